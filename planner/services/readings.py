"""Readings typed, shown back with their outcome, corrected with the old value kept, left out, taken back."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from datetime import datetime, timedelta
from typing import Final
from zoneinfo import ZoneInfo

from planner.errors import InputError, StoreError
from planner.hydration.model import MorningMark
from planner.monitoring.model import Reading, SickPeriod, Wakefulness
from planner.monitoring.outcome import CONFIRMS_WITHIN, SIGNS_LAST, Judgement, Sample
from planner.season.model import Place
from planner.services.course import DriverCourse
from planner.services.morning import CLOCKS_DIFFER, judged
from planner.services.own import Past
from planner.services.season import read_calendar
from planner.services.typed import local_instant
from planner.store.store import Change, Store
from planner.wording import DASH, clock, day_and_clock, number, per_cent, pulse

# What the screen calls a field of a reading.
FIELD_NAMES: Final = {
    "driver_id": "driver",
    "place_id": "place",
    "taken_at": "time",
    "spo2_pct": "SpO2",
    "pulse_bpm": "pulse",
    "mass_kg": "body mass",
    "quality_note": "what was wrong with it",
    "left_out": "left out because",
    "device": "oximeter",
    "headache": "headache",
    "gut": "stomach",
    "fatigue": "fatigue",
    "dizziness": "dizziness",
    "warm_hand": "warm hand",
    "wakefulness": "awake or asleep",
    "circumstance": "at rest or after a session",
    "emergency_signs": "emergency signs",
    "entered_by": "typed by",
}


@dataclass(frozen=True)
class TypedReading:
    """What the form holds, as typed; None is what was left empty. `local_time` is the wall clock there."""

    driver_id: int | None
    spo2_pct: float | None
    pulse_bpm: float | None = None
    wakefulness: Wakefulness = "awake"
    at_rest: bool = True
    warm_hand: bool = True
    hand_still: bool = True
    scores: Mapping[str, int | None] | None = None  # headache, gut, fatigue, dizziness
    emergency_signs: tuple[str, ...] = ()
    mass_kg: float | None = None
    device: str = ""
    place_id: int | None = None  # None = where the itinerary has the driver
    local_time: datetime | None = None  # None = now


@dataclass(frozen=True)
class JudgedEntry:
    """A stored reading with whose it is, what was expected and what it came to."""

    driver: str
    zone: str
    sample: Sample
    judgement: Judgement

    @property
    def reading(self) -> Reading:
        """The reading itself."""
        return self.sample.reading


def take(store: Store, typed: TypedReading, *, by: str, now: datetime) -> tuple[Reading, int]:
    """Keep a typed reading, and the body mass typed with it, as one change set.

    Returns: the stored reading and the change set's id, by which it can be taken back.
    Raises: InputError naming the field as the screen calls it; nothing is kept then.
    """
    if typed.driver_id is None:
        raise InputError("driver", "", "one of the team")
    if typed.spo2_pct is None:
        raise InputError("SpO2", "", "40 to 100 %")
    calendar = read_calendar(store)
    driver = next((d for d in calendar.drivers if d.id == typed.driver_id), None)
    if driver is None:
        raise InputError("driver", typed.driver_id, "one of the team")
    where = DriverCourse(calendar, driver).where(now)
    place = where.place if typed.place_id is None else calendar.places[typed.place_id]
    taken_at = _taken_at(typed, place, now)
    scores = dict(typed.scores or {})
    reading = Reading(
        driver_id=driver.id,
        place_id=place.id,
        taken_at=_free_instant(store, driver.id, taken_at),
        spo2_pct=typed.spo2_pct,
        pulse_bpm=typed.pulse_bpm,
        wakefulness=typed.wakefulness,
        circumstance="at rest" if typed.at_rest else "after a session",
        device=" ".join(typed.device.split()),
        warm_hand=typed.warm_hand,
        quality_note="" if typed.hand_still else "the hand moved",
        emergency_signs=typed.emergency_signs,
        headache=scores.get("headache"),
        gut=scores.get("gut"),
        fatigue=scores.get("fatigue"),
        dizziness=scores.get("dizziness"),
        entered_by=by,
    )
    try:
        with store.transaction(by, "typed on Readings") as change_set_id:
            kept = store.add(reading, by=by)
            if typed.mass_kg is not None:
                store.add(MorningMark(driver.id, taken_at, mass_kg=typed.mass_kg, entered_by=by), by=by)
    except InputError as problem:
        raise _in_screen_words(problem) from None
    return kept, change_set_id


def judge_entry(store: Store, reading: Reading) -> JudgedEntry:
    """A stored reading with its outcome, judged by those before it."""
    calendar = read_calendar(store)
    driver = next(d for d in calendar.drivers if d.id == reading.driver_id)
    past = Past.of(store, reading.taken_at)
    course = DriverCourse(calendar, driver, past, reading.taken_at)
    before = store.readings(
        driver_id=driver.id,
        since=reading.taken_at - max(CONFIRMS_WITHIN, SIGNS_LAST),
        until=reading.taken_at,
    )
    sample, judgement = judged(
        course, [*before, reading], [s for s in past.sick_periods if s.driver_id == driver.id]
    )[-1]
    return JudgedEntry(driver.name, calendar.places[reading.place_id].zone, sample, judgement)


def correct(store: Store, corrected: Reading, *, seen: Reading, by: str, why: str) -> Reading:
    """Keep the corrected values of a reading; the old ones stay in its changes.

    Parameters: `seen` is the reading as whoever corrects it last saw it.
    Raises: InputError when nothing differs, no reason is given or a value cannot be used; StoreError when
    somebody else has corrected the reading since it was seen.
    """
    present = store.get(Reading, corrected.id)
    if present != seen:
        raise StoreError(
            "somebody corrected this reading meanwhile: look at what stands there now, then keep yours if it "
            "is still right"
        )
    if corrected == present:
        raise InputError("correction", "", "at least one other value")
    reason = " ".join(why.split())
    if not reason:
        raise InputError("why", why, "a word on why it is corrected")
    try:
        return store.change(corrected, by=by, why=reason)
    except InputError as problem:
        raise _in_screen_words(problem) from None


def correction_words(change: Change, zone: str) -> str:
    """A change in words, the old value first: "07:20 coach: SpO2 98 → 88 (typing error)"."""
    when = f"{day_and_clock(change.at, zone)}, {change.by}"
    why = f" ({change.why})" if change.why else ""
    if change.before is None or change.after is None:
        return f"{when}: {change.action}{why}"
    parts = [
        f"{FIELD_NAMES.get(name, name)} {_value_words(change.before.get(name))} → {_value_words(value)}"
        for name, value in change.after.items()
        if change.before.get(name) != value
    ]
    return f"{when}: {'; '.join(parts) or change.action}{why}"


def reading_words(reading: Reading, zone: str) -> str:
    """A reading on one line: "Sat 6 Jun, 07:02: 92 %, pulse 62/min, awake"."""
    parts = [per_cent(reading.spo2_pct, 0 if reading.spo2_pct == round(reading.spo2_pct) else 1)]
    if reading.pulse_bpm is not None:
        parts.append(f"pulse {pulse(reading.pulse_bpm)}")
    parts.append(reading.wakefulness)
    if reading.circumstance != "at rest":
        parts.append(reading.circumstance)
    if not reading.warm_hand:
        parts.append("cold hand")
    if reading.quality_note:
        parts.append(reading.quality_note)
    if reading.left_out:
        parts.append(f"left out: {reading.left_out}")
    return f"{day_and_clock(reading.taken_at, zone)}: {', '.join(parts)}"


def open_sick_period(store: Store, driver_id: int, now: datetime) -> SickPeriod | None:
    """The driver's sick period that has begun and not ended."""
    periods = store.all(SickPeriod, driver_id=driver_id)
    return next((s for s in periods if s.starts_at <= now and (s.ends_at is None or now < s.ends_at)), None)


def mark_ill(
    store: Store, driver_id: int, *, since: datetime, marked_by: str, note: str, by: str, now: datetime
) -> SickPeriod:
    """Begin a sick period: its readings are for the physician and teach the driver's range nothing.

    Raises: InputError when one is open already, or the beginning lies ahead.
    """
    if open_sick_period(store, driver_id, now) is not None:
        raise InputError("ill since", since.isoformat(), "a driver who is not marked ill already")
    if since > now:
        raise InputError("ill since", since.isoformat(), "a time up to now")
    period = SickPeriod(driver_id, since, None, " ".join(marked_by.split()) or by, " ".join(note.split()))
    return store.add(period, by=by, why="marked ill")


def mark_well(store: Store, period: SickPeriod, *, at: datetime, by: str) -> SickPeriod:
    """End a sick period."""
    return store.change(replace(period, ends_at=at), by=by, why="marked well")


def _taken_at(typed: TypedReading, place: Place, now: datetime) -> datetime:
    if typed.local_time is None:
        return now
    taken_at = local_instant("time", typed.local_time.date(), typed.local_time.time(), place.zone)
    if taken_at > now + CLOCKS_DIFFER:
        zone = ZoneInfo(place.zone)
        raise InputError(
            "time",
            f"{typed.local_time:%Y-%m-%d %H:%M}",
            f"a time up to now, {now.astimezone(zone).date()} {clock(now, place.zone)} at {place.name}",
        )
    return taken_at


def _free_instant(store: Store, driver_id: int, at: datetime) -> datetime:
    """The instant, or the next second at which this driver has no reading: what comes later stays later."""
    taken = {r.taken_at for r in store.readings(driver_id=driver_id, since=at)}
    while at in taken:
        at += timedelta(seconds=1)
    return at


def _in_screen_words(problem: InputError) -> InputError:
    field = ", ".join(FIELD_NAMES.get(name, name) for name in problem.field.split(", "))
    return InputError(field, problem.value, problem.expected)


def _value_words(value: object) -> str:
    if value is None or value == "":
        return DASH
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return number(value, 0 if value == round(value) else 1)
    return str(value)
