"""One way to a round day by day: the bed, the track, the journeys, the light, and what a reading would be."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date, datetime, timedelta
from typing import Final

import numpy as np

from planner.season.arrival import Option
from planner.season.clock_course import LightDay, clock_course, light_days
from planner.season.constraints import local_date
from planner.season.evaluate import Spread, expectations
from planner.season.itinerary import Itinerary, ends_at
from planner.season.model import Leg, Place
from planner.season.nights import ONE_DAY, Night, nights_of
from planner.services.arrival import Arrival

# A reading on waking, so long after the middle of the night; before an early departure.
MORNING_AFTER: Final = timedelta(hours=4)
BEFORE_LEAVING: Final = timedelta(minutes=15)


@dataclass(frozen=True)
class PlanDay:
    """One day by its morning: the night before it, what is expected on waking, and what the day holds.

    `woke_in` is None on the way; `track_m` is the track's elevation on a day with a session.
    """

    day: date
    at: datetime
    woke_in: Place | None
    bed_m: float | None
    in_tent: bool
    expected: Spread | None
    track_m: float | None
    legs: tuple[Leg, ...]
    light: LightDay | None

    @property
    def is_quiet(self) -> bool:
        """Whether nothing but sleeping where one slept before happens."""
        return not self.legs and self.light is None and self.track_m is None and self.woke_in is not None


def plan_days(found: Arrival, option: Option) -> list[PlanDay]:
    """The days of an option from the first free morning to the race; empty when it cannot be built."""
    itinerary = option.itinerary
    if itinerary is None:
        return []
    places, point = found.setting.places, found.point
    nights = nights_of(itinerary, places, found.gap.free_from - ONE_DAY, point.race_at)
    mornings = [_waking(itinerary, night) for night in nights]
    expected = expectations([itinerary], mornings, found.setting)
    spreads = zip(
        *(
            np.asarray(each)[0]
            for each in (expected.mean_spo2_pct, expected.low_spo2_pct, expected.high_spo2_pct)
        ),
        strict=True,
    )
    light = _light(found, itinerary)
    return [
        _day(found, itinerary, night, at, Spread(*(float(v) for v in spread)), light)
        for night, at, spread in zip(nights, mornings, spreads, strict=True)
    ]


def _waking(itinerary: Itinerary, night: Night) -> datetime:
    i = itinerary.index_at(night.at)
    if i is None:
        return night.at
    return max(night.at, min(night.at + MORNING_AFTER, ends_at(itinerary.entries[i]) - BEFORE_LEAVING))


def _day(
    found: Arrival,
    itinerary: Itinerary,
    night: Night,
    at: datetime,
    expected: Spread,
    light: dict[date, LightDay],
) -> PlanDay:
    places = found.setting.places
    day = night.evening + ONE_DAY
    legs = tuple(leg for leg in itinerary.legs if local_date(leg.depart_at, places[leg.from_place_id]) == day)
    if night.place_id is None:
        return PlanDay(day, at, None, None, False, None, None, legs, light.get(day))
    place = places[night.place_id]
    at_the_track = (place.id, day) in found.setting.track_days
    return PlanDay(
        day=day,
        at=at,
        woke_in=place,
        bed_m=night.bed_m,
        in_tent=night.in_tent,
        expected=expected,
        track_m=place.track_elevation_m if at_the_track else None,
        legs=legs,
        light=light.get(day),
    )


def _light(found: Arrival, itinerary: Itinerary) -> dict[date, LightDay]:
    """The light of every day, from each arrival until the next departure; of two on a day the later."""
    places, driver = found.setting.places, found.driver
    course = clock_course(itinerary, places)
    leaves = [leg.depart_at for leg in itinerary.legs[1:]] + [found.point.race_morning]
    windows: dict[date, LightDay] = {}
    # Stays that came in without their legs have no course: nothing is known to have moved the clock.
    for i, leave_at in enumerate(leaves[: len(course)]):
        until = min(leave_at, found.point.race_morning)
        if found.gap.free_from - ONE_DAY <= until and course[i].arrived_at <= until:
            windows.update({each.day: each for each in light_days(driver, course[: i + 1], until, places)})
    return windows
