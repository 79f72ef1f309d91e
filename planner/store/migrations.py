"""How a database file comes from one version of the schema to the next: named, ordered, recorded, atomic.

To change the schema: edit schema.py, append a `Migration` whose statements bring the old tables there, and
keep a file of the version before in tests/data. A migration that has been released is never edited.
"""

from __future__ import annotations

import secrets
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import UTC, datetime

from sqlalchemy import Connection, Engine

from planner.errors import StoreError
from planner.store import schema, version_1
from planner.store.database import APPLICATION_ID, reading, writing


@dataclass(frozen=True)
class Migration:
    """One step from the version before; `apply` gets a connection inside the one transaction of all steps."""

    name: str
    apply: Callable[[Connection], None]


def _every_record(connection: Connection) -> None:
    for statement in version_1.STATEMENTS:
        connection.exec_driver_sql(statement)


MIGRATIONS: tuple[Migration, ...] = (Migration("every record of the first release", _every_record),)


def migrate(engine: Engine, migrations: Sequence[Migration] = MIGRATIONS) -> None:
    """Bring the file to the last of the migrations, in one transaction; make it if it is empty.

    Raises: StoreError when the file belongs to another program or to a newer version of this one.
    """
    with reading(engine) as connection:
        # Before anything is written: another program's file is left as it is.
        version = version_of(connection, newest=len(migrations))
    _use_write_ahead_log(engine)
    if version == len(migrations):
        return
    with writing(engine) as connection:
        # Another process may have migrated since the look above.
        version = version_of(connection, newest=len(migrations))
        for number, step in enumerate(migrations[version:], start=version + 1):
            step.apply(connection)
            connection.execute(
                schema.migration.insert(),
                {"number": number, "name": step.name, "applied_at": datetime.now(UTC)},
            )
        if version == 0:
            uid = secrets.token_hex(8)
            connection.execute(
                schema.meta.insert(), [{"name": "uid", "value": uid}, {"name": "version", "value": "1"}]
            )
        connection.exec_driver_sql(f"PRAGMA application_id = {APPLICATION_ID}")
        connection.exec_driver_sql(f"PRAGMA user_version = {len(migrations)}")


def version_of(connection: Connection, newest: int) -> int:
    """The number of migrations that made this file; 0 for an empty one.

    Raises: StoreError when it is not ours, or was made by more than `newest` migrations.
    """
    file = connection.engine.url.database
    application_id = int(connection.exec_driver_sql("PRAGMA application_id").scalar_one())
    version = int(connection.exec_driver_sql("PRAGMA user_version").scalar_one())
    if application_id != APPLICATION_ID:
        tables = int(connection.exec_driver_sql("SELECT count(*) FROM sqlite_schema").scalar_one())
        if application_id == 0 and version == 0 and tables == 0:
            return 0
        raise StoreError(f"{file}: this is a database of another program; choose another file")
    if version > newest:
        raise StoreError(
            f"{file}: this database has version {version}, this program knows {newest}: update the program"
        )
    return version


def _use_write_ahead_log(engine: Engine) -> None:
    """Readers then never wait for a writer. The setting stays in the file, but a backup is without it."""
    raw = engine.raw_connection()
    try:
        raw.cursor().execute("PRAGMA journal_mode = WAL")
    finally:
        raw.close()
