"""The heat balance of a seated, clothed person at any air pressure, and the humidity that goes with it.

The structure is that of ISO 7933 and ISO 9920 (kPa, m2 K/W), with the convection, the evaporation and the
clothing's vapour resistance made to follow the air pressure. W/m2 are per body surface.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from planner.checks import FloatArray, FloatLike, checked, like
from planner.constants import SEA_LEVEL_PRESSURE_HPA, ZERO_CELSIUS_K
from planner.physiology.air import _saturation_vapour_pressure_kpa as _saturation_kpa

STEFAN_BOLTZMANN_W_M2_K4: Final = 5.67e-8
SKIN_EMISSIVITY: Final = 0.97
SEATED_RADIATING_FRACTION: Final = 0.70
CLO_M2_K_W: Final = 0.155
LEWIS_RATIO_K_KPA: Final = 16.5
# ASHRAE Fundamentals (from memory): convection follows air density to this power.
CONVECTION_PRESSURE_EXPONENT: Final = 0.55
# Nobody has measured how a garment's vapour resistance follows pressure: somewhere between not at all and in
# proportion. The middle is a judgement; callers carry 0 to 1 through as a range.
ALTITUDE_EXPONENT: Final = 0.5
HOT_SKIN_TEMPERATURE_C: Final = 36.0
# WMO-No. 8 (from memory): coefficient of a ventilated psychrometer with a wet, not iced, bulb.
PSYCHROMETER_COEFFICIENT_PER_K: Final = 6.53e-4
PSYCHROMETER_TEMPERATURE_TERM: Final = 9.44e-4

LOWEST_WET_BULB_C: Final = -80.0
BISECTIONS: Final = 50
FIXED_POINT_TOLERANCE_C: Final = 1e-9
FIXED_POINT_STEPS: Final = 100


@dataclass(frozen=True)
class HeatBalance:
    """Where the body's heat goes [W/m2], arrays of one shape; a gain is negative."""

    clothing_surface_c: FloatLike
    convection_w_m2: FloatLike
    radiation_w_m2: FloatLike
    breath_convection_w_m2: FloatLike
    breath_evaporation_w_m2: FloatLike
    required_w_m2: FloatLike
    maximal_w_m2: FloatLike


def vapour_pressure_kpa(air_temperature_c: FloatLike, humidity_pct: FloatLike) -> FloatLike:
    """Partial pressure of water vapour in air.

    Parameters:
        air_temperature_c: dry-bulb temperature [C], scalar or array.
        humidity_pct: relative humidity, 0 to 100 [%], scalar or array.
    Returns:
        Vapour pressure [kPa], the common shape of the inputs.
    Raises:
        InputError: an input out of range.
    Valid:
        As air.saturation_vapour_pressure_kpa.
    Source:
        Definition of relative humidity; Magnus formula as in ISO 7933:2004 (published).
    """
    temperature = checked("air_temperature_c", air_temperature_c)
    humidity = checked("humidity_pct", humidity_pct)
    return like(_saturation_kpa(temperature) * humidity / 100.0, air_temperature_c, humidity_pct)


def humidity_in_warmer_air_pct(
    humidity_pct: FloatLike, air_temperature_c: FloatLike, warmed_to_c: FloatLike
) -> FloatLike:
    """Relative humidity after air was warmed or cooled without adding or losing water.

    Parameters:
        humidity_pct: relative humidity outside, 0 to 100 [%], scalar or array.
        air_temperature_c: temperature outside [C], scalar or array.
        warmed_to_c: temperature in the cockpit [C], scalar or array.
    Returns:
        Relative humidity in the cockpit [%], at most 100, the common shape of the inputs.
    Raises:
        InputError: an input out of range.
    Valid:
        A ventilated cockpit: the driver's own sweat and breath are left out.
    Source:
        Equal vapour pressure (computed from the definition).
    Example:
        >>> round(humidity_in_warmer_air_pct(50.0, 30.0, 45.0), 1)
        22.1
    """
    outside = checked("air_temperature_c", air_temperature_c)
    inside = checked("air_temperature_c", warmed_to_c, "warmed_to_c")
    humidity = checked("humidity_pct", humidity_pct)
    warmed = np.minimum(humidity * _saturation_kpa(outside) / _saturation_kpa(inside), 100.0)
    return like(warmed, humidity_pct, air_temperature_c, warmed_to_c)


def body_surface_area_m2(mass_kg: FloatLike, height_cm: FloatLike) -> FloatLike:
    """Body surface area after DuBois: 0.007184 kg^0.425 cm^0.725.

    Parameters:
        mass_kg: body mass [kg], scalar or array.
        height_cm: body height [cm], scalar or array.
    Returns:
        Surface area [m2], the common shape of the inputs.
    Raises:
        InputError: a mass or height out of range.
    Valid:
        Adults.
    Source:
        DuBois & DuBois 1916, Arch Intern Med 17:863 (published).
    Example:
        >>> round(body_surface_area_m2(79.0, 178.0), 2)
        1.97
    """
    mass = checked("mass_kg", mass_kg)
    height = checked("height_cm", height_cm)
    return like(0.007184 * mass**0.425 * height**0.725, mass_kg, height_cm)


def wet_bulb_c(
    air_temperature_c: FloatLike,
    humidity_pct: FloatLike,
    pressure_hpa: FloatLike = SEA_LEVEL_PRESSURE_HPA,
) -> FloatLike:
    """Psychrometric wet-bulb temperature, solved with the air pressure.

    The root of e = esat(tw) - A p (t - tw), A = 6.53e-4 (1 + 9.44e-4 tw) per K: at the same temperature and
    humidity the wet bulb reads lower in thin air.

    Parameters:
        air_temperature_c: dry-bulb temperature [C], scalar or array.
        humidity_pct: relative humidity, 0 to 100 [%], scalar or array.
        pressure_hpa: air pressure at the station [hPa], scalar or array.
    Returns:
        Wet-bulb temperature of a ventilated, wet bulb [C], the common shape of the inputs.
    Raises:
        InputError: an input out of range.
    Valid:
        Wet bulbs above freezing; below, it stands for supercooled water.
    Source:
        WMO-No. 8, psychrometric formula (from memory).
    Example:
        >>> round(wet_bulb_c(35.0, 30.0, 1013.25), 1)
        21.7
    """
    temperature = checked("air_temperature_c", air_temperature_c)
    humidity = checked("humidity_pct", humidity_pct)
    pressure_kpa = checked("pressure_hpa", pressure_hpa) / 10.0
    temperature, humidity, pressure_kpa = np.broadcast_arrays(temperature, humidity, pressure_kpa)
    vapour = _saturation_kpa(temperature) * humidity / 100.0
    low = np.full(temperature.shape, LOWEST_WET_BULB_C)
    high = temperature.astype(np.float64)
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        coefficient = PSYCHROMETER_COEFFICIENT_PER_K * (1.0 + PSYCHROMETER_TEMPERATURE_TERM * middle)
        too_wet = _saturation_kpa(middle) - coefficient * pressure_kpa * (temperature - middle) > vapour
        high = np.where(too_wet, middle, high)
        low = np.where(too_wet, low, middle)
    known = ~(np.isnan(vapour) | np.isnan(pressure_kpa))
    return like(np.where(known, 0.5 * (low + high), np.nan), air_temperature_c, humidity_pct, pressure_hpa)


def wbgt_c(
    wet_bulb_c: FloatLike, radiant_temperature_c: FloatLike, air_temperature_c: FloatLike = np.nan
) -> FloatLike:
    """Wet-bulb globe temperature.

    In the sun 0.7 tnw + 0.2 tg + 0.1 ta; without the sun, or where no air temperature is given,
    0.7 tnw + 0.3 tg.

    Parameters:
        wet_bulb_c: natural wet-bulb temperature [C], scalar or array.
        radiant_temperature_c: globe temperature [C], scalar or array.
        air_temperature_c: dry-bulb temperature in the sun [C], scalar or array; NaN = no sun.
    Returns:
        Wet-bulb globe temperature [C], the common shape of the inputs.
    Raises:
        InputError: an input out of range.
    Valid:
        The natural wet bulb is not ventilated and stands in the sun: it reads higher than a psychrometer.
    Source:
        ISO 7243:2017 (published).
    Example:
        >>> round(wbgt_c(25.0, 32.0, 20.0), 1)
        25.9
    """
    wet = checked("wet_bulb_c", wet_bulb_c)
    globe = checked("radiant_temperature_c", radiant_temperature_c)
    air = checked("air_temperature_c", air_temperature_c)
    shade = 0.7 * wet + 0.3 * globe
    sun = 0.7 * wet + 0.2 * globe + 0.1 * air
    return like(np.where(np.isnan(air), shade, sun), wet_bulb_c, radiant_temperature_c, air_temperature_c)


def heat_balance(
    air_temperature_c: FloatLike,
    radiant_temperature_c: FloatLike,
    humidity_pct: FloatLike,
    air_speed_m_s: FloatLike,
    metabolic_w_m2: FloatLike,
    insulation_clo: FloatLike,
    permeability: FloatLike,
    *,
    pressure_hpa: FloatLike = SEA_LEVEL_PRESSURE_HPA,
    altitude_exponent: FloatLike = ALTITUDE_EXPONENT,
    skin_temperature_c: FloatLike = HOT_SKIN_TEMPERATURE_C,
    work_w_m2: FloatLike = 0.0,
) -> HeatBalance:
    """Required and maximal evaporation of a seated, clothed person.

    Convection hc = hc0 (P/P0)^0.55 with hc0 = max(2.38 |tcl - ta|^0.25, 3.5 + 5.2 v, or 8.7 v^0.6 above
    1 m/s); radiation as at sea level; evaporation by the Lewis ratio 16.5 P0/P K/kPa; the clothing's own
    vapour resistance times (P/P0)^x. Clothing surface temperature by fixed point. Without clothing (0 clo)
    there is no clothing resistance, whatever im says.

    Parameters:
        air_temperature_c: dry-bulb temperature of the air around the person [C], scalar or array.
        radiant_temperature_c: mean radiant temperature [C], scalar or array.
        humidity_pct: relative humidity, 0 to 100 [%], scalar or array.
        air_speed_m_s: speed of the air past the body [m/s], scalar or array.
        metabolic_w_m2: metabolic rate [W/m2], scalar or array.
        insulation_clo: insulation of the whole ensemble [clo], scalar or array.
        permeability: vapour permeability index im of the ensemble [1], scalar or array.
        pressure_hpa: air pressure at the station [hPa], scalar or array.
        altitude_exponent: x, how clothing vapour resistance follows pressure, 0 to 1 [1], scalar or array.
        skin_temperature_c: mean skin temperature [C], scalar or array.
        work_w_m2: external work done [W/m2], scalar or array.
    Returns:
        HeatBalance in W/m2 and C, the common shape of the inputs.
    Raises:
        InputError: an input out of range.
    Valid:
        Structure of ISO 7933 up to 1.0 clo and 50 C; a racing suit (about 1.56 clo) is an extrapolation.
    Source:
        ISO 7933:2004, ISO 9920 (published structure); ASHRAE Fundamentals for pressure (from memory); x:
        judgement.
    Example:
        >>> balance = heat_balance(30.0, 35.0, 40.0, 0.5, 230.0, 1.0, 0.35)
        >>> round(balance.required_w_m2, 1), round(balance.maximal_w_m2, 1)
        (195.7, 107.0)
    """
    air = checked("air_temperature_c", air_temperature_c)
    radiant = checked("radiant_temperature_c", radiant_temperature_c)
    humidity = checked("humidity_pct", humidity_pct)
    speed = checked("air_speed_m_s", air_speed_m_s)
    metabolic = checked("metabolic_w_m2", metabolic_w_m2)
    clo = checked("insulation_clo", insulation_clo)
    permeable = checked("permeability", permeability)
    pressure_ratio = checked("pressure_hpa", pressure_hpa) / SEA_LEVEL_PRESSURE_HPA
    exponent = checked("altitude_exponent", altitude_exponent)
    skin = checked("skin_temperature_c", skin_temperature_c)
    work = checked("work_w_m2", work_w_m2)

    vapour = _saturation_kpa(air) * humidity / 100.0
    insulation = CLO_M2_K_W * clo
    area_factor = 1.0 + 0.28 * clo
    still_convection, radiative, surface = _clothing_surface(
        air, radiant, speed, skin, insulation, area_factor, pressure_ratio
    )
    convective = still_convection * pressure_ratio**CONVECTION_PRESSURE_EXPONENT
    convection = area_factor * convective * (surface - air)
    radiation = area_factor * radiative * (surface - radiant)

    # Vapour resistance: the garment's at sea level from im, scaled, and today's air layer.
    total_insulation = insulation + 1.0 / (area_factor * (still_convection + radiative))
    total_resistance = total_insulation / (LEWIS_RATIO_K_KPA * permeable)
    air_layer = 1.0 / (LEWIS_RATIO_K_KPA * still_convection * area_factor)
    clothing_resistance = np.where(clo > 0.0, np.maximum(total_resistance - air_layer, 0.0), 0.0)
    resistance = clothing_resistance * pressure_ratio**exponent + pressure_ratio / (
        LEWIS_RATIO_K_KPA * convective * area_factor
    )
    maximal = (_saturation_kpa(skin) - vapour) / resistance

    breath_convection = 0.001516 * metabolic * (28.56 + 0.115 * air + 0.641 * vapour - air)
    breath_evaporation = 0.00127 * metabolic * (59.34 + 0.53 * air - 11.63 * vapour)
    required = metabolic - work - breath_convection - breath_evaporation - convection - radiation

    given = (
        air_temperature_c,
        radiant_temperature_c,
        humidity_pct,
        air_speed_m_s,
        metabolic_w_m2,
        insulation_clo,
        permeability,
        pressure_hpa,
        altitude_exponent,
        skin_temperature_c,
        work_w_m2,
    )
    parts = np.broadcast_arrays(
        surface, convection, radiation, breath_convection, breath_evaporation, required, maximal
    )
    return HeatBalance(*(like(part, *given) for part in parts))


def _clothing_surface(
    air: FloatArray,
    radiant: FloatArray,
    speed: FloatArray,
    skin: FloatArray,
    insulation: FloatArray,
    area_factor: FloatArray,
    pressure_ratio: FloatArray,
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Sea-level convective and radiative coefficients [W/(m2 K)] and the clothing surface temperature [C].

    Each step solves the balance that is linear once the two coefficients are held at the last temperature;
    they depend on it so weakly that the error shrinks at least fivefold a step.
    """
    forced = np.where(speed > 1.0, 8.7 * speed**0.6, 3.5 + 5.2 * speed)
    thinning = pressure_ratio**CONVECTION_PRESSURE_EXPONENT
    radiation_factor = 4.0 * STEFAN_BOLTZMANN_W_M2_K4 * SKIN_EMISSIVITY * SEATED_RADIATING_FRACTION
    surface = 0.5 * (skin + air) + 0.0 * (radiant + speed + insulation + pressure_ratio)
    for _ in range(FIXED_POINT_STEPS):
        convective = np.maximum(2.38 * np.abs(surface - air) ** 0.25, forced)
        radiative = radiation_factor * (0.5 * (surface + radiant) + ZERO_CELSIUS_K) ** 3
        to_air = area_factor * convective * thinning
        to_walls = area_factor * radiative
        updated = (skin + insulation * (to_air * air + to_walls * radiant)) / (
            1.0 + insulation * (to_air + to_walls)
        )
        step = np.abs(updated - surface)
        surface = updated
        if not np.any(step > FIXED_POINT_TOLERANCE_C):
            break
    return convective, radiative, surface
