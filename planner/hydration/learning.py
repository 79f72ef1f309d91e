"""A driver's own sweat: the ratio of what was weighed to what was predicted, learned with shrinkage.

The ratio carries from one session to another, so that a cool test still informs a hot race. With few
weighings it stays near the population's 1, with many it is the driver's own. Everything is vectorised: the
last axis is the weighings, the ones before it drivers and sessions.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from planner.checks import FloatArray
from planner.physiology.ranges import Range
from planner.physiology.sweat import RANGE_SD, SweatPrediction, nine_of_ten

# Judgement: from one session to the next the same driver differs from his own ratio by so much.
SESSION_SCATTER: Final = 0.07
# How a driver's weighings scatter is mixed with the stated errors, which count as so many (judgement).
STATED_ERRORS_COUNT: Final = 4.0
# A stated range is never narrower than this share either way, however many weighings (judgement).
NARROWEST: Final = 0.06
# The spread of ratios between drivers is the prediction's own uncertainty; it is kept within what people
# differ by (judgement).
LEAST_PRIOR_LOG_SD: Final = 0.2
MOST_PRIOR_LOG_SD: Final = 0.45
# Conditions are alike when the predicted rates differ by less than this share; with so many weighings in
# like conditions only those are used: the driver's own measured rate comes first (judgement).
LIKE_WITHIN: Final = 0.10
LIKE_ENOUGH: Final = 3

NEWTON_STEPS: Final = 30
NEWTON_TOLERANCE: Final = 1e-9
LONGEST_STEP: Final = 0.5


@dataclass(frozen=True)
class Evidence:
    """Weighings with what was predicted for them [L/h]; the last axis is the weighings, NaN where none is."""

    measured_l_per_h: FloatArray
    error_l_per_h: FloatArray
    predicted_l_per_h: FloatArray


@dataclass(frozen=True)
class Learned:
    """What the weighings taught for each driver and session.

    `own_share` says how much of the range is the driver's own, 0 none of it, 1 all.
    """

    ratio: FloatArray
    log_sd: FloatArray
    prior_log_sd: FloatArray
    weighings: FloatArray
    like_conditions: FloatArray

    @property
    def own_share(self) -> FloatArray:
        """Share of the population's variance that the weighings have removed, 0 to 1."""
        return np.maximum(1.0 - (self.log_sd / self.prior_log_sd) ** 2, 0.0)


def prior_log_sd(prediction: SweatPrediction) -> FloatArray:
    """How much the ratio differs between people, before anybody was weighed."""
    best = np.asarray(prediction.sweat_rate_l_per_h.best, dtype=np.float64)
    person = np.asarray(prediction.person_sd_l_per_h, dtype=np.float64)
    relative = np.divide(person, best, out=np.full(best.shape, np.inf), where=best > 0.0)
    kept: FloatArray = np.clip(relative, LEAST_PRIOR_LOG_SD, MOST_PRIOR_LOG_SD)
    return kept


def learn_ratio(evidence: Evidence, expected_l_per_h: FloatArray, prior_sd: FloatArray) -> Learned:
    """The driver's ratio for each session from weighings.

    A log-normal prior around 1; each weighing adds its error and the scatter from session to session. The
    most probable ratio is found by Newton steps, its standard deviation from the curvature there and from how
    much the weighings scatter about it.
    Parameters: `expected_l_per_h` [L/h] and `prior_sd` have the shape of the evidence without its last axis,
    or broadcast against it.
    """
    known = (
        np.isfinite(evidence.measured_l_per_h)
        & np.isfinite(evidence.error_l_per_h)
        & (evidence.predicted_l_per_h > 0.0)
    )
    measured = np.where(known, evidence.measured_l_per_h, 0.0)
    error = np.where(known, evidence.error_l_per_h, 1.0)
    predicted = np.where(known, evidence.predicted_l_per_h, 0.0)

    expected = np.asarray(expected_l_per_h, dtype=np.float64)
    like = known & (np.abs(predicted - expected[..., np.newaxis]) <= LIKE_WITHIN * expected[..., np.newaxis])
    enough = like.sum(axis=-1) >= LIKE_ENOUGH
    used = np.where(enough[..., np.newaxis], like, known)

    prior_precision = 1.0 / np.asarray(prior_sd, dtype=np.float64) ** 2
    log_ratio = np.zeros(np.broadcast_shapes(prior_precision.shape, used.shape[:-1]))
    for _ in range(NEWTON_STEPS):
        slope = predicted * np.exp(log_ratio)[..., np.newaxis]
        weight = used / (error**2 + (SESSION_SCATTER * slope) ** 2)
        curvature = (weight * slope**2).sum(axis=-1) + prior_precision
        pull = (weight * slope * (measured - slope)).sum(axis=-1) - prior_precision * log_ratio
        step = np.clip(pull / curvature, -LONGEST_STEP, LONGEST_STEP)
        log_ratio = log_ratio + step
        if not np.any(np.abs(step) > NEWTON_TOLERANCE):
            break
    number = used.sum(axis=-1).astype(np.float64)
    misfit = (weight * (measured - slope) ** 2).sum(axis=-1)
    # One more taken off than for the ratio itself: few weighings leave their own scatter unsure.
    scatter = (STATED_ERRORS_COUNT + misfit) / (STATED_ERRORS_COUNT + np.maximum(number - 2.0, 0.0))
    from_weighings = (curvature - prior_precision) / np.where(number > 1.0, scatter, 1.0)
    return Learned(
        ratio=np.exp(log_ratio),
        log_sd=1.0 / np.sqrt(prior_precision + from_weighings),
        prior_log_sd=np.broadcast_to(prior_sd, log_ratio.shape),
        weighings=number,
        like_conditions=like.sum(axis=-1).astype(np.float64),
    )


def rate_to_expect(prediction: SweatPrediction, learned: Learned) -> Range:
    """Expected sweat rate [L/h] with its range: the prediction times the ratio.

    The weighings shrink what is unsure about the person; what is unsure about the conditions stays. Without
    weighings this is the population's range as predicted.
    """
    population = prediction.sweat_rate_l_per_h
    best = np.asarray(population.best, dtype=np.float64) * learned.ratio
    remaining = learned.log_sd / learned.prior_log_sd
    person = np.asarray(prediction.person_sd_l_per_h) * learned.ratio * remaining
    conditions = np.asarray(prediction.conditions_sd_l_per_h) * learned.ratio
    sd = np.maximum(np.hypot(person, conditions), NARROWEST / RANGE_SD * best)
    low, high = nine_of_ten(best, sd)
    none = learned.weighings == 0.0
    return Range(
        np.where(none, population.low, low),
        np.where(none, population.best, best),
        np.where(none, population.high, high),
    )
