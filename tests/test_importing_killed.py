"""Killing the process at any moment of an import leaves all of the file or none of it."""

from __future__ import annotations

import time
from datetime import UTC, datetime, timedelta
from multiprocessing import get_context
from multiprocessing.connection import Connection
from pathlib import Path

from planner.season.model import Driver, Place
from planner.services.importing import import_readings
from planner.store.store import Store

NOW = datetime(2026, 6, 6, 13, 40, tzinfo=UTC)
LINES = 4000
KILLS = 20
# The moments of death spread over the import and a little beyond it, so that both ends are seen.
LATEST_DEATH = 1.15


def _file() -> bytes:
    first = NOW - timedelta(minutes=LINES)
    lines = [f"Ada,Plateau,{(first + timedelta(minutes=n)).isoformat()},{90 + n % 10}" for n in range(LINES)]
    return "\n".join(["driver,place,taken_at,spo2_pct", *lines]).encode()


def _import(path: Path, data: bytes, tell: Connection) -> None:
    """Run in the process that is killed: say when the import begins and when it is done."""
    store = Store.open(path)
    tell.send("begins")
    import_readings(store, data, "long.csv", "coach", NOW)
    tell.send("done")


def _store(path: Path) -> None:
    store = Store.open(path)
    place = store.add(Place("Plateau", "America/Mexico_City", 2250.0, 2250.0, 19.0, -99.0), by="test")
    store.add(Driver("Ada", "woman", place.id, 61.5, 171.0), by="test")
    store.close()


def test_a_killed_import_leaves_all_or_nothing(tmp_path: Path) -> None:
    data = _file()
    processes = get_context("forkserver")
    processes.set_forkserver_preload(["planner.services.importing"])

    def begun(path: Path) -> tuple[object, Connection]:
        _store(path)
        hear, tell = processes.Pipe(duplex=False)
        process = processes.Process(target=_import, args=(path, data, tell))
        process.start()
        assert hear.recv() == "begins"
        return process, hear

    # One that lives tells how long an import takes here.
    process, hear = begun(tmp_path / "whole.db")
    started = time.perf_counter()
    assert hear.recv() == "done"
    takes_s = time.perf_counter() - started
    process.join()

    found: list[int] = []
    for number in range(KILLS):
        path = tmp_path / f"{number}.db"
        process, hear = begun(path)
        time.sleep(takes_s * LATEST_DEATH * number / (KILLS - 1))
        process.kill()
        process.join()
        store = Store.open(path)
        assert store.check() == []
        found.append(len(store.readings()))
        store.close()
    assert set(found) <= {0, LINES}
    assert found[0] == 0, "the first was killed at once"
