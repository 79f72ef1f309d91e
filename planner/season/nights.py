"""An itinerary night by night: where the bed stands, what the night amounts to, the ascent it is part of."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import UTC, date, datetime, time, timedelta
from functools import lru_cache
from itertools import pairwise
from typing import Final
from zoneinfo import ZoneInfo

from planner.physiology.air import site_pressure
from planner.physiology.illness import LARGEST_START_M
from planner.physiology.oxygen import equivalent_elevation_m, inspired_po2_mmhg
from planner.season.itinerary import Itinerary
from planner.season.model import Place, Stay

# A night counts as spent where the driver is at this local time: judgement.
MIDDLE_OF_THE_NIGHT: Final = time(3)
ONE_DAY: Final = timedelta(days=1)
LONGEST_WAY: Final = timedelta(days=4)  # between two nights in bed


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
    """Every night whose middle lies from `from_at` up to `until`.

    A night in bed is one whose small hours pass there by the local clock. A calendar day between two nights
    in bed that has none is a night on the way; flying west by day there is none, over the date line one more.
    """
    in_bed: list[Night] = []
    for stay in itinerary.stays:
        if stay.depart_at > from_at - LONGEST_WAY and stay.arrive_at < until + LONGEST_WAY:
            in_bed += _in_bed(stay, places[stay.place_id])
    found = in_bed[:1]
    for before, after in pairwise(in_bed):
        on_the_way = (after.evening - before.evening).days - 1
        for lost in range(on_the_way):
            at = before.at + (after.at - before.at) * (lost + 1) / (on_the_way + 1)
            evening = before.evening + (lost + 1) * ONE_DAY
            found.append(Night(evening, at, None, before.bed_m, before.bed_m))
        found.append(after)
    return [night for night in found if from_at <= night.at < until]


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


def _in_bed(stay: Stay, place: Place) -> list[Night]:
    bed_m = place.bed_elevation_m if stay.bed_elevation_m is None else stay.bed_elevation_m
    tent = stay.tent_oxygen_fraction if stay.tent_hours_per_night > 0.0 else None
    sleeping_m = sleeping_elevation_m(place, bed_m, tent)
    zone = ZoneInfo(place.zone)
    morning = stay.arrive_at.astimezone(zone).date()
    found = []
    while (middle := datetime.combine(morning, MIDDLE_OF_THE_NIGHT, zone).astimezone(UTC)) < stay.depart_at:
        if middle >= stay.arrive_at:
            found.append(Night(morning - ONE_DAY, middle, place.id, bed_m, sleeping_m, tent is not None))
        morning += ONE_DAY
    return found
