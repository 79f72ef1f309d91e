"""From the records of a season to its day model, and from a plan of the day model back to an itinerary."""

from __future__ import annotations

from collections.abc import Callable, Collection, Sequence
from dataclasses import dataclass
from datetime import time, timedelta
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np

from planner.checks import FloatArray
from planner.errors import InputError
from planner.physiology.acclimatisation import ventilatory_state_at
from planner.physiology.air import site_pressure
from planner.physiology.capacity import aerobic_capacity_pct
from planner.physiology.illness import LARGEST_START_M, planned_ascent_risk
from planner.physiology.oxygen import inspired_po2_mmhg
from planner.physiology.person import PersonPosterior, population_latents
from planner.physiology.ventilation import resting_saturation_pct, ventilatory_target
from planner.season.arrival_ways import TENT_HOURS_PER_NIGHT, TENT_OXYGEN_FRACTION
from planner.season.clock_course import clock_course, offset_at
from planner.season.constraints import RISK_CLASSES, bed_refused
from planner.season.day_model import ON_THE_WAY, Bed, BoolArray, DayProblem, DayRound, IntArray
from planner.season.day_travel import Travel
from planner.season.evaluate import RoundPoint, equivalent_days
from planner.season.exposure import exposure_history
from planner.season.itinerary import Itinerary, Visit, replace_between
from planner.season.model import Place, Stay
from planner.season.nights import sleeping_elevation_m
from planner.season.season_task import (
    ASCENT,
    BODY_CLOCK,
    HIGHEST_RISK,
    LOCKS,
    LOWEST_CAPACITY,
    LOWEST_SPO2,
    PHYSICIAN,
    SeasonTask,
    at_round,
    day_of,
    midnight,
    points_within,
    utc,
)

DEPARTURE_H: Final = 10.0  # local hour at which a journey of the day model departs
# After the last session or appointment of a stay one may leave the same evening: judgement.
PACKING_H: Final = 3.0
EVENING_FROM_H: Final = 18.0
EVENING_TO_H: Final = 22.0
CHANGE_OF_BED: Final = time(12)


@dataclass(frozen=True)
class DaySeason:
    """The day model of a task, with the instants that it stands for."""

    task: SeasonTask
    problem: DayProblem
    arrive_at_h: FloatArray  # (days, beds, beds) hours since the first day 00:00 UTC, by day of departure

    def itinerary_of(self, plan: IntArray) -> Itinerary:
        """The itinerary that a plan of bed numbers stands for.

        Raises: InputError when the driver is travelling at either end, or a fixed appointment would break.
        """
        task, places = self.task, self.task.setting.places
        visits: list[Visit] = []
        before, lost = self.problem.start_bed, 0
        for night, bed in enumerate(int(b) for b in plan):
            if bed == ON_THE_WAY:
                lost += 1
                continue
            if bed != before:
                visits.append(self._visit(night, before, bed, lost))
            before, lost = bed, 0
        last = self.problem.beds[before]
        visits = self._with_kept(visits)
        end = utc(task.until_day, time(23, 59), places[last.place_id])
        if not visits:
            visits.append(Visit(last.place_id, task.starts_at + timedelta(minutes=1)))
        return replace_between(
            task.itinerary, task.starts_at, end, visits, task.setting.times, task.fixed_within()
        )

    def _with_kept(self, visits: list[Visit]) -> list[Visit]:
        """The visits with those of the kept stretches as the present itinerary has them, to the minute."""
        kept = self.task.kept
        if not kept:
            return visits
        now = [
            Visit(s.place_id, s.arrive_at, s.bed_elevation_m, s.tent_oxygen_fraction, s.tent_hours_per_night)
            for s in self.task.itinerary.stays
            if any(begin < s.arrive_at < end for begin, end in kept)
        ]
        others = [v for v in visits if not any(begin < v.arrive_at < end for begin, end in kept)]
        return sorted((*others, *now), key=lambda v: v.arrive_at)

    def _visit(self, night: int, before: int, bed: int, lost: int) -> Visit:
        here = self.problem.beds[bed]
        if self.problem.same_place[before, bed]:
            day = self.problem.first_day + timedelta(days=night)
            at = utc(day, CHANGE_OF_BED, self.task.setting.places[here.place_id])
        else:
            hours = float(self.arrive_at_h[night - lost, before, bed])
            at = midnight(self.problem.first_day) + timedelta(minutes=round(hours * 60.0))
        return Visit(here.place_id, at, None, here.tent_oxygen_fraction, here.tent_hours)


def day_season(task: SeasonTask, without: Collection[str] = ()) -> DaySeason:
    """The day model of a season; `without` names what is set aside (see season_task).

    Raises: InputError when the driver is not at a place on the first morning.
    """
    setting = task.setting
    start = task.itinerary.index_at(task.starts_at)
    entry = task.itinerary.entries[start] if start is not None else None
    if not isinstance(entry, Stay):
        raise InputError("from_day", task.from_day, "a day on whose morning the driver is at a place")
    beds = _beds(task, entry.place_id, without)
    allowed, air_ok, bound, at_track, departs_h = _nights(task, beds, without)
    travel = Travel(task, beds, departs_h, without)
    history = exposure_history(
        setting.home,
        task.itinerary.stays,
        task.itinerary.legs,
        setting.places,
        origin=task.starts_at,
        pressures=setting.pressures,
        track_days=setting.track_days,
    )
    course = clock_course(task.itinerary, setting.places)
    problem = DayProblem(
        first_day=task.from_day,
        beds=tuple(beds),
        allowed=allowed,
        air_ok=air_ok,
        bound=bound,
        at_track=at_track,
        hours=travel.hours,
        flights=travel.flights,
        way_po2_mmhg=travel.way_po2_mmhg,
        lost=travel.lost,
        zones_east_h=travel.zones_east_h,
        rounds=tuple(_rounds(task, without)),
        start_bed=next(i for i, bed in enumerate(beds) if bed.place_id == entry.place_id),
        start_state=float(ventilatory_state_at(history, 0.0)),
        low_m=max(LARGEST_START_M, setting.home.bed_elevation_m),
        first_night_risk=np.array([_first_night_risk(bed.sleeping_m) for bed in beds]),
        history_risk=RISK_CLASSES.index(planned_ascent_risk(setting.driver.altitude_history, []).risk),
        rates=task.rates,
        start_offset_h=offset_at(course, task.starts_at, setting.places),
        ascent_rule=ASCENT not in without and not task.rules.ascent_override.strip(),
        measure=task.measure,
        combination=task.combination,
    )
    return DaySeason(task, problem, travel.arrive_at_h)


def _rounds(task: SeasonTask, without: Collection[str]) -> list[DayRound]:
    found = []
    for point in points_within(task):
        if point.round_id not in task.wishes:
            continue
        wish, venue = task.wishes[point.round_id], task.setting.places[point.place_id]
        limits = wish.limits

        def kept(words: str, point: RoundPoint = point) -> bool:
            return at_round(words, point) not in without

        spo2 = limits.lowest_race_spo2_pct if kept(LOWEST_SPO2) else None
        capacity = limits.lowest_race_capacity_pct if kept(LOWEST_CAPACITY) else None
        risk = limits.highest_risk if kept(HIGHEST_RISK) else RISK_CLASSES[-1]
        found.append(
            DayRound(
                name=point.name,
                round_id=point.round_id,
                first_day=day_of(task, point.first_session_at, venue),
                race_day=day_of(task, point.race_at, venue),
                weight=wish.weight,
                value_of=race_values(venue, task.setting.person),
                lowest_spo2_pct=spo2,
                lowest_capacity_pct=capacity,
                highest_risk=RISK_CLASSES.index(risk),
                largest_clock_offset_h=limits.largest_clock_offset_h if kept(BODY_CLOCK) else None,
            )
        )
    return found


def race_values(
    venue: Place, person: PersonPosterior | None
) -> Callable[[FloatArray], tuple[FloatArray, FloatArray]]:
    """SpO2 to expect of the driver and aerobic capacity at a venue's track, as functions of the state."""
    pressure_hpa = site_pressure(venue.track_elevation_m, venue.latitude_deg).pressure_hpa
    inspired = float(inspired_po2_mmhg(pressure_hpa))
    target = np.asarray(ventilatory_target(inspired))
    latents = population_latents() if person is None else person.latents()
    weight = latents.weight / latents.weight.sum()
    offset_pct = float(weight @ latents.offset_mean_pct)
    breathing = latents.breathing[:, None]

    def values(state: FloatArray) -> tuple[FloatArray, FloatArray]:
        spo2 = weight @ np.asarray(resting_saturation_pct(inspired, state, breathing)) + offset_pct
        days = equivalent_days(state, target)
        return spo2, np.asarray(aerobic_capacity_pct(venue.track_elevation_m, days))

    return values


def _beds(task: SeasonTask, start_place_id: int, without: Collection[str]) -> list[Bed]:
    """Home first, then every place that matters once; those that the physician refuses are left out."""
    setting, home = task.setting, task.setting.home
    ids = [home.id, start_place_id, *(f.place_id for f in task.fixed_within()), *task.candidates]
    needed = {start_place_id, home.id, *(f.place_id for f in task.fixed_within())}
    beds = []
    for place in (setting.places[i] for i in dict.fromkeys(ids)):
        refused = PHYSICIAN not in without and bed_refused(
            setting.driver, place.bed_elevation_m, None, place.bed_elevation_m
        )
        if place.id in needed or not refused:
            beds.append(_bed(place, is_home=place.id == home.id))
    sleeping_m = sleeping_elevation_m(home, home.bed_elevation_m, TENT_OXYGEN_FRACTION)
    if task.tent and not bed_refused(setting.driver, home.bed_elevation_m, TENT_OXYGEN_FRACTION, sleeping_m):
        beds.append(_bed(home, is_home=True, tent=True))
    return beds


def _bed(place: Place, *, is_home: bool, tent: bool = False) -> Bed:
    pressures = site_pressure(
        np.array([place.bed_elevation_m, place.track_elevation_m]), place.latitude_deg
    ).pressure_hpa
    bed_hpa, track_hpa = (float(p) for p in np.asarray(pressures))
    return Bed(
        name=f"{place.name}, tent" if tent else place.name,
        place_id=place.id,
        bed_m=place.bed_elevation_m,
        sleeping_m=sleeping_elevation_m(place, place.bed_elevation_m, TENT_OXYGEN_FRACTION if tent else None),
        bed_po2_mmhg=float(inspired_po2_mmhg(bed_hpa)),
        track_po2_mmhg=float(inspired_po2_mmhg(track_hpa)),
        is_home=is_home,
        tent_oxygen_fraction=TENT_OXYGEN_FRACTION if tent else None,
        tent_po2_mmhg=float(inspired_po2_mmhg(bed_hpa, TENT_OXYGEN_FRACTION)) if tent else 0.0,
        tent_hours=TENT_HOURS_PER_NIGHT if tent else 0.0,
    )


def _nights(
    task: SeasonTask, beds: Sequence[Bed], without: Collection[str]
) -> tuple[BoolArray, BoolArray, BoolArray, BoolArray, FloatArray]:
    """Where a night may be spent, or on the way; bound days; days at the track; hours of departure."""
    places, count = task.setting.places, task.days
    place_ids = np.array([bed.place_id for bed in beds])
    fixed = task.fixed_within()
    free = np.isin(place_ids, [task.setting.home.id, *task.candidates])
    allowed = np.tile(free, (count, 1))
    at_track = np.zeros_like(allowed)
    air_ok, bound = np.ones(count, dtype=bool), np.zeros(count, dtype=bool)
    departs_h = np.full(count, DEPARTURE_H)
    # Between two fixed points both their places are open, too; before the first one the start's.
    start = task.itinerary.index_at(task.starts_at)
    behind = task.itinerary.entries[start].place_id if start is not None else -1  # type: ignore[union-attr]
    begin = 0
    for point in fixed:
        allowed[begin : day_of(task, point.starts_at, places[point.place_id])] |= place_ids == behind
        allowed[begin : day_of(task, point.ends_at, places[point.place_id])] |= place_ids == point.place_id
        begin, behind = day_of(task, point.ends_at, places[point.place_id]), point.place_id
    allowed[begin:] |= place_ids == behind
    for point in fixed:
        venue = places[point.place_id]
        first, last = day_of(task, point.starts_at, venue), day_of(task, point.ends_at, venue)
        ends = point.ends_at.astimezone(ZoneInfo(venue.zone))
        leaves_h = max(ends.hour + ends.minute / 60.0 + PACKING_H, EVENING_FROM_H)
        stays_on = leaves_h > EVENING_TO_H
        there = slice(max(first - 1, 0), last + stays_on)
        allowed[there] &= place_ids == point.place_id
        air_ok[there] = False
        bound[first : last + stays_on] = True
        if not stays_on:
            departs_h[last] = leaves_h
        for day in range(first, last + 1):
            date_there = task.from_day + timedelta(days=day)
            at_track[day] = (place_ids == point.place_id) & (
                (point.place_id, date_there) in task.setting.track_days
            )
    for lock in task.locks if LOCKS not in without else ():
        nights = slice(
            max((lock.first - task.from_day).days, 0), max((lock.last - task.from_day).days + 1, 0)
        )
        allowed[nights] &= place_ids == lock.place_id
        air_ok[nights] = False
    end_at = utc(task.until_day, time(23, 59), task.setting.home)
    index = task.itinerary.index_at(end_at)
    last_entry = task.itinerary.entries[index] if index is not None else None
    ends_in = last_entry.place_id if isinstance(last_entry, Stay) else task.setting.home.id
    allowed[-1] &= place_ids == ends_in
    air_ok[-1] = False
    return allowed, air_ok, bound, at_track, departs_h


def _first_night_risk(sleeping_m: float) -> int:
    return RISK_CLASSES.index(planned_ascent_risk("none or mild", [sleeping_m]).risk)
