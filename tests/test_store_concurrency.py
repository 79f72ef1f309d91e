"""Many threads and several processes on one file: nobody is turned away, nothing is lost."""

from __future__ import annotations

import subprocess
import sys
import threading
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from pathlib import Path

from store_records import BY, HOME, at, with_team

from planner.monitoring.model import Reading
from planner.season.model import Place
from planner.store.store import Store

THREADS = 10
WRITES_EACH = 40


def in_threads(work: Callable[[int], None], count: int = THREADS) -> None:
    """Run the work in threads that start together; any error in one of them fails the test."""
    gate = threading.Barrier(count)

    def run(number: int) -> None:
        gate.wait()
        work(number)

    with ThreadPoolExecutor(count) as pool:
        for future in [pool.submit(run, number) for number in range(count)]:
            future.result()


def test_ten_threads_with_forty_writes_each_lose_nothing(store: Store) -> None:
    home, driver = with_team(store)
    version = store.version()

    def write(thread: int) -> None:
        for number in range(WRITES_EACH):
            with store.transaction(f"thread {thread}"):
                by = f"thread {thread}"
                kept = store.add(Reading(driver.id, home.id, at(1 + number % 28), 90.0, device=by), by=by)
                store.change(replace(kept, spo2_pct=95.0, taken_at=at(1, minute=number)), by=by)

    in_threads(write)
    readings = store.readings()
    assert len(readings) == THREADS * WRITES_EACH
    assert {reading.spo2_pct for reading in readings} == {95.0}
    assert len({(reading.device, reading.taken_at) for reading in readings}) == THREADS * WRITES_EACH
    assert len({reading.id for reading in readings}) == THREADS * WRITES_EACH
    assert store.version() == version + THREADS * WRITES_EACH
    assert len(store.change_sets(1000)) == 1 + THREADS * WRITES_EACH
    assert store.check() == []


def test_a_counter_kept_in_a_record_counts_every_thread(store: Store) -> None:
    """Read, add one, write: right only when each transaction holds the write lock from its start."""
    home = store.add(replace(HOME, bed_elevation_m=0.0), by=BY)

    def count(thread: int) -> None:
        for _ in range(20):
            with store.transaction(BY):
                now = store.get(Place, home.id)
                store.change(replace(now, bed_elevation_m=now.bed_elevation_m + 1.0), by=BY)

    in_threads(count)
    assert store.get(Place, home.id).bed_elevation_m == THREADS * 20


def test_readers_see_whole_transactions_and_never_wait_for_writers(store: Store) -> None:
    home, driver = with_team(store)
    done = threading.Event()
    seen: set[int] = set()

    def work(number: int) -> None:
        if number == 0:
            for batch in range(25):
                device = f"batch {batch}"
                store.add_all(
                    [Reading(driver.id, home.id, at(1, minute=n), 95.0, device=device) for n in range(40)],
                    by=BY,
                )
            done.set()
            return
        while not done.is_set():
            seen.add(len(store.readings()))
            seen.add(len(store.reading_columns()["id"]))

    in_threads(work, count=4)
    assert {count % 40 for count in seen} == {0}
    assert len(seen) > 1, "the readers did look while the writer wrote"


def test_a_reader_sees_the_old_state_while_a_transaction_is_open(store: Store) -> None:
    home = store.add(HOME, by=BY)
    seen: list[float] = []
    with store.transaction(BY):
        store.change(replace(home, bed_elevation_m=99.0), by=BY)
        reader = threading.Thread(target=lambda: seen.append(store.get(Place, home.id).bed_elevation_m))
        reader.start()
        reader.join(timeout=30)
    assert seen == [HOME.bed_elevation_m]
    assert store.get(Place, home.id).bed_elevation_m == 99.0


def test_more_threads_than_connections_wait_for_their_turn(store: Store) -> None:
    home = store.add(HOME, by=BY)
    seen: list[Place] = []

    def read(thread: int) -> None:
        for _ in range(5):
            seen.append(store.get(Place, home.id))

    in_threads(read, count=50)
    assert seen == [home] * 250


def test_threads_opening_a_new_file_at_once_make_one_store(tmp_path: Path) -> None:
    uids: list[str] = []

    def open_one(number: int) -> None:
        store = Store.open(tmp_path / "new.db")
        uids.append(store.uid)
        store.close()

    in_threads(open_one)
    assert len(uids) == THREADS
    assert len(set(uids)) == 1


WRITER = """
import sys
from pathlib import Path
from dataclasses import replace
from planner.season.model import Place
from planner.store.store import Store

store = Store.open(Path(sys.argv[1]))
name = sys.argv[2]
print("ready", flush=True)
sys.stdin.readline()
for number in range(int(sys.argv[3])):
    with store.transaction(name):
        shared = store.get(Place, 1)
        store.change(replace(shared, bed_elevation_m=shared.bed_elevation_m + 1.0), by=name)
        store.add(Place(f"{name} {number}", "UTC", 0.0, 0.0, 0.0, 0.0), by=name)
store.close()
"""


def test_two_processes_write_at_once_and_lose_nothing(store: Store) -> None:
    store.add(replace(HOME, bed_elevation_m=0.0), by=BY)
    writes = 60
    processes = [
        subprocess.Popen(
            [sys.executable, "-c", WRITER, str(store.path), name, str(writes)],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
        )
        for name in ("first", "second")
    ]
    for process in processes:
        assert process.stdout is not None
        assert process.stdout.readline() == "ready\n"
    results = []
    for process in processes:
        assert process.stdin is not None
        process.stdin.write("go\n")
        process.stdin.flush()
    for process in processes:
        results.append((process.communicate(timeout=120)[1], process.returncode))
    assert results == [("", 0), ("", 0)]
    assert store.get(Place, 1).bed_elevation_m == 2 * writes
    names = [place.name for place in store.all(Place)][1:]
    assert sorted(names) == sorted(f"{name} {n}" for name in ("first", "second") for n in range(writes))
    assert store.check() == []
