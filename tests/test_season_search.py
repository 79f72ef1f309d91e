"""The season search against full enumeration, and what its exactness rests on."""

from __future__ import annotations

import numpy as np
import pytest
from season_problems import all_plans, random_season, value_at

from planner.checks import FloatArray
from planner.physiology.population import POPULATION
from planner.season import stretch
from planner.season.day_model import DayProblem, evaluate_plans
from planner.season.dominance import undominated
from planner.season.search import SearchCancelledError, count_plans, search

SEASONS = 200


def enumerated_curve(problem: DayProblem) -> tuple[FloatArray, FloatArray, int, int]:
    """Trade-off of all plans by brute force: costs, benefits, plans enumerated, feasible ones."""
    plans = all_plans(problem)
    found = evaluate_plans(problem, plans)
    cost, benefit = found.cost[found.feasible], found.benefit[found.feasible]
    order = np.lexsort((-benefit, cost))
    best = np.maximum.accumulate(benefit[order]) if len(order) else benefit
    first = np.diff(best, prepend=-np.inf) > 0.0
    return cost[order][first], benefit[order][first], len(plans), int(found.feasible.sum())


def best_within(costs: FloatArray, benefits: FloatArray, budget: FloatArray) -> FloatArray:
    """Most benefit at no more than each budget; minus infinity when nothing is that cheap."""
    affordable = costs[None, :] <= budget[:, None] + 1e-7
    return np.where(affordable, benefits[None, :], -np.inf).max(axis=1, initial=-np.inf)


def test_the_search_equals_full_enumeration_on_200_seasons(capsys: pytest.CaptureFixture[str]) -> None:
    enumerated = feasible = touched = infeasible = points = 0
    for seed in range(SEASONS):
        problem = random_season(seed)
        costs, benefits, count, good = enumerated_curve(problem)
        found = search(problem)
        enumerated, feasible, touched = enumerated + count, feasible + good, touched + found.touched
        infeasible += not len(costs)
        points += len(costs)
        assert len(found.cost) == 0 if len(costs) == 0 else len(found.cost) > 0, f"season {seed}"
        budgets = np.concatenate([costs, found.cost])
        here, there = best_within(costs, benefits, budgets), best_within(found.cost, found.benefit, budgets)
        assert here == pytest.approx(there, abs=1e-7), f"season {seed}"
        if len(found.cost):
            # The plans themselves are what the curve says, judged by the model without the search.
            judged = evaluate_plans(problem, found.plans)
            assert judged.feasible.all(), f"season {seed}"
            assert judged.cost == pytest.approx(found.cost, abs=1e-9)
            assert judged.benefit == pytest.approx(found.benefit, abs=1e-9)
    with capsys.disabled():
        print(
            f"\n{SEASONS} seasons: {enumerated} plans enumerated, {feasible} feasible; the search touched"
            f" {touched} partial plans; {points} points on the curves, {infeasible} seasons without any plan"
        )
    # The sample must be worth something: most seasons have a plan, some have none, curves several points.
    assert 5 <= infeasible <= SEASONS // 2
    assert points > SEASONS


def test_count_of_plans_equals_going_through_them() -> None:
    for seed in range(40):
        problem = random_season(seed)
        free = [
            r.__class__(r.name, r.round_id, r.first_day, r.race_day, r.weight, r.value_of)
            for r in problem.rounds
        ]
        # Without the limits of the rounds, and with the class of the ascent and its rest day left aside.
        open_problem = DayProblem(**{**vars_of(problem), "rounds": tuple(free), "history_risk": 0})
        found = evaluate_plans(open_problem, all_plans(open_problem))
        assert count_plans(open_problem) == int(found.feasible.sum())


def vars_of(problem: DayProblem) -> dict[str, object]:
    return {name: getattr(problem, name) for name in DayProblem.__dataclass_fields__}


@pytest.mark.parametrize("elevation_m", [0.0, 800.0, 1600.0, 2250.0, 3200.0, 4500.0])
def test_more_state_is_never_less_saturation_or_capacity(elevation_m: float) -> None:
    # What step 2 of the proof in planner.season.search rests on.
    spo2, capacity = value_at(elevation_m)(np.linspace(0.0, 0.7, 1401))
    assert (np.diff(spo2) >= -1e-12).all()
    assert (np.diff(capacity) >= -1e-12).all()


def test_undominated_against_the_definition() -> None:
    rng = np.random.default_rng(1)
    for n in (1, 2, 50, 700):
        cost, first, second = (rng.integers(0, 12, n).astype(float) for _ in range(3))
        key = rng.integers(0, 2, n).astype(float)
        travel_h = rng.uniform(0.0, 20.0, n)
        kept = undominated(cost, first, second, key, travel_h)
        for i in range(n):
            beats = (cost <= cost[i]) & (first >= first[i]) & (second >= second[i]) & (key == key[i])
            strictly = beats & ((cost < cost[i]) | (first > first[i]) | (second > second[i]))
            equals = beats & ~strictly
            assert (i in kept) <= (not strictly.any())
            same = np.flatnonzero(equals)
            assert strictly.any() or set(same) & set(kept) == {same[travel_h[same].argmin()]}


def test_progress_and_cancel() -> None:
    problem = random_season(3)
    told: list[float] = []
    search(problem, progress=told.append)
    assert told == sorted(told)
    assert told[-1] == 1.0
    with pytest.raises(SearchCancelledError, match="nothing has been changed"):
        search(problem, cancelled=lambda: len(told) > 2)


def test_ways_judged_by_two_samples_give_the_same_curves(monkeypatch: pytest.MonkeyPatch) -> None:
    # With two samples nearly every comparison of ways rests on convexity.
    seasons = [random_season(seed) for seed in range(0, SEASONS, 4)]
    expected = [search(problem) for problem in seasons]
    monkeypatch.setattr(stretch, "SAMPLES", 2)
    for problem, curve in zip(seasons, expected, strict=True):
        again = search(problem)
        assert again.cost == pytest.approx(curve.cost)
        assert again.benefit == pytest.approx(curve.benefit, abs=1e-9)


def test_states_fall_more_slowly_than_they_rise() -> None:
    # What the convexity of a step rests on, see planner.season.moves.
    assert POPULATION.fall_time_d > POPULATION.rise_time_d
