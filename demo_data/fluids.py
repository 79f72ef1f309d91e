"""Weighings of the last three rounds and this one, cockpit conditions, and five weeks of morning marks.

One driver drinks more than he loses, one hardly drinks: both are meant to be found.
"""

from __future__ import annotations

from collections.abc import Sequence
from datetime import timedelta
from typing import Final
from zoneinfo import ZoneInfo

from demo_data.nature import sweat_l_per_h
from demo_data.readings import ILL_TODAY
from demo_data.world import NOW, NOW_ROUND, PLACE_BY_ID, ROUNDS, SESSIONS, TODAY, generator
from planner.hydration.cockpit import FULL_SUIT
from planner.hydration.model import CockpitConditions, MorningMark, Weighing
from planner.monitoring.model import Reading
from planner.season.model import Driver, Session

FIRST_WEIGHED_ROUND: Final = NOW_ROUND - 3
FIRST_MARK: Final = TODAY - timedelta(weeks=5)

# The driver's own sweat rate over the average one, and what is drunk of it.
SWEAT_RATIO: Final = {1: 0.85, 2: 1.05, 3: 0.95, 4: 1.10, 5: 0.80, 6: 1.35, 7: 1.00, 8: 0.75}
DRUNK_SHARE: Final = {1: 0.70, 2: 0.65, 3: 0.75, 4: 0.55, 5: 0.80, 6: 0.12, 7: 1.40, 8: 0.70}
UNDER_DRINKS: Final = 6

BREATH_KG_PER_H: Final = 0.06
WEIGHED_AROUND: Final = timedelta(minutes=6)  # before the start and after the end of a session
SCALE_STEP_KG: Final = 0.05
SCALE_SD_KG: Final = 0.03

# Round: air, radiant temperature, humidity in the cockpit of the first practice.
_COCKPIT: Final = {
    7: (38.0, 41.0, 32.0),
    8: (43.0, 47.0, 20.0),
    9: (41.0, 45.0, 34.0),
    10: (37.0, 41.0, 24.0),
}
# Session: how much hotter than the first practice.
_HOTTER_C: Final = {"Practice 1": 0.0, "Practice 2": 2.0, "Qualifying": 1.5, "Race": 3.5}
_AIR_SPEED_M_S: Final = 0.5


def _conditions() -> tuple[CockpitConditions, ...]:
    """Return the conditions of every session weighed; an estimate for those of this weekend still to come."""
    conditions = []
    for session in SESSIONS:
        if session.round_id in _COCKPIT:
            air_c, radiant_c, humidity_pct = _COCKPIT[session.round_id]
            hotter_c = _HOTTER_C[session.name]
            conditions.append(
                CockpitConditions(
                    session.id,
                    air_c + hotter_c,
                    radiant_c + hotter_c,
                    humidity_pct - hotter_c,
                    _AIR_SPEED_M_S,
                    measured=session.ends_at <= NOW,
                )
            )
    return tuple(conditions)


CONDITIONS: Final = _conditions()


def weighings(driver: Driver) -> list[Weighing]:
    """Return the driver's weigh-ins and weigh-outs, oldest first."""
    return [
        _weighing(driver, session, conditions)
        for conditions in CONDITIONS
        for session in SESSIONS
        if session.id == conditions.session_id and session.ends_at <= NOW
        # Who is ill does not drive.
        if not (driver.id == ILL_TODAY and session.round_id == NOW_ROUND)
    ]


def _weighing(driver: Driver, session: Session, conditions: CockpitConditions) -> Weighing:
    random = generator(f"weighing {session.id}", driver.id)
    starts_at, ends_at = session.starts_at - WEIGHED_AROUND, session.ends_at + WEIGHED_AROUND
    hours = (ends_at - starts_at) / timedelta(hours=1)
    average_l_per_h = sweat_l_per_h(driver, conditions.air_temperature_c, conditions.humidity_pct)
    sweat_l = average_l_per_h * SWEAT_RATIO[driver.id] * hours * (1.0 + 0.06 * random.normal())
    bottle_ml = driver.bottle_ml * (2.0 if hours > 1.5 else 1.0)  # a race has a stop for a second one
    drink_ml = min(round(sweat_l * 1000.0 * DRUNK_SHARE[driver.id] / 50.0) * 50.0, bottle_ml)
    urine_ml = 150.0 if random.random() < 0.15 else 0.0
    before_kg = driver.mass_kg * (1.0 + 0.004 * random.normal())
    after_kg = before_kg - sweat_l - BREATH_KG_PER_H * hours + (drink_ml - urine_ml) / 1000.0
    return Weighing(
        driver.id,
        ROUNDS[session.round_id - 1].place_id,
        starts_at,
        ends_at,
        mass_before_kg=_on_scale(before_kg + SCALE_SD_KG * random.normal()),
        mass_after_kg=_on_scale(after_kg + SCALE_SD_KG * random.normal()),
        drink_ml=drink_ml,
        urine_ml=urine_ml,
        ensemble=FULL_SUIT.name,
        air_temperature_c=conditions.air_temperature_c,
        radiant_temperature_c=conditions.radiant_temperature_c,
        humidity_pct=conditions.humidity_pct,
        air_speed_m_s=conditions.air_speed_m_s,
        session_id=session.id,
        entered_by="coach",
    )


def _on_scale(mass_kg: float) -> float:
    return round(round(mass_kg / SCALE_STEP_KG) * SCALE_STEP_KG, 2)


def morning_marks(driver: Driver, readings: Sequence[Reading]) -> list[MorningMark]:
    """Return a mark for every morning reading of the last five weeks, made right after it."""
    marks: dict[object, MorningMark] = {}
    for reading in readings:
        day = reading.taken_at.astimezone(ZoneInfo(PLACE_BY_ID[reading.place_id].zone)).date()
        if day < FIRST_MARK or reading.wakefulness != "awake" or reading.circumstance != "at rest":
            continue
        random = generator(f"mark {day}", driver.id)
        dry = driver.id == UNDER_DRINKS and day == TODAY
        mass_kg = driver.mass_kg * (1.0 + 0.0035 * random.normal()) if not dry else driver.mass_kg * 0.987
        marks[day] = MorningMark(
            driver.id,
            reading.taken_at + timedelta(minutes=3),
            mass_kg=round(mass_kg, 1),
            urine_colour=6 if dry else int(random.choice((2, 3, 3, 4))),
            thirsty=bool(random.random() < 0.06) and not dry,
            entered_by=driver.name,
        )
    return list(marks.values())
