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
        Quantity("zones_east_h", "zones crossed or still to adapt to, east positive", "h", -24.0, 24.0),
        Quantity("clock_time_h", "time of day on the wall clock", "h", 0.0, 24.0),
        Quantity("sleep_h", "length of the habitual night's sleep", "h", 3.0, 14.0),
        Quantity("ventilatory_state", "lasting rise of alveolar ventilation over sea level's", "1", 0.0, 5.0),
        Quantity("breathing", "how strongly a person breathes, in standard deviations", "1", -6.0, 6.0),
        Quantity("pressure_sd_hpa", "how unsure a pressure is, standard deviation", "hPa", 0.0, 50.0),
        Quantity("mass_kg", "body mass", "kg", 35.0, 150.0),
        Quantity("height_cm", "body height", "cm", 120.0, 230.0),
        Quantity("wet_bulb_c", "temperature of a wetted thermometer", "C", -80.0, 75.0),
        Quantity("skin_temperature_c", "mean temperature of the skin", "C", 20.0, 42.0),
        Quantity("work_w_m2", "external mechanical work over the body surface", "W/m2", 0.0, 300.0),
        Quantity("insulation_clo", "thermal insulation of the clothing", "clo", 0.0, 4.0),
        Quantity("permeability", "vapour permeability index im of the clothing", "1", 0.05, 1.0),
        Quantity("altitude_exponent", "how clothing vapour resistance follows pressure", "1", 0.0, 1.0),
        Quantity("required_w_m2", "evaporation that would keep the heat balance", "W/m2", -2000.0, 3000.0),
        Quantity("maximal_w_m2", "evaporation that air and clothing let pass", "W/m2", -3000.0, 6000.0),
        Quantity("vapour_pressure_mmhg", "partial pressure of water vapour in the air", "mmHg", 0.0, 60.0),
        Quantity("oxygen_uptake_l_min", "oxygen taken up", "L/min", 0.0, 8.0),
        Quantity("energy_kcal", "energy turned over", "kcal", 0.0, 20000.0),
        Quantity("surface_m2", "body surface area", "m2", 0.8, 3.5),
        Quantity("sweat_rate_l_per_h", "sweat lost", "L/h", 0.0, 5.0),
        Quantity("sweat_l", "sweat lost in a session", "L", 0.0, 60.0),
        Quantity("session_hours", "length of a session or a stint", "h", 0.0, 12.0),
        Quantity("drink_cap_l_per_h", "most that is drunk in an hour", "L/h", 0.0, 1.0),
        Quantity("drink_rate_l_per_h", "drunk in an hour", "L/h", 0.0, 5.0),
        Quantity("stints", "stints of a session, the bottle filled again between them", "1", 1.0, 24.0),
        Quantity("mass_lost_kg", "body mass lost in a session", "kg", 0.0, 60.0),
        Quantity("planned_drink_ml", "to be drunk in a session", "mL", 0.0, 60000.0),
        Quantity("yes_or_no", "1 yes, 0 no", "1", 0.0, 1.0),
        Quantity("mass_change_pct", "change of body mass, a loss negative", "%", -15.0, 15.0),
        Quantity("urine_colour", "colour of the urine on the scale 1 to 8", "1", 1.0, 8.0),
        Quantity("bottle_ml", "capacity of the drinks bottle in the car", "mL", 100.0, 5000.0),
        Quantity("sweat_sodium_mmol_l", "sodium in whole-body sweat", "mmol/L", 5.0, 150.0),
        Quantity("tent_hours_per_night", "time a night in an altitude tent", "h", 0.0, 24.0),
        Quantity("radiant_temperature_c", "mean radiant temperature", "C", -60.0, 120.0),
        Quantity("air_speed_m_s", "speed of the air over the body", "m/s", 0.0, 60.0),
        Quantity("metabolic_w_m2", "metabolic rate per body surface", "W/m2", 30.0, 700.0),
        Quantity("drink_ml", "drunk between two weighings", "mL", 0.0, 10000.0),
        Quantity("food_g", "eaten between two weighings", "g", 0.0, 3000.0),
        Quantity("urine_ml", "passed between two weighings", "mL", 0.0, 3000.0),
        Quantity("urine_specific_gravity", "density of urine over that of water", "1", 1.0, 1.06),
    )
}


def checked(quantity: str, value: FloatLike, field: str | None = None) -> FloatArray:
    """Return the value as a float64 array, or refuse it.

    Parameters: `quantity` names a row of `QUANTITIES`; `value` is a number or array of any shape in that
    unit, NaN passes as "not known"; `field` is the name to use in the message if it differs.
    Raises: InputError naming the field, the first value out of range, the range and the unit.
    """
    known = QUANTITIES[quantity]
    array = numbers(field or quantity, value, known.unit)
    outside = (array < known.low) | (array > known.high)
    if outside.any():
        worst = float(array[outside].flat[0]) if array.ndim else float(array)
        unit = "" if known.unit == "1" else f" {known.unit}"  # a pure number has no unit to print
        expected = f"{known.low:g} to {known.high:g}{unit} ({known.meaning})"
        raise InputError(field or quantity, worst, expected)
    return array


def numbers(field: str, value: FloatLike, unit: str) -> FloatArray:
    """Return the value as a float64 array of any size, or refuse what is no number.

    A text that spells a number, or None, is refused too: it would have been read where it was typed.
    Raises: InputError naming the field, the value and the unit.
    """
    try:
        array = np.asarray(value)
    except ValueError:  # rows of different lengths
        array = np.asarray(None)
    if array.dtype.kind not in "fiub":
        raise InputError(field, value, f"a number{in_unit(unit)}")
    return array.astype(np.float64, copy=False)


def in_unit(unit: str) -> str:
    """As " in hPa", to follow "a number"; nothing for a pure number."""
    return "" if unit == "1" else f" in {unit}"


def like(result: FloatArray, *given: FloatLike) -> FloatLike:
    """Return a Python float when every input was a scalar, else the array: no 0-d arrays leave a formula."""
    if all(np.ndim(g) == 0 for g in given):
        return float(result)
    return result
