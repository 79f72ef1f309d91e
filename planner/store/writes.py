"""Writing inside one open change set: every write is validated, kept and logged, or refused as a whole."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from datetime import datetime
from typing import Any

from sqlalchemy import Column, Connection, func, insert, select, update
from sqlalchemy.exc import IntegrityError

from planner.errors import InputError, NotFoundError, StoreError
from planner.store import schema
from planner.store.history import Action, ChangeSet, in_force
from planner.store.records import (
    KIND_BY_NAME,
    KIND_BY_TABLE,
    KINDS,
    Kind,
    R,
    columns,
    from_json,
    kind_of,
    plain,
    to_json,
    validate,
    values_of,
)

# SQLite takes a limited number of values in one statement.
IDS_PER_STATEMENT = 500


@dataclass(frozen=True)
class _State:
    """A record at one moment: its fields, and the change set that removed it (None while it is live)."""

    values: dict[str, Any]
    removed_in: int | None


@dataclass
class OpenChangeSet:
    """A change set that is being written on a connection that holds the write lock."""

    connection: Connection
    id: int
    by: str
    at: datetime
    written: bool = False

    # Adding -----------------------------------------------------------------------------------------------

    def add_all(self, records: Iterable[R], why: str) -> list[R]:
        """Keep new records and return them with their ids."""
        by_kind: dict[type[R], list[R]] = defaultdict(list)
        order: list[tuple[type[R], int]] = []
        for given in records:
            kind_of(type(given))
            record = plain(given)
            validate(record)
            if record.id != 0:
                raise InputError("id", record.id, "0 for a record that is not stored yet")
            order.append((type(record), len(by_kind[type(record)])))
            by_kind[type(record)].append(record)
        kept = {record: self._add_kind(KINDS[record], group, why) for record, group in by_kind.items()}
        return [kept[record][position] for record, position in order]

    def _add_kind(self, kind: Kind, records: Sequence[R], why: str) -> list[R]:
        values = [values_of(kind, record) for record in records]
        self._check_references(kind, values)
        # Rows are never deleted, so the ids after the highest one are free as long as the write lock is held.
        highest = self.connection.execute(select(func.coalesce(func.max(kind.table.c.id), 0))).scalar_one()
        ids = range(highest + 1, highest + 1 + len(records))
        try:
            self.connection.execute(
                insert(kind.table), [{"id": id, **row} for id, row in zip(ids, values, strict=True)]
            )
        except IntegrityError as error:
            raise self._why_refused(kind, values, error) from error
        self._log(kind, "add", [(id, None, row) for id, row in zip(ids, values, strict=True)], why)
        return [replace(record, id=id) for record, id in zip(records, ids, strict=True)]

    # Changing, removing, restoring --------------------------------------------------------------------------

    def change(self, given: R, why: str) -> R:
        """Keep a record's new fields; nothing is written when they equal the old ones."""
        kind = kind_of(type(given))
        record = plain(given)
        validate(record)
        before = self._live(kind, record.id).values
        after = values_of(kind, record)
        if before == after:
            return record
        self._check_references(kind, [after])
        self._update(kind, record.id, after)
        self._log(kind, "change", [(record.id, before, after)], why)
        return record

    def remove(self, kind: Kind, record_id: int, why: str) -> None:
        """Remove a record and those that belong to it.

        Raises: StoreError while records that do not belong to it refer to it.
        """
        self._live(kind, record_id)
        going: dict[str, set[int]] = defaultdict(set)
        self._gather_belonging(kind, {record_id}, going)
        for table_name, ids in going.items():
            self._refuse_while_used(KIND_BY_TABLE[table_name], ids, going)
        for table_name, ids in going.items():
            self._set_removed(KIND_BY_TABLE[table_name], ids, why)

    def restore(self, kind: Kind, record_id: int, why: str) -> None:
        """Put back a removed record, and what was removed with it."""
        removed_in = self._state(kind, record_id).removed_in
        if removed_in is None:
            raise StoreError(f"{kind.name} {record_id} is not removed")
        self._set_live(kind, {record_id}, why)
        parents = {record_id}
        self._restore_belonging(kind, parents, removed_in, why)
        self._refuse_dangling({kind})

    def _gather_belonging(self, kind: Kind, ids: set[int], going: dict[str, set[int]]) -> None:
        new = ids - going[kind.table.name]
        if not new:
            return
        going[kind.table.name] |= new
        for child, column in _referring_to(kind, "CASCADE"):
            self._gather_belonging(child, self._referring_ids(child, column, new, removed_in=None), going)

    def _restore_belonging(self, kind: Kind, ids: set[int], removed_in: int, why: str) -> None:
        for child, column in _referring_to(kind, "CASCADE"):
            back = self._referring_ids(child, column, ids, removed_in=removed_in)
            if back:
                self._set_live(child, back, why)
                self._restore_belonging(child, back, removed_in, why)

    def _referring_ids(
        self, child: Kind, column: Column[Any], ids: set[int], removed_in: int | None
    ) -> set[int]:
        found: set[int] = set()
        for some in _in_portions(ids):
            found.update(
                self.connection.execute(
                    select(child.table.c.id).where(
                        column.in_(some), child.table.c.removed_in.is_not_distinct_from(removed_in)
                    )
                ).scalars()
            )
        return found

    def _refuse_while_used(self, kind: Kind, ids: set[int], going: dict[str, set[int]]) -> None:
        for child, column in _referring_to(kind, "RESTRICT"):
            using = self._referring_ids(child, column, ids, removed_in=None) - going[child.table.name]
            if using:
                raise StoreError(
                    f"this {_in_words(kind)} cannot be removed while {len(using)} "
                    f"{_in_words(child)} record(s) refer to it by {column.name}"
                )

    def _set_removed(self, kind: Kind, ids: Iterable[int], why: str) -> None:
        self._set_state(kind, "remove", ids, self.id, why)

    def _set_live(self, kind: Kind, ids: Iterable[int], why: str) -> None:
        self._set_state(kind, "restore", ids, None, why)

    def _set_state(
        self, kind: Kind, action: Action, ids: Iterable[int], removed_in: int | None, why: str
    ) -> None:
        for some in _in_portions(ids):
            states = self._states(kind, some)
            try:
                self.connection.execute(
                    update(kind.table).where(kind.table.c.id.in_(some)).values(removed_in=removed_in)
                )
            except IntegrityError as error:
                raise self._why_refused(kind, [state.values for state in states.values()], error) from error
            self._log(
                kind,
                action,
                [
                    (id, state.values, None) if action == "remove" else (id, None, state.values)
                    for id, state in states.items()
                ],
                why,
            )

    def _update(self, kind: Kind, record_id: int, values: dict[str, Any]) -> None:
        try:
            self.connection.execute(update(kind.table).where(kind.table.c.id == record_id).values(**values))
        except IntegrityError as error:
            raise self._why_refused(kind, [values], error, except_id=record_id) from error

    # Undoing ------------------------------------------------------------------------------------------------

    def undo(self, target: ChangeSet) -> None:
        """Put every record that the target touched back to where it stood before.

        Raises: StoreError when a change set in force touched one of them since.
        """
        log = schema.change
        first: dict[tuple[str, int], tuple[str, str | None]] = {}
        for kind_name, record_id, action, before in self.connection.execute(
            select(log.c.kind, log.c.record_id, log.c.action, log.c.before)
            .where(log.c.change_set_id == target.id)
            .order_by(log.c.id)
        ):
            first.setdefault((kind_name, record_id), (action, before))
        self._refuse_if_touched_since(target)
        why = f"undo of change set {target.id}"
        remove: dict[Kind, list[int]] = defaultdict(list)
        for (kind_name, record_id), (action, before) in first.items():
            kind = KIND_BY_NAME[kind_name]
            if action in ("add", "restore"):
                remove[kind].append(record_id)
            else:
                self._put_back(kind, record_id, from_json(kind, before or "{}"), why)
        for kind, ids in remove.items():
            live = [id for some in _in_portions(ids) for id in self._live_ids(kind, some)]
            self._set_removed(kind, live, why)
        self._refuse_dangling({KIND_BY_NAME[kind_name] for kind_name, _ in first})

    def _put_back(self, kind: Kind, record_id: int, values: dict[str, Any], why: str) -> None:
        now = self._state(kind, record_id)
        if now.values != values:
            self._update(kind, record_id, values)
        if now.removed_in is not None:
            self._set_live(kind, [record_id], why)
        elif now.values != values:
            self._log(kind, "change", [(record_id, now.values, values)], why)

    def _refuse_if_touched_since(self, target: ChangeSet) -> None:
        log, sets = schema.change, schema.change_set
        touched = select(log.c.kind, log.c.record_id).where(log.c.change_set_id == target.id).subquery()
        newer = self.connection.execute(
            select(sets.c.id, sets.c.at, sets.c.by, sets.c.why, sets.c.undoes)
            .join(log, log.c.change_set_id == sets.c.id)
            .join(touched, (touched.c.record_id == log.c.record_id) & (touched.c.kind == log.c.kind))
            .where(log.c.change_set_id > target.id)
            .distinct()
            .order_by(sets.c.id.desc())
        )
        newer_sets = [ChangeSet(*row) for row in newer]
        cancelled = {each.id for each in newer_sets}
        for each in in_force(newer_sets):
            if each.undoes == target.id:
                raise StoreError(f"change set {target.id} has been undone already")
            if each.undoes not in cancelled:
                raise StoreError(
                    f"change set {target.id} cannot be undone: {each.by} changed the same record "
                    f"on {each.at:%Y-%m-%d at %H:%M} UTC (change set {each.id}); undo that first"
                )

    def _refuse_dangling(self, kinds: set[Kind]) -> None:
        for problem in dangling(self.connection, {kind.table.name for kind in kinds}):
            raise StoreError(f"this would leave {problem}")

    # Looking ------------------------------------------------------------------------------------------------

    def _states(self, kind: Kind, ids: Sequence[int]) -> dict[int, _State]:
        rows = self.connection.execute(
            select(*columns(kind), kind.table.c.removed_in).where(kind.table.c.id.in_(ids))
        )
        return {row[-2]: _State(dict(zip(kind.fields, row[:-2], strict=True)), row[-1]) for row in rows}

    def _state(self, kind: Kind, record_id: int) -> _State:
        states = self._states(kind, [record_id])
        if record_id not in states:
            raise NotFoundError(f"there is no {_in_words(kind)} {record_id}")
        return states[record_id]

    def _live(self, kind: Kind, record_id: int) -> _State:
        state = self._state(kind, record_id)
        if state.removed_in is not None:
            raise NotFoundError(f"{_in_words(kind)} {record_id} has been removed; restore it first")
        return state

    def _live_ids(self, kind: Kind, ids: Iterable[int]) -> set[int]:
        return set(
            self.connection.execute(
                select(kind.table.c.id).where(
                    kind.table.c.id.in_(list(ids)), kind.table.c.removed_in.is_(None)
                )
            ).scalars()
        )

    def _check_references(self, kind: Kind, values: Sequence[dict[str, Any]]) -> None:
        for field in kind.fields:
            for key in kind.table.c[field].foreign_keys:
                wanted = {row[field] for row in values} - {None}
                parent = KIND_BY_TABLE[key.column.table.name]
                live: set[int] = set()
                for some in _in_portions(wanted):
                    live |= self._live_ids(parent, some)
                if wanted - live:
                    raise InputError(field, min(wanted - live), f"the id of a stored {_in_words(parent)}")

    def _why_refused(
        self, kind: Kind, values: Sequence[dict[str, Any]], error: IntegrityError, except_id: int = 0
    ) -> Exception:
        """Which record is there already; looked for only after the database refused."""
        unique = schema.UNIQUE.get(kind.record, ())
        seen: set[tuple[object, ...]] = set()
        for row in values if unique else ():
            key = tuple(row[field] for field in unique)
            there = self.connection.execute(
                select(kind.table.c.id).where(
                    *(kind.table.c[field] == row[field] for field in unique),
                    kind.table.c.removed_in.is_(None),
                    kind.table.c.id != except_id,
                )
            ).first()
            if there is not None or key in seen:
                shown = ", ".join(str(value) for value in key)
                return InputError(
                    unique[-1], shown, f"a {_in_words(kind)} that is not there yet (by {', '.join(unique)})"
                )
            seen.add(key)
        return StoreError(f"the database refused this {_in_words(kind)} ({error.orig})")

    def _log(
        self,
        kind: Kind,
        action: Action,
        changed: Sequence[tuple[int, dict[str, Any] | None, dict[str, Any] | None]],
        why: str,
    ) -> None:
        if not changed:
            return
        self.written = True
        self.connection.execute(
            insert(schema.change),
            [
                {
                    "change_set_id": self.id,
                    "kind": kind.name,
                    "record_id": record_id,
                    "action": action,
                    "before": None if before is None else to_json(before),
                    "after": None if after is None else to_json(after),
                    "why": why,
                }
                for record_id, before, after in changed
            ],
        )


def dangling(connection: Connection, tables: set[str] | None = None) -> list[str]:
    """Live records that refer to removed ones, in words; only references from or to `tables` when given."""
    result = []
    for child in KINDS.values():
        for column in child.table.c:
            for key in column.foreign_keys:
                parent = KIND_BY_TABLE.get(key.column.table.name)
                if parent is None:
                    continue
                if tables is not None and not tables & {child.table.name, parent.table.name}:
                    continue
                parent_table = parent.table.alias()
                count = connection.execute(
                    select(func.count())
                    .select_from(child.table.join(parent_table, column == parent_table.c.id))
                    .where(child.table.c.removed_in.is_(None), parent_table.c.removed_in.is_not(None))
                ).scalar_one()
                if count:
                    result.append(
                        f"{count} {_in_words(child)} record(s) whose {column.name} "
                        f"names a removed {_in_words(parent)}"
                    )
    return result


def _referring_to(kind: Kind, rule: str) -> list[tuple[Kind, Column[Any]]]:
    return [
        (child, column)
        for child in KINDS.values()
        for column in child.table.c
        for key in column.foreign_keys
        if key.column.table is kind.table and key.ondelete == rule
    ]


def _in_portions(ids: Iterable[int]) -> Iterable[list[int]]:
    ordered = sorted(ids)
    for start in range(0, len(ordered), IDS_PER_STATEMENT):
        yield ordered[start : start + IDS_PER_STATEMENT]


def _in_words(kind: Kind) -> str:
    return kind.table.name.replace("_", " ")
