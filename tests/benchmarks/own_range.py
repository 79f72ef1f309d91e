"""Learning every driver's own range from 100 000 readings of 40 drivers, and drawing a season's band.

Run as `python tests/benchmarks/own_range.py`. Both ways in (columns of the store, records) are timed in turn
within each round; medians are printed, and the processor's own time, which a busy machine inflates less.
"""

from __future__ import annotations

import time
from datetime import UTC, datetime, timedelta
from statistics import median

import numpy as np

from planner.monitoring.model import Reading
from planner.monitoring.own_range import columns_of, own_ranges, own_ranges_from_columns
from planner.physiology.acclimatisation import ExposureHistory
from planner.physiology.expectation import expected_spo2

DRIVERS = 40
READINGS = 100_000
SEGMENTS = 900  # three seasons of stays, flights and days at the track
ROUNDS = 5
TARGET_SECONDS = 1.0
ORIGIN = datetime(2030, 1, 1, tzinfo=UTC)


def invented() -> tuple[list[Reading], dict[int, ExposureHistory]]:
    """Invented readings and itineraries, the same ones every time."""
    random = np.random.default_rng(1)
    each = READINGS // DRIVERS
    readings = []
    histories = {}
    for driver in range(1, DRIVERS + 1):
        start = np.sort(random.uniform(0.0, each * 24.0, SEGMENTS))
        start[0] = 0.0
        inspired = random.choice([149.0, 148.0, 135.0, 122.0, 111.0], SEGMENTS)
        histories[driver] = ExposureHistory(start, inspired)
        spo2 = np.clip(np.round(random.normal(95.0, 1.5, each)), 80, 100)
        readings += [
            Reading(
                driver_id=driver,
                place_id=1,
                taken_at=ORIGIN + timedelta(hours=24.0 * i + 7.0),
                spo2_pct=float(value),
                device="clip" if i % 5 else "ring",
            )
            for i, value in enumerate(spo2)
        ]
    return readings, histories


def main() -> None:
    """Time both ways in side by side and print the medians."""
    readings, histories = invented()
    columns = columns_of(readings)
    by_columns: list[float] = []
    by_records: list[float] = []
    processor: dict[str, list[float]] = {"from columns": [], "from records": []}
    bands: list[float] = []
    own_ranges_from_columns(columns, histories, origin=ORIGIN)  # warm-up
    for _ in range(ROUNDS):
        started, used = time.perf_counter(), time.process_time()
        people = own_ranges_from_columns(columns, histories, origin=ORIGIN)
        by_columns.append(time.perf_counter() - started)
        processor["from columns"].append(time.process_time() - used)
        started, used = time.perf_counter(), time.process_time()
        again = own_ranges(readings, histories, origin=ORIGIN)
        by_records.append(time.perf_counter() - started)
        processor["from records"].append(time.process_time() - used)
        started = time.perf_counter()
        expected_spo2(histories[1], np.arange(365) * 24.0 + 7.0, person=people[1])
        bands.append(time.perf_counter() - started)
    assert all(people[d].readings == READINGS // DRIVERS for d in people)
    assert people[1].breathing == again[1].breathing
    print(f"{READINGS:,} readings of {DRIVERS} drivers, median of {ROUNDS} rounds, range in brackets")
    for name, measured in (("from columns", by_columns), ("from records", by_records)):
        verdict = "met" if median(measured) <= TARGET_SECONDS else "MISSED"
        print(
            f"{name:14s}{median(measured):7.3f} s  [{min(measured):.3f}-{max(measured):.3f}]"
            f"  target {TARGET_SECONDS:g} s: {verdict}; processor {median(processor[name]):.3f} s"
        )
    print(f"a season's band, 365 mornings of one driver: {1e3 * median(bands):.1f} ms")


if __name__ == "__main__":
    main()
