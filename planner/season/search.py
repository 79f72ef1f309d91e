"""The season search: the whole trade-off between cost and benefit, exact under the day model.

Dynamic programming from gate to gate. A gate is a night that every plan spends at one place: between two of
them the ways across are found once (`stretch`). A label is a partial plan up to a gate: its cost, its benefit
so far, its state of acclimatisation, its body-clock offset, its ascent. Of the labels of one gate and bed one
is dropped only if another can do everything that it can, at no more cost and no less benefit:

1. A step takes states to states without changing their order, and so does each later one: it is a chain of
   x + r (t - x) with r the falling or the rising share of that piece, and the same t for both labels. Two
   states stay apart by at least exp(-k / fast) and at most exp(-k / slow) of what they were apart, k days
   later, with the two time constants of the model.
2. The benefit at a round rises with the state, with a slope between s_min and s_max (found on a fine grid,
   then widened by 5 %).
3. So for the weighted sum, of two labels with states x and y that are continued alike, what the later rounds
   give differs by at least l (x - y) and at most L (x - y) when x > y, where l and L are the weighted sums of
   s_min exp(-k / fast) and s_max exp(-k / slow) over the rounds ahead. Hence the label with benefit a and
   state x is no worse than the one with b and y in every continuation if a + l x >= b + l y and
   a + L x >= b + L y. When a round ahead has a floor, the state itself must be no lower:
   a + l x >= b + l y and x >= y.
4. For the worst round, min(a, later) is no lower if a >= b and x >= y.
5. Costs ahead are the same for both. Offset, climbing nights and class of the ascent decide what is allowed
   later, so only labels that agree in them are compared; each only while a round ahead limits it.

Nothing is rounded, so the result is the trade-off of all plans of the day model.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from planner.checks import FloatArray
from planner.errors import PlannerError
from planner.season.day_model import (
    ON_THE_WAY,
    BoolArray,
    DayProblem,
    IntArray,
    keeps_limits,
)
from planner.season.dominance import SlopeBounds, undominated
from planner.season.moves import LOST, OFFSET_DIGITS, Moves
from planner.season.stretch import Crossing, Entry, Ways

# Room for the rounding of sums when a cost is held against the largest one asked for.
COST_SLACK: Final = 1e-9


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
    """Partial plans that end in one bed on a gate's night, with the label and the way that each came by."""

    cost: FloatArray
    travel_h: FloatArray
    benefit: FloatArray
    state: FloatArray
    offset: FloatArray
    climbing: IntArray
    risk: IntArray
    from_bed: IntArray
    from_label: IntArray
    way: IntArray  # (n,) row of the gate's list of ways

    def __len__(self) -> int:
        return len(self.cost)

    def taken(self, chosen: IntArray | BoolArray) -> _Labels:
        return _Labels(**{name: column[chosen] for name, column in vars(self).items()})


@dataclass(frozen=True)
class _Gate:
    """The labels of one gate by bed, and the beds of the nights of each way that led to it."""

    night: int
    labels: dict[int, _Labels]
    ways: IntArray  # (ways, nights since the gate before)


def search(
    problem: DayProblem,
    *,
    most_extra_cost: float | None = None,
    progress: Callable[[float], None] | None = None,
    cancelled: Callable[[], bool] | None = None,
) -> TradeOff:
    """The whole trade-off of a season; empty when no plan keeps every limit (see `obstacles`).

    `most_extra_cost` leaves out plans that cost more than that above the cheapest one without limits.
    `progress` is told the share done after each gate, `cancelled` asked before each.
    Raises: SearchCancelledError when `cancelled` says so.
    """
    run = _Run(problem, most_extra_cost)
    for night in gates(problem):
        if cancelled is not None and cancelled():
            raise SearchCancelledError("the search was stopped; nothing has been changed")
        run.go_to(night)
        if progress is not None:
            progress((night + 1) / problem.days)
    return run.trade_off()


def gates(problem: DayProblem) -> list[int]:
    """The nights that every plan spends at one place (the only bed, or before a race), and the last."""
    return [
        night
        for night in range(problem.days)
        if night == problem.days - 1
        or (
            not problem.air_ok[night]
            and (problem.allowed[night].sum() == 1 or night in problem.by_race_night)
        )
    ]


def count_plans(problem: DayProblem) -> int:
    """How many day-by-day plans the season has, counted exactly without going through them.

    Plans that the limits of a round would refuse are counted too: full enumeration has to look at them.
    """
    allowed = Moves(problem).allowed
    beds = range(len(problem.beds))
    # Python's whole numbers: the counts go far beyond what an array holds.
    counts: list[list[int]] = [[int(bed == problem.start_bed) for bed in beds]]
    for night in range(problem.days):
        here = [0] * len(problem.beds)
        for lost in LOST:
            if night - lost >= 0:
                before = counts[night - lost]
                for a, b in np.argwhere(allowed[night, lost]):
                    here[b] += before[a]
        counts.append(here)
    return sum(counts[-1])


class _Run:
    def __init__(self, problem: DayProblem, most_extra_cost: float | None) -> None:
        self.problem = problem
        self.moves = Moves(problem)
        self.crossing = Crossing(self.moves)
        self.bounds = SlopeBounds(problem)
        self.touched = 0
        self.most_cost = np.inf
        if most_extra_cost is not None:
            self.most_cost = self._cheapest() + most_extra_cost + COST_SLACK
        zero, none = np.zeros(1), np.zeros(1, dtype=np.intp)
        start = _Labels(
            cost=zero,
            travel_h=zero,
            benefit=np.full(1, np.inf) if problem.combination == "worst" else zero,
            state=np.full(1, problem.start_state),
            offset=np.full(1, problem.start_offset_h),
            climbing=none,
            risk=none,
            from_bed=none,
            from_label=none,
            way=none,
        )
        self.gates = [_Gate(-1, {problem.start_bed: start}, np.zeros((1, 0), dtype=np.intp))]

    def _cheapest(self) -> float:
        """Cost of the cheapest plan when no round had a limit."""
        return min(
            (
                float((self.moves.cost[lost, self.problem.start_bed] + self.moves.cheapest_to_go[lost])[b])
                for lost in LOST
                if lost < self.problem.days
                for b in np.flatnonzero(self.moves.allowed[lost, lost, self.problem.start_bed])
            ),
            default=np.inf,
        )

    def go_to(self, night: int) -> None:
        """Make the labels of a gate out of those of the gate before it."""
        last = self.gates[-1]
        ahead = bool(self.bounds.ahead[last.night + 1])
        found: list[tuple[int, _Labels]] = []
        rows: list[IntArray] = []
        count = 0
        for bed, labels in last.labels.items():
            keys = _keys(labels, np.round(labels.offset, OFFSET_DIGITS))
            for key in np.unique(keys):
                group = np.flatnonzero(keys == key)
                some = labels.taken(group)
                entry = Entry(
                    last.night,
                    bed,
                    float(some.offset[0]),
                    int(some.climbing[0]),
                    int(some.risk[0]),
                    some.state,
                )
                ways = self.crossing.ways(
                    entry,
                    night,
                    state_counts=ahead,
                    most_cost=self.most_cost - float(some.cost.min()),
                )
                found += self._continued(entry, some, group, ways, count)
                rows.append(ways.beds)
                count += len(ways.beds)
        here: dict[int, _Labels] = {}
        for bed in sorted({bed for bed, _ in found}):
            labels = _joined([part for b, part in found if b == bed])
            labels = self._at_races(night, labels)
            affordable = labels.cost + self.moves.cheapest_to_go[night, bed] <= self.most_cost
            labels = labels.taken(affordable)
            clock, keeps = self.moves.clock_key(night, bed, labels.offset)
            settled = np.where(clock == 0.0, 0.0, labels.offset)
            labels = replace(labels, offset=settled).taken(keeps)
            first, second = self.bounds.comparisons(night, labels.benefit, labels.state)
            keys = _keys(labels, clock[keeps])
            here[bed] = labels.taken(undominated(labels.cost, first, second, keys, labels.travel_h))
        self.gates.append(_Gate(night, here, np.concatenate(rows) if rows else np.zeros((0, 0), np.intp)))

    def _continued(
        self, entry: Entry, labels: _Labels, numbers: IntArray, ways: Ways, first_row: int
    ) -> list[tuple[int, _Labels]]:
        """Every label continued by every way, by the bed in which it ends."""
        state = self.crossing.states_after(entry, ways, labels.state)
        parts = []
        for bed in np.unique(ways.bed):
            chosen = np.flatnonzero(ways.bed == bed)
            way, label = (i.reshape(-1) for i in np.meshgrid(chosen, np.arange(len(labels)), indexing="ij"))
            self.touched += len(way)
            parts.append(
                (
                    int(bed),
                    _Labels(
                        cost=labels.cost[label] + ways.cost[way],
                        travel_h=labels.travel_h[label] + ways.travel_h[way],
                        benefit=labels.benefit[label],
                        state=state[way, label],
                        offset=ways.offset_h[way],
                        climbing=ways.climbing[way],
                        risk=ways.risk[way],
                        from_bed=np.full(len(way), entry.bed),
                        from_label=numbers[label],
                        way=first_row + way,
                    ),
                )
            )
        return parts

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
        if night >= problem.last_risk_night:
            labels = replace(labels, risk=np.zeros_like(labels.risk))
        if night + 1 >= problem.days or not problem.clock_counts[night + 1]:
            labels = replace(labels, offset=np.zeros_like(labels.offset))
        return labels

    def trade_off(self) -> TradeOff:
        ends = [
            (float(cost), float(benefit), bed, i)
            for bed, labels in self.gates[-1].labels.items()
            for i, (cost, benefit) in enumerate(zip(labels.cost, labels.benefit, strict=True))
        ]
        ends.sort(key=lambda e: (e[0], -e[1]))
        curve: list[tuple[float, float, int, int]] = []
        for end in ends:
            if not curve or end[1] > curve[-1][1]:
                curve.append(end)
        plans = np.full((len(curve), self.problem.days), ON_THE_WAY, dtype=np.intp)
        for row, (_, _, bed, i) in zip(plans, curve, strict=True):
            for before, gate in zip(self.gates[-2::-1], self.gates[:0:-1], strict=True):
                labels = gate.labels[bed]
                row[before.night + 1 : gate.night + 1] = gate.ways[labels.way[i]]
                bed, i = int(labels.from_bed[i]), int(labels.from_label[i])
        benefit = np.array([e[1] for e in curve])
        return TradeOff(
            np.array([e[0] for e in curve]),
            np.where(np.isinf(benefit), 0.0, benefit),
            plans,
            self.touched + self.crossing.touched,
        )


def _keys(labels: _Labels, clock: FloatArray) -> FloatArray:
    """One number for each combination of climbing nights, class of ascent and body clock."""
    code = np.unique(clock, return_inverse=True)[1] if clock.any() else np.zeros(len(labels), dtype=np.intp)
    return (labels.climbing * 4 + labels.risk + 64 * code).astype(np.float64)


def _joined(parts: list[_Labels]) -> _Labels:
    return _Labels(**{name: np.concatenate([vars(p)[name] for p in parts]) for name in vars(parts[0])})
