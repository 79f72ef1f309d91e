"""Writing inside one open change set: every write is validated, kept and logged, or refused as a whole."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from itertools import takewhile
from operator import attrgetter
from typing import Any

from sqlalchemy import Column, Connection, func, insert, literal, select, update
from sqlalchemy.exc import IntegrityError

from planner.errors import InputError, NotFoundError, StoreError
from planner.store import schema
from planner.store.bulk import insert_columns
from planner.store.history import Action, ChangeSet, in_force, newest_first
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
    record_from,
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
    records_written: bool = False
    settings_written: bool = False

    # Adding -----------------------------------------------------------------------------------------------

    def add_all(self, records: Iterable[R], why: str) -> list[R]:
        """Keep new records and return them with their ids, in the order given."""
        by_kind: dict[type[R], list[R]] = defaultdict(list)
        places: list[tuple[type[R], int]] = []
        for given in records:
            kind_of(type(given))
            record = plain(given)
            validate(record)
            if record.id != 0:
                raise InputError("id", record.id, "0 for a record that is not stored yet")
            group = by_kind[type(record)]
            places.append((type(record), len(group)))
            group.append(record)
        kept = {record: self._add_kind(record, group, why) for record, group in by_kind.items()}
        return [kept[record][position] for record, position in places]

    def _add_kind(self, record: type[R], records: Sequence[R], why: str) -> list[R]:
        kind = KINDS[record]
        rows = list(map(attrgetter(*kind.fields), records))
        columns = list(zip(*rows, strict=True))
        for field, values in zip(kind.fields, columns, strict=True):
            self._check_references(kind, field, values)
        # Rows are never deleted, so the ids after the highest one are free as long as the write lock is held.
        highest = self.connection.execute(select(func.coalesce(func.max(kind.table.c.id), 0))).scalar_one()
        ids = range(highest + 1, highest + 1 + len(rows))
        try:
            insert_columns(self.connection, kind, ids, columns)
        except IntegrityError as error:
            # The rows before the refused one are in the table by now: they are none that were there already.
            others = kind.table.c.id <= highest
            raise self._why_refused(kind, map(vars, records), error, others) from error
        self._log_where(kind, "add", kind.table.c.id > highest, why)
        return [record_from(record, (*row, id)) for row, id in zip(rows, ids, strict=True)]

    # Changing, removing, restoring --------------------------------------------------------------------------

    def change(self, given: R, why: str) -> R:
        """Keep a record's new fields; nothing is written when they equal the old ones."""
        kind = kind_of(type(given))
        record = plain(given)
        validate(record)
        before = self._live(kind, record.id).values
        after = values_of(kind, record)
        if before != after:
            for field, value in after.items():
                self._check_references(kind, field, [value])
            self._update(kind, record.id, after)
            self._log_change(kind, record.id, before, why)
        return record

    def _update(self, kind: Kind, record_id: int, after: Mapping[str, Any]) -> None:
        try:
            self.connection.execute(update(kind.table).where(kind.table.c.id == record_id).values(**after))
        except IntegrityError as error:
            raise self._why_refused(kind, [after], error, kind.table.c.id != record_id) from error

    def _log_change(self, kind: Kind, record_id: int, before: Mapping[str, Any], why: str) -> None:
        self.connection.execute(
            insert(schema.change),
            {
                "change_set_id": self.id,
                "kind": kind.name,
                "record_id": record_id,
                "action": "change",
                "before": to_json(before),
                "why": why,
            },
        )
        self.records_written = True

    def remove(self, kind: Kind, record_id: int, why: str) -> None:
        """Remove a record and those that belong to it.

        Raises: StoreError while records that do not belong to it refer to it.
        """
        self._live(kind, record_id)
        going: dict[Kind, set[int]] = defaultdict(set)
        self._gather_belonging(kind, {record_id}, going)
        for each, ids in list(going.items()):
            self._refuse_while_used(each, ids, going)
        for each, ids in going.items():
            self._set_removed(each, ids, why)

    def restore(self, kind: Kind, record_id: int, why: str) -> None:
        """Put back a removed record, and what was removed with it.

        Raises: StoreError when it is not removed, or refers to a record that still is.
        """
        removed_in = self._state(kind, record_id).removed_in
        if removed_in is None:
            raise StoreError(f"{kind.words} {record_id} is not removed")
        touched: set[Kind] = set()
        self._restore_with_belonging(kind, {record_id}, removed_in, why, touched)
        self._refuse_dangling(touched)

    def _gather_belonging(self, kind: Kind, ids: set[int], going: dict[Kind, set[int]]) -> None:
        going[kind] |= ids
        for child, column in _referring_to(kind, "CASCADE"):
            belonging = self._referring_ids(child, column, ids, removed_in=None) - going[child]
            if belonging:
                self._gather_belonging(child, belonging, going)

    def _restore_with_belonging(
        self, kind: Kind, ids: set[int], removed_in: int, why: str, touched: set[Kind]
    ) -> None:
        self._set_live(kind, ids, why)
        touched.add(kind)
        for child, column in _referring_to(kind, "CASCADE"):
            belonging = self._referring_ids(child, column, ids, removed_in=removed_in)
            if belonging:
                self._restore_with_belonging(child, belonging, removed_in, why, touched)

    def _referring_ids(
        self, child: Kind, column: Column[Any], ids: set[int], removed_in: int | None
    ) -> set[int]:
        state = child.table.c.removed_in.is_not_distinct_from(removed_in)
        return {
            id
            for some in _in_portions(ids)
            for id in self.connection.execute(
                select(child.table.c.id).where(column.in_(some), state)
            ).scalars()
        }

    def _refuse_while_used(self, kind: Kind, ids: set[int], going: dict[Kind, set[int]]) -> None:
        for child, column in _referring_to(kind, "RESTRICT"):
            using = self._referring_ids(child, column, ids, removed_in=None) - going[child]
            if using:
                raise StoreError(
                    f"this {kind.words} cannot be removed: {_count(len(using), child)} "
                    f"to it by {column.name}; change or remove them first"
                )

    def _set_removed(self, kind: Kind, ids: Iterable[int], why: str) -> None:
        self._set_state(kind, "remove", ids, self.id, why)

    def _set_live(self, kind: Kind, ids: Iterable[int], why: str) -> None:
        self._set_state(kind, "restore", ids, None, why)

    def _set_state(
        self, kind: Kind, action: Action, ids: Iterable[int], removed_in: int | None, why: str
    ) -> None:
        for some in _in_portions(ids):
            chosen = kind.table.c.id.in_(some)
            try:
                self.connection.execute(update(kind.table).where(chosen).values(removed_in=removed_in))
            except IntegrityError as error:
                rows = [state.values for state in self._states(kind, some).values()]
                raise self._why_refused(kind, rows, error, kind.table.c.id.not_in(some)) from error
            self._log_where(kind, action, chosen, why)

    # Undoing ------------------------------------------------------------------------------------------------

    def undo(self, target: ChangeSet) -> None:
        """Put every record that the target touched back to where it stood before.

        Raises: StoreError when a change set in force touched one of them since.
        """
        self._refuse_if_touched_since(target)
        first_action, first_values = self._before(target)
        appeared: dict[Kind, set[int]] = defaultdict(set)
        was_live: dict[Kind, set[int]] = defaultdict(set)
        for (kind, record_id), action in first_action.items():
            (appeared if action in ("add", "restore") else was_live)[kind].add(record_id)
        replaced: dict[tuple[Kind, int], dict[str, Any]] = {}
        for (kind, record_id), values in first_values.items():
            now = self._state(kind, record_id).values
            if now != {**now, **values}:
                self._update(kind, record_id, values)
                replaced[kind, record_id] = now
        # In the log a record is restored before it changes, and changes before it is removed.
        for kind, ids in was_live.items():
            self._set_live(kind, self._ids_where(kind, ids, live=False), "")
        for (kind, record_id), now in replaced.items():
            self._log_change(kind, record_id, now, "")
        for kind, ids in appeared.items():
            self._set_removed(kind, self._ids_where(kind, ids, live=True), "")
        self._refuse_dangling({kind for kind, _ in first_action})
        self.records_written = True  # that it was undone is kept, also when its writes had cancelled out

    def _before(
        self, target: ChangeSet
    ) -> tuple[dict[tuple[Kind, int], str], dict[tuple[Kind, int], dict[str, Any]]]:
        """For each record of a change set its first action, and the fields before its first change if any."""
        log = schema.change
        actions: dict[tuple[Kind, int], str] = {}
        values: dict[tuple[Kind, int], dict[str, Any]] = {}
        for kind_name, record_id, action, before in self.connection.execute(
            select(log.c.kind, log.c.record_id, log.c.action, log.c.before)
            .where(log.c.change_set_id == target.id)
            .order_by(log.c.id)
        ):
            key = (KIND_BY_NAME[kind_name], record_id)
            actions.setdefault(key, action)
            if action == "change" and key not in values:
                values[key] = from_json(key[0], before)
        return actions, values

    def _refuse_if_touched_since(self, target: ChangeSet) -> None:
        log = schema.change
        touched = select(log.c.kind, log.c.record_id).where(log.c.change_set_id == target.id).subquery()
        touching = set(
            self.connection.execute(
                select(log.c.change_set_id)
                .join(touched, (touched.c.record_id == log.c.record_id) & (touched.c.kind == log.c.kind))
                .where(log.c.change_set_id > target.id)
            ).scalars()
        )
        newer = takewhile(lambda each: each.id > target.id, newest_first(self.connection))
        for each in in_force(newer):
            if each.undoes == target.id:
                raise StoreError(f"change set {target.id} has been undone already")
            # An undo of a newer change set only takes that one out of the way.
            only_clears_the_way = each.undoes is not None and each.undoes > target.id
            if each.id in touching and not only_clears_the_way:
                raise StoreError(
                    f"change set {target.id} cannot be undone: {each.by} changed the same record "
                    f"on {each.at:%Y-%m-%d at %H:%M} UTC (change set {each.id}); undo that first"
                )

    def _refuse_dangling(self, kinds: set[Kind]) -> None:
        for problem in dangling(self.connection, kinds):
            raise StoreError(f"this cannot be done: it would leave {problem}")

    # Looking ------------------------------------------------------------------------------------------------

    def _states(self, kind: Kind, ids: Sequence[int]) -> dict[int, _State]:
        rows = self.connection.execute(
            select(*columns(kind), kind.table.c.removed_in).where(kind.table.c.id.in_(ids))
        )
        return {row[-2]: _State(dict(zip(kind.fields, row[:-2], strict=True)), row[-1]) for row in rows}

    def _state(self, kind: Kind, record_id: int) -> _State:
        states = self._states(kind, [record_id])
        if record_id not in states:
            raise NotFoundError(f"there is no {kind.words} {record_id}")
        return states[record_id]

    def _live(self, kind: Kind, record_id: int) -> _State:
        state = self._state(kind, record_id)
        if state.removed_in is not None:
            raise NotFoundError(f"{kind.words} {record_id} has been removed; restore it first")
        return state

    def _ids_where(self, kind: Kind, ids: Iterable[int], *, live: bool) -> set[int]:
        removed_in = kind.table.c.removed_in
        state = removed_in.is_(None) if live else removed_in.is_not(None)
        return {
            id
            for some in _in_portions(ids)
            for id in self.connection.execute(
                select(kind.table.c.id).where(kind.table.c.id.in_(some), state)
            ).scalars()
        }

    def _check_references(self, kind: Kind, field: str, values: Iterable[Any]) -> None:
        for key in kind.table.c[field].foreign_keys:
            parent = KIND_BY_TABLE[key.column.table.name]
            wanted = set(values) - {None}
            missing = wanted - self._ids_where(parent, wanted, live=True)
            if missing:
                raise InputError(field, min(missing), f"the id of a stored {parent.words}")

    def _why_refused(
        self, kind: Kind, rows: Iterable[Mapping[str, Any]], error: IntegrityError, others: Any
    ) -> Exception:
        """Which record is there already, among `others`; looked for only after the database refused."""
        unique = schema.UNIQUE.get(kind.record, ())
        seen: set[tuple[object, ...]] = set()
        for row in rows if unique else ():
            key = tuple(row[field] for field in unique)
            there = self.connection.execute(
                select(kind.table.c.id).where(
                    *(kind.table.c[field] == row[field] for field in unique),
                    kind.table.c.removed_in.is_(None),
                    others,
                )
            ).first()
            if there is not None or key in seen:
                shown = ", ".join(str(value) for value in key)
                return InputError(", ".join(unique), shown, f"a {kind.words} that is not there already")
            seen.add(key)
        return StoreError(f"the database refused this {kind.words} ({error.orig})")

    def _log_where(self, kind: Kind, action: Action, chosen: Any, why: str) -> None:
        """Log an action that changes no field, for every record that is chosen."""
        log = schema.change
        given = [literal(value) for value in (self.id, kind.name, action, why)]
        self.connection.execute(
            insert(log).from_select(
                ["change_set_id", "kind", "action", "why", "record_id"],
                select(*given, kind.table.c.id).where(chosen).order_by(kind.table.c.id),
            )
        )
        self.records_written = True


def dangling(connection: Connection, kinds: set[Kind] | None = None) -> list[str]:
    """Live records that refer to removed ones, in words; only references from or to `kinds` when given."""
    result = []
    for parent in KINDS.values():
        for child, column in _referring_to(parent):
            if kinds is not None and not kinds & {child, parent}:
                continue
            of_parent = parent.table.alias()
            count = connection.execute(
                select(func.count())
                .select_from(child.table.join(of_parent, column == of_parent.c.id))
                .where(child.table.c.removed_in.is_(None), of_parent.c.removed_in.is_not(None))
            ).scalar_one()
            if count:
                result.append(f"{_count(count, child)} to a removed {parent.words} by {column.name}")
    return result


def _referring_to(kind: Kind, rule: str | None = None) -> list[tuple[Kind, Column[Any]]]:
    return [
        (child, column)
        for child in KINDS.values()
        for column in child.table.c
        for key in column.foreign_keys
        if key.column.table is kind.table and rule in (None, key.ondelete)
    ]


def _in_portions(ids: Iterable[int]) -> Iterable[list[int]]:
    ordered = sorted(ids)
    for start in range(0, len(ordered), IDS_PER_STATEMENT):
        yield ordered[start : start + IDS_PER_STATEMENT]


def _count(count: int, kind: Kind) -> str:
    return f"1 {kind.words} refers" if count == 1 else f"{count} {kind.words} records refer"
