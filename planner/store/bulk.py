"""Many records at once, without making an object of each."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import datetime
from typing import Any

import numpy as np
from numpy.typing import NDArray
from sqlalchemy import Boolean, Connection, Float, Integer, Text, insert, select, type_coerce

from planner.errors import InputError
from planner.monitoring.model import Reading
from planner.store import schema
from planner.store.columns import UtcInstant, Words, words
from planner.store.records import KINDS, Kind, from_json


def insert_columns(
    connection: Connection, kind: Kind, ids: Sequence[int], columns: Sequence[Sequence[Any]]
) -> None:
    """Insert records by their columns, one for each of the kind's fields. The statement is built once, and
    only what needs it is converted: half the time of handing the rows to the statement builder one by one."""
    # The statement names the columns in the order of the table: the id, then the fields (a test says so).
    names = dict.fromkeys(("id", *kind.fields))
    statement = str(insert(kind.table).values(names).compile(dialect=connection.dialect))
    written: list[Sequence[Any]] = [ids]
    for field, values in zip(kind.fields, columns, strict=True):
        bind = kind.table.c[field].type.dialect_impl(connection.dialect).bind_processor(connection.dialect)
        written.append(values if bind is None else [bind(value) for value in values])
    connection.exec_driver_sql(statement, list(zip(*written, strict=True)))


def reading_columns(
    connection: Connection, since: datetime | None, until: datetime | None
) -> dict[str, NDArray[Any]]:
    """Live readings taken from `since` up to but without `until`, oldest first, as one array a field.

    `id`, `driver_id`, `place_id`: int64. `taken_at`: datetime64[us] in UTC. Numbers, also the whole ones that
    may be missing: float64, NaN where there is none. `warm_hand`: bool. Texts and `emergency_signs` (tuples):
    object.
    """
    table = schema.reading
    fields = ("id", *KINDS[Reading].fields)
    query = select(*(_raw(table.c[field]) for field in fields)).where(table.c.removed_in.is_(None))
    if since is not None:
        query = query.where(table.c.taken_at >= since)
    if until is not None:
        query = query.where(table.c.taken_at < until)
    rows = connection.execute(query.order_by(table.c.taken_at, table.c.id)).all()
    values = zip(*rows, strict=True) if rows else ((),) * len(fields)
    return {field: _array(table.c[field], column) for field, column in zip(fields, values, strict=True)}


def _raw(column: Any) -> Any:
    """The column as the database keeps it, so that nothing is converted row by row."""
    if isinstance(column.type, UtcInstant | Boolean):
        return type_coerce(column, Integer)
    if isinstance(column.type, Words):
        return type_coerce(column, Text)
    return column


def _array(column: Any, values: Sequence[Any]) -> NDArray[Any]:
    if isinstance(column.type, UtcInstant):
        return np.array(values, dtype=np.int64).view("datetime64[us]")
    if isinstance(column.type, Boolean):
        return np.array(values, dtype=np.bool_)
    if isinstance(column.type, Float) or (isinstance(column.type, Integer) and column.nullable):
        return np.array(values, dtype=np.float64)
    if isinstance(column.type, Integer):
        return np.array(values, dtype=np.int64)
    result = np.empty(len(values), dtype=object)
    result[:] = [words(value) for value in values] if isinstance(column.type, Words) else values
    return result


def held_before(connection: Connection, kind: Kind, fields: Sequence[str]) -> set[tuple[Any, ...]]:
    """The values of these fields in every record that is or was, the values before each change included."""
    for field in fields:
        if field not in kind.fields:
            raise InputError("fields", field, f"a field of {kind.name}")
    table, log, sets = kind.table, schema.change, schema.change_set
    undos = select(sets.c.id).where(sets.c.undoes.is_not(None))
    counts = table.c.removed_in.is_(None) | table.c.removed_in.not_in(undos)
    held = {tuple(row) for row in connection.execute(select(*(table.c[f] for f in fields)).where(counts))}
    changed = connection.execute(
        select(log.c.before)
        .join(table, table.c.id == log.c.record_id)
        .where(log.c.kind == kind.name, log.c.action == "change", counts)
    ).scalars()
    for before in changed:
        values = from_json(kind, before)
        held.add(tuple(values.get(field) for field in fields))
    return held
