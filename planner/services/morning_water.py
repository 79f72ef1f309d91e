"""The morning's mass, urine and thirst of every driver, judged against the driver's own mornings."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from datetime import date, datetime, time, timedelta
from typing import Final
from zoneinfo import ZoneInfo

from planner.errors import InputError
from planner.hydration.model import MorningMark
from planner.hydration.morning import BASELINE_LOOKS_BACK, MorningWater, baseline_kg, judge_morning
from planner.season.model import Driver
from planner.services.course import DriverCourse
from planner.services.season import Calendar, read_calendar
from planner.store.store import Store
from planner.wording import METRIC, UnitChoice

# A mass taken later in the day is no morning mass (judgement).
MORNING_ENDS: Final = time(12)
LOOKS_BACK: Final = BASELINE_LOOKS_BACK + timedelta(days=1)


@dataclass(frozen=True)
class TypedMark:
    """A morning's marks as typed, mass in kg; None is what was left empty."""

    driver_id: int | None
    mass_kg: float | None = None
    urine_colour: int | None = None
    urine_specific_gravity: float | None = None
    thirsty: bool | None = None


@dataclass(frozen=True)
class UsualMass:
    """The median of the last four weeks' mornings, None of fewer than three; the last morning weighed."""

    baseline_kg: float | None
    last: MorningMark | None
    zone: str


def morning_fluid_findings(
    store: Store, at: datetime, calendar: Calendar | None = None, units: UnitChoice = METRIC
) -> dict[int, MorningWater]:
    """What this morning's marks say, by driver id; a driver without marks today is left out.

    Today is the local day where the driver is at the instant.
    """
    season = read_calendar(store) if calendar is None else calendar
    marks = [m for m in store.all(MorningMark) if at - LOOKS_BACK <= m.at <= at]
    findings: dict[int, MorningWater] = {}
    for driver in season.drivers:
        where = DriverCourse(season, driver).where(at)
        zone = ZoneInfo(where.place.zone)
        mornings = _mornings([m for m in marks if m.driver_id == driver.id], zone)
        mark = mornings.pop(at.astimezone(zone).date(), None)
        if mark is not None:
            findings[driver.id] = judge_morning(
                mark, list(mornings.values()), elevation_m=where.bed_elevation_m, units=units
            )
    return findings


def marks_of_today(store: Store, driver: Driver, at: datetime, calendar: Calendar) -> MorningMark | None:
    """Everything marked this morning for a driver, as one; None when nothing was."""
    zone = ZoneInfo(DriverCourse(calendar, driver).where(at).place.zone)
    marks = [m for m in store.all(MorningMark, driver_id=driver.id) if at - LOOKS_BACK <= m.at <= at]
    return _mornings(marks, zone).get(at.astimezone(zone).date())


def usual_morning_mass(store: Store, driver: Driver, at: datetime, calendar: Calendar) -> UsualMass:
    """A driver's usual morning mass up to an instant, by the same rule as the morning's judgement."""
    zone = DriverCourse(calendar, driver).where(at).place.zone
    marks = [m for m in store.all(MorningMark, driver_id=driver.id) if at - LOOKS_BACK <= m.at <= at]
    mornings = list(_mornings(marks, ZoneInfo(zone)).values())
    weighed = [m for m in mornings if m.mass_kg is not None]
    return UsualMass(baseline_kg(at, weighed), weighed[-1] if weighed else None, zone)


def take_mark(store: Store, typed: TypedMark, *, by: str, now: datetime) -> tuple[MorningMark, int]:
    """Keep a morning's marks.

    Returns: the stored record and the change set by which it can be taken back.
    Raises: InputError when no driver is chosen, nothing is typed or a figure cannot be.
    """
    if typed.driver_id is None:
        raise InputError("driver", "nothing chosen", "one of the team")
    values = (typed.mass_kg, typed.urine_colour, typed.urine_specific_gravity, typed.thirsty)
    if all(value is None for value in values):
        raise InputError("morning marks", "nothing typed", "a mass, a urine mark or thirst")
    mark = MorningMark(
        typed.driver_id,
        now,
        typed.mass_kg,
        typed.urine_colour,
        typed.urine_specific_gravity,
        typed.thirsty,
        entered_by=by,
    )
    with store.transaction(by, "morning marks typed on Fluids") as change_set_id:
        kept = store.add(mark, by=by)
    return kept, change_set_id


def _mornings(marks: Iterable[MorningMark], zone: ZoneInfo) -> dict[date, MorningMark]:
    """One mark a local day, of what was marked before noon; of two figures the later one counts."""
    days: dict[date, MorningMark] = {}
    for mark in sorted(marks, key=lambda m: m.at):
        local = mark.at.astimezone(zone)
        if local.time() >= MORNING_ENDS:
            continue
        before = days.get(local.date())
        days[local.date()] = mark if before is None else _together(before, mark)
    return days


def _together(earlier: MorningMark, later: MorningMark) -> MorningMark:
    fields: Sequence[str] = ("mass_kg", "urine_colour", "urine_specific_gravity", "thirsty")
    kept = {f: getattr(earlier, f) for f in fields if getattr(later, f) is None}
    return replace(later, **kept)
