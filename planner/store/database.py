"""Opening a SQLite file: the settings of a connection, how transactions begin, plain words for errors."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from sqlalchemy import Connection, Engine, create_engine, event
from sqlalchemy.engine import URL
from sqlalchemy.exc import SQLAlchemyError, StatementError

from planner.errors import PlannerError, StoreError

# Written into the file's header, so that a database of another program is recognised ("plan" as four bytes).
APPLICATION_ID = int.from_bytes(b"plan", "big")

# The first bytes of every SQLite file (https://www.sqlite.org/fileformat.html, 1.3).
FILE_MARK = b"SQLite format 3\0"

# How long a writer waits for another one. Writes take milliseconds; a large import some seconds.
BUSY_TIMEOUT_S = 60.0

# A page's script uses one connection at a time; more threads than this wait for their turn.
CONNECTIONS_KEPT = 8
CONNECTIONS_MORE = 24


def prepare_path(path: Path) -> None:
    """Make the folder and the file, and make sure that nothing else lies at the path: SQLite itself would
    take a short text for an empty database and write over it.

    Raises: StoreError.
    """
    try:
        if path.is_dir():
            raise StoreError(f"{path}: this is a folder; name a file")
        path.parent.mkdir(parents=True, exist_ok=True)
        if not path.exists():
            path.touch(mode=0o600)  # health records: nobody else on this machine reads them
        else:
            with path.open("rb") as file:
                mark = file.read(len(FILE_MARK))
            if mark not in (b"", FILE_MARK):
                raise StoreError(f"{path}: this is not a database of this program")
    except OSError as error:
        raise StoreError(f"{path}: cannot be opened or made ({error.strerror})") from error


def create_database_engine(path: Path) -> Engine:
    """An engine with a pool of connections that any thread may use, one thread at a time each."""
    engine = create_engine(
        URL.create("sqlite", database=str(path)),
        connect_args={"timeout": BUSY_TIMEOUT_S, "check_same_thread": False},
        pool_size=CONNECTIONS_KEPT,
        max_overflow=CONNECTIONS_MORE,
        pool_timeout=BUSY_TIMEOUT_S,
        hide_parameters=True,  # a health record must not get into a log by way of an error
    )
    event.listen(engine, "connect", _prepare)
    event.listen(engine, "begin", _begin)
    return engine


def _prepare(connection: sqlite3.Connection, record: object) -> None:
    # The driver must not begin transactions by itself: it would begin them deferred (see `_begin`).
    connection.isolation_level = None
    connection.execute("PRAGMA foreign_keys = ON")
    # In the write-ahead log a commit is on the disk before it is reported only with FULL.
    connection.execute("PRAGMA synchronous = FULL")


def _begin(connection: Connection) -> None:
    # A deferred transaction that turns from reading to writing fails at once when another one has written
    # since; one that is immediate waits for its turn at the start and cannot fail half-way.
    immediate = connection.get_execution_options().get("immediate", False)
    connection.exec_driver_sql("BEGIN IMMEDIATE" if immediate else "BEGIN")


@contextmanager
def reading(engine: Engine) -> Iterator[Connection]:
    """A transaction that sees one state of the database and writes nothing."""
    with engine.connect() as connection:
        yield connection


@contextmanager
def writing(engine: Engine) -> Iterator[Connection]:
    """A transaction that holds the write lock from its start; kept at the end, dropped on any error."""
    with engine.connect() as connection:
        immediate = connection.execution_options(immediate=True)
        with immediate.begin():
            yield immediate


@contextmanager
def plain_errors(path: Path) -> Iterator[None]:
    """Turn the database's errors into one plain line."""
    try:
        yield
    except StatementError as error:
        if isinstance(error.orig, PlannerError):
            raise error.orig from error  # a value that a column type refused
        raise StoreError(f"{path}: {plain_words(error)}") from error
    except (SQLAlchemyError, sqlite3.Error) as error:
        raise StoreError(f"{path}: {plain_words(error)}") from error


@contextmanager
def readable_values(path: Path) -> Iterator[None]:
    """Say that the database is damaged when a value in it cannot be what its column holds. Around the store's
    own reading only: a caller's code may raise such errors for reasons of its own."""
    try:
        yield
    except (ValueError, TypeError, OverflowError) as error:
        message = " ".join(str(error).split())
        raise StoreError(f"{path}: the database is damaged ({message}); use a backup") from error


def plain_words(error: Exception) -> str:
    """What a database error means to the user, on one line."""
    cause: Any = error.orig if isinstance(error, StatementError) and error.orig is not None else error
    message = " ".join(str(cause).split())
    if "file is not a database" in message:
        return "this is not a database of this program"
    if "decode" in message:  # the message itself would show what is in the record
        return "the database is damaged (a text in it cannot be read); use a backup"
    if "malformed" in message:
        return f"the database is damaged ({message}); use a backup"
    if "locked" in message:
        return "the database is in use by another program that does not let go; try again"
    if "readonly" in message:
        return "the database cannot be written; see to the rights of the file and its folder"
    if "unable to open" in message:
        return "the database cannot be opened; see to the rights of the file and its folder"
    if "disk is full" in message or "disk I/O" in message:
        return f"the disk refused ({message}); nothing of this change was kept"
    return f"the database refused ({message})"
