"""The season at the resolution of one day: what every day-by-day plan is worth, and what it may not do.

Night `n` lies between the mornings (07:00) of day `n` and day `n + 1`. A plan names a bed for every night, or
ON_THE_WAY. Discretised are: one place a night; a journey fills whole days, departs at 10:00 (later when that
would arrive on the day before) and no session or appointment falls on its days; ten hours of a day by day,
fourteen by night; air by the model atmosphere. The body clock is followed over the days before a race that
limits it, as many as any one journey needs to come within the limit, and counts as adapted before then: wrong
only for a driver who keeps changing zones, by what was left then less what has worn off. States and costs are
not rounded. Within a day the true course may put a stretch of at most 24 h at another of the two places; with
the fitted time constant upwards that moves the state by at most 16 % of the difference between their targets
for each move, and the error shrinks by at least 4 % a day afterwards. `tests/test_day_model.py` measures it.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import date
from functools import cached_property, lru_cache
from math import ceil
from typing import Final, Literal, TypeAlias

import numpy as np
from numpy.typing import NDArray

from planner.checks import FloatArray
from planner.physiology.body_clock import (
    LED_WEST_FROM_ZONES,
    clock_offset_h,
    days_to_adapt,
    remaining_offset_h,
)
from planner.physiology.illness import LARGEST_NIGHTLY_GAIN_M, MOST_NIGHTS_CLIMBING, SLOW_ABOVE_M
from planner.physiology.population import POPULATION
from planner.physiology.ventilation import ventilatory_target

ON_THE_WAY: Final = -1
DAY_HOURS: Final = 10.0
NIGHT_HOURS: Final = 14.0
MOST_NIGHTS_LOST: Final = 2
CLOCK_SLACK_H: Final = 1e-9  # room for the rounding of sums
IMPOSSIBLE: Final = -1
HIGHEST_RISK_CLASS: Final = 2

Measure: TypeAlias = Literal["SpO2", "capacity"]
Combination: TypeAlias = Literal["weighted sum", "worst"]
IntArray: TypeAlias = NDArray[np.intp]
BoolArray: TypeAlias = NDArray[np.bool_]


@dataclass(frozen=True)
class Bed:
    """One way to spend a night: a place's beds, lower beds there, or a tent there."""

    name: str
    place_id: int
    bed_m: float
    sleeping_m: float
    bed_po2_mmhg: float
    track_po2_mmhg: float
    is_home: bool = False
    tent_oxygen_fraction: float | None = None
    tent_po2_mmhg: float = 0.0
    tent_hours: float = 0.0


@dataclass(frozen=True)
class DayRound:
    """One round that counts or has limits. `value_of`: SpO2 and capacity [%] for a state on race morning."""

    name: str
    round_id: int
    first_day: int
    race_day: int
    weight: float
    value_of: Callable[[FloatArray], tuple[FloatArray, FloatArray]]
    lowest_spo2_pct: float | None = None
    lowest_capacity_pct: float | None = None
    highest_risk: int = 2
    largest_clock_offset_h: float | None = None

    @property
    def clock_days(self) -> int:
        """Days before the race within which any one journey's offset wears off down to the limit."""
        limit = self.largest_clock_offset_h or 0.0
        ways = (LED_WEST_FROM_ZONES, LED_WEST_FROM_ZONES - 24.0)
        return max(ceil(float(days_to_adapt(w)) * max(1.0 - limit / abs(w), 0.0)) for w in ways) + 1

    @property
    def has_floor(self) -> bool:
        """Whether a state can be too low for this round."""
        return self.lowest_spo2_pct is not None or self.lowest_capacity_pct is not None


@dataclass(frozen=True)
class Rates:
    """What a plan costs, in nights away: a tent night, a flight, an hour of travel. The coach's own."""

    tent_night: float = 0.5
    flight: float = 0.5
    travel_hour: float = 0.0


@dataclass(frozen=True)
class DayProblem:
    """One driver's season day by day; see the module for what is discretised.

    `allowed` (days, beds) where a night may be spent; `air_ok` (days) whether it may be spent on the way;
    `bound` (days) no journey on that day; `at_track` (days, beds) daytime at the track; `hours` and `flights`
    (beds, beds) of a journey; `way_po2_mmhg` (beds, beds) on it; `lost` (days, beds, beds) nights on the way
    when it departs on that day, IMPOSSIBLE when it may not; `zones_east_h` (days, beds, beds).
    """

    first_day: date
    beds: tuple[Bed, ...]
    allowed: BoolArray
    air_ok: BoolArray
    bound: BoolArray
    at_track: BoolArray
    hours: FloatArray
    flights: IntArray
    way_po2_mmhg: FloatArray
    lost: IntArray
    zones_east_h: FloatArray
    rounds: tuple[DayRound, ...]
    start_bed: int
    start_state: float
    low_m: float
    first_night_risk: IntArray  # (beds,) class of a first night there: 0 low, 1 moderate, 2 high
    history_risk: int
    rates: Rates = Rates()
    start_offset_h: float = 0.0
    ascent_rule: bool = True
    measure: Measure = "SpO2"
    combination: Combination = "weighted sum"

    @property
    def days(self) -> int:
        """Number of nights."""
        return len(self.allowed)

    @cached_property
    def by_race_night(self) -> dict[int, list[DayRound]]:
        """The rounds by the night before their race."""
        found: dict[int, list[DayRound]] = {}
        for each in self.rounds:
            found.setdefault(each.race_day - 1, []).append(each)
        return found

    @cached_property
    def clock_counts(self) -> BoolArray:
        """(days,) whether the body clock is followed on that night: before a race that limits it."""
        counts = np.zeros(self.days, dtype=bool)
        for each in self.rounds:
            if each.largest_clock_offset_h is not None:
                counts[max(each.race_day - each.clock_days, 0) : each.race_day] = True
        return counts

    @cached_property
    def last_risk_night(self) -> int:
        """The last night on which the class of the ascent still matters; -1 when no round limits it."""
        limited = [r.race_day - 1 for r in self.rounds if r.highest_risk < HIGHEST_RISK_CLASS]
        return max(limited, default=-1)

    @cached_property
    def same_place(self) -> BoolArray:
        """(beds, beds) whether a change of bed needs no journey."""
        ids = np.array([bed.place_id for bed in self.beds])
        return np.asarray(ids[:, None] == ids[None, :])

    def may_change(self, night: int, before: int, bed: int, lost: int) -> bool:
        """Whether a night in `bed` may follow one in `before`, `lost` nights on the way between them."""
        if not self.allowed[night, bed] or not self.climbs_slowly(before, bed):
            return False
        if self.same_place[before, bed]:
            return lost == 0
        depart = night - lost
        if depart < 0 or self.lost[depart, before, bed] != lost:
            return False
        return bool(self.air_ok[depart:night].all() and not self.bound[depart : night + 1].any())

    def climbs_slowly(self, before: int, bed: int) -> bool:
        """Whether the ascent rule lets a night in `bed` follow one in `before`."""
        return not self.ascent_rule or self.counted_gain_m(before, bed) <= LARGEST_NIGHTLY_GAIN_M

    def counted_gain_m(self, before: int, bed: int) -> float:
        """Gain in sleeping elevation that the ascent rule counts: what lies above 3 000 m."""
        return max(self.beds[bed].sleeping_m - max(self.beds[before].sleeping_m, SLOW_ABOVE_M), 0.0)

    def step_cost(self, before: int, bed: int, lost: int) -> float:
        """Cost of a night in `bed` after one in `before`, with the journey between them."""
        here = self.beds[bed]
        cost = lost + (0.0 if here.is_home else 1.0) + self.rates.tent_night * (here.tent_hours > 0.0)
        if not self.same_place[before, bed]:
            cost += self.rates.flight * float(self.flights[before, bed])
            cost += self.rates.travel_hour * float(self.hours[before, bed])
        return cost

    def pieces(self, before: int, bed: int, lost: int, *, at_track: bool) -> list[tuple[float, float]]:
        """The air of a step to the morning after the night: (inspired oxygen [mmHg], hours) in order."""
        here = self.beds[bed]
        tent = [(here.tent_po2_mmhg, here.tent_hours)] if here.tent_hours > 0.0 else []
        if self.same_place[before, bed]:
            by_day = here.track_po2_mmhg if at_track else here.bed_po2_mmhg
            return [(by_day, DAY_HOURS), (here.bed_po2_mmhg, NIGHT_HOURS - here.tent_hours), *tent]
        awake = (DAY_HOURS + NIGHT_HOURS) * (1 + lost) - here.tent_hours
        way = min(float(self.hours[before, bed]), awake)
        return [(float(self.way_po2_mmhg[before, bed]), way), (here.bed_po2_mmhg, awake - way), *tent]


@lru_cache(maxsize=4096)
def _target_of(po2_mmhg: float) -> float:
    return float(ventilatory_target(po2_mmhg))


class Steps:
    """The steps of one problem in closed form, each worked out once."""

    def __init__(self, problem: DayProblem) -> None:
        self.problem = problem
        self._known: dict[tuple[int, int, int, bool], list[tuple[float, float, float]]] = {}

    def state_after(self, state: FloatArray, night: int, before: int, bed: int, lost: int) -> FloatArray:
        """The state on the morning after; rises with the state before, which the search relies on."""
        at_track = bool(self.problem.at_track[night, bed])
        for target, rise, fall in self.pieces(before, bed, lost, at_track=at_track):
            gap = target - state
            state = state + np.where(gap > 0.0, rise, fall) * gap
        return state

    def pieces(self, before: int, bed: int, lost: int, *, at_track: bool) -> list[tuple[float, float, float]]:
        """Target, rising and falling share of each piece of a step."""
        key = (before, bed, lost, at_track)
        if key not in self._known:
            pieces = [p for p in self.problem.pieces(before, bed, lost, at_track=at_track) if p[1] > 0.0]
            self._known[key] = [
                (
                    _target_of(po2_mmhg),
                    -float(np.expm1(-hours / 24.0 / POPULATION.rise_time_d)),
                    -float(np.expm1(-hours / 24.0 / POPULATION.fall_time_d)),
                )
                for po2_mmhg, hours in pieces
            ]
        return self._known[key]


def offset_after(
    problem: DayProblem, offset_h: FloatArray, night: int, before: int, bed: int, lost: int
) -> FloatArray:
    """Body-clock offset on the morning after: a journey shifts it, each day at a place wears it off."""
    if not problem.same_place[before, bed]:
        zones = float(problem.zones_east_h[night - lost, before, bed])
        if zones != 0.0:
            offset_h = np.asarray(clock_offset_h((offset_h + zones) % 24.0))
    return np.asarray(remaining_offset_h(offset_h, 1.0))


@dataclass(frozen=True)
class PlanValues:
    """What complete plans are worth, one entry a plan; `spo2_pct` and `capacity_pct` are (plans, rounds)."""

    feasible: BoolArray
    cost: FloatArray
    benefit: FloatArray
    spo2_pct: FloatArray
    capacity_pct: FloatArray


def evaluate_plans(problem: DayProblem, plans: IntArray) -> PlanValues:
    """Judge complete plans (plans, nights) of bed numbers or ON_THE_WAY, all of them in one pass.

    This is the model itself, written without any thought of searching; the search is tested against it.
    """
    count = len(plans)
    feasible = np.ones(count, dtype=bool)
    cost = np.zeros(count)
    state = np.full(count, problem.start_state)
    offset = np.full(count, problem.start_offset_h)
    climbing = np.zeros(count, dtype=np.intp)
    risk = np.zeros(count, dtype=np.intp)
    bed = np.full(count, problem.start_bed, dtype=np.intp)
    on_the_way = np.zeros(count, dtype=np.intp)
    values = np.full((2, count, len(problem.rounds)), np.nan)
    steps = Steps(problem)
    for night in range(problem.days):
        goes_to = plans[:, night]
        on_the_way += goes_to == ON_THE_WAY
        lands = goes_to != ON_THE_WAY
        for before, to, lost in _distinct_moves(bed[lands], goes_to[lands], on_the_way[lands]):
            who = lands & (bed == before) & (goes_to == to) & (on_the_way == lost)
            if lost > MOST_NIGHTS_LOST or not problem.may_change(night, before, to, lost):
                feasible[who] = False
                continue
            cost[who] += problem.step_cost(before, to, lost)
            state[who] = steps.state_after(state[who], night, before, to, lost)
            if problem.clock_counts[night]:
                offset[who] = offset_after(problem, offset[who], night, before, to, lost)
            else:
                offset[who] = 0.0
            climbing[who], risk[who] = ascent_after(problem, climbing[who], risk[who], before, to)
        if problem.ascent_rule:
            feasible &= climbing <= MOST_NIGHTS_CLIMBING
        bed = np.where(lands, goes_to, bed)
        on_the_way = np.where(lands, 0, on_the_way)
        for each in problem.by_race_night.get(night, []):
            k = problem.rounds.index(each)
            values[0, :, k], values[1, :, k] = each.value_of(state)
            feasible &= keeps_limits(problem, each, values[0, :, k], values[1, :, k], offset, risk)
    feasible &= on_the_way == 0
    chosen = values[0 if problem.measure == "SpO2" else 1]
    return PlanValues(feasible, cost, combined(problem, chosen), values[0], values[1])


def ascent_after(
    problem: DayProblem, climbing: IntArray, risk: IntArray, before: int, bed: int
) -> tuple[IntArray, IntArray]:
    """Nights in a row that climbed above 3 000 m, and the class of the ascent so far, after a night."""
    climbing = climbing + 1 if problem.counted_gain_m(before, bed) > 0.0 else np.zeros_like(climbing)
    if problem.beds[bed].sleeping_m <= problem.low_m:
        return climbing, np.zeros_like(risk)
    if problem.beds[before].sleeping_m <= problem.low_m:
        return climbing, np.full_like(risk, problem.first_night_risk[bed])
    return climbing, risk


def keeps_limits(
    problem: DayProblem,
    each: DayRound,
    spo2_pct: FloatArray,
    capacity_pct: FloatArray,
    offset_h: FloatArray,
    risk: IntArray,
) -> BoolArray:
    """Whether a round's limits are kept on race morning."""
    kept: BoolArray = np.maximum(risk, problem.history_risk) <= each.highest_risk
    if each.lowest_spo2_pct is not None:
        kept = kept & (spo2_pct >= each.lowest_spo2_pct)
    if each.lowest_capacity_pct is not None:
        kept = kept & (capacity_pct >= each.lowest_capacity_pct)
    if each.largest_clock_offset_h is not None:
        kept = kept & (np.abs(offset_h) <= each.largest_clock_offset_h + CLOCK_SLACK_H)
    return kept


def combined(problem: DayProblem, values: FloatArray) -> FloatArray:
    """The benefit of plans from values (plans, rounds): the weighted sum, or the worst that has weight."""
    weights = np.array([each.weight for each in problem.rounds])
    if problem.combination == "weighted sum":
        return np.asarray(np.where(weights > 0.0, values, 0.0) @ weights)
    counted = values[:, weights > 0.0]
    return np.asarray(counted.min(axis=1) if counted.shape[1] else np.zeros(len(values)))


def _distinct_moves(before: IntArray, to: IntArray, lost: IntArray) -> Sequence[tuple[int, int, int]]:
    found = np.unique(np.stack([before, to, lost], axis=1), axis=0)
    return [(int(a), int(b), int(c)) for a, b, c in found]
