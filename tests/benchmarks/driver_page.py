"""How long the Driver page's script takes with three seasons of readings, on a warm rerun.

Run as `python tests/benchmarks/driver_page.py`. The demo season is repeated in the two years before it, with
three times its readings in each. Measured as in `page_scripts`, and beside it, in the same run, the page with
the one season of the demo. Target: under 80 ms at the median.
"""

from __future__ import annotations

import logging
import os
import statistics
import sys
import tempfile
from dataclasses import replace
from datetime import timedelta
from pathlib import Path
from typing import TypeVar

from page_scripts import measured_ms

from planner.monitoring.model import Reading
from planner.season.model import Leg, Round, Session, Stay
from planner.services.importing import load_demo
from planner.store.store import Store

R = TypeVar("R")

TARGET_MS = 80.0
# A year in weeks, so that a race stays on its day of the week.
YEAR = timedelta(weeks=52)
# The demo's readings run over ten weeks; an earlier season gets them three times, one after the other.
FILLINGS = (timedelta(0), timedelta(weeks=11), timedelta(weeks=22))


def add_earlier_seasons(store: Store, years: int) -> None:
    """Repeat the demo's season in each of so many years before it."""
    rounds, sessions = store.all(Round), store.all(Session)
    stays, legs, readings = store.all(Stay), store.all(Leg), store.all(Reading)
    for year in range(1, years + 1):
        back = year * YEAR
        added = store.add_all(
            [
                replace(each, id=0, number=each.number + 100 * year, name=f"{each.name}, {year} years before")
                for each in rounds
            ],
            by="benchmark",
        )
        new_id = {old.id: new.id for old, new in zip(rounds, added, strict=True)}
        held = [replace(each, round_id=new_id[each.round_id]) for each in sessions]
        store.add_all([earlier(each, back, "starts_at", "ends_at") for each in held], by="benchmark")
        for entries in (stays, legs):
            store.add_all([earlier(each, back, "arrive_at", "depart_at") for each in entries], by="benchmark")
        for filling in FILLINGS:
            store.add_all([earlier(each, back - filling, "taken_at") for each in readings], by="benchmark")


def earlier(record: R, back: timedelta, *instants: str) -> R:
    """A copy of a record, not stored yet, with its instants moved back."""
    moved = {name: getattr(record, name) - back for name in instants}
    return replace(record, id=0, **moved)


def main() -> None:
    logging.disable(logging.WARNING)
    with tempfile.TemporaryDirectory() as folder:
        heads = ("readings", "first ms", "median ms", "slowest ms", "of target")
        print(f"{'store':14}" + "".join(f"{head:>12}" for head in heads))
        for name, years in (("one season", 0), ("three seasons", 2)):
            path = Path(folder) / f"{years}.db"
            store = Store.open(path)
            load_demo(store)
            add_earlier_seasons(store, years)
            amount = len(store.readings())
            store.close()
            os.environ["PLANNER_STORE"] = str(path)
            first, warm = measured_ms("driver")
            median = statistics.median(warm)
            times = f"{first:12.1f}{median:12.1f}{max(warm):12.1f}{median / TARGET_MS:11.2f}x"
            print(f"{name:14}{amount:12}{times}")


if __name__ == "__main__":
    sys.exit(main())
