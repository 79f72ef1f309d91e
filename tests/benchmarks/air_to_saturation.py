"""The whole chain from elevation to saturation against a library that computes the pressure alone.

Run as `python tests/benchmarks/air_to_saturation.py`. Every contender is timed in turn within each round, so
that a busy machine slows all of them alike; the medians and their ratio are printed.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from statistics import median

import ambiance
import numpy as np

from planner.physiology.air import standard_pressure_hpa
from planner.physiology.blood import saturation_pct
from planner.physiology.chain import (
    RESTING_ALVEOLAR_ARTERIAL_DIFFERENCE_MMHG,
    elevation_to_saturation_pct,
)
from planner.physiology.oxygen import alveolar_po2_mmhg, inspired_po2_mmhg, paco2_mmhg

ELEMENTS = 1_000_000
ROUNDS = 9
TARGET_RATIO = 8.0


def one_after_the_other(elevation_m: np.ndarray) -> np.ndarray:
    """The same chain by the guarded public functions, each over all elements at once."""
    inspired = inspired_po2_mmhg(standard_pressure_hpa(elevation_m))
    alveolar = alveolar_po2_mmhg(inspired, paco2_mmhg(elevation_m, 0.0))
    return saturation_pct(np.maximum(alveolar - RESTING_ALVEOLAR_ARTERIAL_DIFFERENCE_MMHG, 0.0))


def nanoseconds_per_element(work: Callable[[], object]) -> float:
    """One timed run."""
    started = time.perf_counter()
    work()
    return (time.perf_counter() - started) * 1e9 / ELEMENTS


def main() -> None:
    """Time all contenders side by side and print the medians."""
    elevation_m = np.random.default_rng(1).uniform(0.0, 4500.0, ELEMENTS)
    library = "ambiance: pressure alone"
    contenders: dict[str, Callable[[], object]] = {
        library: lambda: ambiance.Atmosphere(elevation_m).pressure,
        "whole chain": lambda: elevation_to_saturation_pct(elevation_m),
        "whole chain, latitude 19": lambda: elevation_to_saturation_pct(elevation_m, 0.0, 19.0),
        "whole chain, pH 7.44": lambda: elevation_to_saturation_pct(elevation_m, 0.0, np.nan, 7.44),
        "same chain, function by function": lambda: one_after_the_other(elevation_m),
    }
    assert np.allclose(elevation_to_saturation_pct(elevation_m), one_after_the_other(elevation_m), rtol=1e-12)

    times: dict[str, list[float]] = {name: [] for name in contenders}
    for work in contenders.values():
        work()  # warm-up
    for _ in range(ROUNDS):
        for name, work in contenders.items():
            times[name].append(nanoseconds_per_element(work))

    print(f"{ELEMENTS} elevations, median of {ROUNDS} rounds in one run")
    print(f"{'':34}{'ns/element':>12}{'times faster':>14}")
    reference = median(times[library])
    for name, taken in times.items():
        print(f"{name:34}{median(taken):12.1f}{reference / median(taken):14.1f}")
    reached = reference / median(times["whole chain"])
    verdict = "met" if reached >= TARGET_RATIO else "missed"
    print(f"target {TARGET_RATIO:.0f} times or more: {verdict} ({reached:.1f})")


if __name__ == "__main__":
    main()
