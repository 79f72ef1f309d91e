"""State evolution of many itineraries in day-major blocks against plain Python loops, side by side.

Run as `python tests/benchmarks/state_evolution.py`. Contenders are timed in turn within each round, so that a
busy machine slows all of them alike; medians per step and their ratios are printed. The plain loop runs over
a thousandth of the itineraries (it would take minutes otherwise) and is given per step like the others.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable
from statistics import median

import numpy as np

from planner.physiology.acclimatisation import evolve
from planner.physiology.population import POPULATION
from planner.physiology.ventilation import REFERENCE_INSPIRED_PO2_MMHG

ITINERARIES = 100_000
DAYS = 60
PLAIN_ITINERARIES = 100
HOURS_PER_DAY = 24
ROUNDS = 7
TARGET_NANOSECONDS_PER_HOUR_STEP = 4.0


def plain_loop(states: list[float], inspired: list[list[float]], steps_per_day: int) -> list[float]:
    """The same recursion in plain Python, day after day or hour after hour."""
    rise = -math.expm1(-1.0 / (steps_per_day * POPULATION.rise_time_d))
    fall = -math.expm1(-1.0 / (steps_per_day * POPULATION.fall_time_d))
    ends = []
    for column, start in enumerate(states):
        state = start
        for day in inspired:
            missing = max(REFERENCE_INSPIRED_PO2_MMHG - day[column], 0.0)
            share = min(POPULATION.paco2_fall_per_mmhg * missing, 0.8)
            target = share / (1.0 - share)
            for _ in range(steps_per_day):
                gap = target - state
                state += (rise if gap > 0.0 else fall) * gap
        ends.append(state)
    return ends


def nanoseconds(work: Callable[[], object], steps: int) -> float:
    """One timed run, per step."""
    started = time.perf_counter()
    work()
    return (time.perf_counter() - started) * 1e9 / steps


def main() -> None:
    """Time all contenders side by side and print the medians."""
    random = np.random.default_rng(1)
    # A stay at or near 2300 m (about 110 mmHg inspired) with days elsewhere.
    inspired = random.uniform(108.0, 150.0, (DAYS, ITINERARIES))
    start = random.uniform(0.0, 0.3, ITINERARIES)
    few_states = start[:PLAIN_ITINERARIES].tolist()
    few_inspired = inspired[:, :PLAIN_ITINERARIES].tolist()
    contenders: dict[str, tuple[Callable[[], object], int]] = {
        "day steps in blocks": (lambda: evolve(start, inspired), ITINERARIES * DAYS),
        "plain loop, day steps": (
            lambda: plain_loop(few_states, few_inspired, 1),
            PLAIN_ITINERARIES * DAYS,
        ),
        "plain loop, hour steps": (
            lambda: plain_loop(few_states, few_inspired, HOURS_PER_DAY),
            PLAIN_ITINERARIES * DAYS,
        ),
    }
    ours = evolve(start, inspired)[-1, :PLAIN_ITINERARIES]
    assert np.allclose(ours, plain_loop(few_states, few_inspired, 1), rtol=1e-12)
    assert np.allclose(ours, plain_loop(few_states, few_inspired, HOURS_PER_DAY), rtol=1e-9)

    times: dict[str, list[float]] = {name: [] for name in contenders}
    for _ in range(ROUNDS):
        for name, (work, steps) in contenders.items():
            times[name].append(nanoseconds(work, steps))
    medians = {name: median(measured) for name, measured in times.items()}
    print(f"{ITINERARIES:,} itineraries x {DAYS} days, median of {ROUNDS} rounds, range in brackets")
    for name, measured in times.items():
        print(f"{name:26s}{medians[name]:10.2f} ns a day step  [{min(measured):.2f}-{max(measured):.2f}]")
    block = medians["day steps in blocks"]
    per_hour = block / HOURS_PER_DAY
    print(f"plain loop over blocks, day steps: {medians['plain loop, day steps'] / block:.0f} times")
    print(f"plain loop over blocks, hour steps: {medians['plain loop, hour steps'] / block:.0f} times")
    verdict = "met" if per_hour <= TARGET_NANOSECONDS_PER_HOUR_STEP else "MISSED"
    print(
        f"blocks: {block:.2f} ns a day step = {per_hour:.2f} ns a driver-hour, "
        f"target {TARGET_NANOSECONDS_PER_HOUR_STEP:g}: {verdict}"
    )


if __name__ == "__main__":
    main()
