"""A process that dies in the middle of a large write leaves all of it or nothing, and a sound file.

The moments of death are spread over the write alone, by the clock and by what has been written; that they
truly fall inside it shows in the write-ahead log, which then holds rows without their commit.
"""

from __future__ import annotations

import time
from multiprocessing import get_context
from multiprocessing.connection import Connection
from multiprocessing.process import BaseProcess
from pathlib import Path

from store_records import BY, some_readings, with_team

from planner.store.store import Store

ROWS = 20_000  # more than the database keeps in memory before it begins to write
KILLS = 20


def _write(path: Path, tell: Connection) -> None:
    """Run in the process that is killed: say when the write begins and when it is done."""
    store = Store.open(path)
    home, driver = with_team(store)
    readings = some_readings(driver, home, ROWS)
    tell.send("begins")
    store.add_all(readings, by=BY)
    tell.send("done")
    time.sleep(60)  # until it is killed: no orderly end


def _begun(path: Path) -> tuple[BaseProcess, Connection]:
    processes = get_context("forkserver")
    processes.set_forkserver_preload(["planner.store.store", "store_records"])
    hear, tell = processes.Pipe(duplex=False)
    process = processes.Process(target=_write, args=(path, tell), daemon=True)
    process.start()
    tell.close()
    assert hear.recv() == "begins"
    return process, hear


def _log_bytes(path: Path) -> int:
    return path.with_name(path.name + "-wal").stat().st_size


def test_killed_at_twenty_moments_of_a_write(tmp_path: Path) -> None:
    paths = [tmp_path / f"{number}.db" for number in range(KILLS)]

    # The last to die has finished, and tells how long the write takes here and how far its log grows.
    last, hear = _begun(paths[-1])
    started_at = time.perf_counter()
    before_bytes = _log_bytes(paths[-1])
    assert hear.recv() == "done"
    takes_s = time.perf_counter() - started_at
    last.kill()
    last.join()
    grows_bytes = _log_bytes(paths[-1]) - before_bytes

    # Half of the others die by the clock, half when so much has been written.
    for number, path in enumerate(paths[:-1]):
        process, hear = _begun(path)
        if number < KILLS // 2:
            time.sleep(takes_s * number / (KILLS // 2))
        else:
            share = (number - KILLS // 2) / (KILLS // 2)
            while _log_bytes(path) <= before_bytes + share * grows_bytes and not hear.poll():
                time.sleep(0.0005)
        process.kill()
        process.join()

    found = []
    half_written = 0
    for path in paths:
        written_bytes = _log_bytes(path) - before_bytes
        store = Store.open(path)
        assert store.check() == []
        found.append(len(store.readings()))
        half_written += found[-1] == 0 and written_bytes > 0
        assert len(store.change_sets()) == (2 if found[-1] else 1)
        store.close()
    print(
        f"of {KILLS} killed, {found.count(ROWS)} kept all of {ROWS} rows and {found.count(0)} none, "
        f"{half_written} of these with rows already written; the write takes {takes_s:.2f} s"
    )
    assert set(found) == {0, ROWS}
    assert found[0] == 0, "the first was killed at once"
    assert found[-1] == ROWS, "the last was killed after its commit"
    assert half_written >= 3
