"""The whole chain from elevation to arterial saturation by the published lines, for many at once."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

import numpy as np

from planner.checks import FloatArray, FloatLike, checked, like
from planner.constants import AIR_OXYGEN_FRACTION
from planner.physiology.air import _site_pressure_hpa
from planner.physiology.blood import STANDARD_BODY_TEMPERATURE_C, STANDARD_PH, _saturation_pct
from planner.physiology.oxygen import (
    RESTING_RESPIRATORY_QUOTIENT,
    _alveolar_po2_mmhg,
    _inspired_po2_mmhg,
    _paco2_mmhg,
)

# Vazquez & Perez-Padilla 2000 (published), at rest.
RESTING_ALVEOLAR_ARTERIAL_DIFFERENCE_MMHG: Final = 6.0

# Elements worked on at a time: few enough that the intermediate arrays stay in the processor's cache, enough
# that the calls themselves do not count (measured by tests/benchmarks/air_to_saturation.py).
BLOCK: Final = 8192


def elevation_to_saturation_pct(
    elevation_m: FloatLike,
    days: FloatLike = 0.0,
    latitude_deg: FloatLike = np.nan,
    ph: FloatLike = STANDARD_PH,
) -> FloatLike:
    """Arterial oxygen saturation of a resting lowlander from elevation alone, by the published lines.

    site_pressure, inspired_po2_mmhg, paco2_mmhg, alveolar_po2_mmhg, less 6 mmHg between alveoli and artery,
    then saturation_pct.

    Parameters:
        elevation_m: geometric elevation [m], scalar or array.
        days: time spent there, coming straight from sea level [d], scalar or array.
        latitude_deg: geographic latitude [deg], scalar or array; NaN = standard atmosphere.
        ph: acidity of the blood [1], scalar or array.
    Returns:
        Saturation [%], the common shape of the inputs.
    Raises:
        InputError: an input out of range.
    Valid:
        0 to 3000 m as a first look. Against measurements on arrival it reads 1 to 2 points low at 2438 m and
        7 points low at 4300 m: planner.physiology.expectation is fitted to them, this is not.
    Source:
        The chain of the functions named above (published, each in its place).
    Example:
        >>> round(elevation_to_saturation_pct(0.0), 1)
        97.8
    """
    elevation = checked("elevation_m", elevation_m)
    time = checked("days", days)
    latitude = checked("latitude_deg", latitude_deg)
    acidity = checked("ph", ph)
    saturation = _in_blocks(_elevation_to_saturation_pct, elevation, time, latitude, acidity)
    return like(saturation, elevation_m, days, latitude_deg, ph)


def _elevation_to_saturation_pct(
    elevation: FloatArray, days: FloatArray, latitude: FloatArray, acidity: FloatArray
) -> FloatArray:
    fraction = np.asarray(AIR_OXYGEN_FRACTION)
    inspired = _inspired_po2_mmhg(_site_pressure_hpa(elevation, latitude), fraction)
    paco2 = _paco2_mmhg(elevation, days)
    alveolar = _alveolar_po2_mmhg(inspired, paco2, fraction, np.asarray(RESTING_RESPIRATORY_QUOTIENT))
    arterial = np.maximum(alveolar - RESTING_ALVEOLAR_ARTERIAL_DIFFERENCE_MMHG, 0.0)
    return _saturation_pct(arterial, acidity, np.asarray(STANDARD_BODY_TEMPERATURE_C))


def _in_blocks(kernel: Callable[..., FloatArray], *arrays: FloatArray) -> FloatArray:
    """Apply an elementwise kernel block by block; scalars stay scalars and are broadcast inside it."""
    shape = np.broadcast_shapes(*(array.shape for array in arrays))
    if int(np.prod(shape)) <= BLOCK:
        return kernel(*arrays)
    flat = [a if a.ndim == 0 else np.broadcast_to(a, shape).reshape(-1) for a in arrays]
    result = np.empty(shape)
    out = result.reshape(-1)
    for start in range(0, out.size, BLOCK):
        part = slice(start, start + BLOCK)
        out[part] = kernel(*(a if a.ndim == 0 else a[part] for a in flat))
    return result
