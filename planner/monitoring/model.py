"""What is measured on a driver, as typed, with what is needed to judge it."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from typing import Literal, TypeAlias

Wakefulness: TypeAlias = Literal["awake", "asleep"]
Circumstance: TypeAlias = Literal["at rest", "after a session"]
NoticeKind: TypeAlias = Literal["told the physician", "note"]
Outcome: TypeAlias = Literal["in range", "repeat", "refer", "urgent"]


@dataclass(frozen=True)
class Reading:
    """One pulse-oximeter reading. `taken_at` is an instant in UTC."""

    driver_id: int
    place_id: int
    taken_at: datetime
    spo2_pct: float
    pulse_bpm: float | None = None
    wakefulness: Wakefulness = "awake"
    circumstance: Circumstance = "at rest"
    device: str = ""
    warm_hand: bool = True
    quality_note: str = ""  # what was wrong with the measurement, if anything
    emergency_signs: tuple[str, ...] = ()  # codes of physiology.illness.EMERGENCY_SIGNS
    headache: int | None = None  # Lake Louise 2018 items, 0-3; None = not asked
    gut: int | None = None
    fatigue: int | None = None
    dizziness: int | None = None
    left_out: str = ""  # why this reading must not teach the driver's range; empty = it may
    entered_by: str = ""
    id: int = 0


@dataclass(frozen=True)
class SickPeriod:
    """A time of illness as marked by the physician or the driver: its readings teach nothing."""

    driver_id: int
    starts_at: datetime
    ends_at: datetime | None  # None = still ill
    marked_by: str
    note: str = ""
    id: int = 0


@dataclass(frozen=True)
class Notice:
    """What was done about an outcome: told the physician, measured again, a note."""

    driver_id: int
    at: datetime
    kind: NoticeKind
    text: str = ""
    entered_by: str = ""
    id: int = 0
