"""The season search: the whole trade-off between cost and benefit, exact under the day model.

Dynamic programming over nights. A label is a partial plan: its cost, its benefit so far, its state of
acclimatisation, its body-clock offset, its ascent. Labels of one bed on one night are compared, and one is
dropped only if another can do everything that it can, at no more cost and no less benefit:

1. The step of a day takes states to states without changing their order, and so does each later one: it is
   x + r (t - x) with r the falling or the rising rate of that stretch, and the same t for both labels. Two
   states stay apart by at least exp(-k / fast) and at most exp(-k / slow) of what they were apart, k days
   later, with the two time constants of the model.
2. The benefit at a round rises with the state, with a slope between s_min and s_max (found on a fine grid,
   then widened by 5 %).
3. So for the weighted sum, of two labels with states x and y that are continued alike, what the later rounds
   give differs by at least l (x - y) and at most L (x - y) when x > y, where l and L are the weighted sums of
   s_min exp(-k / fast) and s_max exp(-k / slow) over the rounds ahead. Hence the label with benefit a and
   state x is no worse than the one with b and y in every continuation if a + l x >= b + l y and
   a + L x >= b + L y.
   When a round ahead has a floor, the state itself must be no lower: a + l x >= b + l y and x >= y.
4. For the worst round, min(a, later) is no lower if a >= b and x >= y.
5. Costs ahead are the same for both. Offset, climbing nights and class of the ascent decide what is allowed
   later, so only labels that agree in them are compared; the offset only while a round ahead limits it.

Nothing is rounded, so the result is the trade-off of all plans of the day model.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from planner.checks import FloatArray
from planner.errors import PlannerError
from planner.physiology.illness import MOST_NIGHTS_CLIMBING
from planner.physiology.population import POPULATION
from planner.physiology.ventilation import ventilatory_target
from planner.season.day_model import (
    MOST_NIGHTS_LOST,
    ON_THE_WAY,
    BoolArray,
    DayProblem,
    DayRound,
    IntArray,
    Steps,
    ascent_after,
    keeps_limits,
    offset_after,
)

GRID_STATES: Final = 801
SLOPE_MARGIN: Final = 0.05
# Labels are compared in blocks of this many, so that a comparison stays in the processor's cache.
BLOCK: Final = 256
OFFSET_DIGITS: Final = 6  # offsets that differ by less are one offset; rounding of sums differs in the 12th


class SearchCancelledError(PlannerError):
    """The search was stopped before its end; nothing has been changed."""


@dataclass(frozen=True)
class TradeOff:
    """The trade-off curve: plans by rising cost, each with more benefit than all cheaper ones.

    `plans` (n, nights) holds bed numbers or ON_THE_WAY. `touched` counts the partial plans looked at.
    """

    cost: FloatArray
    benefit: FloatArray
    plans: IntArray
    touched: int


@dataclass(frozen=True)
class _Labels:
    """Partial plans that end in one bed on one night, with where each came from."""

    cost: FloatArray
    benefit: FloatArray
    state: FloatArray
    offset: FloatArray
    climbing: IntArray
    risk: IntArray
    from_night: IntArray
    from_bed: IntArray
    from_label: IntArray

    def __len__(self) -> int:
        return len(self.cost)

    def taken(self, chosen: IntArray | BoolArray) -> _Labels:
        return _Labels(**{name: column[chosen] for name, column in vars(self).items()})


def search(
    problem: DayProblem,
    *,
    progress: Callable[[float], None] | None = None,
    cancelled: Callable[[], bool] | None = None,
) -> TradeOff:
    """The whole trade-off of a season; empty when no plan keeps every limit (see `in_the_way`).

    `progress` is told the share done after each night, `cancelled` asked before each.
    Raises: SearchCancelledError when `cancelled` says so.
    """
    run = _Run(problem)
    for night in range(problem.days):
        if cancelled is not None and cancelled():
            raise SearchCancelledError("the search was stopped; nothing has been changed")
        run.spend(night)
        if progress is not None:
            progress((night + 1) / problem.days)
    return run.trade_off()


class _Run:
    def __init__(self, problem: DayProblem) -> None:
        self.problem = problem
        self.steps = Steps(problem)
        self.bounds = _SlopeBounds(problem)
        self.touched = 0
        zero = np.zeros(1)
        none = np.zeros(1, dtype=np.intp)
        worst = problem.combination == "worst"
        self.start = _Labels(
            cost=zero,
            benefit=np.full(1, np.inf) if worst else zero,
            state=np.full(1, problem.start_state),
            offset=np.full(1, problem.start_offset_h),
            climbing=none,
            risk=none,
            from_night=none - 1,
            from_bed=none + problem.start_bed,
            from_label=none,
        )
        # labels[night][bed]; night -1 is the start.
        self.labels: list[dict[int, _Labels]] = []

    def before(self, night: int) -> dict[int, _Labels]:
        return self.labels[night] if night >= 0 else {self.problem.start_bed: self.start}

    def spend(self, night: int) -> None:
        """Make the labels of one night out of those of the nights before it."""
        here: dict[int, _Labels] = {}
        for bed in np.flatnonzero(self.problem.allowed[night]):
            made = [
                self._moved(night, before, int(bed), lost)
                for lost in range(min(MOST_NIGHTS_LOST, night) + 1)
                for before in self.before(night - 1 - lost)
                if self.problem.may_change(night, before, int(bed), lost)
            ]
            if not made:
                continue
            labels = made[0] if len(made) == 1 else _joined(made)
            self.touched += len(labels)
            labels = self._at_races(night, labels)
            kept = self._undominated(night, labels)
            if len(kept):
                here[int(bed)] = labels.taken(kept)
        self.labels.append(here)

    def _moved(self, night: int, before: int, bed: int, lost: int) -> _Labels:
        problem = self.problem
        old = self.before(night - 1 - lost)[before]
        climbing, risk = ascent_after(problem, old.climbing, old.risk, before, bed)
        if night <= problem.last_clock_night:
            offset = offset_after(problem, old.offset, night, before, bed, lost)
        else:
            offset = np.zeros(len(old))
        count = np.ones(len(old), dtype=np.intp)
        return _Labels(
            cost=old.cost + problem.step_cost(before, bed, lost),
            benefit=old.benefit,
            state=self.steps.state_after(old.state, night, before, bed, lost),
            offset=offset,
            climbing=climbing,
            risk=risk,
            from_night=count * (night - 1 - lost),
            from_bed=count * before,
            from_label=np.arange(len(old)),
        )

    def _at_races(self, night: int, labels: _Labels) -> _Labels:
        problem = self.problem
        for each in problem.by_race_night.get(night, []):
            spo2, capacity = each.value_of(labels.state)
            kept = keeps_limits(problem, each, spo2, capacity, labels.offset, labels.risk)
            value = spo2 if problem.measure == "SpO2" else capacity
            if problem.combination == "worst":
                benefit = np.minimum(labels.benefit, value) if each.weight > 0.0 else labels.benefit
            else:
                benefit = labels.benefit + each.weight * value
            labels = replace(labels, benefit=benefit).taken(kept)
        if problem.ascent_rule:
            return labels.taken(labels.climbing <= MOST_NIGHTS_CLIMBING)
        return labels

    def _undominated(self, night: int, labels: _Labels) -> IntArray:
        first, second = self.bounds.comparisons(night, labels.benefit, labels.state)
        key = (labels.climbing * 4 + labels.risk).astype(np.float64)
        if night <= self.problem.last_clock_night:
            _, code = np.unique(np.round(labels.offset, OFFSET_DIGITS), return_inverse=True)
            key = key + 64.0 * code
        return undominated(labels.cost, first, second, key)

    def trade_off(self) -> TradeOff:
        ends = [
            (float(cost), float(benefit), bed, i)
            for bed, labels in self.labels[-1].items()
            for i, (cost, benefit) in enumerate(zip(labels.cost, labels.benefit, strict=True))
        ]
        ends.sort(key=lambda e: (e[0], -e[1]))
        curve: list[tuple[float, float, int, int]] = []
        for end in ends:
            if not curve or end[1] > curve[-1][1]:
                curve.append(end)
        plans = np.full((len(curve), self.problem.days), ON_THE_WAY, dtype=np.intp)
        for row, (_, _, bed, i) in zip(plans, curve, strict=True):
            night = self.problem.days - 1
            while night >= 0:
                row[night] = bed
                labels = self.labels[night][bed]
                night, bed, i = (
                    int(labels.from_night[i]),
                    int(labels.from_bed[i]),
                    int(labels.from_label[i]),
                )
        benefit = np.array([e[1] for e in curve])
        return TradeOff(
            np.array([e[0] for e in curve]),
            np.where(np.isinf(benefit), 0.0, benefit),
            plans,
            self.touched,
        )


class _SlopeBounds:
    """How little and how much a difference in state can still be worth, for every night."""

    def __init__(self, problem: DayProblem) -> None:
        self.worst = problem.combination == "worst"
        self.lowest = np.zeros(problem.days)
        self.highest = np.zeros(problem.days)
        self.floor_ahead = np.zeros(problem.days, dtype=bool)
        self.ahead = np.zeros(problem.days, dtype=bool)
        fast = min(POPULATION.rise_time_d, POPULATION.fall_time_d)
        slow = max(POPULATION.rise_time_d, POPULATION.fall_time_d)
        states = np.linspace(0.0, _highest_state(problem), GRID_STATES)
        for each in problem.rounds:
            s_min, s_max = _slopes(each, states, problem.measure == "SpO2")
            for night in range(min(each.race_day - 1, problem.days)):
                days = each.race_day - 1 - night
                self.lowest[night] += each.weight * s_min * np.exp(-days / fast)
                self.highest[night] += each.weight * s_max * np.exp(-days / slow)
                self.floor_ahead[night] |= each.has_floor
                self.ahead[night] |= each.has_floor or each.weight > 0.0

    def comparisons(
        self, night: int, benefit: FloatArray, state: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """The two figures in which a label must be no lower than another to make it superfluous."""
        if not self.ahead[night]:
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


def undominated(cost: FloatArray, first: FloatArray, second: FloatArray, key: FloatArray) -> IntArray:
    """Indices of the labels that no other of the same key beats or equals; of equal ones the first stays.

    A label is beaten by one that costs no more and is no lower in both figures.
    """
    order = np.lexsort((-second, -first, cost))
    kept = order[:0]
    for start in range(0, len(order), BLOCK):
        block = order[start : start + BLOCK]
        if len(kept):
            # Sorted by cost, every label kept so far costs no more than those of this block.
            beaten = (
                (key[kept, None] == key[block])
                & (first[kept, None] >= first[block])
                & (second[kept, None] >= second[block])
            ).any(axis=0)
            block = block[~beaten]
        within = (
            (key[block, None] == key[block])
            & (first[block, None] >= first[block])
            & (second[block, None] >= second[block])
        )
        beaten = np.triu(within, 1).any(axis=0)
        kept = np.concatenate([kept, block[~beaten]])
    return kept


def _joined(parts: list[_Labels]) -> _Labels:
    return _Labels(**{name: np.concatenate([vars(p)[name] for p in parts]) for name in vars(parts[0])})


def count_plans(problem: DayProblem) -> int:
    """How many day-by-day plans the season has, counted exactly without going through them.

    Plans that the limits of a round would refuse are counted too: full enumeration has to look at them.
    """
    counts: list[dict[int, int]] = []

    def before(night: int) -> dict[int, int]:
        return counts[night] if night >= 0 else {problem.start_bed: 1}

    for night in range(problem.days):
        here: dict[int, int] = {}
        for bed in (int(b) for b in np.flatnonzero(problem.allowed[night])):
            total = sum(
                ways
                for lost in range(min(MOST_NIGHTS_LOST, night) + 1)
                for place, ways in before(night - 1 - lost).items()
                if problem.may_change(night, place, bed, lost)
            )
            if total:
                here[bed] = total
        counts.append(here)
    return sum(counts[-1].values())
