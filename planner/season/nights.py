"""An itinerary night by night: where the bed stands, what the night amounts to, the ascent it is part of."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import date, datetime, time, timedelta
from functools import lru_cache
from typing import Final
from zoneinfo import ZoneInfo

from planner.physiology.air import site_pressure
from planner.physiology.illness import LARGEST_START_M
from planner.physiology.oxygen import equivalent_elevation_m, inspired_po2_mmhg
from planner.season.itinerary import Itinerary, begins_in
from planner.season.model import Leg, Place, Stay

# A night counts as spent where the driver is at this local time: judgement.
MIDDLE_OF_THE_NIGHT: Final = time(3)
ONE_DAY: Final = timedelta(days=1)


@dataclass(frozen=True)
class Night:
    """One night: `evening` is the local date on which it begins; `place_id` is None on the way.

    `bed_m` is the bed's elevation; `sleeping_m` what the night amounts to, in a tent its equivalent.
    """

    evening: date
    at: datetime
    place_id: int | None
    bed_m: float
    sleeping_m: float
    in_tent: bool = False


@dataclass(frozen=True)
class Ascent:
    """The nights since the driver last slept low, and the elevation slept at then."""

    start_m: float
    nights: tuple[Night, ...]

    @property
    def sleeping_m(self) -> list[float]:
        """What each night amounts to [m]."""
        return [night.sleeping_m for night in self.nights]


def nights_of(
    itinerary: Itinerary, places: Mapping[int, Place], from_at: datetime, until: datetime
) -> list[Night]:
    """Every night whose middle lies from `from_at` up to `until`; on the way the start's zone counts."""
    found: list[Night] = []
    for entry in itinerary.entries:
        start, end = _span(entry)
        if end <= from_at or start >= until:
            continue
        place = places[begins_in(entry)]
        zone = ZoneInfo(place.zone)
        morning = max(start, from_at).astimezone(zone).date()
        while (
            middle := datetime.combine(morning, MIDDLE_OF_THE_NIGHT, zone).astimezone(ZoneInfo("UTC"))
        ) < end:
            if max(start, from_at) <= middle < until:
                found.append(_night(entry, place, morning - ONE_DAY, middle))
            morning += ONE_DAY
    # Flying west by day the small hours of the start pass on the way, and those of the goal in bed there.
    in_bed = {night.evening for night in found if night.place_id is not None}
    return [night for night in found if night.place_id is not None or night.evening not in in_bed]


def ascent_to(nights: Sequence[Night], home: Place) -> Ascent:
    """The ascent that the last of these nights belongs to.

    Low is what lies below 1 200 m, where the published table starts, or no higher than the driver's home.
    Nights on the way are no nights of the ascent.
    """
    low_m = max(LARGEST_START_M, home.bed_elevation_m)
    climbing: list[Night] = []
    for night in reversed(nights):
        if night.place_id is None:
            continue
        if night.sleeping_m <= low_m:
            return Ascent(night.sleeping_m, tuple(reversed(climbing)))
        climbing.append(night)
    return Ascent(home.bed_elevation_m, tuple(reversed(climbing)))


def sleeping_elevation_m(place: Place, bed_m: float, tent_oxygen_fraction: float | None) -> float:
    """What a night amounts to: the bed's elevation, in a tent the elevation of equal inspired oxygen."""
    if tent_oxygen_fraction is None:
        return bed_m
    return _tent_elevation_m(bed_m, place.latitude_deg, tent_oxygen_fraction)


@lru_cache(maxsize=256)
def _tent_elevation_m(bed_m: float, latitude_deg: float, oxygen_fraction: float) -> float:
    pressure_hpa = site_pressure(bed_m, latitude_deg).pressure_hpa
    inspired = inspired_po2_mmhg(pressure_hpa, oxygen_fraction)
    return max(float(equivalent_elevation_m(inspired, latitude_deg)), bed_m)


def _night(entry: Stay | Leg, place: Place, evening: date, middle: datetime) -> Night:
    if isinstance(entry, Leg):
        return Night(evening, middle, None, place.bed_elevation_m, place.bed_elevation_m)
    bed_m = place.bed_elevation_m if entry.bed_elevation_m is None else entry.bed_elevation_m
    tent = entry.tent_oxygen_fraction if entry.tent_hours_per_night > 0.0 else None
    sleeping_m = sleeping_elevation_m(place, bed_m, tent)
    return Night(evening, middle, place.id, bed_m, sleeping_m, tent is not None)


def _span(entry: Stay | Leg) -> tuple[datetime, datetime]:
    if isinstance(entry, Stay):
        return entry.arrive_at, entry.depart_at
    return entry.depart_at, entry.arrive_at
