"""The normal distribution and mixtures of it, without a statistics library."""

from __future__ import annotations

from typing import Final

import numpy as np

from planner.checks import FloatArray

# Abramowitz & Stegun 1964, 26.2.17 (published): absolute error below 7.5e-8.
_P: Final = 0.2316419
_B: Final = (0.319381530, -0.356563782, 1.781477937, -1.821255978, 1.330274429)
_NEWTON_STEPS: Final = 12
_REACH_SD: Final = 8.0


def _density(x: FloatArray) -> FloatArray:
    return np.asarray(np.exp(-0.5 * x * x) / np.sqrt(2.0 * np.pi))


def _cumulative(x: FloatArray) -> FloatArray:
    t = 1.0 / (1.0 + _P * np.abs(x))
    series = t * (_B[0] + t * (_B[1] + t * (_B[2] + t * (_B[3] + t * _B[4]))))
    upper = _density(x) * series
    return np.asarray(np.where(x > 0.0, 1.0 - upper, upper))


def _mixture_quantile(probability: float, weight: FloatArray, mean: FloatArray, sd: FloatArray) -> FloatArray:
    """Quantile of mixtures of normals: weight (k, 1) or (k, n), mean and sd (k, n); result (n,).

    Newton's method kept inside a bracket that each step tightens, so it cannot run away.
    """
    low = (mean - _REACH_SD * sd).min(axis=0)
    high = (mean + _REACH_SD * sd).max(axis=0)
    centre = (weight * mean).sum(axis=0)
    spread = np.sqrt((weight * (sd * sd + (mean - centre) ** 2)).sum(axis=0))
    # Start at the quantile of the one normal with the mixture's mean and spread.
    at = centre + spread * _standard_quantile(probability)
    for _ in range(_NEWTON_STEPS):
        z = (at - mean) / sd
        miss = (weight * _cumulative(z)).sum(axis=0) - probability
        slope = (weight * _density(z) / sd).sum(axis=0)
        high = np.where(miss > 0.0, at, high)
        low = np.where(miss > 0.0, low, at)
        step = at - miss / np.maximum(slope, 1e-12)
        at = np.where((step >= low) & (step <= high), step, 0.5 * (low + high))
    return np.asarray(at)


def _standard_quantile(probability: float) -> float:
    """Quantile of the standard normal by halving the interval."""
    low, high = -_REACH_SD, _REACH_SD
    for _ in range(60):
        middle = 0.5 * (low + high)
        if float(_cumulative(np.asarray(middle))) < probability:
            low = middle
        else:
            high = middle
    return 0.5 * (low + high)
