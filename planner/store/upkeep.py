"""Keeping the database safe: a consistent copy while it is in use, and the question whether it is sound."""

from __future__ import annotations

import os
import sqlite3
import tempfile
from contextlib import closing
from pathlib import Path

from sqlalchemy import Connection, Engine, func, select

from planner.errors import StoreError
from planner.store import schema
from planner.store.database import APPLICATION_ID, plain_words
from planner.store.records import KINDS, Kind, Record, columns, problems, record_from
from planner.store.writes import dangling

# Where SQLite's file format keeps the application id (https://www.sqlite.org/fileformat.html, 1.3).
APPLICATION_ID_AT = 68


def backup(engine: Engine, live: Path, target: Path) -> None:
    """Copy the live database, as it stands in one moment, to a file that is complete or not there.

    Raises: StoreError when the target is the live database, another program's file, or cannot be written.
    """
    try:
        _refuse_target(live, target)
        handle, name = tempfile.mkstemp(prefix=".backup-", suffix=".part", dir=target.parent)
        os.close(handle)
        part = Path(name)
        try:
            _copy(engine, part)
            _to_disk(part)
            os.replace(part, target)
            _to_disk(target.parent)
        finally:
            part.unlink(missing_ok=True)
    except OSError as error:
        raise StoreError(f"{target}: the backup could not be written ({error.strerror})") from error
    except sqlite3.Error as error:
        raise StoreError(f"{target}: the backup could not be written: {plain_words(error)}") from error


def _refuse_target(live: Path, target: Path) -> None:
    if target.is_dir():
        raise StoreError(f"{target}: this is a folder; name a file for the backup")
    beside_live = {live.resolve().with_name(live.name + end) for end in ("", "-wal", "-shm", "-journal")}
    if target.resolve() in beside_live or (target.exists() and target.samefile(live)):
        raise StoreError(f"{target}: this is the database in use; choose another file for the backup")
    if target.with_name(target.name + "-wal").exists():
        raise StoreError(f"{target}: this is a database that is open; choose another file for the backup")
    if target.exists() and target.stat().st_size > 0 and _application_id(target) != APPLICATION_ID:
        raise StoreError(f"{target}: this file is not a backup of this program; choose another name")


def _application_id(path: Path) -> int:
    with path.open("rb") as file:
        header = file.read(APPLICATION_ID_AT + 4)
    return int.from_bytes(header[APPLICATION_ID_AT:], "big")


def _copy(engine: Engine, part: Path) -> None:
    with engine.connect() as connection, closing(sqlite3.connect(part)) as copy:
        source = connection.connection.driver_connection
        if not isinstance(source, sqlite3.Connection):
            raise StoreError("only a SQLite database can be backed up")
        source.backup(copy)
        # A single file, that can be carried and opened without the companions of the write-ahead log.
        copy.execute("PRAGMA journal_mode = DELETE")
        if copy.execute("PRAGMA quick_check").fetchone() != ("ok",):
            raise StoreError("the database is damaged, so that no sound backup can be made")


def _to_disk(path: Path) -> None:
    if os.name == "nt" and path.is_dir():
        return  # Windows cannot sync a folder
    handle = os.open(path, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def check(connection: Connection) -> list[str]:
    """What is wrong with the database, in words; empty when it is sound."""
    integrity = connection.exec_driver_sql("PRAGMA integrity_check").scalars().all()
    if integrity != ["ok"]:
        return [f"integrity: {' '.join(line.split())}" for line in integrity]
    found = [
        f"{row[0]} {row[1]} refers to a {row[2]} that is not there"
        for row in connection.exec_driver_sql("PRAGMA foreign_key_check")
    ]
    found += dangling(connection)
    for kind in KINDS.values():
        try:
            found += _invalid(connection, kind)
        except (ValueError, TypeError, OverflowError) as error:
            found.append(f"a {kind.words} cannot be read: {' '.join(str(error).split())}")
        found += _unlogged(connection, kind)
    return found


def _invalid(connection: Connection, kind: Kind) -> list[str]:
    """What the door of the store would refuse today in the records that are live."""
    found = []
    for row in connection.execute(select(*columns(kind)).where(kind.table.c.removed_in.is_(None))):
        record: Record = record_from(kind.record, row)
        found += [f"{kind.words} {row[-1]}: {problem}" for problem in problems(record)]
    return found


def _unlogged(connection: Connection, kind: Kind) -> list[str]:
    """Records that no change set accounts for, which this program never writes."""
    log = schema.change
    logged = select(log.c.record_id).where(log.c.kind == kind.name)
    count = connection.execute(
        select(func.count()).select_from(kind.table).where(kind.table.c.id.not_in(logged))
    ).scalar_one()
    return [f"{count} {kind.words} record(s) are not in the log of changes"] if count else []
