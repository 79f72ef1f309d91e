"""The store with 100 000 readings against the bare database driver, which neither checks nor logs anything.

Run as `python tests/benchmarks/store_speed.py`. Every contender is timed in turn within each round, so that a
busy machine slows all of them alike; the medians and their ratios are printed.
"""

from __future__ import annotations

import sqlite3
import tempfile
import time
from collections.abc import Callable
from contextlib import closing
from datetime import UTC, datetime, timedelta
from pathlib import Path
from statistics import median

import numpy as np

from planner.monitoring.model import Reading
from planner.season.model import Driver, Place
from planner.store.schema import reading as table
from planner.store.store import Store

ROWS = 100_000
ROUNDS = 3
BY = "benchmark"


def with_driver(path: Path) -> tuple[Store, list[Reading]]:
    """A store with a place and a driver, and the readings to be kept."""
    store = Store.open(path)
    place = store.add(Place("Invented Plateau", "UTC", 2250.0, 2250.0, 5.0, -73.0), by=BY)
    driver = store.add(Driver("Ada Invented", "woman", place.id, 61.0, 171.0), by=BY)
    first = datetime(2026, 1, 1, tzinfo=UTC)
    rng = np.random.default_rng(1)
    return store, [
        Reading(driver.id, place.id, first + timedelta(minutes=n), float(spo2), float(pulse), device="clip")
        for n, (spo2, pulse) in enumerate(
            zip(rng.integers(80, 100, ROWS), rng.integers(45, 110, ROWS), strict=True)
        )
    ]


def bare_insert(path: Path, rows: list[tuple[object, ...]]) -> None:
    """The same rows into the same table, indexes and all, in one transaction: what the driver alone takes."""
    marks = ", ".join("?" * len(rows[0]))
    with closing(sqlite3.connect(path)) as connection, connection:
        connection.executemany(f"INSERT INTO reading VALUES ({marks})", rows)


def bare_rows(path: Path) -> list[tuple[object, ...]]:
    """All rows as the driver hands them out."""
    with closing(sqlite3.connect(path)) as connection:
        return connection.execute("SELECT * FROM reading ORDER BY taken_at").fetchall()


def one_round(folder: Path) -> dict[str, float]:
    """Seconds of every contender, each in files of its own."""
    store, readings = with_driver(folder / "store.db")
    bare, _ = with_driver(folder / "bare.db")
    bare.close()
    seconds: dict[str, float] = {}

    def timed(name: str, work: Callable[[], object]) -> None:
        started = time.perf_counter()
        work()
        seconds[name] = time.perf_counter() - started

    timed("add_all", lambda: store.add_all(readings, by=BY))
    rows = bare_rows(store.path)
    assert len(rows) == ROWS
    assert len(rows[0]) == len(table.c)
    timed("bare insert", lambda: bare_insert(bare.path, rows))
    timed("readings", store.readings)
    timed("reading_columns", store.reading_columns)
    timed("bare select", lambda: bare_rows(bare.path))
    timed("backup", lambda: store.backup(folder / "backup.db"))
    timed("check", store.check)
    last = store.last_change_set()
    assert last is not None
    timed("undo of all", lambda: store.undo(last.id, by=BY))
    timed("100 x version", lambda: [store.version() for _ in range(100)])
    timed("100 x all(Driver)", lambda: [store.all(Driver) for _ in range(100)])
    driver = store.all(Driver)[0]
    timed("100 x add one", lambda: [store.add(reading, by=BY) for reading in readings[:100]])
    assert len(store.readings(driver_id=driver.id)) == 100
    store.close()
    return seconds


def main() -> None:
    """Time all rounds and print the medians."""
    rounds = []
    for _ in range(ROUNDS):
        with tempfile.TemporaryDirectory() as folder:
            rounds.append(one_round(Path(folder)))
    seconds = {name: median(each[name] for each in rounds) for name in rounds[0]}
    for name, value in seconds.items():
        print(f"{name:20s} {value:7.3f} s")
    for ours, bare in (
        ("add_all", "bare insert"),
        ("readings", "bare select"),
        ("reading_columns", "bare select"),
    ):
        print(f"{ours} / {bare}: {seconds[ours] / seconds[bare]:.1f}")
    print(f"readings / reading_columns: {seconds['readings'] / seconds['reading_columns']:.1f}")


if __name__ == "__main__":
    main()
