"""When one partial plan makes another superfluous: what a state can still be worth, and who is beaten.

The proof stands in `search`.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from planner.checks import FloatArray
from planner.physiology.population import POPULATION
from planner.physiology.ventilation import ventilatory_target
from planner.season.day_model import DayProblem, DayRound, IntArray

GRID_STATES: Final = 801
SLOPE_MARGIN: Final = 0.05
# Partial plans are compared in blocks of this many, so that a comparison stays in the processor's cache.
BLOCK: Final = 256


class SlopeBounds:
    """How little and how much a difference in state can still be worth, for every night."""

    def __init__(self, problem: DayProblem) -> None:
        self.worst = problem.combination == "worst"
        self.lowest = np.zeros(problem.days)
        self.highest = np.zeros(problem.days)
        self.floor_ahead = np.zeros(problem.days, dtype=bool)
        # One more entry in front: `ahead[n + 1]` says whether the state matters after night n.
        self.ahead = np.zeros(problem.days + 1, dtype=bool)
        fast = min(POPULATION.rise_time_d, POPULATION.fall_time_d)
        slow = max(POPULATION.rise_time_d, POPULATION.fall_time_d)
        states = np.linspace(0.0, _highest_state(problem), GRID_STATES)
        for each in problem.rounds:
            s_min, s_max = _slopes(each, states, problem.measure == "SpO2")
            days = each.race_day - 1 - np.arange(each.race_day - 1)
            self.lowest[: each.race_day - 1] += each.weight * s_min * np.exp(-days / fast)
            self.highest[: each.race_day - 1] += each.weight * s_max * np.exp(-days / slow)
            self.floor_ahead[: each.race_day - 1] |= each.has_floor
            self.ahead[: each.race_day] |= each.has_floor or each.weight > 0.0

    def comparisons(
        self, night: int, benefit: FloatArray, state: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """The two figures in which a label must be no lower than another to make it superfluous."""
        if not self.ahead[night + 1]:
            return benefit, benefit
        if self.worst:
            return benefit, state
        low = benefit + self.lowest[night] * state
        if self.floor_ahead[night]:
            return low, state
        return low, benefit + self.highest[night] * state


def _highest_state(problem: DayProblem) -> float:
    air = [bed.bed_po2_mmhg for bed in problem.beds] + [bed.track_po2_mmhg for bed in problem.beds]
    air += [bed.tent_po2_mmhg for bed in problem.beds if bed.tent_hours > 0.0]
    air += [float(problem.way_po2_mmhg.min())]
    return max(float(ventilatory_target(min(air))), problem.start_state, 1e-6)


def _slopes(each: DayRound, states: FloatArray, of_spo2: bool) -> tuple[float, float]:
    spo2, capacity = each.value_of(states)
    secants = np.diff(spo2 if of_spo2 else capacity) / np.diff(states)
    lowest, highest = float(secants.min()), float(secants.max())
    return max(lowest, 0.0) * (1.0 - SLOPE_MARGIN), highest * (1.0 + SLOPE_MARGIN)


def undominated(
    cost: FloatArray, first: FloatArray, second: FloatArray, key: FloatArray, travel_h: FloatArray
) -> IntArray:
    """Indices of the labels that no other of the same key beats or equals.

    A label is beaten by one that costs no more and is no lower in both figures; of equal ones the one with
    the least travel stays.
    """
    order = np.lexsort((travel_h, -second, -first, cost))
    if not len(order) or (key == key[0]).all():
        return _undominated_of_one_key(order, first, second)
    return np.concatenate(
        [_undominated_of_one_key(order[key[order] == k], first, second) for k in np.unique(key)]
    )


def _undominated_of_one_key(order: IntArray, first: FloatArray, second: FloatArray) -> IntArray:
    kept: list[IntArray] = []
    # The best of what is kept so far: falling in the first figure, rising in the second.
    stair_first, stair_second = np.empty(0), np.empty(0)
    for start in range(0, len(order), BLOCK):
        block = order[start : start + BLOCK]
        # Sorted by cost, every label kept so far costs no more than those of this block. The last step of the
        # stair that is no lower in the first figure is the highest of them in the second.
        step = np.searchsorted(-stair_first, -first[block], side="right") - 1
        if len(stair_first):
            block = block[(step < 0) | (stair_second[step] < second[block])]
        within = (first[block, None] >= first[block]) & (second[block, None] >= second[block])
        block = block[~np.triu(within, 1).any(axis=0)]
        kept.append(block)
        stair_first = np.concatenate([stair_first, first[block]])
        stair_second = np.concatenate([stair_second, second[block]])
        by_first = np.lexsort((-stair_second, -stair_first))
        stair_first, stair_second = stair_first[by_first], stair_second[by_first]
        rises = stair_second > np.concatenate([[-np.inf], np.maximum.accumulate(stair_second)[:-1]])
        stair_first, stair_second = stair_first[rises], stair_second[rises]
    return np.concatenate(kept) if kept else order
