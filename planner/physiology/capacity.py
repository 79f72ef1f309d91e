"""Aerobic capacity at an elevation, in per cent of the person's own at sea level."""

from __future__ import annotations

from typing import Final

import numpy as np

from planner.checks import FloatArray, FloatLike, checked, like
from planner.constants import DEVIATIONS_95

# Loss on arrival, LINEAR x + QUADRATIC x^2 per cent, x in km: least squares (computed) through the line of
# Wehrlin & Hallen over its 0.3-2.8 km and the unacclimatised curve of Bassett over 0-4.5 km, one point per
# 100 m. A polynomial of second degree keeps falling beyond the data, which Bassett's cubic does not.
LOSS_PCT_PER_KM: Final = 4.6
LOSS_PCT_PER_KM2: Final = 0.59

# Gain of full acclimatisation: Bassett's acclimatised less his unacclimatised curve, never below zero (from
# memory), times 1.2: the mean (computed) of 1.0 by Bassett himself, 1.36 by Schuler's rows, 1.22 by Sucec's.
GAIN_COEFFICIENTS: Final = (-0.178, 0.31, 2.17, -0.1)
GAIN_SCALE: Final = 1.2

# Least squares (computed) through Schuler's gains of 3.2, 4.8 and 5.5 points after 6, 13 and 20 days.
GAIN_TIME_CONSTANT_D: Final = 7.8

# Spread between people of the loss on arrival, as a share of it (judgement, from individual falls of 4.6 to
# 7.5 % per 1000 m among eight athletes, from memory).
LOSS_SD_SHARE: Final = 0.2


def aerobic_capacity_pct(elevation_m: FloatLike, days: FloatLike = 0.0) -> FloatLike:
    """Maximal oxygen uptake of a trained lowlander at an elevation, in per cent of that at sea level.

    100 - 4.6 x - 0.59 x^2 on arrival (x in km); acclimatisation gives back
    1.2 (-0.178 x^3 + 0.31 x^2 + 2.17 x - 0.1) with a time constant of 7.8 days, and nothing above 4.4 km.

    Parameters:
        elevation_m: geometric elevation [m], scalar or array. For a measured pressure pass its
            standard_elevation_m.
        days: time spent there, coming straight from sea level [d], scalar or array.
    Returns:
        Aerobic capacity [%], the common shape of the inputs; 100 at and below sea level.
    Raises:
        InputError: an elevation or a time out of range.
    Valid:
        0 to 4500 m, people who train; above that an extrapolation. A driver works below the maximum, so this
        is no measure of lap time. People differ: show aerobic_capacity_range_pct beside it.
    Source:
        Wehrlin & Hallen 2006, Eur J Appl Physiol 96:404 and Bassett 1999, Med Sci Sports Exerc 31:1665 (from
        memory); Schuler 2007 and Sucec 1996 (published rows); reconciled by least squares (computed).
    Example:
        >>> round(aerobic_capacity_pct(2240.0))
        87
    """
    elevation = checked("elevation_m", elevation_m)
    time = checked("days", days)
    return like(_aerobic_capacity_pct(elevation, time), elevation_m, days)


def aerobic_capacity_range_pct(elevation_m: FloatLike, days: FloatLike = 0.0) -> tuple[FloatLike, FloatLike]:
    """Range of aerobic capacity that holds 95 % of people at an elevation.

    The loss on arrival differs between people with a standard deviation of a fifth of itself.

    Parameters:
        elevation_m: geometric elevation [m], scalar or array.
        days: time spent there, coming straight from sea level [d], scalar or array.
    Returns:
        Low and high end [%], each in the common shape of the inputs.
    Raises:
        InputError: an elevation or a time out of range.
    Valid:
        As aerobic_capacity_pct.
    Source:
        Judgement, from the individual falls in Wehrlin & Hallen 2006, Eur J Appl Physiol 96:404, from memory.
    Example:
        >>> low, high = aerobic_capacity_range_pct(2240.0)
        >>> round(low), round(high)
        (82, 92)
    """
    elevation = checked("elevation_m", elevation_m)
    time = checked("days", days)
    middle = _aerobic_capacity_pct(elevation, time)
    half = DEVIATIONS_95 * LOSS_SD_SHARE * _loss_on_arrival_pct(elevation)
    low, high = np.maximum(middle - half, 0.0), np.minimum(middle + half, 100.0)
    return like(low, elevation_m, days), like(high, elevation_m, days)


def _loss_on_arrival_pct(elevation: FloatArray) -> FloatArray:
    km = np.maximum(elevation, 0.0) / 1000.0
    return km * (LOSS_PCT_PER_KM + LOSS_PCT_PER_KM2 * km)


def _gain_pct(elevation: FloatArray) -> FloatArray:
    km = np.maximum(elevation, 0.0) / 1000.0
    return np.asarray(GAIN_SCALE * np.maximum(np.polyval(GAIN_COEFFICIENTS, km), 0.0))


def _aerobic_capacity_pct(elevation: FloatArray, days: FloatArray) -> FloatArray:
    adapted = 1.0 - np.exp(-days / GAIN_TIME_CONSTANT_D)
    return 100.0 - _loss_on_arrival_pct(elevation) + _gain_pct(elevation) * adapted
