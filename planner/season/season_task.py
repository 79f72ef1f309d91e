"""One driver's season as a task for the search: what is fixed, what is free, what is asked."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import UTC, date, datetime, time
from typing import Final
from zoneinfo import ZoneInfo

from planner.season.constraints import RISK_CLASSES, Limits, local_date
from planner.season.day_model import Combination, Measure, Rates
from planner.season.evaluate import RoundPoint, Setting
from planner.season.itinerary import Fixed, Itinerary
from planner.season.model import Place, Stay

MORNING: Final = time(7)

# What may be set aside to find out what stands in the way of a season.
PHYSICIAN: Final = "the physician's highest bed"
ASCENT: Final = "the ascent rule above 3 000 m"
LOCKS: Final = "the locked nights"
LANDING: Final = "the shortest time from landing to the first session"
TRAVEL: Final = "the longest travel a day"


@dataclass(frozen=True)
class Wish:
    """What one high round counts for, and the limits that it has."""

    weight: float = 1.0
    limits: Limits = field(default_factory=Limits)


@dataclass(frozen=True)
class Lock:
    """Nights, by the date of their evening, that stay as they are: all of them at one place."""

    first: date
    last: date
    place_id: int


@dataclass(frozen=True)
class SeasonTask:
    """One driver's season to be searched, from the morning of `from_day` to the night of `until_day`.

    `candidates` are places where free nights may be spent, besides home and the fixed places before and
    after; `wishes` by round. `kept` are stretches whose stays are taken over from the present itinerary as
    they are; their nights should be locked. `tent` lets nights at home be spent in a tent if the physician's
    note allows it.
    """

    setting: Setting
    itinerary: Itinerary
    points: tuple[RoundPoint, ...]
    fixed: tuple[Fixed, ...]
    candidates: tuple[int, ...]
    wishes: Mapping[int, Wish]
    from_day: date
    until_day: date
    rules: Limits = field(default_factory=Limits)
    rates: Rates = field(default_factory=Rates)
    locks: tuple[Lock, ...] = ()
    kept: tuple[tuple[datetime, datetime], ...] = ()
    tent: bool = True
    measure: Measure = "SpO2"
    combination: Combination = "weighted sum"

    @property
    def days(self) -> int:
        """Number of nights."""
        return (self.until_day - self.from_day).days + 1

    @property
    def starts_at(self) -> datetime:
        """The first morning, local where the driver is, or at home when that is not known."""
        at_home = utc(self.from_day, MORNING, self.setting.home)
        i = self.itinerary.index_at(at_home)
        entry = self.itinerary.entries[i] if i is not None else None
        if isinstance(entry, Stay):
            there = utc(self.from_day, MORNING, self.setting.places[entry.place_id])
            if entry.arrive_at <= there < entry.depart_at:
                return there
        return at_home

    def fixed_within(self) -> list[Fixed]:
        """The fixed points that lie wholly inside."""
        places = self.setting.places
        return [
            f
            for f in self.fixed
            if local_date(f.starts_at, places[f.place_id]) > self.from_day
            and local_date(f.ends_at, places[f.place_id]) <= self.until_day
        ]


LOWEST_SPO2: Final = "the lowest race-morning SpO2"
LOWEST_CAPACITY: Final = "the lowest aerobic capacity"
HIGHEST_RISK: Final = "the highest class of ascent"
BODY_CLOCK: Final = "the body clock on race day"


def at_round(words: str, point: RoundPoint) -> str:
    """The name of one limit of one round."""
    return f"{words} at {point.name}"


def limit_names(task: SeasonTask) -> list[str]:
    """The names of the limits that rounds have, in time order, as `without` takes them."""
    names = []
    for point in points_within(task):
        if point.round_id in task.wishes:
            limits = task.wishes[point.round_id].limits
            asked = {
                LOWEST_SPO2: limits.lowest_race_spo2_pct is not None,
                LOWEST_CAPACITY: limits.lowest_race_capacity_pct is not None,
                HIGHEST_RISK: limits.highest_risk != RISK_CLASSES[-1],
                BODY_CLOCK: limits.largest_clock_offset_h is not None,
            }
            names += [at_round(words, point) for words, is_asked in asked.items() if is_asked]
    return names


def points_within(task: SeasonTask) -> list[RoundPoint]:
    """The rounds that lie wholly inside the task, in time order."""
    within = {f.round_id for f in task.fixed_within() if f.round_id is not None}
    return sorted((p for p in task.points if p.round_id in within), key=lambda p: p.race_at)


def day_of(task: SeasonTask, at: datetime, place: Place) -> int:
    """Number of the day of an instant at a place."""
    return (local_date(at, place) - task.from_day).days


def midnight(day: date) -> datetime:
    """The first instant of a day in UTC, from which the day model counts its hours."""
    return datetime.combine(day, time(0), UTC)


def utc(day: date, wall: time, place: Place) -> datetime:
    """A local time of a day at a place as an instant."""
    return datetime.combine(day, wall, ZoneInfo(place.zone)).astimezone(UTC)
