"""The store: every record of the team in one SQLite file, every write logged, correctable and undoable.

One `Store` is shared by all threads of the program. Each thread that reads or writes takes a connection of
its own from the pool; a transaction belongs to the thread that began it. Writers wait for each other,
readers wait for nobody and see one consistent state.
"""

from __future__ import annotations

import threading
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from numpy.typing import NDArray
from sqlalchemy import Connection, Engine, delete, insert, select, update

from planner.errors import InputError, NotFoundError, StoreError
from planner.monitoring.model import Reading
from planner.record_checks import Problem, found
from planner.record_checks import name as name_problem
from planner.record_checks import text as text_problem
from planner.store import history, schema, upkeep
from planner.store.bulk import held_before, reading_columns
from planner.store.database import (
    create_database_engine,
    plain_errors,
    prepare_path,
    readable_values,
    reading,
    writing,
)
from planner.store.history import Change, ChangeSet
from planner.store.migrations import migrate
from planner.store.records import R, columns, kind_of, record_from
from planner.store.writes import OpenChangeSet

__all__ = ["Change", "ChangeSet", "Store"]


class Store:
    """The database of one team. Make one with `Store.open`."""

    def __init__(self, engine: Engine, path: Path) -> None:
        self._engine = engine
        self._thread = threading.local()
        self.path = path
        with self._reading() as connection:
            self.uid: str = connection.execute(
                select(schema.meta.c.value).where(schema.meta.c.name == "uid")
            ).scalar_one()

    @classmethod
    def open(cls, path: Path) -> Store:
        """Open the file, make it when it is not there, and bring it to this program's version.

        Raises: StoreError when it cannot be opened, is another program's or a newer version's, or is damaged.
        """
        path = Path(path).expanduser().absolute()
        prepare_path(path)
        engine = create_database_engine(path)
        try:
            with plain_errors(path), readable_values(path):
                migrate(engine)
                return cls(engine, path)
        except BaseException:
            engine.dispose()
            raise

    def close(self) -> None:
        """Let go of the file."""
        self._engine.dispose()

    # Reading ------------------------------------------------------------------------------------------------

    def all(self, kind: type[R], *, include_removed: bool = False, **equals: Any) -> list[R]:
        """The records of a kind whose fields equal the given values, in the order in which they were added.

        Raises: InputError for a field that the kind does not have.
        """
        table = kind_of(kind).table
        query = select(*columns(kind_of(kind))).order_by(table.c.id)
        if not include_removed:
            query = query.where(table.c.removed_in.is_(None))
        for field, value in equals.items():
            if field != "id" and field not in kind_of(kind).fields:
                raise InputError(field, value, f"a field of {kind.__name__}")
            query = query.where(table.c[field].is_(None) if value is None else table.c[field] == value)
        with self._reading() as connection:
            return [record_from(kind, row) for row in connection.execute(query)]

    def get(self, kind: type[R], id: int) -> R:
        """One record. Raises: NotFoundError when it is not there or has been removed."""
        records = self.all(kind, id=id)
        if not records:
            raise NotFoundError(f"there is no {kind.__name__} {id}")
        return records[0]

    def readings(
        self, *, driver_id: int | None = None, since: datetime | None = None, until: datetime | None = None
    ) -> list[Reading]:
        """Readings taken from `since` up to but without `until`, oldest first."""
        table = schema.reading
        query = select(*columns(kind_of(Reading))).where(table.c.removed_in.is_(None))
        if driver_id is not None:
            query = query.where(table.c.driver_id == driver_id)
        if since is not None:
            query = query.where(table.c.taken_at >= since)
        if until is not None:
            query = query.where(table.c.taken_at < until)
        with self._reading() as connection:
            rows = connection.execute(query.order_by(table.c.taken_at, table.c.id))
            return [record_from(Reading, row) for row in rows]

    def reading_columns(
        self, *, since: datetime | None = None, until: datetime | None = None
    ) -> dict[str, NDArray[Any]]:
        """The same readings as one array a field, oldest first; see `bulk.reading_columns` for the types."""
        with self._reading() as connection:
            return reading_columns(connection, since, until)

    def held_before(self, kind: type[R], *fields: str) -> set[tuple[Any, ...]]:
        """What these fields hold, or ever held, in any record of a kind, also corrected or removed ones.

        An import that skips these adds nothing when it is repeated, even after a correction. Records whose
        adding was undone do not count.
        """
        with self._reading() as connection:
            return held_before(connection, kind_of(kind), fields)

    def version(self) -> int:
        """A counter that every write moves: a key for caches."""
        with self._reading() as connection:
            return int(
                connection.execute(
                    select(schema.meta.c.value).where(schema.meta.c.name == "version")
                ).scalar_one()
            )

    # Writing ------------------------------------------------------------------------------------------------

    @contextmanager
    def transaction(self, by: str, why: str = "") -> Iterator[int]:
        """Everything that this thread writes inside is one change set, kept whole or not at all.

        Gives the change set's id. Inside another transaction it joins that one. A write that is refused
        inside leaves no part of itself; the rest stands if the caller goes on. Reading inside sees what
        has been written so far.
        """
        with self._change_set(by, why) as current:
            yield current.id

    def add(self, record: R, *, by: str, why: str = "") -> R:
        """Keep a new record; returns it with its id. Raises: InputError naming the field."""
        return self.add_all([record], by=by, why=why)[0]

    def add_all(self, records: Iterable[R], *, by: str, why: str = "") -> list[R]:
        """Keep new records, all or none; returns them with their ids. Raises: InputError naming the field."""
        with self._write(by, why) as (current, own_why):
            return current.add_all(records, own_why)

    def change(self, record: R, *, by: str, why: str = "") -> R:
        """Keep new values of a stored record; the old ones stay in its changes.

        Raises: InputError naming the field; NotFoundError when the record is not there.
        """
        with self._write(by, why) as (current, own_why):
            return current.change(record, own_why)

    def remove(self, record: R, *, by: str, why: str = "") -> None:
        """Remove a record, recoverably, and what belongs to it (a driver's readings, a round's sessions).

        Raises: StoreError while something that does not belong to it refers to it (a place in use).
        """
        with self._write(by, why) as (current, own_why):
            current.remove(kind_of(type(record)), record.id, own_why)

    def restore(self, kind: type[R], id: int, *, by: str) -> R:
        """Put back a removed record, and what was removed with it. Raises: StoreError, NotFoundError."""
        with self._write(by, "") as (current, own_why):
            current.restore(kind_of(kind), id, own_why)
        return self.get(kind, id)

    # The log of changes -------------------------------------------------------------------------------------

    def changes(self, kind: type[R], id: int) -> list[Change]:
        """Every change of a record, oldest first."""
        with self._reading() as connection:
            return history.changes_of(connection, kind_of(kind), id)

    def changed_ids(self, kind: type[R]) -> set[int]:
        """The ids of the records of a kind that have been corrected at least once."""
        log = schema.change
        with self._reading() as connection:
            return set(
                connection.execute(
                    select(log.c.record_id).where(log.c.kind == kind_of(kind).name, log.c.action == "change")
                ).scalars()
            )

    def change_sets(self, limit: int = 50) -> list[ChangeSet]:
        """The newest change sets, newest first, undone ones and undos included."""
        with self._reading() as connection:
            return [each for each, _ in zip(history.newest_first(connection), range(limit), strict=False)]

    def last_change_set(self, by: str | None = None) -> ChangeSet | None:
        """The newest change set (of one person, if given) that has not been undone and is not an undo."""
        with self._reading() as connection:
            for each in history.in_force(history.newest_first(connection)):
                if each.undoes is None and by in (None, each.by):
                    return each
        return None

    def undo(self, change_set_id: int, *, by: str) -> ChangeSet:
        """Take back a change set; the undo is a change set itself, which can be undone in turn.

        Raises: StoreError when it was undone already, or a newer change set in force touched its records.
        """
        if self._current() is not None:
            raise StoreError("an undo is a change set of its own; it cannot be part of another")
        with self._change_set(by, f"undo of change set {change_set_id}") as current:
            target = history.change_set(current.connection, change_set_id)
            current.undo(target)
            current.connection.execute(
                update(schema.change_set)
                .where(schema.change_set.c.id == current.id)
                .values(undoes=change_set_id)
            )
            return history.change_set(current.connection, current.id)

    # Settings -----------------------------------------------------------------------------------------------

    def setting(self, name: str, default: str | None = None) -> str | None:
        """A setting's value, or the default."""
        with self._reading() as connection:
            value = connection.execute(
                select(schema.setting.c.value).where(schema.setting.c.name == name)
            ).scalar_one_or_none()
        return default if value is None else value

    def set_setting(self, name: str, value: str | None) -> None:
        """Keep a setting; None takes it away. Settings are not part of the log of changes."""
        _refuse(name_problem("name", name), None if value is None else text_problem("value", value))
        current = self._current()
        if current is not None:
            _set_setting(current.connection, name, value)
            current.settings_written = True
            return
        with plain_errors(self.path), writing(self._engine) as connection:
            _set_setting(connection, name, value)
            _move_version(connection)

    # Upkeep -------------------------------------------------------------------------------------------------

    def backup(self, path: Path) -> None:
        """Write a consistent copy while the store is in use; an older backup is replaced in one step.

        Raises: StoreError when the path is the store itself or another file, or cannot be written.
        """
        with plain_errors(self.path):
            upkeep.backup(self._engine, self.path, Path(path).expanduser().absolute())

    def check(self) -> list[str]:
        """What is wrong with the database, in words; empty when it is sound."""
        try:
            with self._reading() as connection:
                return upkeep.check(connection)
        except StoreError as error:
            return [str(error)]

    # Transactions -------------------------------------------------------------------------------------------

    def _current(self) -> OpenChangeSet | None:
        current: OpenChangeSet | None = getattr(self._thread, "change_set", None)
        return current

    @contextmanager
    def _reading(self) -> Iterator[Connection]:
        current = self._current()
        with plain_errors(self.path), readable_values(self.path):
            if current is not None:
                yield current.connection
                return
            with reading(self._engine) as connection:
                yield connection

    @contextmanager
    def _change_set(self, by: str, why: str) -> Iterator[OpenChangeSet]:
        _refuse(name_problem("by", by), text_problem("why", why))
        current = self._current()
        if current is not None:
            if by != current.by:
                raise InputError("by", by, f"{current.by}, who began this transaction")
            yield current
            return
        with plain_errors(self.path), writing(self._engine) as connection:
            at = datetime.now(UTC)
            id = connection.execute(
                insert(schema.change_set).returning(schema.change_set.c.id), {"at": at, "by": by, "why": why}
            ).scalar_one()
            self._thread.change_set = current = OpenChangeSet(connection, id, by)
            try:
                yield current
            finally:
                self._thread.change_set = None
            if current.records_written or current.settings_written:
                _move_version(connection)
            if not current.records_written:
                connection.execute(delete(schema.change_set).where(schema.change_set.c.id == id))

    @contextmanager
    def _write(self, by: str, why: str) -> Iterator[tuple[OpenChangeSet, str]]:
        """One write, alone or inside a transaction; its own reason is logged only where it adds something."""
        inside = self._current() is not None
        with self._change_set(by, why) as current, current.connection.begin_nested():
            yield current, why if inside else ""


def _refuse(*problems: Problem) -> None:
    for problem in found(problems):
        raise problem


def _move_version(connection: Connection) -> None:
    connection.exec_driver_sql("UPDATE meta SET value = CAST(value AS INTEGER) + 1 WHERE name = 'version'")


def _set_setting(connection: Connection, name: str, value: str | None) -> None:
    connection.execute(delete(schema.setting).where(schema.setting.c.name == name))
    if value is not None:
        connection.execute(insert(schema.setting), {"name": name, "value": value})
