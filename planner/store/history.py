"""The log of changes: who changed what, when and why, and which change sets are still in force."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from datetime import datetime
from typing import Any, Literal, TypeAlias, cast

from sqlalchemy import Connection, select

from planner.errors import NotFoundError
from planner.store import schema
from planner.store.records import Kind, columns, from_json

Action: TypeAlias = Literal["add", "change", "remove", "restore"]


@dataclass(frozen=True)
class Change:
    """One change of one record. `before` and `after` hold its fields; before is None when the record
    appeared (add, restore), after is None when it went (remove)."""

    at: datetime
    by: str
    why: str
    action: Action
    before: dict[str, Any] | None
    after: dict[str, Any] | None
    change_set_id: int


@dataclass(frozen=True)
class ChangeSet:
    """What was written together. `undoes` is the id of the change set that this one took back, if it did."""

    id: int
    at: datetime
    by: str
    why: str
    undoes: int | None


def changes_of(connection: Connection, kind: Kind, record_id: int) -> list[Change]:
    """Every change of a record, oldest first. Raises: NotFoundError when there never was such a record."""
    row = connection.execute(select(*columns(kind)).where(kind.table.c.id == record_id)).one_or_none()
    if row is None:
        raise NotFoundError(f"there is no {kind.words} {record_id}")
    values = dict(zip(kind.fields, row[:-1], strict=True))
    sets, log = schema.change_set, schema.change
    rows = connection.execute(
        select(
            sets.c.id,
            sets.c.at,
            sets.c.by,
            sets.c.why,
            log.c.why.label("own_why"),
            log.c.action,
            log.c.before,
        )
        .join(sets, sets.c.id == log.c.change_set_id)
        .where(log.c.kind == kind.name, log.c.record_id == record_id)
        .order_by(log.c.id.desc())
    )
    # Walked backwards: `values` is what stood after the change at hand.
    result: list[Change] = []
    for set_id, at, by, why, own_why, action, before_text in rows:
        after = None if action == "remove" else values
        if action == "change":
            values = {**values, **from_json(kind, before_text)}
        before = None if action in ("add", "restore") else values
        result.append(Change(at, by, own_why or why, cast(Action, action), before, after, set_id))
    return result[::-1]


def change_set(connection: Connection, change_set_id: int) -> ChangeSet:
    """One change set. Raises: NotFoundError."""
    row = connection.execute(
        select(schema.change_set).where(schema.change_set.c.id == change_set_id)
    ).one_or_none()
    if row is None:
        raise NotFoundError(f"there is no change set {change_set_id}")
    return ChangeSet(row.id, row.at, row.by, row.why, row.undoes)


def newest_first(connection: Connection) -> Iterator[ChangeSet]:
    """Every change set, newest first, fetched as it is asked for."""
    for row in connection.execute(select(schema.change_set).order_by(schema.change_set.c.id.desc())):
        yield ChangeSet(row.id, row.at, row.by, row.why, row.undoes)


def in_force(newest_first: Iterable[ChangeSet]) -> Iterator[ChangeSet]:
    """The change sets that no later one in force took back; an undone undo takes nothing back."""
    taken_back: set[int] = set()
    for each in newest_first:
        if each.id in taken_back:
            continue
        if each.undoes is not None:
            taken_back.add(each.undoes)
        yield each
