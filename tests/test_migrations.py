"""How a file comes from one version to the next, shown with migrations made up for the purpose."""

from __future__ import annotations

import shutil
import sqlite3
from collections.abc import Iterator
from contextlib import closing
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

import pytest
import store_version_1
from sqlalchemy import Connection, Engine
from store_records import BY, HOME, content

from planner.errors import StoreError
from planner.monitoring.model import Reading
from planner.season.model import Driver, Place
from planner.store import schema
from planner.store.database import create_database_engine, plain_errors, reading
from planner.store.migrations import MIGRATIONS, Migration, migrate, version_of
from planner.store.store import Store


@pytest.fixture
def engine(tmp_path: Path) -> Iterator[Engine]:
    engine = create_database_engine(tmp_path / "planner.db")
    yield engine
    engine.dispose()


def catalogue(connection: Connection) -> dict[str, Any]:
    """All tables with their columns, references and indexes, however the statements were laid out."""
    names = connection.exec_driver_sql("SELECT name FROM sqlite_schema WHERE type = 'table' ORDER BY name")
    indexes = connection.exec_driver_sql("SELECT name, sql FROM sqlite_schema WHERE type = 'index'")
    return {
        "indexes": {name: " ".join((sql or "").split()) for name, sql in indexes.all()},
        **{
            name: [
                sorted(tuple(row)[1:] for row in connection.exec_driver_sql(f"PRAGMA table_info('{name}')")),
                sorted(
                    tuple(row)[2:] for row in connection.exec_driver_sql(f"PRAGMA foreign_key_list('{name}')")
                ),
            ]
            for name in names.scalars().all()
        },
    }


def applied(connection: Connection) -> list[tuple[int, str]]:
    return [(row.number, row.name) for row in connection.execute(schema.migration.select())]


def add_colour(connection: Connection) -> None:
    connection.exec_driver_sql("ALTER TABLE driver ADD COLUMN helmet_colour TEXT NOT NULL DEFAULT 'white'")


def fill_colour_and_fail(connection: Connection) -> None:
    connection.exec_driver_sql("UPDATE driver SET helmet_colour = 'blue'")
    connection.exec_driver_sql("DELETE FROM reading")
    connection.exec_driver_sql("CREATE TABLE half_way (id INTEGER)")
    raise RuntimeError("a fault in the migration")


COLOUR = Migration("helmet colours", add_colour)
FAULTY = Migration("a faulty one", fill_colour_and_fail)


@pytest.fixture
def old_file(tmp_path: Path) -> Path:
    """A copy of the kept file of version 1."""
    path = tmp_path / "old.db"
    shutil.copy(store_version_1.FILE, path)
    return path


def test_the_migrations_lead_to_the_tables_of_the_schema(engine: Engine, tmp_path: Path) -> None:
    migrate(engine)
    direct = create_database_engine(tmp_path / "direct.db")
    schema.metadata.create_all(direct)
    with reading(engine) as migrated, reading(direct) as made:
        assert catalogue(migrated) == catalogue(made)
        assert len(catalogue(made)) == 1 + len(schema.metadata.tables)
    direct.dispose()


def test_migrations_are_recorded_with_name_order_and_instant(engine: Engine) -> None:
    before = datetime.now(UTC)
    migrate(engine)
    with reading(engine) as connection:
        assert applied(connection) == [(1, "every record of the first release")]
        assert version_of(connection, newest=1) == len(MIGRATIONS) == 1
        (row,) = connection.execute(schema.migration.select())
        assert before <= row.applied_at <= datetime.now(UTC)


def test_migrating_again_does_nothing(engine: Engine, tmp_path: Path) -> None:
    migrate(engine)
    with reading(engine) as connection:
        uid = connection.execute(schema.meta.select()).all()
    migrate(engine)
    with reading(engine) as connection:
        assert connection.execute(schema.meta.select()).all() == uid
        assert len(applied(connection)) == 1


def test_a_second_migration_runs_on_an_old_file_and_keeps_its_records(old_file: Path) -> None:
    engine = create_database_engine(old_file)
    migrate(engine, (*MIGRATIONS, COLOUR))
    with reading(engine) as connection:
        assert applied(connection) == [(1, "every record of the first release"), (2, "helmet colours")]
        assert version_of(connection, newest=2) == 2
        rows = connection.exec_driver_sql("SELECT name, helmet_colour FROM driver").all()
        assert [tuple(row) for row in rows] == [("Ada Invented", "white")]
    engine.dispose()
    with pytest.raises(
        StoreError, match="this database has version 2, this program knows 1: update the program"
    ):
        Store.open(old_file)


def test_a_new_file_goes_through_all_migrations_in_order(engine: Engine) -> None:
    order: list[str] = []

    def noting(name: str) -> Migration:
        return Migration(name, lambda connection: order.append(name))

    migrate(engine, (*MIGRATIONS, noting("second"), noting("third")))
    assert order == ["second", "third"]
    with reading(engine) as connection:
        assert [name for _, name in applied(connection)][1:] == ["second", "third"]


def test_a_failing_migration_leaves_the_file_as_it_was(old_file: Path) -> None:
    engine = create_database_engine(old_file)
    with pytest.raises(RuntimeError, match="a fault in the migration"):
        migrate(engine, (*MIGRATIONS, COLOUR, FAULTY))
    engine.dispose()
    with closing(sqlite3.connect(old_file)) as now, closing(sqlite3.connect(store_version_1.FILE)) as kept:
        assert list(now.iterdump()) == list(kept.iterdump())
        assert now.execute("PRAGMA user_version").fetchone() == (1,)
    store = Store.open(old_file)
    assert len(store.readings()) == 1
    assert store.check() == []
    store.close()


def test_a_failing_first_migration_leaves_an_empty_file(engine: Engine, tmp_path: Path) -> None:
    def fail(connection: Connection) -> None:
        connection.exec_driver_sql("CREATE TABLE half_way (id INTEGER)")
        connection.exec_driver_sql("CREATE TABLE half_way (id INTEGER)")

    with pytest.raises(StoreError, match="the database refused"), plain_errors(tmp_path):
        migrate(engine, (Migration("faulty", fail),))
    with reading(engine) as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM sqlite_schema").scalar_one() == 0
        assert version_of(connection, newest=1) == 0
    migrate(engine)
    with reading(engine) as connection:
        assert version_of(connection, newest=1) == 1


def test_the_kept_file_of_version_1_opens_with_all_that_it_holds(old_file: Path, store: Store) -> None:
    old = Store.open(old_file)
    assert old.uid == store_version_1.UID
    assert old.check() == []
    store_version_1.fill(store)
    assert content(old) == content(store)
    assert old.setting("clock_frozen_at") == store.setting("clock_frozen_at")
    shown = [(change.action, change.why, change.before) for change in old.changes(Reading, 1)]
    assert shown == [(change.action, change.why, change.before) for change in store.changes(Reading, 1)]
    assert [change.action for change in old.changes(Driver, 1)] == ["add", "change", "change"]
    old.restore(Reading, 2, by=BY)
    assert old.add(Place("Added today", "UTC", 0.0, 0.0, 0.0, 0.0), by=BY).id == 3
    assert old.get(Place, 1).name == HOME.name
    assert old.check() == []
    old.close()


def test_every_version_of_the_schema_has_a_kept_file() -> None:
    folder = store_version_1.FILE.parent
    for version in range(1, len(MIGRATIONS) + 1):
        path = folder / f"store_version_{version}.sqlite"
        with closing(sqlite3.connect(f"file:{path}?mode=ro&immutable=1", uri=True)) as connection:
            assert connection.execute("PRAGMA user_version").fetchone() == (version,)
