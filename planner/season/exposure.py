"""From an itinerary to what the body breathed: stays and legs become inspired oxygen over time."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import date, datetime, time, timedelta
from itertools import pairwise
from typing import Final, Literal, TypeAlias
from zoneinfo import ZoneInfo

import numpy as np

from planner.checks import FloatArray
from planner.constants import AIR_OXYGEN_FRACTION
from planner.physiology.acclimatisation import ExposureHistory
from planner.physiology.air import site_pressure, standard_pressure_hpa
from planner.physiology.oxygen import inspired_po2_mmhg
from planner.season.model import Driver, Leg, Place, PressureMeasurement, Round, Session, Stay

# A day at the track, local wall clock: judgement. The rest of the day counts as spent at the beds.
TRACK_FROM: Final = time(9)
TRACK_TO: Final = time(19)
# A tent night ends at this local time and lasts as many hours as the stay says: judgement.
TENT_TO: Final = time(7)
LONGEST_TENT_NIGHT_H: Final = 12.0  # so that it never reaches into the day at the track
# Cabin pressure altitude when none is typed: judgement, within the usual 1 800-2 400 m.
# Normal operation allows at most 2 438 m (8 000 ft, 14 CFR 25.841, published).
PLANNING_CABIN_ALTITUDE_M: Final = 2000.0
HIGHEST_CABIN_ALTITUDE_M: Final = 2438.0
# A measured station pressure speaks for this long before and after: judgement, the time of passing weather.
MEASUREMENT_REACH: Final = timedelta(hours=12)
ROAD_PIECES: Final = 4  # a road climbs in this many equal steps

Spent: TypeAlias = Literal["bed", "track", "tent", "cabin", "road"]


@dataclass(frozen=True)
class Segment:
    """A stretch of unchanging air, from `starts_at` until the next one starts.

    `elevation_m` is the ground's, or the cabin's pressure altitude; `place_id` is None on the way.
    """

    starts_at: datetime
    elevation_m: float
    spent: Spent
    place_id: int | None = None
    oxygen_fraction: float = AIR_OXYGEN_FRACTION


def exposure_history(
    home: Place,
    stays: Sequence[Stay],
    legs: Sequence[Leg],
    places: Mapping[int, Place],
    *,
    origin: datetime,
    pressures: Iterable[PressureMeasurement] = (),
    track_days: Collection[tuple[int, date]] = (),
) -> ExposureHistory:
    """What one driver breathed, in hours since `origin`.

    The beds by night, the track by day on `track_days` (see there) when it lies at another elevation than
    the beds, tents by their oxygen, flights by their cabin, roads in steps. Before the first entry the body
    is at steady state for the home's beds; after the last one it stays where it is. A hole between two
    entries counts as more of the earlier one.
    Raises: KeyError when a stay or leg names a place that `places` does not hold.
    """
    measured = list(pressures)
    pieces = segments(home, stays, legs, places, track_days=track_days)
    pieces = _split_at_measurements(pieces, measured)
    start_h = np.array([(p.starts_at - origin) / timedelta(hours=1) for p in pieces], dtype=np.float64)
    pressure_hpa = _pressure_hpa(pieces, places, measured)
    oxygen = np.array([p.oxygen_fraction for p in pieces], dtype=np.float64)
    return ExposureHistory(
        start_h=start_h, inspired_po2_mmhg=np.asarray(inspired_po2_mmhg(pressure_hpa, oxygen))
    )


def segments(
    home: Place,
    stays: Sequence[Stay],
    legs: Sequence[Leg],
    places: Mapping[int, Place],
    *,
    track_days: Collection[tuple[int, date]] = (),
) -> list[Segment]:
    """The course of one driver as segments in time order; the first lies at home, an hour before all else.

    Raises: KeyError when a stay or leg names a place that `places` does not hold.
    """
    entries: list[Stay | Leg] = sorted((*stays, *legs), key=_starts_at)
    if not entries:
        return [Segment(datetime.min.replace(tzinfo=ZoneInfo("UTC")), home.bed_elevation_m, "bed", home.id)]
    days = frozenset(track_days)
    before = _starts_at(entries[0]) - timedelta(hours=1)
    course = [Segment(before, home.bed_elevation_m, "bed", home.id)]
    for entry in entries:
        if isinstance(entry, Stay):
            course.extend(_stay_segments(entry, places[entry.place_id], days))
        else:
            course.extend(_leg_segments(entry, places))
    return course


def track_days(
    rounds: Iterable[Round], sessions: Iterable[Session], places: Mapping[int, Place]
) -> frozenset[tuple[int, date]]:
    """The (place id, local date) pairs on which a session is held there."""
    place_of = {r.id: places[r.place_id] for r in rounds}
    return frozenset(
        (place_of[s.round_id].id, s.starts_at.astimezone(ZoneInfo(place_of[s.round_id].zone)).date())
        for s in sessions
        if s.round_id in place_of
    )


def where_is(driver: Driver, at: datetime, stays: Iterable[Stay], legs: Iterable[Leg]) -> Stay | Leg | None:
    """The stay or leg that holds the driver at an instant; at the moment of a change, the one that begins."""
    everybody: list[Stay | Leg] = [*stays, *legs]
    holding = [e for e in everybody if e.driver_id == driver.id and _starts_at(e) <= at < _ends_at(e)]
    return max(holding, key=_starts_at, default=None)


def _starts_at(entry: Stay | Leg) -> datetime:
    return entry.arrive_at if isinstance(entry, Stay) else entry.depart_at


def _ends_at(entry: Stay | Leg) -> datetime:
    return entry.depart_at if isinstance(entry, Stay) else entry.arrive_at


def _stay_segments(stay: Stay, place: Place, days: frozenset[tuple[int, date]]) -> list[Segment]:
    bed_m = place.bed_elevation_m if stay.bed_elevation_m is None else stay.bed_elevation_m
    zone = ZoneInfo(place.zone)
    bed = Segment(stay.arrive_at, bed_m, "bed", place.id)
    pieces = [bed]

    def insert(start: datetime, end: datetime, what: Segment) -> None:
        start, end = max(start, stay.arrive_at), min(end, stay.depart_at)
        if start < end:
            pieces.append(_moved(what, start))
            pieces.append(_moved(bed, end))

    for day in _local_days(stay, zone):
        if stay.tent_oxygen_fraction is not None and stay.tent_hours_per_night > 0.0:
            end = _utc(day, TENT_TO, zone)
            hours = min(stay.tent_hours_per_night, LONGEST_TENT_NIGHT_H)
            tent = Segment(end, bed_m, "tent", place.id, stay.tent_oxygen_fraction)
            insert(end - timedelta(hours=hours), end, tent)
        if bed_m != place.track_elevation_m and (place.id, day) in days:
            track = Segment(stay.arrive_at, place.track_elevation_m, "track", place.id)
            insert(_utc(day, TRACK_FROM, zone), _utc(day, TRACK_TO, zone), track)
    return _last_of_each_start(pieces, stay.depart_at)


def _last_of_each_start(pieces: list[Segment], depart_at: datetime) -> list[Segment]:
    """Where two pieces start at once the later one holds, and none starts when the driver leaves."""
    by_start = {p.starts_at: p for p in pieces if p.starts_at < depart_at}
    return [by_start[start] for start in sorted(by_start)]


def _leg_segments(leg: Leg, places: Mapping[int, Place]) -> list[Segment]:
    if leg.mode == "flight":
        cabin_m = PLANNING_CABIN_ALTITUDE_M if leg.cabin_altitude_m is None else leg.cabin_altitude_m
        return [Segment(leg.depart_at, cabin_m, "cabin")]
    low, high = places[leg.from_place_id].bed_elevation_m, places[leg.to_place_id].bed_elevation_m
    step = (leg.arrive_at - leg.depart_at) / ROAD_PIECES
    return [
        Segment(leg.depart_at + i * step, low + (high - low) * (i + 0.5) / ROAD_PIECES, "road")
        for i in range(ROAD_PIECES)
    ]


def _local_days(stay: Stay, zone: ZoneInfo) -> Iterator[date]:
    day = stay.arrive_at.astimezone(zone).date()
    # A tent night that ends on the morning after the departure may begin before it.
    last = stay.depart_at.astimezone(zone).date() + timedelta(days=1)
    while day <= last:
        yield day
        day += timedelta(days=1)


def _utc(day: date, wall: time, zone: ZoneInfo) -> datetime:
    return datetime.combine(day, wall, zone).astimezone(ZoneInfo("UTC"))


def _moved(piece: Segment, starts_at: datetime) -> Segment:
    return Segment(starts_at, piece.elevation_m, piece.spent, piece.place_id, piece.oxygen_fraction)


def _split_at_measurements(pieces: list[Segment], measured: list[PressureMeasurement]) -> list[Segment]:
    """Begin a new segment wherever the nearest measurement of the place changes."""
    changes: dict[int, list[datetime]] = {}
    for place_id in {m.place_id for m in measured}:
        times = sorted(m.measured_at for m in measured if m.place_id == place_id)
        between = [a + (b - a) / 2 for a, b in pairwise(times)]
        edges = [t + sign * MEASUREMENT_REACH for t in times for sign in (-1, 1)]
        changes[place_id] = sorted({*between, *edges})
    split: list[Segment] = []
    for i, piece in enumerate(pieces):
        split.append(piece)
        if piece.place_id is None:
            continue
        end = pieces[i + 1].starts_at if i + 1 < len(pieces) else None
        split.extend(
            _moved(piece, at)
            for at in changes.get(piece.place_id, ())
            if piece.starts_at < at and (end is None or at < end)
        )
    return split


def _pressure_hpa(
    pieces: list[Segment], places: Mapping[int, Place], measured: list[PressureMeasurement]
) -> FloatArray:
    """Station pressure of each segment; a measured one is carried from the track to the beds by its ratio."""
    elevation_m = np.array([p.elevation_m for p in pieces], dtype=np.float64)
    latitude_deg = np.array(
        [np.nan if p.place_id is None else places[p.place_id].latitude_deg for p in pieces], dtype=np.float64
    )
    cabin = np.array([p.spent == "cabin" for p in pieces])
    model = np.asarray(site_pressure(elevation_m, latitude_deg).pressure_hpa, dtype=np.float64)
    pressure_hpa = np.where(cabin, standard_pressure_hpa(elevation_m), model)
    by_place: dict[int, list[PressureMeasurement]] = {}
    for m in measured:
        by_place.setdefault(m.place_id, []).append(m)
    for place_id, ours in by_place.items():
        place = places[place_id]
        track_hpa = float(site_pressure(place.track_elevation_m, place.latitude_deg).pressure_hpa)
        for i, piece in enumerate(pieces):
            if piece.place_id != place_id:
                continue
            # Judged at the segment's start and just after it, so that a reach that ends here has ended.
            at = piece.starts_at + timedelta(seconds=1)
            nearest = min(ours, key=lambda m: abs(m.measured_at - at))
            if abs(nearest.measured_at - at) < MEASUREMENT_REACH:
                pressure_hpa[i] *= nearest.pressure_hpa / track_hpa
    return pressure_hpa
