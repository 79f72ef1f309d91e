"""A driver's recent mornings as plain records: what was expected, what was read, what it came to."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date

from planner.monitoring.model import Outcome, Reading
from planner.monitoring.outcome import ExpectedRange


@dataclass(frozen=True)
class JudgedReading:
    """A reading with its outcome; `when` is its local day and time in words, `words` its first reason."""

    reading: Reading
    outcome: Outcome
    when: str
    words: str


@dataclass(frozen=True)
class Morning:
    """One local day: the range expected awake that morning, and the day's readings in time order."""

    on: date
    expected: ExpectedRange
    readings: tuple[JudgedReading, ...] = ()
