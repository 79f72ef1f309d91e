"""Acclimatisation as a state: how breathing, plasma volume and haemoglobin mass follow where somebody was.

The state of breathing is one number, the lasting rise of alveolar ventilation (`ventilatory_state`): 0 at sea
level, 0.2 to 0.5 when acclimatised to a high place. It moves towards the target of the inspired oxygen with
one time constant upwards and a longer one downwards, so over any constant stretch it has a closed form and
the whole past is in that one number. More state always means more saturation at every elevation, so a search
over days may carry the number and compare plans by it. A person's own state is the population's times the
person's breathing response: one course of the state serves everybody who follows the same itinerary.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from planner.checks import FloatArray, FloatLike, checked, like, numbers
from planner.constants import HOURS_PER_DAY
from planner.errors import InputError
from planner.physiology.population import POPULATION, Population
from planner.physiology.ventilation import _target

# Columns of one block: its states and targets stay in the processor's cache.
BLOCK: Final = 4096


@dataclass(frozen=True)
class ExposureHistory:
    """What somebody breathed over time, as inspired oxygen tension that stays constant until the next start.

    `start_h` (n,) ascending hours since any fixed origin; `inspired_po2_mmhg` (n,), the last one for ever.
    Before `start_h[0]` the body is at steady state for `inspired_po2_mmhg[0]`: that is the home.
    """

    start_h: FloatArray
    inspired_po2_mmhg: FloatArray

    def __post_init__(self) -> None:
        start = numbers("start_h", self.start_h, "h")
        inspired = checked("inspired_po2_mmhg", self.inspired_po2_mmhg)
        if start.ndim != 1 or start.size == 0 or start.shape != inspired.shape:
            raise InputError("start_h", start.shape, f"one start for each of {inspired.shape} tensions")
        if not (np.isfinite(start).all() and np.isfinite(inspired).all()):
            raise InputError("start_h", "not a number", "finite starts and tensions")
        if (np.diff(start) < 0.0).any():
            raise InputError("start_h", float(start[1:][np.diff(start) < 0.0][0]), "ascending hours")
        object.__setattr__(self, "start_h", start)
        object.__setattr__(self, "inspired_po2_mmhg", inspired)

    def segment_at(self, at_h: FloatArray) -> np.ndarray[tuple[int, ...], np.dtype[np.intp]]:
        """Index of the segment that holds each instant; the first one before it starts."""
        return np.maximum(np.searchsorted(self.start_h, at_h, side="right") - 1, 0)

    def inspired_at(self, at_h: FloatArray) -> FloatArray:
        """Inspired oxygen tension [mmHg] at each instant [h]."""
        return self.inspired_po2_mmhg[self.segment_at(at_h)]


def ventilatory_state_at(history: ExposureHistory, at_h: FloatLike) -> FloatLike:
    """Lasting rise of alveolar ventilation at some instants of a history.

    Parameters:
        history: what was breathed [object].
        at_h: instants in the history's hours [h], scalar or array.
    Returns:
        State relative to sea level [1], the shape of at_h.
    Raises:
        InputError: instants that are no numbers.
    Valid:
        As the model's: 0 to 5000 m, healthy people.
    Source:
        First order with the fitted time constant upwards (computed from Wachsmuth 2013, Br J Sports Med
        47:i93) and 22 days downwards (judgement after Beidleman 1997, Med Sci Sports Exerc 29:1588).
    Example:
        >>> home = ExposureHistory(np.array([0.0]), np.array([149.0]))
        >>> ventilatory_state_at(home, 48.0) < 0.01
        True
    """
    at = numbers("at_h", at_h, "h")
    targets = _target(history.inspired_po2_mmhg, POPULATION)
    state = _first_order_at(history, targets, at, POPULATION.rise_time_d, POPULATION.fall_time_d)
    return like(state, at_h)


def ventilatory_state_after(
    ventilatory_state: FloatLike, inspired_po2_mmhg: FloatLike, hours: FloatLike
) -> FloatLike:
    """State after some hours at a constant inspired oxygen tension, in closed form.

    Parameters:
        ventilatory_state: state at the start [1], scalar or array.
        inspired_po2_mmhg: oxygen tension of moist inspired gas [mmHg], scalar or array.
        hours: length of the stretch [h], scalar or array.
    Returns:
        State at the end [1], the common shape; it never overshoots and rises with the state at the start.
    Raises:
        InputError: an input out of range.
    Valid:
        As ventilatory_state_at.
    Source:
        As ventilatory_state_at (computed, judgement).
    Example:
        >>> ventilatory_state_after(0.2, 149.5, 24.0) < 0.2
        True
    """
    state = checked("ventilatory_state", ventilatory_state)
    inspired = checked("inspired_po2_mmhg", inspired_po2_mmhg)
    time = checked("hours", hours)
    after = _relaxed(state, _target(inspired, POPULATION), time / HOURS_PER_DAY, POPULATION)
    return like(after, ventilatory_state, inspired_po2_mmhg, hours)


def evolve(
    ventilatory_state: FloatArray, inspired_po2_mmhg: FloatArray, hours: FloatLike = HOURS_PER_DAY
) -> FloatArray:
    """States of many itineraries step by step, in day-major arrays.

    Parameters:
        ventilatory_state: states at the start [1], (n,).
        inspired_po2_mmhg: oxygen tension in each step [mmHg], (steps, n).
        hours: length of every step, or of each one [h], scalar or (steps,).
    Returns:
        States at the end of each step [1], (steps, n).
    Raises:
        InputError: an input out of range or shapes that do not fit.
    Valid:
        As ventilatory_state_at; exact when the tension is constant within each step.
    Source:
        As ventilatory_state_at (computed, judgement).
    Example:
        >>> evolve(np.zeros(1), np.full((2, 1), 100.0)).shape
        (2, 1)
    """
    start = checked("ventilatory_state", ventilatory_state)
    inspired = np.asarray(inspired_po2_mmhg, dtype=np.float64)
    if inspired.ndim != 2 or start.shape != inspired.shape[1:]:
        raise InputError("inspired_po2_mmhg", inspired.shape, f"an array (steps, {start.size})")
    time = np.broadcast_to(checked("hours", hours), inspired.shape[:1])
    rise = -np.expm1(-time / (HOURS_PER_DAY * POPULATION.rise_time_d))
    fall = -np.expm1(-time / (HOURS_PER_DAY * POPULATION.fall_time_d))
    states = np.empty(inspired.shape)
    for first in range(0, start.size, BLOCK):
        columns = slice(first, first + BLOCK)
        targets = _target(checked("inspired_po2_mmhg", inspired[:, columns]), POPULATION)
        state = start[columns].copy()
        upwards = np.empty(state.shape)
        for step, gap in enumerate(targets):
            # gap x (rise where upwards, else fall), without a choice element by element.
            gap -= state
            np.maximum(gap, 0.0, out=upwards)
            upwards *= rise[step] - fall[step]
            gap *= fall[step]
            gap += upwards
            state += gap
            states[step, columns] = state
    return states


def _relaxed(state: FloatArray, target: FloatArray, days: FloatArray, population: Population) -> FloatArray:
    """The state after some days on the way to a target that stays where it is."""
    gap = target - state
    time_d = np.where(gap > 0.0, population.rise_time_d, population.fall_time_d)
    return np.asarray(target - gap * np.exp(-days / time_d))


def _first_order_at(
    history: ExposureHistory, targets: FloatArray, at_h: FloatArray, rise_time_d: float, fall_time_d: float
) -> FloatArray:
    """A state that follows the target of each segment, with one time constant up and one down."""
    at_start = np.empty(targets.shape)
    state = float(targets[0])
    lengths = np.diff(history.start_h).tolist()
    aims = targets.tolist()
    rise_h, fall_h = HOURS_PER_DAY * rise_time_d, HOURS_PER_DAY * fall_time_d
    for i, aim in enumerate(aims):
        at_start[i] = state
        if i < len(lengths):
            gap = aim - state
            state = aim - gap * float(np.exp(-lengths[i] / (rise_h if gap > 0.0 else fall_h)))
    segment = history.segment_at(at_h)
    since = np.maximum(at_h - history.start_h[segment], 0.0)
    gap_there = targets[segment] - at_start[segment]
    tau_h = np.where(gap_there > 0.0, rise_h, fall_h)
    return np.asarray(targets[segment] - gap_there * np.exp(-since / tau_h))
