"""Haemoglobin's oxygen dissociation curve with Bohr and temperature shifts, and its exact inverse."""

from __future__ import annotations

from typing import Final

import numpy as np

from planner.checks import FloatArray, FloatLike, checked, like
from planner.errors import InputError

STANDARD_PH: Final = 7.4
STANDARD_BODY_TEMPERATURE_C: Final = 37.0
# Severinghaus 1979 (published): S = 1 / (SCALE / (P^3 + LINEAR P) + 1).
SCALE: Final = 23400.0
LINEAR: Final = 150.0
# The inverse is the real root of P^3 + 150 P = 2 A, which is 2 sqrt(50) sinh(asinh(A / 50^1.5) / 3).
ROOT: Final = float(np.sqrt(LINEAR / 3.0))

# Steps of Newton's method for the shifts; it starts within a factor of 3 and gains digits quadratically.
NEWTON_STEPS: Final = 8


def saturation_pct(
    po2_mmhg: FloatLike,
    ph: FloatLike = STANDARD_PH,
    body_temperature_c: FloatLike = STANDARD_BODY_TEMPERATURE_C,
) -> FloatLike:
    """Oxygen saturation of haemoglobin at an oxygen tension.

    S = 1 / (23400 / (P^3 + 150 P) + 1) at pH 7.4 and 37 C; other conditions by carrying P there with
    dlnP/dpH = (P / 26.6)^0.184 - 2.2 and dlnP/dT = 0.058 / ((0.243 P / 100)^3.88 + 1) + 0.013.

    Parameters:
        po2_mmhg: oxygen tension of the blood [mmHg], scalar or array.
        ph: acidity of the blood [1], scalar or array.
        body_temperature_c: temperature of the blood [C], scalar or array.
    Returns:
        Saturation [%], the common shape of the inputs.
    Raises:
        InputError: an input out of range.
    Valid:
        Normal adult haemoglobin without carbon monoxide; stated to +-0.55 points at pH 7.4 and 37 C. The
        temperature term is that of a closed sample, whose pH falls as it warms: ph is the value at 37 C.
    Source:
        Severinghaus 1979, J Appl Physiol 46:599 (published).
    Example:
        >>> round(saturation_pct(60.0), 2)
        90.58
    """
    tension = checked("arterial_po2_mmhg", po2_mmhg, "po2_mmhg")
    acidity = checked("ph", ph)
    temperature = checked("body_temperature_c", body_temperature_c)
    return like(_saturation_pct(tension, acidity, temperature), po2_mmhg, ph, body_temperature_c)


def po2_mmhg(
    saturation_pct: FloatLike,
    ph: FloatLike = STANDARD_PH,
    body_temperature_c: FloatLike = STANDARD_BODY_TEMPERATURE_C,
) -> FloatLike:
    """Oxygen tension at which haemoglobin has a saturation: the exact inverse of saturation_pct.

    Parameters:
        saturation_pct: oxygen saturation, below 100 [%], scalar or array.
        ph: acidity of the blood [1], scalar or array.
        body_temperature_c: temperature of the blood [C], scalar or array.
    Returns:
        Oxygen tension [mmHg], the common shape of the inputs.
    Raises:
        InputError: an input out of range; a saturation of 100, which the curve reaches at no tension.
    Valid:
        As saturation_pct. Above 97 % a point of saturation is worth tens of mmHg: read it with care.
    Source:
        Ellis 1989, J Appl Physiol 67:902 (from memory), here in hyperbolic form, which loses no digits at
        either end; the shifts of Severinghaus 1979 solved by Newton's method.
    Example:
        >>> round(po2_mmhg(50.0), 2)
        26.86
    """
    saturation = checked("saturation_pct", saturation_pct)
    if (saturation >= 100.0).any():
        raise InputError("saturation_pct", 100.0, "below 100 %, which the dissociation curve never reaches")
    acidity = checked("ph", ph)
    temperature = checked("body_temperature_c", body_temperature_c)
    standard = _standard_po2_mmhg(saturation)
    return like(_unshifted(standard, acidity, temperature), saturation_pct, ph, body_temperature_c)


def _saturation_pct(tension: FloatArray, acidity: FloatArray, temperature: FloatArray) -> FloatArray:
    return _standard_saturation_pct(_at_standard(tension, acidity, temperature))


def _at_standard(tension: FloatArray, acidity: FloatArray, temperature: FloatArray) -> FloatArray:
    """The tension of equal saturation at pH 7.4 and 37 C."""
    return np.asarray(tension * np.exp(-_log_shift(tension, acidity, temperature)))


def _standard_saturation_pct(tension: FloatArray) -> FloatArray:
    content = tension * (tension * tension + LINEAR)
    return 100.0 * content / (content + SCALE)


def _standard_slope_pct_per_mmhg(tension: FloatArray) -> FloatArray:
    """Derivative of _standard_saturation_pct by the tension."""
    square = tension * tension
    content = tension * (square + LINEAR)
    return 100.0 * SCALE * (3.0 * square + LINEAR) / (content + SCALE) ** 2


def _standard_po2_mmhg(saturation: FloatArray) -> FloatArray:
    half = 0.5 * SCALE * saturation / (100.0 - saturation)
    return np.asarray(2.0 * ROOT * np.sinh(np.arcsinh(half / ROOT**3) / 3.0))


def _log_shift(tension: FloatArray, acidity: FloatArray, temperature: FloatArray) -> FloatArray:
    """ln of the tension here over the tension of equal saturation at pH 7.4 and 37 C."""
    off_ph, off_temperature = acidity - STANDARD_PH, temperature - STANDARD_BODY_TEMPERATURE_C
    # Each power costs as much as the rest of the curve: not taken where all blood is at the standard.
    by_ph = ((tension / 26.6) ** 0.184 - 2.2) * off_ph if off_ph.any() else off_ph
    if not off_temperature.any():
        return by_ph + off_temperature
    return by_ph + (0.058 / ((0.00243 * tension) ** 3.88 + 1.0) + 0.013) * off_temperature


def _log_shift_slope(tension: FloatArray, acidity: FloatArray, temperature: FloatArray) -> FloatArray:
    """Derivative of _log_shift by ln(tension)."""
    power = (0.00243 * tension) ** 3.88
    by_ph = 0.184 * (tension / 26.6) ** 0.184
    by_temperature = -0.058 * 3.88 * power / (power + 1.0) ** 2
    return by_ph * (acidity - STANDARD_PH) + by_temperature * (temperature - STANDARD_BODY_TEMPERATURE_C)


def _unshifted(standard: FloatArray, acidity: FloatArray, temperature: FloatArray) -> FloatArray:
    """The tension that carries over to the given standard tension."""
    # log(tension) - shift(tension) = log(standard); its slope stays above 0.4 for every accepted pH and
    # temperature, so Newton's steps in log(tension) converge from the standard tension itself.
    ratio = np.zeros(np.broadcast_shapes(standard.shape, acidity.shape, temperature.shape))
    for _ in range(NEWTON_STEPS):
        tension = standard * np.exp(ratio)
        miss = ratio - _log_shift(tension, acidity, temperature)
        ratio = ratio - miss / (1.0 - _log_shift_slope(tension, acidity, temperature))
    return np.asarray(standard * np.exp(ratio))
