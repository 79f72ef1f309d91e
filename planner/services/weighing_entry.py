"""Weigh-in and weigh-out as typed, kept and taken back."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import datetime, timedelta
from typing import Final

from planner.errors import InputError
from planner.hydration.model import CockpitConditions, Weighing, WeighingClothes
from planner.hydration.weighings import SHORTEST, check_weighing
from planner.season.model import Driver
from planner.services.cockpit import conditions_of, worn_ensemble
from planner.services.course import DriverCourse
from planner.services.fluids import SessionAt, sessions_in_order
from planner.services.season import Calendar
from planner.store.store import Store

# A weighing belongs to the session that begins or is under way so near to it (judgement).
NEAR: Final = timedelta(hours=3)
STILL_OPEN: Final = timedelta(hours=12)
# What getting ready and getting out add to a session between the two weighings (judgement).
AROUND: Final = timedelta(minutes=15)

FIELD_NAMES: Final = {
    "mass_before_kg": "mass before",
    "mass_after_kg": "mass after",
    "drink_ml": "drunk",
    "food_g": "eaten",
    "urine_ml": "urine",
    "ends_at": "time between the weighings",
    "starts_at": "time of the weigh-in",
    "air_temperature_c": "air in the cockpit",
    "humidity_pct": "humidity in the cockpit",
}


@dataclass(frozen=True)
class OpenWeighing:
    """A weigh-in that waits for its weigh-out."""

    weighing: Weighing
    driver: Driver
    session: SessionAt | None


@dataclass(frozen=True)
class TypedWeighOut:
    """The weigh-out as typed, in house units; None is what was left empty."""

    mass_after_kg: float | None
    drink_ml: float | None = None
    urine_ml: float | None = None
    food_g: float | None = None
    clothes: WeighingClothes = "towelled skin"
    minutes: float | None = None  # between the two weighings
    air_temperature_c: float | None = (
        None  # in the cockpit, with the humidity; None = as noted for the session
    )
    humidity_pct: float | None = None


def session_near(calendar: Calendar, at: datetime) -> SessionAt | None:
    """The session under way at an instant, or the nearest one within three hours of it."""

    def distance(each: SessionAt) -> timedelta:
        if each.session.starts_at <= at <= each.session.ends_at:
            return timedelta(0)
        return min(abs(each.session.starts_at - at), abs(each.session.ends_at - at))

    near = [s for s in sessions_in_order(calendar) if distance(s) <= NEAR]
    return min(near, key=distance, default=None)


def weigh_in(
    store: Store, calendar: Calendar, driver_id: int | None, mass_kg: float | None, *, by: str, now: datetime
) -> tuple[Weighing, int]:
    """Keep a weigh-in; the session near in time and the driver's place go with it.

    Returns: the stored weighing and the change set by which it can be taken back.
    Raises: InputError naming the field; a driver who is weighed in already has to be weighed out first.
    """
    driver = _driver(calendar, driver_id)
    if mass_kg is None:
        raise InputError("mass before", "nothing typed", "the body mass")
    if any(each.driver.id == driver.id for each in open_weighings(store, calendar, now)):
        raise InputError("driver", driver.name, "somebody who is not weighed in already")
    near = session_near(calendar, now)
    place = near.place if near else DriverCourse(calendar, driver).where(now).place
    weighing = Weighing(
        driver_id=driver.id,
        place_id=place.id,
        starts_at=now,
        ends_at=None,
        mass_before_kg=mass_kg,
        ensemble=worn_ensemble(store).name,
        session_id=near.session.id if near else None,
        entered_by=by,
    )
    _check(weighing, driver)
    with store.transaction(by, "weigh-in") as change_set_id:
        kept = store.add(weighing, by=by)
    return kept, change_set_id


def weigh_out(
    store: Store, opened: OpenWeighing, typed: TypedWeighOut, *, by: str, now: datetime
) -> tuple[Weighing, int]:
    """Finish a weighing; the cockpit conditions noted for its session go with it.

    Returns: the stored weighing and the change set by which it can be taken back.
    Raises: InputError naming the field as the screen calls it.
    """
    if typed.mass_after_kg is None:
        raise InputError("mass after", "nothing typed", "the body mass")
    if typed.drink_ml is None:
        raise InputError("drunk", "nothing typed", "what was drunk, 0 if nothing")
    minutes = likely_minutes(opened, now) if typed.minutes is None else typed.minutes
    measured = measured_conditions(store, opened)
    finished = replace(
        opened.weighing,
        ends_at=opened.weighing.starts_at + timedelta(minutes=minutes),
        mass_after_kg=typed.mass_after_kg,
        drink_ml=typed.drink_ml,
        urine_ml=typed.urine_ml or 0.0,
        food_g=typed.food_g or 0.0,
        clothes=typed.clothes,
        radiant_temperature_c=measured.radiant_temperature_c if measured else None,
        air_speed_m_s=measured.air_speed_m_s if measured else None,
        air_temperature_c=_first(typed.air_temperature_c, measured.air_temperature_c if measured else None),
        humidity_pct=_first(typed.humidity_pct, measured.humidity_pct if measured else None),
    )
    _check(finished, opened.driver)
    with store.transaction(by, "weigh-out") as change_set_id:
        kept = store.change(finished, by=by)
    return kept, change_set_id


def measured_conditions(store: Store, opened: OpenWeighing) -> CockpitConditions | None:
    """The cockpit as measured for the weighing's session; an estimate is not taken for a measurement."""
    session_id = opened.weighing.session_id
    noted = conditions_of(store, session_id) if session_id else None
    return noted if noted is not None and noted.measured else None


def open_weighings(store: Store, calendar: Calendar, now: datetime) -> list[OpenWeighing]:
    """Weigh-ins of the last twelve hours without a weigh-out, oldest first."""
    drivers = {d.id: d for d in calendar.drivers}
    sessions = {s.session.id: s for s in sessions_in_order(calendar)}
    waiting = [
        OpenWeighing(w, drivers[w.driver_id], sessions.get(w.session_id or 0))
        for w in store.all(Weighing)
        if w.mass_after_kg is None and w.driver_id in drivers and abs(now - w.starts_at) <= STILL_OPEN
    ]
    return sorted(waiting, key=lambda each: each.weighing.starts_at)


def likely_minutes(opened: OpenWeighing, now: datetime) -> int:
    """Time between the weighings: what the clock says, or the session's length while it says too little."""
    passed = now - opened.weighing.starts_at
    if passed < SHORTEST:
        session = opened.session
        passed = timedelta(hours=session.hours if session else 1.0) + AROUND
    return round(passed / timedelta(minutes=1))


def not_weighed_in(
    store: Store, calendar: Calendar, session: SessionAt | None, now: datetime
) -> Sequence[Driver]:
    """Drivers who have no weighing for the session and none open."""
    busy = {each.driver.id for each in open_weighings(store, calendar, now)}
    if session is not None:
        busy |= {w.driver_id for w in store.all(Weighing, session_id=session.session.id)}
    return [d for d in calendar.drivers if d.id not in busy]


def _driver(calendar: Calendar, driver_id: int | None) -> Driver:
    driver = next((d for d in calendar.drivers if d.id == driver_id), None)
    if driver is None:
        raise InputError("driver", "nothing chosen", "one of the team")
    return driver


def _first(typed: float | None, noted: float | None) -> float | None:
    return noted if typed is None else typed


def _check(weighing: Weighing, driver: Driver) -> None:
    try:
        check_weighing(weighing, driver)
    except InputError as problem:
        field = FIELD_NAMES.get(problem.field, problem.field)
        raise InputError(field, problem.value, problem.expected) from None
