"""What altitude does to the blood: plasma volume, haemoglobin mass, and the dose in kilometre hours.

Each is a state that follows the exposure history with its own time constants, in closed form over every
constant stretch, as breathing does. Tents and cabins count by the elevation at which the standard
atmosphere has their inspired oxygen.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from planner.checks import FloatArray, FloatLike, like, numbers
from planner.constants import HOURS_PER_DAY
from planner.errors import InputError
from planner.physiology.acclimatisation import ExposureHistory, _first_order_at
from planner.physiology.air import _standard_elevation_m
from planner.physiology.oxygen import _plain_air_pressure_hpa

# Plasma volume: about -6 % after a day at 2500 m and -1 % for each 500 m more (Beidleman 2017, n=393,
# published), still falling to day 7; a time constant of one day and nothing below 1000 m are judgement.
PLASMA_DAY_ONE_PCT: Final = 6.0
PLASMA_DAY_ONE_AT_M: Final = 2500.0
PLASMA_PCT_PER_M: Final = 1.0 / 500.0
PLASMA_FROM_M: Final = 1000.0
PLASMA_TIME_D: Final = 1.0
# 74 % of the change was left after eight days at sea level (Beidleman 1997, Med Sci Sports Exerc 29:1588,
# published): 8 / -ln(0.74), computed.
PLASMA_RETURN_TIME_D: Final = 26.6

# Haemoglobin mass: +1.1 % per 100 h (Gore 2013, Br J Sports Med 47:i31, published), at 2750 m (judgement)
# is 0.004 % per km h; that it fades with a time constant of 30 days is judgement.
HAEMOGLOBIN_PCT_PER_KM_H: Final = 0.004
HAEMOGLOBIN_TIME_D: Final = 30.0
# One person's measured change varies by 2 % (Gore 2013, published); some people gain nothing.
HAEMOGLOBIN_SD_PCT: Final = 2.0

METRES_PER_KM: Final = 1000.0


def plasma_volume_change_pct(history: ExposureHistory, at_h: FloatLike) -> FloatLike:
    """Change of plasma volume against a life at sea level, a loss negative.

    Parameters:
        history: what was breathed [object].
        at_h: instants in the history's hours [h], scalar or array.
    Returns:
        Change [%], the shape of at_h.
    Raises:
        InputError: instants that are no numbers.
    Valid:
        0 to 4500 m; drinking more does not undo it.
    Source:
        Beidleman 2017 and 1997 (published) for the size after a day and for the return; time constant of the
        fall and its beginning at 1000 m: judgement.
    """
    at = numbers("at_h", at_h, "h")
    elevation = _equivalent_m(history.inspired_po2_mmhg)
    ramp = np.clip((elevation - PLASMA_FROM_M) / (PLASMA_DAY_ONE_AT_M - PLASMA_FROM_M), 0.0, 1.0)
    day_one = PLASMA_DAY_ONE_PCT * ramp + PLASMA_PCT_PER_M * np.maximum(elevation - PLASMA_DAY_ONE_AT_M, 0.0)
    loss = day_one / -np.expm1(-1.0 / PLASMA_TIME_D)
    return like(0.0 - _first_order_at(history, loss, at, PLASMA_TIME_D, PLASMA_RETURN_TIME_D), at_h)


def haemoglobin_mass_change_pct(history: ExposureHistory, at_h: FloatLike) -> FloatLike:
    """Gain of haemoglobin mass against that of a life at sea level; HAEMOGLOBIN_SD_PCT tells its scatter.

    Parameters:
        history: what was breathed [object].
        at_h: instants in the history's hours [h], scalar or array.
    Returns:
        Mean gain [%], the shape of at_h.
    Raises:
        InputError: instants that are no numbers.
    Valid:
        1500 to 4500 m, with iron in order. Studies disagree: below 3000 m some found no gain in four weeks
        (Rasmussen 2013, published).
    Source:
        +1.1 % per 100 h (Gore 2013, published) turned into a dose; time constant: judgement.
    """
    at = numbers("at_h", at_h, "h")
    kilometres = _equivalent_m(history.inspired_po2_mmhg) / METRES_PER_KM
    lasting = HAEMOGLOBIN_PCT_PER_KM_H * HOURS_PER_DAY * HAEMOGLOBIN_TIME_D * kilometres
    return like(_first_order_at(history, lasting, at, HAEMOGLOBIN_TIME_D, HAEMOGLOBIN_TIME_D), at_h)


def altitude_dose_km_h(history: ExposureHistory, from_h: float, to_h: float) -> float:
    """Dose of altitude between two instants: kilometres times hours.

    Parameters:
        history: what was breathed [object].
        from_h: first instant in the history's hours [h].
        to_h: last instant [h].
    Returns:
        Dose [km h].
    Raises:
        InputError: instants out of order.
    Valid:
        Any history; elevations below sea level count as zero.
    Source:
        Garvican-Lewis 2016, J Appl Physiol 121:352 (published): (m / 1000) x hours.
    Example:
        >>> stay = ExposureHistory(np.array([0.0]), np.array([111.34]))
        >>> round(altitude_dose_km_h(stay, 0.0, 24.0 * 14.0))
        753
    """
    if not from_h <= to_h:
        raise InputError("to_h", to_h, f"an instant not before {from_h:g} h")
    starts = np.maximum(history.start_h, from_h)
    starts[0] = from_h
    ends = np.append(history.start_h[1:], np.inf)
    hours = np.maximum(np.minimum(ends, to_h) - starts, 0.0)
    return float((_equivalent_m(history.inspired_po2_mmhg) / METRES_PER_KM) @ hours)


def _equivalent_m(inspired_mmhg: FloatArray) -> FloatArray:
    """Elevation at which the standard atmosphere has this inspired oxygen, zero below sea level."""
    return np.maximum(_standard_elevation_m(_plain_air_pressure_hpa(inspired_mmhg)), 0.0)
