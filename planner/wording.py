"""How numbers, ranges and times are written: pure text, and a dash for what is unknown, never "nan".

House values go in (m, hPa, C, kg, mL); the reader's choice of units is applied here and nowhere else.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import date, datetime, timedelta
from typing import Final
from zoneinfo import ZoneInfo

from planner.errors import InputError
from planner.units import TO_HOUSE, from_house

DASH: Final = "–"  # en dash: ranges, and the place of a missing number
THIN: Final = "\u2009"
NO_BREAK: Final = "\u00a0"
MINUS: Final = "−"
UNIT_NAMES: Final = {"C": "°C", "F": "°F"}


@dataclass(frozen=True)
class UnitChoice:
    """The units that one person reads and types in; the defaults are metric."""

    elevation: str = "m"
    temperature: str = "C"
    mass: str = "kg"
    volume: str = "mL"
    pressure: str = "hPa"

    def __post_init__(self) -> None:
        for kind, known in TO_HOUSE.items():
            if getattr(self, kind) not in known:
                raise InputError(f"unit of {kind}", getattr(self, kind), " or ".join(known))


METRIC: Final = UnitChoice()


def is_known(value: float | None) -> bool:
    """False for None, NaN and infinity."""
    return value is not None and math.isfinite(value)


def number(value: float | None, decimals: int = 0) -> str:
    """`2250` as "2 250" with a thin space, a true minus sign, and a dash for what is not known."""
    if value is None or not math.isfinite(value):
        return DASH
    text = f"{value:,.{decimals}f}".replace(",", THIN)
    if text.startswith("-"):
        text = text[1:] if not any(c in "123456789" for c in text) else MINUS + text[1:]
    return text


def number_range(low: float | None, high: float | None, decimals: int = 0) -> str:
    """Two numbers joined by an en dash: "90–96"."""
    if not (is_known(low) and is_known(high)):
        return DASH
    return f"{number(low, decimals)}{DASH}{number(high, decimals)}"


def per_cent(value: float | None, decimals: int = 0) -> str:
    """A per cent, whole unless asked otherwise: "88 %"."""
    return _with_unit(number(value, decimals), "%")


def per_cent_range(low: float | None, high: float | None, decimals: int = 0) -> str:
    """A range in per cent, whole unless asked otherwise: "90–96 %"."""
    return _with_unit(number_range(low, high, decimals), "%")


def elevation(value_m: float | None, units: UnitChoice = METRIC) -> str:
    """Whole metres or feet: "2 250 m"."""
    return _quantity("elevation", value_m, units.elevation, {"m": 0, "ft": 0})


def pressure(value_hpa: float | None, units: UnitChoice = METRIC) -> str:
    """Whole hPa or mmHg, kPa to one decimal."""
    return _quantity("pressure", value_hpa, units.pressure, {"hPa": 0, "mmHg": 0, "kPa": 1})


def temperature(value_c: float | None, units: UnitChoice = METRIC) -> str:
    """Whole degrees."""
    return _quantity("temperature", value_c, units.temperature, {"C": 0, "F": 0})


def mass(value_kg: float | None, units: UnitChoice = METRIC) -> str:
    """To 0.1 kg, or 0.1 lb."""
    return _quantity("mass", value_kg, units.mass, {"kg": 1, "lb": 1})


def volume(value_ml: float | None, units: UnitChoice = METRIC) -> str:
    """A drink to 50 mL, or to a whole fluid ounce."""
    if value_ml is not None and math.isfinite(value_ml) and units.volume == "mL":
        value_ml = 50.0 * round(value_ml / 50.0)
    return _quantity("volume", value_ml, units.volume, {"mL": 0, "fl oz": 0})


def pulse(value_bpm: float | None) -> str:
    """Whole beats a minute: "64/min"."""
    return DASH if value_bpm is None or not math.isfinite(value_bpm) else f"{number(value_bpm)}/min"


def day(at: date | datetime, zone: str = "UTC") -> str:
    """A date as "Thu 14 May"; an instant is first taken to its zone."""
    local = at.astimezone(ZoneInfo(zone)) if isinstance(at, datetime) else at
    return f"{local:%a} {local.day} {local:%b}"


def clock(at: datetime, zone: str) -> str:
    """The wall clock at a place, "07:12"."""
    return f"{at.astimezone(ZoneInfo(zone)):%H:%M}"


def day_and_clock(at: datetime, zone: str) -> str:
    """Both: "Thu 14 May, 07:12"."""
    return f"{day(at, zone)}, {clock(at, zone)}"


def zone_name(zone: str, at: datetime) -> str:
    """What the zone is called at that instant: "CEST", or "UTC−05:00" where it has no letters of its own."""
    local = at.astimezone(ZoneInfo(zone))
    name = local.tzname() or ""
    if name.isalpha():
        return name
    offset = local.utcoffset() or timedelta()
    minutes = round(abs(offset).total_seconds() / 60.0)
    sign = MINUS if offset < timedelta() else "+"
    return f"UTC{sign}{minutes // 60:02d}:{minutes % 60:02d}"


def age(since: timedelta) -> str:
    """How long ago, in the largest fitting unit: "just now", "40 min ago", "3 h ago", "2 days ago"."""
    minutes = since.total_seconds() / 60.0
    if minutes < 1.0:
        return "just now"
    if minutes < 90.0:
        return f"{round(minutes)}{NO_BREAK}min ago"
    if minutes < 36.0 * 60.0:
        return f"{round(minutes / 60.0)}{NO_BREAK}h ago"
    return f"{round(minutes / 1440.0)} days ago"


def counted(amount: int, singular: str, plural: str = "") -> str:
    """An amount with its word: "1 driver", "8 drivers"."""
    return f"{amount} {singular if amount == 1 else plural or singular + 's'}"


def unit_name(unit: str) -> str:
    """How a unit is written: "°C" for C, the others as they are called."""
    return UNIT_NAMES.get(unit, unit)


def _quantity(kind: str, value: float | None, unit: str, decimals: dict[str, int]) -> str:
    if value is None or not math.isfinite(value):
        return DASH
    return _with_unit(number(from_house(kind, value, unit), decimals[unit]), unit_name(unit))


def _with_unit(text: str, unit: str) -> str:
    return text if text == DASH else f"{text}{NO_BREAK}{unit}"
