"""Conversion at the edges: inside the program every quantity has one unit."""

from __future__ import annotations

from typing import Final

from planner.constants import HPA_PER_MMHG

METRES_PER_FOOT: Final = 0.3048
KG_PER_POUND: Final = 0.45359237
ML_PER_US_FLUID_OUNCE: Final = 29.5735295625

# unit -> (factor, offset): value in the house unit = given * factor + offset
TO_HOUSE: dict[str, dict[str, tuple[float, float]]] = {
    "elevation": {"m": (1.0, 0.0), "ft": (METRES_PER_FOOT, 0.0)},
    "temperature": {"C": (1.0, 0.0), "F": (5.0 / 9.0, -160.0 / 9.0)},
    "mass": {"kg": (1.0, 0.0), "lb": (KG_PER_POUND, 0.0)},
    "volume": {"mL": (1.0, 0.0), "fl oz": (ML_PER_US_FLUID_OUNCE, 0.0)},
    "pressure": {"hPa": (1.0, 0.0), "mmHg": (HPA_PER_MMHG, 0.0), "kPa": (10.0, 0.0)},
}


def to_house(kind: str, value: float, unit: str) -> float:
    """Convert a typed value (kind: elevation, temperature, mass, volume, pressure) to the house unit."""
    factor, offset = TO_HOUSE[kind][unit]
    return value * factor + offset


def from_house(kind: str, value: float, unit: str) -> float:
    """Convert a value in the house unit (m, C, kg, mL, hPa) to the unit that the user reads."""
    factor, offset = TO_HOUSE[kind][unit]
    return (value - offset) / factor
