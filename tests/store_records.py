"""An invented team for the tests of the store: one record of every kind, and a way to keep them all."""

from __future__ import annotations

from dataclasses import fields, replace
from datetime import UTC, date, datetime
from typing import Any

from planner.hydration.model import CockpitConditions, MorningMark, Weighing
from planner.monitoring.model import Notice, Reading, SickPeriod
from planner.season.model import (
    Commitment,
    Driver,
    Leg,
    Place,
    PressureMeasurement,
    Round,
    Session,
    Stay,
)
from planner.store.store import Store

BY = "Tester"


def at(day: int, hour: int = 7, minute: int = 0, month: int = 5) -> datetime:
    """An instant of May 2026 unless another month is named."""
    return datetime(2026, month, day, hour, minute, tzinfo=UTC)


HOME = Place("Invented Harbour", "Europe/Lisbon", 12.0, 15.5, 38.25, -9.125)
HIGH = Place("Invented Plateau", "America/Bogota", 2250.0, 2310.0, 5.5, -73.5)
DRIVER = Driver(
    "Ada Invented", "woman", 1, 61.5, 171.0, 750.0, 44.0, "moderate or severe", 2500.0, "", None, "06:30"
)
ROUND = Round(7, "Plateau round", 2)
SESSION = Session(1, "race", "Race", at(17, 18), at(17, 19, 30))

# In an order in which each refers only to those before; references are to the first of each kind but
# HIGH, which is the second place.
EVERY_KIND: tuple[Any, ...] = (
    HOME,
    HIGH,
    DRIVER,
    ROUND,
    SESSION,
    Commitment(1, "Factory day", 1, at(4, 8), at(4, 16)),
    Stay(1, 2, at(12, 20), at(18, 9), 2400.0, 0.15, 8.5),
    Leg(1, 1, 2, at(12, 6), at(12, 20), "flight", 2100.0),
    PressureMeasurement(2, at(13), 780.25, "altimeter setting 1025 hPa"),
    Reading(
        1,
        2,
        at(13, 11, 59),
        91.0,
        64.0,
        "asleep",
        "after a session",
        "ring, left hand",
        False,
        "cold finger",
        ("cough", "blue_lips"),
        1,
        0,
        2,
        3,
        "cold hand",
        "Ada",
    ),
    SickPeriod(1, at(2), None, "physician", "a cold"),
    Notice(1, at(13, 12), "told the physician", "by telephone", "coach"),
    CockpitConditions(1, 48.0, 52.5, 35.0, 1.5, True),
    Weighing(
        1, 2, at(17, 17), at(17, 20), 61.4, 60.3, 500.0, 30.0, 120.0, "underwear", "suit",
        48.0, 52.0, 35.0, 1.5, 170.0, 1, "coach",
    ),
    MorningMark(1, at(14), 61.2, 4, 1.018, False, "Ada"),
)  # fmt: skip


def keep_every_kind(store: Store) -> list[Any]:
    """Keep one record of every kind (and a second place), in one change set."""
    with store.transaction(BY, "an invented team"):
        return [store.add(record, by=BY) for record in EVERY_KIND]


def with_team(store: Store) -> tuple[Place, Driver]:
    """Keep a place and a driver at home there."""
    with store.transaction(BY, "an invented team"):
        home = store.add(HOME, by=BY)
        return home, store.add(
            replace(DRIVER, home_place_id=home.id, iron_checked_on=date(2026, 3, 1)), by=BY
        )


def some_readings(driver: Driver, place: Place, count: int, first: datetime | None = None) -> list[Reading]:
    """Different readings, one a minute."""
    start = first or at(1)
    minute = at(1, 0, 1) - at(1, 0, 0)
    return [
        Reading(driver.id, place.id, start + n * minute, 90.0 + n % 10, 50.0 + n % 40, device="clip")
        for n in range(count)
    ]


def content(store: Store) -> dict[str, Any]:
    """Every live record of every kind, by the name of the kind."""
    return {kind.__name__: store.all(kind) for kind in {type(record) for record in EVERY_KIND}}


def field_names(record: type) -> list[str]:
    """The names of a record's fields."""
    return [field.name for field in fields(record)]
