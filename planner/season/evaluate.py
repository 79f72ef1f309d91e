"""What an itinerary gives at a high round, and what it costs; many candidates in one pass."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import date, datetime, time, timedelta
from functools import cached_property
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np

from planner.checks import FloatArray
from planner.physiology.acclimatisation import ExposureHistory
from planner.physiology.air import site_pressure
from planner.physiology.capacity import aerobic_capacity_pct, aerobic_capacity_range_pct
from planner.physiology.expectation import Expectation, expected_spo2
from planner.physiology.illness import RiskClass, ascent_cautions, planned_ascent_risk
from planner.physiology.oxygen import inspired_po2_mmhg
from planner.physiology.person import PersonPosterior
from planner.physiology.population import POPULATION
from planner.physiology.ventilation import ventilatory_target
from planner.season.clock_course import LightDay, clock_course, light_days, offset_at
from planner.season.constraints import HIGH_FROM_M, local_date
from planner.season.exposure import exposure_history, segments
from planner.season.itinerary import Itinerary
from planner.season.model import Driver, Leg, Place, PressureMeasurement, Stay
from planner.season.nights import Ascent, ascent_to, nights_of, sleeping_elevation_m
from planner.season.travel import LegTimes

# Race morning is this local time at the track, or an hour before a race that starts earlier: judgement.
RACE_MORNING: Final = time(9)
BEFORE_AN_EARLY_RACE: Final = timedelta(hours=1)
# Nights and dose at elevation are counted over this long before the race: judgement, four weeks.
COUNTED_BEFORE: Final = timedelta(days=28)
# Between two candidates of one pass the body rests at home this long; nothing is left of what came before.
RESET_H: Final = 24.0 * 365.0 * 5.0
# The share of full acclimatisation is cut here, so that the days it corresponds to stay finite.
LARGEST_SHARE: Final = 0.99


@dataclass(frozen=True)
class RoundPoint:
    """A round as a plan has to meet it: first session, race, and the morning of the race."""

    round_id: int
    name: str
    place_id: int
    first_session_at: datetime
    race_at: datetime
    race_morning: datetime


@dataclass(frozen=True)
class Setting:
    """What an evaluation needs besides the itinerary."""

    driver: Driver
    places: Mapping[int, Place]
    times: LegTimes
    track_days: frozenset[tuple[int, date]] = frozenset()
    pressures: tuple[PressureMeasurement, ...] = ()
    person: PersonPosterior | None = None

    @cached_property
    def home(self) -> Place:
        """Where the driver lives."""
        return self.places[self.driver.home_place_id]


@dataclass(frozen=True)
class Spread:
    """A mean with its 95 % range."""

    mean: float
    low: float
    high: float


@dataclass(frozen=True)
class RoundOutlook:
    """What an itinerary gives at one round. `hours_since_landing` is None when no leg leads there."""

    point: RoundPoint
    first_session_spo2_pct: Spread
    race_spo2_pct: Spread
    race_capacity_pct: Spread
    risk: RiskClass
    risk_reasons: tuple[str, ...]
    ascent_warnings: tuple[str, ...]
    nights_high: int
    dose_km_h: float
    clock_offset_h: float
    light: tuple[LightDay, ...]
    hours_since_landing: float | None


@dataclass(frozen=True)
class Costs:
    """What a stretch of an itinerary costs."""

    nights_away: int
    tent_nights: int
    flights: int
    travel_h: float
    longest_travel_h_per_day: float


def round_point(
    round_id: int, name: str, place: Place, first_session_at: datetime, race_at: datetime
) -> RoundPoint:
    """A round with its race morning in the venue's zone."""
    zone = ZoneInfo(place.zone)
    nine = datetime.combine(race_at.astimezone(zone).date(), RACE_MORNING, zone).astimezone(ZoneInfo("UTC"))
    return RoundPoint(
        round_id, name, place.id, first_session_at, race_at, min(nine, race_at - BEFORE_AN_EARLY_RACE)
    )


def outlooks(
    itineraries: Sequence[Itinerary], points: Sequence[RoundPoint], setting: Setting
) -> list[list[RoundOutlook]]:
    """What each itinerary gives at each round: all of them go through one pass over one joined history."""
    if not itineraries or not points:
        return [[] for _ in itineraries]
    instants = [at for point in points for at in (point.first_session_at, point.race_morning)]
    expected = expectations(itineraries, instants, setting)
    capacity = _capacities(expected, points, setting)
    return [
        [_outlook(itinerary, point, i, k, expected, capacity, setting) for k, point in enumerate(points)]
        for i, itinerary in enumerate(itineraries)
    ]


def expectations(
    itineraries: Sequence[Itinerary], instants: Sequence[datetime], setting: Setting
) -> Expectation:
    """Readings to expect at some instants along each itinerary, fields shaped (itineraries, instants)."""
    origin = min(instants)
    at_h = np.array([(at - origin) / timedelta(hours=1) for at in instants])
    histories = [
        exposure_history(
            setting.home,
            itinerary.stays,
            itinerary.legs,
            setting.places,
            origin=origin,
            pressures=setting.pressures,
            track_days=setting.track_days,
        )
        for itinerary in itineraries
    ]
    joined, shifts = _joined(histories, float(at_h.max()))
    return expected_spo2(joined, at_h[None, :] + shifts[:, None], person=setting.person)


def costs(itinerary: Itinerary, from_at: datetime, until: datetime, setting: Setting) -> Costs:
    """What the stretch between two instants costs; a leg counts where it arrives."""
    legs = [leg for leg in itinerary.legs if from_at < leg.arrive_at <= until]
    nights = nights_of(itinerary, setting.places, from_at, until)
    return Costs(
        nights_away=sum(night.place_id != setting.home.id for night in nights),
        tent_nights=sum(night.in_tent for night in nights),
        flights=sum(flights_of(leg, setting.times) for leg in legs),
        travel_h=sum(_hours(leg) for leg in legs),
        longest_travel_h_per_day=max(_travel_by_day(legs, setting.places).values(), default=0.0),
    )


def flights_of(leg: Leg, times: LegTimes) -> int:
    """Take-offs of a leg: none on the road, at least one by air."""
    return max(times.between(leg.from_place_id, leg.to_place_id).flights, 1) if leg.mode == "flight" else 0


def equivalent_days(ventilatory_state: FloatArray, target: FloatArray) -> FloatArray:
    """Days that somebody straight from sea level would need there to reach a state of acclimatisation [d].

    This carries the published gain of capacity with days at one place over to any itinerary: judgement.
    """
    share = np.clip(ventilatory_state / np.maximum(target, 1e-9), 0.0, LARGEST_SHARE)
    return np.asarray(-POPULATION.rise_time_d * np.log1p(-share))


def _joined(histories: Sequence[ExposureHistory], until_h: float) -> tuple[ExposureHistory, FloatArray]:
    """One history that runs through several, at home for years in between, and each one's shift in hours."""
    earliest = min(float(h.start_h[0]) for h in histories)
    latest = max(until_h, *(float(h.start_h[-1]) for h in histories)) + 1.0
    shifts = np.arange(len(histories), dtype=np.float64) * (latest - earliest + RESET_H)
    starts = [h.start_h + shift for h, shift in zip(histories, shifts, strict=True)]
    for i in range(1, len(starts)):
        starts[i][0] = shifts[i - 1] + latest
    inspired = [h.inspired_po2_mmhg for h in histories]
    return ExposureHistory(np.concatenate(starts), np.concatenate(inspired)), shifts


def _capacities(expected: Expectation, points: Sequence[RoundPoint], setting: Setting) -> FloatArray:
    """Aerobic capacity on race morning: mean, low, high, shaped (3, itineraries, points)."""
    venues = [setting.places[p.place_id] for p in points]
    elevation_m = np.array([v.track_elevation_m for v in venues])
    latitude_deg = np.array([v.latitude_deg for v in venues])
    pressure_hpa = site_pressure(elevation_m, latitude_deg).pressure_hpa
    target = np.asarray(ventilatory_target(inspired_po2_mmhg(pressure_hpa)))
    days = equivalent_days(np.asarray(expected.ventilatory_state)[:, 1::2], target)
    elevations = np.broadcast_to(elevation_m, days.shape)
    low, high = aerobic_capacity_range_pct(elevations, days)
    return np.array([aerobic_capacity_pct(elevations, days), low, high])


def _outlook(
    itinerary: Itinerary,
    point: RoundPoint,
    i: int,
    k: int,
    expected: Expectation,
    capacity: FloatArray,
    setting: Setting,
) -> RoundOutlook:
    nights = nights_of(itinerary, setting.places, point.race_at - 3 * COUNTED_BEFORE, point.race_at)
    ascent = ascent_to(nights, setting.home)
    risk = planned_ascent_risk(setting.driver.altitude_history, ascent.sleeping_m, ascent.start_m)
    course = clock_course(itinerary, setting.places)
    landed = [
        leg.arrive_at
        for leg in itinerary.legs
        if leg.to_place_id == point.place_id and leg.arrive_at <= point.first_session_at
    ]
    counted = [n for n in nights if n.at >= point.race_at - COUNTED_BEFORE and n.place_id is not None]
    return RoundOutlook(
        point=point,
        first_session_spo2_pct=_spread(expected, i, 2 * k),
        race_spo2_pct=_spread(expected, i, 2 * k + 1),
        race_capacity_pct=Spread(*(float(c) for c in capacity[:, i, k])),
        risk=risk.risk,
        risk_reasons=risk.reasons,
        ascent_warnings=ascent_warnings(ascent),
        nights_high=sum(night.sleeping_m >= HIGH_FROM_M for night in counted),
        dose_km_h=_dose_km_h(itinerary, point.race_at, setting),
        clock_offset_h=offset_at(course, point.race_morning, setting.places),
        light=tuple(light_days(setting.driver, course, point.race_morning, setting.places)),
        hours_since_landing=(point.first_session_at - landed[-1]) / timedelta(hours=1) if landed else None,
    )


def ascent_warnings(ascent: Ascent) -> tuple[str, ...]:
    """Each night of an ascent that breaks the rule above 3 000 m, with its date."""
    return tuple(
        f"{ascent.nights[c.night].evening:%a %-d %b}: {c.sentence}"
        for c in ascent_cautions(ascent.sleeping_m, ascent.start_m)
    )


def _spread(expected: Expectation, i: int, k: int) -> Spread:
    fields = (expected.mean_spo2_pct, expected.low_spo2_pct, expected.high_spo2_pct)
    return Spread(*(float(np.asarray(field)[i, k]) for field in fields))


def _dose_km_h(itinerary: Itinerary, race_at: datetime, setting: Setting) -> float:
    """Elevation times hours over the counted time, from 1 500 m up, tents by their equivalent, no flights."""
    begin = race_at - COUNTED_BEFORE
    course = segments(
        setting.home, itinerary.stays, itinerary.legs, setting.places, track_days=setting.track_days
    )
    ends = [segment.starts_at for segment in course[1:]] + [race_at]
    dose = 0.0
    for segment, end in zip(course, ends, strict=True):
        overlap = min(end, race_at) - max(segment.starts_at, begin)
        if overlap <= timedelta(0) or segment.place_id is None:
            continue
        tent = segment.oxygen_fraction if segment.spent == "tent" else None
        elevation_m = sleeping_elevation_m(setting.places[segment.place_id], segment.elevation_m, tent)
        if elevation_m >= HIGH_FROM_M:
            dose += elevation_m / 1000.0 * (overlap / timedelta(hours=1))
    return dose


def _travel_by_day(legs: Sequence[Leg], places: Mapping[int, Place]) -> dict[date, float]:
    by_day: dict[date, float] = {}
    for leg in legs:
        day = local_date(leg.depart_at, places[leg.from_place_id])
        by_day[day] = by_day.get(day, 0.0) + _hours(leg)
    return by_day


def _hours(entry: Leg | Stay) -> float:
    return abs(entry.arrive_at - entry.depart_at) / timedelta(hours=1)
