"""Oxygen from the air to the alveoli, and the carbon dioxide that takes its place."""

from __future__ import annotations

from typing import Final

import numpy as np

from planner.checks import QUANTITIES, FloatArray, FloatLike, checked, like
from planner.constants import AIR_OXYGEN_FRACTION, BODY_WATER_VAPOUR_MMHG, HPA_PER_MMHG
from planner.errors import InputError
from planner.physiology.air import _site_pressure_hpa

# Vazquez & Perez-Padilla 2000 (published): PaCO2 = intercept - slope A, A in km.
ACUTE_PACO2_INTERCEPT_MMHG: Final = 37.78
ACUTE_PACO2_SLOPE_MMHG_PER_KM: Final = 0.908
ACCLIMATISED_PACO2_INTERCEPT_MMHG: Final = 38.3
ACCLIMATISED_PACO2_SLOPE_MMHG_PER_KM: Final = 2.5
# Time constant of an exponential through the by-day PaCO2 of lowlanders at 3600 m (Wachsmuth 2013,
# Br J Sports Med 47:i93, published rows; the fit is computed).
PACO2_TIME_CONSTANT_D: Final = 5.9

RESTING_RESPIRATORY_QUOTIENT: Final = 0.85  # mixed diet (published range 0.8 to 0.85)

# Halvings of -430 to 9000 m that reach the resolution of a double.
BISECTIONS: Final = 54
# By so much a pressure may miss the end of that range after its way through inspired oxygen and back.
ROUNDING: Final = 1e-12


def inspired_po2_mmhg(pressure_hpa: FloatLike, oxygen_fraction: FloatLike = AIR_OXYGEN_FRACTION) -> FloatLike:
    """Oxygen tension of inspired gas once the windpipe has warmed and moistened it.

    PIO2 = FIO2 (PB - 47 mmHg). Leaving out the 47 mmHg of water vapour is the classic error.

    Parameters:
        pressure_hpa: air pressure where the person breathes [hPa], scalar or array.
        oxygen_fraction: oxygen fraction of the dry gas [1], scalar or array; a tent has less than plain air.
    Returns:
        Inspired oxygen tension [mmHg], the common shape of the inputs.
    Raises:
        InputError: a pressure outside 300 to 1100 hPa or a fraction outside 0.05 to 1.
    Valid:
        Body temperature near 37 C. Equal PIO2 in thin air and in a tent is not quite the same exposure.
    Source:
        Conkin 2011, Aviat Space Environ Med 82:1157, and every textbook (published).
    Example:
        >>> round(inspired_po2_mmhg(1013.25, 0.21))
        150
    """
    pressure = checked("pressure_hpa", pressure_hpa)
    fraction = checked("oxygen_fraction", oxygen_fraction)
    return like(_inspired_po2_mmhg(pressure, fraction), pressure_hpa, oxygen_fraction)


def alveolar_po2_mmhg(
    inspired_po2_mmhg: FloatLike,
    paco2_mmhg: FloatLike,
    oxygen_fraction: FloatLike = AIR_OXYGEN_FRACTION,
    respiratory_quotient: FloatLike = RESTING_RESPIRATORY_QUOTIENT,
) -> FloatLike:
    """Alveolar oxygen tension by the full alveolar gas equation.

    PAO2 = PIO2 - PaCO2 (FIO2 + (1 - FIO2) / R).

    Parameters:
        inspired_po2_mmhg: oxygen tension of moist inspired gas [mmHg], scalar or array.
        paco2_mmhg: carbon dioxide tension of arterial blood [mmHg], scalar or array.
        oxygen_fraction: oxygen fraction of the dry gas breathed [1], scalar or array.
        respiratory_quotient: carbon dioxide given off over oxygen taken up [1], scalar or array.
    Returns:
        Alveolar oxygen tension [mmHg], the common shape of the inputs, never below 0.
    Raises:
        InputError: an input out of range.
    Valid:
        Steady state. R is 0.8 to 0.85 at rest on a mixed diet; it is 1.0 in a hard effort.
    Source:
        Fenn, Rahn & Otis 1946, Am J Physiol 146:637 (from memory); the equation: published.
    Example:
        >>> round(alveolar_po2_mmhg(0.21 * 713, 40.0, 0.21, 0.8), 1)
        101.8
    """
    inspired = checked("inspired_po2_mmhg", inspired_po2_mmhg)
    paco2 = checked("paco2_mmhg", paco2_mmhg)
    fraction = checked("oxygen_fraction", oxygen_fraction)
    quotient = checked("respiratory_quotient", respiratory_quotient)
    alveolar = _alveolar_po2_mmhg(inspired, paco2, fraction, quotient)
    return like(alveolar, inspired_po2_mmhg, paco2_mmhg, oxygen_fraction, respiratory_quotient)


def equivalent_elevation_m(inspired_po2_mmhg: FloatLike, latitude_deg: FloatLike = np.nan) -> FloatLike:
    """Elevation at which plain air would give an inspired oxygen tension: what a tent or a cabin stands for.

    Parameters:
        inspired_po2_mmhg: oxygen tension of moist inspired gas [mmHg], scalar or array.
        latitude_deg: latitude of the model atmosphere meant [deg], scalar or array; NaN = the standard one.
    Returns:
        Elevation [m], the common shape of the inputs; site_pressure and inspired_po2_mmhg lead back exactly.
    Raises:
        InputError: a tension that plain air has nowhere between -430 and 9000 m, or a latitude out of range.
    Valid:
        -430 to 9000 m. Normobaric and hypobaric exposure at equal PIO2 are not quite the same.
    Source:
        Equal inspired oxygen tension (published: Conkin 2011, Aviat Space Environ Med 82:1157).
    Example:
        >>> tent = inspired_po2_mmhg(1013.25, 0.16)
        >>> round(equivalent_elevation_m(tent, 19.0), -1)
        2180.0
    """
    inspired = checked("inspired_po2_mmhg", inspired_po2_mmhg)
    latitude = checked("latitude_deg", latitude_deg)
    inspired, latitude = np.broadcast_arrays(inspired, latitude)
    pressure = _plain_air_pressure_hpa(inspired)
    lowest, highest = QUANTITIES["elevation_m"].low, QUANTITIES["elevation_m"].high
    low = np.full(inspired.shape, lowest)
    high = np.full(inspired.shape, highest)
    thickest, thinnest = _site_pressure_hpa(low, latitude), _site_pressure_hpa(high, latitude)
    outside = (pressure > thickest * (1.0 + ROUNDING)) | (pressure < thinnest * (1.0 - ROUNDING))
    if outside.any():
        raise InputError(
            "inspired_po2_mmhg",
            float(inspired[outside].flat[0]),
            f"a tension in mmHg that plain air has between {lowest:g} and {highest:g} m",
        )
    # Pressure falls strictly with elevation, so halving the interval always finds the one root; the blend of
    # the two atmospheres has no closed inverse.
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        too_low = _site_pressure_hpa(middle, latitude) > pressure
        low = np.where(too_low, middle, low)
        high = np.where(too_low, high, middle)
    elevation = np.where(np.isnan(pressure), np.nan, 0.5 * (low + high))
    return like(elevation, inspired_po2_mmhg, latitude_deg)


def paco2_mmhg(elevation_m: FloatLike, days: FloatLike) -> FloatLike:
    """Arterial carbon dioxide tension of a resting lowlander after some days at an elevation.

    From the acute line 37.78 - 0.908 A to the acclimatised line 38.3 - 2.5 A (A in km) by
    1 - exp(-days / 5.9).

    Parameters:
        elevation_m: geometric elevation [m], scalar or array.
        days: time spent there, coming straight from sea level [d], scalar or array.
    Returns:
        PaCO2 [mmHg], the common shape of the inputs.
    Raises:
        InputError: an elevation or a time out of range.
    Valid:
        0 to 5000 m. Below 327 m the published lines cross (by at most 0.5 mmHg at sea level, within their
        scatter). People differ by 2.3 to 2.7 mmHg (standard deviation). Lines for a check and for rough work:
        what the screens and commands show is the fitted planner.physiology.ventilation, whose PaCO2 follows
        the by-day measurements and lies up to 4 mmHg higher on arrival.
    Source:
        Vazquez & Perez-Padilla 2000 (published lines); time constant computed from the by-day rows of
        Wachsmuth 2013, Br J Sports Med 47:i93.
    Example:
        >>> round(paco2_mmhg(2240.0, 0.0), 2)
        35.75
    """
    elevation = checked("elevation_m", elevation_m)
    time = checked("days", days)
    return like(_paco2_mmhg(elevation, time), elevation_m, days)


def _inspired_po2_mmhg(pressure: FloatArray, fraction: FloatArray) -> FloatArray:
    return fraction * (pressure / HPA_PER_MMHG - BODY_WATER_VAPOUR_MMHG)


def _plain_air_pressure_hpa(inspired: FloatArray) -> FloatArray:
    """Pressure at which plain air gives an inspired tension: the inverse of _inspired_po2_mmhg."""
    return HPA_PER_MMHG * (inspired / AIR_OXYGEN_FRACTION + BODY_WATER_VAPOUR_MMHG)


def _alveolar_po2_mmhg(
    inspired: FloatArray, paco2: FloatArray, fraction: FloatArray, quotient: FloatArray
) -> FloatArray:
    return np.maximum(inspired - paco2 * (fraction + (1.0 - fraction) / quotient), 0.0)


def _paco2_mmhg(elevation: FloatArray, days: FloatArray) -> FloatArray:
    # The two lines are joined coefficient by coefficient: one time for many elevations then costs one line.
    acute = np.exp(-days / PACO2_TIME_CONSTANT_D)
    intercept = ACCLIMATISED_PACO2_INTERCEPT_MMHG + acute * (
        ACUTE_PACO2_INTERCEPT_MMHG - ACCLIMATISED_PACO2_INTERCEPT_MMHG
    )
    slope_per_km = ACCLIMATISED_PACO2_SLOPE_MMHG_PER_KM + acute * (
        ACUTE_PACO2_SLOPE_MMHG_PER_KM - ACCLIMATISED_PACO2_SLOPE_MMHG_PER_KM
    )
    return np.asarray(intercept - (slope_per_km / 1000.0) * elevation)
