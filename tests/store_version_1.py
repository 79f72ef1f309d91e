"""Makes tests/data/store_version_1.sqlite, the kept file of version 1: `python tests/store_version_1.py`.

To be run only until version 1 is released; afterwards the file stays as it is, so that the tests prove that
today's program opens what the old one wrote. Running it twice gives the same bytes.
"""

from __future__ import annotations

import sqlite3
import tempfile
from contextlib import closing
from dataclasses import replace
from pathlib import Path

from store_records import BY, at, keep_every_kind

from planner.monitoring.model import Reading
from planner.season.model import Driver
from planner.store.columns import microseconds
from planner.store.store import Store

FILE = Path(__file__).parent / "data" / "store_version_1.sqlite"
UID = "0123456789abcdef"
MADE_AT = microseconds(at(1, month=1))


def fill(store: Store) -> None:
    """One record of every kind, a correction, a removal, an undo and a setting."""
    keep_every_kind(store)
    reading = store.get(Reading, 1)
    store.change(replace(reading, spo2_pct=92.0), by=BY, why="typing error")
    second = store.add(Reading(1, 1, at(20), 97.0), by=BY)
    store.remove(second, by=BY, why="another driver")
    driver = store.get(Driver, 1)
    store.change(replace(driver, mass_kg=99.0), by=BY)
    last = store.last_change_set()
    assert last is not None
    store.undo(last.id, by=BY)
    store.set_setting("clock_frozen_at", at(14).isoformat())


def main() -> None:
    """Write the file, with fixed values where the program takes the clock's or a random one."""
    with tempfile.TemporaryDirectory() as folder:
        store = Store.open(Path(folder) / "planner.db")
        fill(store)
        copy = Path(folder) / "copy.db"
        store.backup(copy)
        store.close()
        with closing(sqlite3.connect(copy)) as connection:
            connection.execute("UPDATE meta SET value = ? WHERE name = 'uid'", (UID,))
            connection.execute("UPDATE migration SET applied_at = ?", (MADE_AT,))
            connection.execute("UPDATE change_set SET at = ? + id", (MADE_AT,))
            connection.commit()
            connection.execute("PRAGMA page_size = 512")  # most tables hold a row: keep the file small
            connection.execute("VACUUM")
        FILE.parent.mkdir(exist_ok=True)
        content = bytearray(copy.read_bytes())
        # The header counts the writes and names the version of the library that made them.
        for start, length in ((24, 4), (92, 4), (96, 4)):
            content[start : start + length] = bytes(length)
        FILE.write_bytes(content)


if __name__ == "__main__":
    main()
