"""Ten weeks of oximeter readings: what such a person shows at such a place (see nature), and noise.

The faults in them are meant: a cold finger, a typing error, readings with a moving hand, a driver who does
not adapt, one who is ill.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import UTC, date, datetime, time, timedelta
from typing import Final

import numpy as np

from demo_data.nature import RESIDENT_DAYS, SCATTER_PCT, spo2_pct
from demo_data.world import NOW, NOW_ROUND, PLACE, PLACE_BY_ID, SESSIONS, TODAY, at, generator
from planner.monitoring.model import Notice, Reading, SickPeriod, Wakefulness
from planner.season.exposure import where_is
from planner.season.model import Driver, Leg, PressureMeasurement, Stay

FIRST_MORNING: Final = TODAY - timedelta(weeks=10)
MISSED_SHARE: Final = 0.06
MOVED_HAND_SHARE: Final = 0.012
HIGH_BEDS_M: Final = 1500.0  # nights above it are recorded
FULL: Final = 100.0


@dataclass(frozen=True)
class Person:
    """How one driver differs from others, and how the driver measures."""

    breathing: float  # breathes more than others, in standard deviations
    offset_pct: float  # of person and oximeter together
    resting_pulse_bpm: float
    device: str
    records_nights: bool


PERSONS: Final = {
    1: Person(+0.6, +0.3, 52.0, "oximeter A", records_nights=True),
    2: Person(-0.4, -0.3, 56.0, "oximeter B", records_nights=False),
    3: Person(+1.1, +0.2, 54.0, "oximeter A", records_nights=True),
    4: Person(-0.7, -0.2, 58.0, "oximeter B", records_nights=True),
    5: Person(-0.2, +0.4, 60.0, "oximeter A", records_nights=False),
    6: Person(+0.3, -0.5, 49.0, "oximeter C", records_nights=True),
    7: Person(-0.7, -0.1, 55.0, "oximeter B", records_nights=False),
    8: Person(-0.1, +0.2, 62.0, "oximeter C", records_nights=False),
}

DOES_NOT_ADAPT: Final = 4
COLD_HAND_TODAY: Final = 7
ILL_TODAY: Final = 2
ILL_IN_MAY: Final = 5
NOT_YET_MEASURED: Final = 8
MISTYPED: Final = (6, date(2026, 4, 25), 69.0)  # 96 was read, 69 typed
STORY_SCATTER: Final = 0.1  # chance has less of a say where the season tells something
# Points that a morning's reading lies away from what the person would show otherwise.
SHIFT_PCT: Final = {
    (DOES_NOT_ADAPT, TODAY - timedelta(days=1)): -3.7,
    (DOES_NOT_ADAPT, TODAY): -3.9,
    (COLD_HAND_TODAY, TODAY): -6.0,
    (ILL_TODAY, TODAY - timedelta(days=1)): -1.0,
    (ILL_TODAY, TODAY): -1.5,
    **{(ILL_IN_MAY, date(2026, 5, 9) + timedelta(days=day)): -2.0 for day in range(4)},
}

SICK_PERIODS: Final = (
    SickPeriod(
        ILL_IN_MAY,
        at(date(2026, 5, 9), "08:00", "Europe/Dublin"),
        at(date(2026, 5, 14), "08:00", "America/Los_Angeles"),
        "team physician",
        "cough and fever, over on 14 May",
    ),
    SickPeriod(
        ILL_TODAY,
        at(TODAY - timedelta(days=1), "08:30", "America/Mexico_City"),
        None,
        "team physician",
        "sore throat and a cold since Thursday night",
    ),
)

NOTICES: Final = (
    Notice(
        ILL_TODAY,
        at(TODAY - timedelta(days=1), "08:35", "America/Mexico_City"),
        "told the physician",
        "cold since the night; the physician sees him at 09:00",
        "coach",
    ),
    Notice(
        DOES_NOT_ADAPT,
        at(TODAY - timedelta(days=1), "07:50", "America/Mexico_City"),
        "note",
        "low for the first time, slept badly; measure again tomorrow",
        "coach",
    ),
)

PRESSURES: Final = tuple(
    PressureMeasurement(PLACE[place].id, at(day, clock, PLACE[place].zone), hpa, typed)
    for place, day, clock, hpa, typed in (
        ("Copperdrift", date(2026, 4, 10), "08:10", 835.6, "station barometer 835.6 hPa"),
        ("Copperdrift", date(2026, 4, 12), "08:05", 831.9, "station barometer 831.9 hPa"),
        ("Portmerrin", date(2026, 5, 30), "09:00", 1015.0, "altimeter setting 1016 hPa"),
        ("Talquime", date(2026, 6, 4), "17:30", 781.4, "station barometer 781.4 hPa"),
        ("Talquime", date(2026, 6, 5), "07:00", 782.9, "station barometer 782.9 hPa"),
        ("Talquime", date(2026, 6, 6), "06:40", 780.8, "station barometer 780.8 hPa"),
    )
)


def readings(driver: Driver, stays: Sequence[Stay], legs: Sequence[Leg]) -> list[Reading]:
    """Return all readings of a driver up to now, oldest first."""
    taken: list[Reading] = []
    day = FIRST_MORNING
    while day <= TODAY:
        stay = _stay_on(driver, day, stays, legs)
        if stay is not None:
            taken += _night(driver, day, stay)
            taken += _morning(driver, day, stay)
        day += timedelta(days=1)
    taken += _after_sessions(driver, stays)
    return sorted((each for each in taken if each.taken_at <= NOW), key=lambda each: each.taken_at)


def waking(driver: Driver, day: date, stay: Stay) -> datetime:
    """Return the instant at which the driver wakes on a day."""
    return at(day, driver.wake_time, PLACE_BY_ID[stay.place_id].zone)


def _stay_on(driver: Driver, day: date, stays: Sequence[Stay], legs: Sequence[Leg]) -> Stay | None:
    """Return where the driver wakes on a day, if in a bed and there for at least the night."""
    noon = datetime.combine(day, time(12), UTC)
    for stay in stays:
        wakes = waking(driver, day, stay)
        if stay.arrive_at + timedelta(hours=6) <= wakes < stay.depart_at and abs(wakes - noon) < timedelta(
            days=1
        ):
            return stay if where_is(driver, wakes, stays, legs) == stay else None
    return None


def _night(driver: Driver, day: date, stay: Stay) -> list[Reading]:
    """Return the reading of a recorded night: every night up high, every fifth one elsewhere."""
    person, random = PERSONS[driver.id], generator(f"night {day}", driver.id)
    high = PLACE_BY_ID[stay.place_id].bed_elevation_m > HIGH_BEDS_M and stay.place_id != driver.home_place_id
    if not person.records_nights or not (high or day.toordinal() % 5 == 0):
        return []
    taken_at = waking(driver, day, stay) - timedelta(minutes=int(random.integers(170, 230)))
    if taken_at < stay.arrive_at + timedelta(hours=3):
        return []
    shown_pct = _drawn_spo2_pct(driver, day, taken_at, stay, "asleep", random)
    return [
        Reading(
            driver.id,
            stay.place_id,
            taken_at,
            shown_pct,
            pulse_bpm=_drawn_pulse_bpm(driver, shown_pct, random) - 5.0,
            wakefulness="asleep",
            device=person.device,
            entered_by=driver.name,
        )
    ]


def _morning(driver: Driver, day: date, stay: Stay) -> list[Reading]:
    """Return the morning's reading, a second one where the hand had moved; now and then none."""
    person, random = PERSONS[driver.id], generator(f"morning {day}", driver.id)
    missed, moved = random.random() < MISSED_SHARE, random.random() < MOVED_HAND_SHARE
    if (driver.id == NOT_YET_MEASURED and day == TODAY) or (missed and day < TODAY - timedelta(days=2)):
        return []
    taken_at = waking(driver, day, stay) + timedelta(minutes=int(random.integers(8, 33)))
    shown_pct = _drawn_spo2_pct(driver, day, taken_at, stay, "awake", random)
    proper = Reading(
        driver.id,
        stay.place_id,
        taken_at,
        shown_pct,
        pulse_bpm=_drawn_pulse_bpm(driver, shown_pct, random),
        device=person.device,
        warm_hand=not (driver.id == COLD_HAND_TODAY and day == TODAY),
        entered_by=driver.name,
        **_symptoms(driver, day, stay, random),
    )
    if (driver.id, day) == MISTYPED[:2]:
        return [replace(proper, spo2_pct=MISTYPED[2])]
    if moved and day < TODAY - timedelta(days=3):
        wrong = replace(proper, spo2_pct=proper.spo2_pct - 4.0, quality_note="hand moved")
        return [wrong, replace(proper, taken_at=taken_at + timedelta(minutes=4))]
    return [proper]


def _after_sessions(driver: Driver, stays: Sequence[Stay]) -> list[Reading]:
    """Return the reading that some take just after this weekend's second practice; it teaches nothing."""
    person, random = PERSONS[driver.id], generator("after practice", driver.id)
    if not person.records_nights:
        return []
    practice = next(each for each in SESSIONS if each.round_id == NOW_ROUND and each.name == "Practice 2")
    taken_at = practice.ends_at + timedelta(minutes=int(random.integers(6, 15)))
    stay = next(each for each in stays if each.arrive_at <= taken_at < each.depart_at)
    shown_pct = _drawn_spo2_pct(driver, taken_at.date(), taken_at, stay, "awake", random) - 1.0
    return [
        Reading(
            driver.id,
            stay.place_id,
            taken_at,
            shown_pct,
            pulse_bpm=_drawn_pulse_bpm(driver, shown_pct, random) + 45.0,
            circumstance="after a session",
            device=person.device,
            entered_by="coach",
        )
    ]


def _drawn_spo2_pct(
    driver: Driver,
    day: date,
    taken_at: datetime,
    stay: Stay,
    wakefulness: Wakefulness,
    random: np.random.Generator,
) -> float:
    """Return a whole per cent drawn around what this person shows there after so many days."""
    person = PERSONS[driver.id]
    at_home = stay.place_id == driver.home_place_id
    days = RESIDENT_DAYS if at_home else (taken_at - stay.arrive_at) / timedelta(days=1)
    own_pct = spo2_pct(PLACE_BY_ID[stay.place_id], days, person.breathing, asleep=wakefulness == "asleep")
    told = day == TODAY or (driver.id, day) in SHIFT_PCT
    noise_pct = random.normal() * SCATTER_PCT * (STORY_SCATTER if told else 1.0)
    shift_pct = SHIFT_PCT.get((driver.id, day), 0.0) if wakefulness == "awake" else 0.0
    return float(min(round(own_pct + person.offset_pct + shift_pct + noise_pct), FULL))


def _drawn_pulse_bpm(driver: Driver, shown_pct: float, random: np.random.Generator) -> float:
    """Return a whole pulse: faster with less oxygen."""
    return float(
        round(PERSONS[driver.id].resting_pulse_bpm + 0.9 * (97.0 - shown_pct) + random.normal() * 2.5)
    )


def _symptoms(driver: Driver, day: date, stay: Stay, random: np.random.Generator) -> dict[str, int]:
    """Return the four answers of a morning up high; elsewhere nobody asks."""
    if PLACE_BY_ID[stay.place_id].bed_elevation_m <= HIGH_BEDS_M or stay.place_id == driver.home_place_id:
        return {}
    unwell = (driver.id, day) in SHIFT_PCT and driver.id != COLD_HAND_TODAY
    tired = int(unwell or random.random() < 0.2)
    return {
        "headache": int(unwell and driver.id == DOES_NOT_ADAPT),
        "gut": 0,
        "fatigue": tired,
        "dizziness": 0,
    }
