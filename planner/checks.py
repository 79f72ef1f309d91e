"""The one guard for numbers: what each quantity is, its unit, and the range that can be typed.

`QUANTITIES` is the nomenclature; the table in DEVELOPERS.md is tested to equal it.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from planner.errors import InputError

FloatArray: TypeAlias = NDArray[np.float64]
FloatLike: TypeAlias = float | FloatArray


@dataclass(frozen=True)
class Quantity:
    """One quantity: its name in code, what it means, its unit and the range that is accepted."""

    name: str
    meaning: str
    unit: str
    low: float
    high: float


QUANTITIES: dict[str, Quantity] = {
    q.name: q
    for q in (
        Quantity("elevation_m", "height of the ground above mean sea level", "m", -430.0, 9000.0),
        Quantity("latitude_deg", "geographic latitude, north positive", "deg", -90.0, 90.0),
        Quantity("longitude_deg", "geographic longitude, east positive", "deg", -180.0, 180.0),
        Quantity("pressure_hpa", "air pressure at the station", "hPa", 300.0, 1100.0),
        Quantity("pressure_mmhg", "air pressure at the station", "mmHg", 225.0, 825.0),
        Quantity("altimeter_setting_hpa", "QNH, reduced by the standard atmosphere", "hPa", 870.0, 1090.0),
        Quantity("air_temperature_c", "dry-bulb temperature of the air", "C", -60.0, 75.0),
        Quantity("humidity_pct", "relative humidity, 0 to 100", "%", 0.0, 100.0),
        Quantity("air_density_kg_m3", "mass of moist air per volume", "kg/m3", 0.2, 1.6),
        Quantity("oxygen_fraction", "oxygen fraction of the dry gas breathed", "1", 0.05, 1.0),
        Quantity("inspired_po2_mmhg", "oxygen tension of moist inspired gas", "mmHg", 0.0, 760.0),
        Quantity("alveolar_po2_mmhg", "oxygen tension in the alveoli", "mmHg", 0.0, 760.0),
        Quantity("arterial_po2_mmhg", "oxygen tension of arterial blood", "mmHg", 0.0, 760.0),
        Quantity("paco2_mmhg", "carbon dioxide tension of arterial blood", "mmHg", 5.0, 90.0),
        Quantity("respiratory_quotient", "carbon dioxide given off over oxygen taken up", "1", 0.65, 1.3),
        Quantity("ph", "acidity of arterial blood", "1", 6.8, 7.9),
        Quantity("body_temperature_c", "temperature of the blood", "C", 30.0, 43.0),
        Quantity("saturation_pct", "oxygen saturation of haemoglobin", "%", 0.0, 100.0),
        Quantity("spo2_pct", "saturation read by a pulse oximeter", "%", 40.0, 100.0),
        Quantity("pulse_bpm", "heart rate", "1/min", 25.0, 230.0),
        Quantity("days", "time spent at an elevation", "d", 0.0, 3650.0),
        Quantity("hours", "time", "h", 0.0, 87600.0),
        Quantity("zones_east_h", "time zones crossed or still to be adapted to, east positive", "h", -24.0, 24.0),
        Quantity("clock_time_h", "time of day on the wall clock", "h", 0.0, 24.0),
        Quantity("sleep_h", "length of the habitual night's sleep", "h", 3.0, 14.0),
        Quantity("mass_kg", "body mass", "kg", 35.0, 150.0),
        Quantity("height_cm", "body height", "cm", 120.0, 230.0),
    )
}


def checked(quantity: str, value: FloatLike, field: str | None = None) -> FloatArray:
    """Return the value as a float64 array, or refuse it.

    Parameters: `quantity` names a row of `QUANTITIES`; `value` is a number or array of any shape in that
    unit, NaN passes as "not known"; `field` is the name to use in the message if it differs.
    Raises: InputError naming the field, the first value out of range, the range and the unit.
    """
    known = QUANTITIES[quantity]
    try:
        array = np.asarray(value, dtype=np.float64)
    except (TypeError, ValueError):
        raise InputError(field or quantity, value, f"a number in {known.unit}") from None
    outside = (array < known.low) | (array > known.high)
    if outside.any():
        worst = float(array[outside].flat[0]) if array.ndim else float(array)
        raise InputError(
            field or quantity, worst, f"{known.low:g} to {known.high:g} {known.unit} ({known.meaning})"
        )
    return array


def like(result: FloatArray, *given: FloatLike) -> FloatLike:
    """Return a Python float when every input was a scalar, else the array: no 0-d arrays leave a formula."""
    if all(np.ndim(g) == 0 for g in given):
        return float(result)
    return result
