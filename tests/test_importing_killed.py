"""Killing the process at any moment of an import leaves all of the file or none of it, and a sound store.

The moments of death are spread over the import by the clock, and over its writing by what has been written;
that they truly fall inside it shows in the write-ahead log, which then holds rows without their commit.
"""

from __future__ import annotations

import time
from datetime import UTC, datetime, timedelta
from multiprocessing import get_context
from multiprocessing.connection import Connection
from multiprocessing.process import BaseProcess
from pathlib import Path

from planner.season.model import Driver, Place
from planner.services.importing import import_readings
from planner.store.store import Store

NOW = datetime(2026, 6, 6, 13, 40, tzinfo=UTC)
LINES = 20_000  # more than the database keeps in memory before it begins to write
KILLS = 20
BY_THE_CLOCK = KILLS // 2


def _file() -> bytes:
    first = NOW - timedelta(minutes=LINES)
    lines = [f"Ada,Plateau,{(first + timedelta(minutes=n)).isoformat()},{90 + n % 10}" for n in range(LINES)]
    return "\n".join(["driver,place,taken_at,spo2_pct", *lines]).encode()


def _import(path: Path, data: bytes, tell: Connection) -> None:
    """Run in the process that is killed: say when the import begins and when it is done."""
    store = Store.open(path)
    # The first write of a process prepares its statements; the moments below are of the writing alone.
    place = store.add(Place("Plateau", "America/Mexico_City", 2250.0, 2250.0, 19.0, -99.0), by="test")
    store.add(Driver("Ada", "woman", place.id, 61.5, 171.0), by="test")
    tell.send("begins")
    import_readings(store, data, "long.csv", "coach", NOW)
    tell.send("done")
    time.sleep(60)  # until it is killed: no orderly end


def _begun(path: Path, data: bytes) -> tuple[BaseProcess, Connection]:
    processes = get_context("forkserver")
    processes.set_forkserver_preload(["planner.services.importing"])
    hear, tell = processes.Pipe(duplex=False)
    process = processes.Process(target=_import, args=(path, data, tell), daemon=True)
    process.start()
    tell.close()
    assert hear.recv() == "begins"
    return process, hear


def _log_bytes(path: Path) -> int:
    return path.with_name(path.name + "-wal").stat().st_size


def _killed(process: BaseProcess) -> None:
    process.kill()
    process.join()


def test_killed_at_twenty_moments_of_an_import(tmp_path: Path) -> None:
    data = _file()
    paths = [tmp_path / f"{number}.db" for number in range(KILLS)]

    # The last to die has finished, and tells how long an import takes here and how far its log grows.
    last, hear = _begun(paths[-1], data)
    started_at = time.perf_counter()
    before_bytes = _log_bytes(paths[-1])
    assert hear.recv() == "done"
    takes_s = time.perf_counter() - started_at
    grows_bytes = _log_bytes(paths[-1]) - before_bytes
    _killed(last)

    for number, path in enumerate(paths[:BY_THE_CLOCK]):
        process, hear = _begun(path, data)
        time.sleep(takes_s * number / BY_THE_CLOCK)
        _killed(process)
    for number, path in enumerate(paths[BY_THE_CLOCK:-1]):
        process, hear = _begun(path, data)
        until_bytes = before_bytes + grows_bytes * number / (KILLS - BY_THE_CLOCK)
        while _log_bytes(path) <= until_bytes and not hear.poll():
            time.sleep(0.0005)
        _killed(process)

    found = []
    half_written = 0
    for path in paths:
        written_bytes = _log_bytes(path) - before_bytes
        store = Store.open(path)
        assert store.check() == []
        found.append(len(store.readings()))
        half_written += found[-1] == 0 and written_bytes > 0
        # Beside the rows stands the change set that tells who imported them, or neither.
        assert ["long.csv" in each.why for each in store.change_sets()].count(True) == (found[-1] > 0)
        store.close()
    print(
        f"of {KILLS} killed, {found.count(LINES)} kept all of {LINES} lines and {found.count(0)} none, "
        f"{half_written} of these with rows already written; the import takes {takes_s:.2f} s"
    )
    assert set(found) == {0, LINES}
    assert found[0] == 0, "the first was killed at once"
    assert found[-1] == LINES, "the last was killed after its commit"
    assert half_written >= 3
