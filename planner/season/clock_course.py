"""The body clock along an itinerary: its offset on any day, and the light that moves it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date, datetime, timedelta

import numpy as np

from planner.errors import InputError
from planner.physiology.body_clock import (
    clock_offset_h,
    light_windows,
    remaining_offset_h,
    temperature_minimum_h,
)
from planner.season.constraints import local_date
from planner.season.itinerary import Itinerary
from planner.season.model import Driver, Place
from planner.season.travel import zones_east_h


@dataclass(frozen=True)
class ClockPoint:
    """The offset with which a driver arrived somewhere, east positive, and the local date of arrival."""

    arrived_at: datetime
    place_id: int
    arrived_on: date
    offset_h: float

    def offset_on(self, day: date) -> float:
        """Offset on a later day, counted in whole days since the arrival."""
        return float(remaining_offset_h(self.offset_h, float(max((day - self.arrived_on).days, 0))))


@dataclass(frozen=True)
class LightDay:
    """The light to seek and to avoid on one local day at a place, wall-clock hours in [0, 24)."""

    day: date
    place_id: int
    offset_h: float
    seek_from_h: float
    seek_to_h: float
    avoid_from_h: float
    avoid_to_h: float


def clock_course(itinerary: Itinerary, places: Mapping[int, Place]) -> list[ClockPoint]:
    """The offset after each leg; before the first one the clock is taken as adapted."""
    course: list[ClockPoint] = []
    for leg in itinerary.legs:
        here, there = places[leg.from_place_id], places[leg.to_place_id]
        zones = zones_east_h(here, there, leg.arrive_at)
        before = course[-1].offset_on(local_date(leg.depart_at, here)) if course else 0.0
        offset = shifted_offset_h(before, zones)
        course.append(ClockPoint(leg.arrive_at, there.id, local_date(leg.arrive_at, there), offset))
    return course


def shifted_offset_h(offset_h: float, zones_east: float) -> float:
    """The offset after crossing more zones; a journey within the zone leaves it as it is."""
    if zones_east == 0.0:
        return offset_h
    return float(clock_offset_h((offset_h + zones_east) % 24.0))


def offset_at(course: list[ClockPoint], at: datetime, places: Mapping[int, Place]) -> float:
    """The offset at an instant, east positive; 0 before the first leg."""
    arrived = [point for point in course if point.arrived_at <= at]
    return arrived[-1].offset_on(local_date(at, places[arrived[-1].place_id])) if arrived else 0.0


def light_days(
    driver: Driver, course: list[ClockPoint], until: datetime, places: Mapping[int, Place]
) -> list[LightDay]:
    """The days from the last arrival before `until` up to then on which light can still move the clock."""
    arrived = [point for point in course if point.arrived_at <= until]
    if not arrived:
        return []
    point = arrived[-1]
    length = (local_date(until, places[point.place_id]) - point.arrived_on).days + 1
    days = [point.arrived_on + timedelta(days=i) for i in range(length)]
    offsets = np.array([point.offset_on(day) for day in days])
    windows = light_windows(offsets, float(temperature_minimum_h(wake_hour(driver))))
    return [
        LightDay(
            day,
            point.place_id,
            float(offsets[i]),
            float(windows.seek_from_h[i]),
            float(windows.seek_to_h[i]),
            float(windows.avoid_from_h[i]),
            float(windows.avoid_to_h[i]),
        )
        for i, day in enumerate(days)
        if offsets[i] != 0.0
    ]


def wake_hour(driver: Driver) -> float:
    """Habitual waking as hours of the wall clock. Raises: InputError for a time that is not HH:MM."""
    return clock_hours(driver.wake_time, "wake_time")


def clock_hours(text: str, field: str) -> float:
    """A wall-clock time HH:MM as hours. Raises: InputError naming the field."""
    hours, colon, minutes = text.strip().partition(":")
    if not (colon and hours.isdecimal() and minutes.isdecimal() and int(hours) < 24 and int(minutes) < 60):
        raise InputError(field, text, "a time of day as HH:MM")
    return int(hours) + int(minutes) / 60.0


def as_clock(hours: float) -> str:
    """Hours of the wall clock as HH:MM, to the nearest minute."""
    minutes = round(hours * 60.0) % (24 * 60)
    return f"{minutes // 60:02d}:{minutes % 60:02d}"
