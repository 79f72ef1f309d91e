"""Drinks plans of a whole team in one pass against the same plans one at a time.

Run as `python tests/benchmarks/fluids.py`. Both ways are timed in turn within each round, so that a busy
machine slows both alike; the medians and their ratio are printed.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from statistics import median

import numpy as np

from planner.hydration.cockpit import inputs_from_conditions, stacked
from planner.hydration.learning import Evidence
from planner.hydration.model import CockpitConditions
from planner.hydration.plan import DrinksPlan, Setting, plan_drinks

DRIVERS = 40
SESSIONS = 6
WEIGHINGS = 12
ROUNDS = 7
TARGET_RATIO = 20.0


def seconds(work: Callable[[], object]) -> float:
    """One timed run."""
    started = time.perf_counter()
    work()
    return time.perf_counter() - started


def main() -> None:
    """Time both ways side by side and print the medians and their ratio."""
    random = np.random.default_rng(1)
    mass = random.uniform(55.0, 95.0, (DRIVERS, 1))
    height = random.uniform(160.0, 192.0, (DRIVERS, 1))
    hours = np.array([1.0, 1.0, 1.0, 0.5, 1.5, 2.0])
    conditions = [
        CockpitConditions(i, 36.0 + 2.0 * i, 41.0 + 2.0 * i, 25.0, 0.5, measured=i < 3)
        for i in range(SESSIONS)
    ]
    inputs = [inputs_from_conditions(each) for each in conditions]
    shape = (DRIVERS, 1, WEIGHINGS)
    evidence = Evidence(
        random.uniform(0.6, 1.4, shape), np.full(shape, 0.08), random.uniform(0.7, 1.0, shape)
    )
    pressure_hpa = 780.0

    def one_pass() -> DrinksPlan:
        return plan_drinks(Setting(mass, height, hours, pressure_hpa), stacked(inputs), evidence)

    def one_at_a_time() -> list[DrinksPlan]:
        return [
            plan_drinks(
                Setting(float(mass[d, 0]), float(height[d, 0]), float(hours[s]), pressure_hpa),
                inputs[s],
                Evidence(
                    evidence.measured_l_per_h[d, 0],
                    evidence.error_l_per_h[d, 0],
                    evidence.predicted_l_per_h[d, 0],
                ),
            )
            for d in range(DRIVERS)
            for s in range(SESSIONS)
        ]

    together = one_pass()
    for position, alone in enumerate(one_at_a_time()):
        picked = together.one(*divmod(position, SESSIONS))
        assert np.isclose(picked.after_ml.best, alone.one().after_ml.best, rtol=1e-6)

    passes, loops = [], []
    for _ in range(ROUNDS):
        passes.append(seconds(one_pass))
        loops.append(seconds(one_at_a_time))
    ratio = median(loops) / median(passes)
    print(f"{DRIVERS} drivers x {SESSIONS} sessions, {WEIGHINGS} weighings each, median of {ROUNDS} rounds")
    print(f"{'one pass':16}{median(passes) * 1000.0:10.1f} ms")
    print(f"{'one at a time':16}{median(loops) * 1000.0:10.1f} ms")
    verdict = "met" if ratio >= TARGET_RATIO else "missed"
    print(f"ratio {ratio:.0f}; target {TARGET_RATIO:.0f} times: {verdict}")


if __name__ == "__main__":
    main()
