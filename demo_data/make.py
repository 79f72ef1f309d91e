"""Writes the demo season: `python -m demo_data.make [FOLDER]`. The same files come out every time."""

from __future__ import annotations

import sys
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from demo_data.fluids import CONDITIONS, morning_marks, weighings
from demo_data.itineraries import itinerary
from demo_data.readings import NOTICES, PRESSURES, SICK_PERIODS, readings
from demo_data.world import COMMITMENTS, DRIVERS, HEADING, NOW, PLACES, ROUNDS, SESSIONS
from planner.exchange.calendar_rounds import write_rounds
from planner.exchange.context import FileContext
from planner.exchange.kinds import write_records
from planner.exchange.registry import KINDS
from planner.exchange.tables import Column, write_table
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


def records() -> dict[type, Sequence[Any]]:
    """Return all records of the season by kind."""
    stays: list[Stay] = []
    legs: list[Leg] = []
    taken: list[Reading] = []
    marks: list[MorningMark] = []
    weighed: list[Weighing] = []
    for driver in DRIVERS:
        own_stays, own_legs = itinerary(driver)
        stays += own_stays
        legs += own_legs
        own_readings = readings(driver, own_stays, own_legs)
        taken += own_readings
        marks += morning_marks(driver, own_readings)
        weighed += weighings(driver)
    return {
        Place: PLACES,
        Driver: DRIVERS,
        Round: ROUNDS,
        Session: SESSIONS,
        Commitment: COMMITMENTS,
        Stay: stays,
        Leg: legs,
        PressureMeasurement: PRESSURES,
        SickPeriod: SICK_PERIODS,
        Reading: taken,
        Notice: NOTICES,
        CockpitConditions: CONDITIONS,
        Weighing: weighed,
        MorningMark: marks,
    }


def write(folder: Path) -> None:
    """Write every file of the season into a folder."""
    folder.mkdir(parents=True, exist_ok=True)
    context = FileContext(now=NOW, drivers=DRIVERS, places=PLACES, rounds=ROUNDS, sessions=SESSIONS)
    season = records()
    for kind in KINDS:
        data = write_records(kind, season[kind.record], context, HEADING)
        (folder / f"{kind.name.replace(' ', '_')}.csv").write_bytes(data)
    calendar = write_rounds(
        ROUNDS, SESSIONS, {p.id: p for p in PLACES}, store_uid="invented-demo", now=NOW, heading=HEADING
    )
    (folder / "calendar.ics").write_bytes(calendar)
    clock = Column("clock_frozen_at", "the instant at which the demo's clock stands", required=True)
    (folder / "clock.csv").write_bytes(write_table([clock], [{clock.name: NOW}], HEADING))


if __name__ == "__main__":
    write(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent)
