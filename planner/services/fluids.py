"""Fluids: the drinks plan of a session for every driver, what the weighings taught, the day's water."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Final, cast

import numpy as np

from planner.errors import InputError, NotFoundError
from planner.hydration.cockpit import FULL_SUIT, CarKind, ClothingEnsemble, inputs_from_conditions
from planner.hydration.findings import DrinkFinding, drink_findings
from planner.hydration.model import CockpitConditions, MorningMark, Weighing
from planner.hydration.plan import DrinksPlan, Setting, TimelineStep, plan_drinks, timeline
from planner.hydration.reasons import plan_reasons
from planner.hydration.weighings import Occasion, Weighed, evidence_for, weigh_up
from planner.physiology.body_water import CONCENTRATED_SPECIFIC_GRAVITY, DARK_URINE_COLOUR, day_water_ml
from planner.physiology.ranges import Range
from planner.season.model import Driver, Place, Round, Session
from planner.services.cockpit import car_of, ensembles_of, expected_conditions, worn_ensemble
from planner.services.course import DriverCourse
from planner.services.limits import drinks_cap_l_per_h
from planner.services.morning import air_at
from planner.services.morning_water import marks_of_today
from planner.services.season import Calendar
from planner.store.store import Store
from planner.wording import METRIC, UnitChoice

NEXT_COUNTS_WITHIN: Final = timedelta(hours=48)  # a later session is no reason to hurry (judgement)
MOST_STINTS: Final = 24
SESSIONS_NAMED: Final = 6
RESIDENT_SINCE: Final = timedelta(days=365)


@dataclass(frozen=True)
class SessionAt:
    """A session with its round and place."""

    session: Session
    round: Round
    place: Place

    @property
    def hours(self) -> float:
        """How long it lasts."""
        return (self.session.ends_at - self.session.starts_at) / timedelta(hours=1)


@dataclass(frozen=True)
class PlannedDriver:
    """One driver's drinks for one session, in floats, with the reasons and the steps in time."""

    driver: Driver
    plan: DrinksPlan
    reasons: tuple[str, ...]
    steps: tuple[TimelineStep, ...]


@dataclass(frozen=True)
class SessionDrinks:
    """A session planned for everybody, with the conditions that it rests on."""

    at: SessionAt
    conditions: CockpitConditions
    ensemble: ClothingEnsemble
    car: CarKind
    pressure_hpa: float
    hours_to_next: float
    rows: tuple[PlannedDriver, ...]


@dataclass(frozen=True)
class Taught:
    """What one driver's weighings say; newest first."""

    driver: Driver
    weighed: tuple[Weighed, ...]
    findings: tuple[DrinkFinding, ...]


@dataclass(frozen=True)
class DayWater:
    """A driver's water for the day, food included and sessions not."""

    driver: Driver
    place: Place
    bed_elevation_m: float
    days_there: float
    total_ml: Range


def sessions_in_order(calendar: Calendar) -> list[SessionAt]:
    """Every session of the season, in time order."""
    found = [
        SessionAt(session, each, calendar.place_of(each))
        for each in calendar.rounds
        for session in calendar.sessions[each.id]
    ]
    return sorted(found, key=lambda at: at.session.starts_at)


def next_session(sessions: Sequence[SessionAt], at: datetime) -> SessionAt | None:
    """The session under way or next to come; the last one after the season."""
    return next((s for s in sessions if s.session.ends_at > at), sessions[-1] if sessions else None)


def find_session(calendar: Calendar, text: str, at: datetime) -> SessionAt:
    """A session by its words: "Race" of the round now or next, "Round 5/Race", or its id.

    Raises: NotFoundError naming what there is.
    """
    sessions = sessions_in_order(calendar)
    wanted = text.strip().casefold()
    if wanted.isdecimal():
        matching = [s for s in sessions if s.session.id == int(wanted)]
    elif "/" in wanted:
        of_round, name = (part.strip() for part in wanted.split("/", 1))
        matching = [
            s for s in sessions if s.round.name.casefold() == of_round and s.session.name.casefold() == name
        ]
    else:
        upcoming = next_session(sessions, at)
        matching = [
            s
            for s in sessions
            if upcoming and s.round.id == upcoming.round.id and s.session.name.casefold() == wanted
        ]
    if not matching:
        names = [f"{s.round.name}/{s.session.name}" for s in sessions if s.session.ends_at > at][
            :SESSIONS_NAMED
        ]
        raise NotFoundError(f"session {text!r} is not known; next to come: {', '.join(names) or 'none'}")
    return matching[0]


def find_driver(calendar: Calendar, text: str) -> Driver:
    """A driver by name or the beginning of it, whatever the case.

    Raises: NotFoundError naming who there is.
    """
    wanted = " ".join(text.split()).casefold()
    exact = [d for d in calendar.drivers if d.name.casefold() == wanted]
    begins = [d for d in calendar.drivers if wanted and d.name.casefold().startswith(wanted)]
    found = exact or begins
    if len(found) != 1:
        names = ", ".join(d.name for d in (found or calendar.drivers))
        raise NotFoundError(f"driver {text!r} is {'not clear' if found else 'not known'}: {names or 'none'}")
    return found[0]


def plan_session(
    store: Store,
    calendar: Calendar,
    at: SessionAt,
    *,
    now: datetime,
    weighed: Iterable[Weighed] | None = None,
    stints: int = 1,
    drink_cap_l_per_h: float | None = None,
    units: UnitChoice = METRIC,
) -> SessionDrinks:
    """Plan a session for all drivers in one pass.

    `weighed` are the weighings to learn from; read from the store when not given, as is the hourly limit that
    the coach has set on Team.
    Raises: InputError naming what cannot be.
    """
    if not 1 <= stints <= MOST_STINTS:
        raise InputError("stints", stints, f"1 to {MOST_STINTS}")
    drivers = calendar.drivers
    conditions = expected_conditions(store, at.session.id)
    ensemble, car = worn_ensemble(store), car_of(store)
    pressure_hpa = air_at(calendar, at.place, at.session.starts_at).pressure_hpa
    taught = weighed_of(store, calendar) if weighed is None else weighed
    before = [w for w in taught if w.weighing.starts_at < at.session.starts_at]
    hours_to_next = _hours_to_next(calendar, at)
    setting = Setting(
        mass_kg=_column([d.mass_kg for d in drivers]),
        height_cm=_column([d.height_cm for d in drivers]),
        session_hours=at.hours,
        pressure_hpa=pressure_hpa,
        stints=float(stints),
        bottle_ml=_column([d.bottle_ml for d in drivers]),
        drink_cap_l_per_h=drinks_cap_l_per_h(store) if drink_cap_l_per_h is None else drink_cap_l_per_h,
        sweat_sodium_mmol_l=_column([d.sweat_sodium_mmol_l for d in drivers]),
        urine_dark=_column([_urine_dark(store, calendar, d, at, now) for d in drivers]),
        hours_to_next=hours_to_next,
    )
    plans = plan_drinks(
        setting,
        inputs_from_conditions(conditions, ensemble, car),
        evidence_for([d.id for d in drivers], before),
    )
    rows = []
    for i, driver in enumerate(drivers):
        plan = plans.one(i, 0)
        own = _setting_of(setting, i)
        rows.append(
            PlannedDriver(
                driver,
                plan,
                plan_reasons(plan, own, conditions, ensemble, units),
                tuple(timeline(plan, at.hours, stints, hours_to_next)),
            )
        )
    return SessionDrinks(at, conditions, ensemble, car, pressure_hpa, hours_to_next, tuple(rows))


def weighed_of(store: Store, calendar: Calendar) -> list[Weighed]:
    """Every finished weighing with its sweat rate and what was predicted for it."""
    drivers = {d.id: d for d in calendar.drivers}
    clothing = {each.name: each for each in ensembles_of(store)}
    car = car_of(store)
    pressures: dict[tuple[int, datetime], float] = {}

    def pressure_hpa(weighing: Weighing) -> float:
        # Measured pressures are near in time by the hour, so one look-up serves a whole session.
        key = weighing.place_id, weighing.starts_at.replace(minute=0, second=0, microsecond=0)
        if key not in pressures:
            place = calendar.places[weighing.place_id]
            pressures[key] = air_at(calendar, place, weighing.starts_at).pressure_hpa
        return pressures[key]

    return weigh_up(
        [
            Occasion(w, drivers[w.driver_id], pressure_hpa(w), clothing.get(w.ensemble, FULL_SUIT), car)
            for w in store.all(Weighing)
            if w.driver_id in drivers
        ]
    )


def taught_of(
    calendar: Calendar, weighed: Sequence[Weighed], units: UnitChoice = METRIC
) -> tuple[Taught, ...]:
    """What the weighings say of each driver, those with findings first."""
    taught = []
    for driver in calendar.drivers:
        own = sorted(
            (w for w in weighed if w.weighing.driver_id == driver.id),
            key=lambda w: w.weighing.starts_at,
            reverse=True,
        )
        taught.append(Taught(driver, tuple(own), tuple(drink_findings(own, units))))
    return tuple(sorted(taught, key=lambda each: (not each.findings, each.driver.name)))


def day_water_of(calendar: Calendar, at: datetime) -> tuple[DayWater, ...]:
    """Every driver's water for the day where the driver is, with the journey of the day, if any."""
    rows = []
    for driver in calendar.drivers:
        course = DriverCourse(calendar, driver)
        where = course.where(at)
        # Without an arrival the driver lives there.
        since = where.arrived_at or at - RESIDENT_SINCE
        days = max((at - since) / timedelta(days=1), 0.0)
        aboard = sum(
            (leg.arrive_at - leg.depart_at) / timedelta(hours=1)
            for leg in course.legs
            if leg.mode == "flight" and leg.depart_at <= at < leg.arrive_at + timedelta(hours=12)
        )
        total = day_water_ml(driver.sex, where.bed_elevation_m, min(days, RESIDENT_SINCE.days), aboard)
        rows.append(DayWater(driver, where.place, where.bed_elevation_m, days, total))
    return tuple(rows)


def _column(values: Sequence[float | None]) -> np.ndarray[tuple[int, ...], np.dtype[np.float64]]:
    known = [math.nan if value is None else value for value in values]
    return np.array(known, dtype=np.float64)[:, np.newaxis]


def _setting_of(setting: Setting, driver: int) -> Setting:
    """One driver's numbers out of the columns."""
    values: Mapping[str, object] = vars(setting)
    return Setting(
        **{
            name: float(value[driver, 0]) if isinstance(value, np.ndarray) else float(cast(float, value))
            for name, value in values.items()
        }
    )


def _hours_to_next(calendar: Calendar, at: SessionAt) -> float:
    later = [
        s.session.starts_at - at.session.ends_at
        for s in sessions_in_order(calendar)
        if s.session.starts_at >= at.session.ends_at
    ]
    gap = min(later, default=NEXT_COUNTS_WITHIN * 2)
    return gap / timedelta(hours=1) if gap <= NEXT_COUNTS_WITHIN else math.nan


def _urine_dark(store: Store, calendar: Calendar, driver: Driver, at: SessionAt, now: datetime) -> float:
    """Whether this morning's urine was dark, for a session of today; not known for any other day."""
    if not timedelta(0) <= at.session.ends_at - now <= timedelta(hours=18):
        return math.nan
    mark = marks_of_today(store, driver, now, calendar)
    return math.nan if mark is None else _darkness(mark)


def _darkness(mark: MorningMark) -> float:
    if mark.urine_colour is None and mark.urine_specific_gravity is None:
        return math.nan
    dark = (mark.urine_colour or 0) >= DARK_URINE_COLOUR
    return float(dark or (mark.urine_specific_gravity or 0.0) > CONCENTRATED_SPECIFIC_GRAVITY)
