"""How long the script of each page takes with the demo season, on a warm rerun.

Run as `python tests/benchmarks/page_scripts.py`. Measured from the entry's first call to the end of the
page's foot, in the process that draws it, without the browser. Target: 50 ms at the median.
"""

from __future__ import annotations

import logging
import os
import statistics
import sys
import tempfile
import time
from pathlib import Path
from unittest import mock

import streamlit as st
from streamlit import config
from streamlit.testing.v1 import AppTest

from planner.services.importing import load_demo
from planner.store.store import Store
from planner.ui import page as frame

ROOT = Path(__file__).resolve().parents[2]
PAGES = tuple(sorted(path.stem for path in (ROOT / "pages").glob("*.py")))
TARGET_MS = 50.0
RUNS = 25
WARM_UP = 3


class Stopwatch:
    """Started by the entry's first call, stopped by the foot of the page."""

    def __init__(self) -> None:
        self.started = 0.0
        self.taken_ms: list[float] = []
        self._configure = st.set_page_config
        self._footer = frame.footer

    def start(self, *given: object, **named: object) -> None:
        self.started = time.perf_counter()
        self._configure(*given, **named)

    def stop(self) -> None:
        self._footer()
        self.taken_ms.append(1000.0 * (time.perf_counter() - self.started))


def measured_ms(stem: str) -> tuple[float, list[float]]:
    """The first run's time and those of the warm ones."""
    st.cache_resource.clear()
    st.cache_data.clear()
    watch = Stopwatch()
    starts = mock.patch.object(st, "set_page_config", watch.start)
    ends = mock.patch.object(frame, "footer", watch.stop)
    with starts, ends:
        at = AppTest.from_file(str(ROOT / "planner" / "app.py"), default_timeout=60).run()
        at.switch_page(f"../pages/{stem}.py")
        st.cache_resource.clear()
        st.cache_data.clear()
        watch.taken_ms.clear()
        for _ in range(1 + WARM_UP + RUNS):
            at.run()
            if at.exception or at.error:
                raise SystemExit(f"{stem}: {[each.value for each in (*at.exception, *at.error)]}")
    return watch.taken_ms[0], watch.taken_ms[1 + WARM_UP :]


def main() -> None:
    logging.disable(logging.WARNING)
    config.set_option("runner.magicEnabled", False)  # as the program's own configuration has it
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "planner.db"
        store = Store.open(path)
        load_demo(store)
        store.close()
        os.environ["PLANNER_STORE"] = str(path)
        print(f"{'page':14}{'first ms':>10}{'median ms':>11}{'slowest ms':>12}{'of target':>11}")
        for stem in PAGES:
            first, warm = measured_ms(stem)
            median = statistics.median(warm)
            print(f"{stem:14}{first:10.1f}{median:11.1f}{max(warm):12.1f}{median / TARGET_MS:10.2f}x")


if __name__ == "__main__":
    sys.exit(main())
