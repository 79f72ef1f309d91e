"""Files into the store: a preview writes nothing, an import is kept whole or not at all; the demo season."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from datetime import UTC, datetime
from pathlib import Path
from typing import Any, Final

from planner.errors import RefusedLineError, StoreError
from planner.exchange.context import FileContext, folded
from planner.exchange.kinds import FileKind, Parsed, read_records
from planner.exchange.readings_file import READINGS
from planner.exchange.registry import KINDS, kind_called, recognised
from planner.exchange.tables import Column, cell_text, read_table
from planner.exchange.times import read_instant
from planner.season.model import Driver, Place, Round, Session, Stay
from planner.services.workspace import FROZEN_CLOCK, mark_begun_empty
from planner.store.store import Store

READINGS_KIND: Final = READINGS.name
DEMO_BY: Final = "demo"
DEMO_CLOCK_FILE: Final = "clock.csv"


@dataclass(frozen=True)
class ImportReport:
    """What an import did, or in a preview would do."""

    file: str
    kind: str
    records: tuple[Any, ...]  # those taken; without ids in a preview
    already_there: int
    refused: tuple[RefusedLineError, ...]  # every fault; a line may have several
    notes: tuple[str, ...]  # what the user should know about how the file was read
    change_set_id: int | None = None  # by which an import can be taken back; None in a preview

    @property
    def taken(self) -> int:
        """How many records are new."""
        return len(self.records)

    @property
    def refused_lines(self) -> int:
        """How many lines were refused."""
        return len({fault.line for fault in self.refused})


def preview_file(
    store: Store, data: bytes, file: str, *, by: str, now: datetime, kind: str | None = None
) -> ImportReport:
    """Tell what an import of the file would do; writes nothing.

    Parameters: `data` are the bytes of the file, `file` its name for messages, `kind` one of the kinds of
    file (None = told from the header), `by` who imports, `now` the present instant.
    Raises: InputError when the file as a whole cannot be used.
    """
    file_kind = kind_called(kind) if kind else recognised(data, file)
    context = _context(store, now)
    parsed = read_records(file_kind, data, file, context)
    return _sorted_out(store, file_kind, parsed, context, file, by)


def import_file(
    store: Store, data: bytes, file: str, *, by: str, now: datetime, kind: str | None = None
) -> ImportReport:
    """Import the good lines of a file in one transaction; a second import of the same file adds nothing.

    Parameters and errors as in `preview_file`.
    """
    file_kind = kind_called(kind) if kind else recognised(data, file)
    context = _context(store, now)
    parsed = read_records(file_kind, data, file, context)
    with store.transaction(by, f"import of {file}") as change_set_id:
        report = _sorted_out(store, file_kind, parsed, context, file, by)
        kept = store.add_all(report.records, by=by)
    return replace(report, records=tuple(kept), change_set_id=change_set_id)


def preview_readings(store: Store, data: bytes, file: str, by: str, now: datetime) -> ImportReport:
    """Tell what an import of a file of readings would do; writes nothing."""
    return preview_file(store, data, file, by=by, now=now, kind=READINGS_KIND)


def import_readings(store: Store, data: bytes, file: str, by: str, now: datetime) -> ImportReport:
    """Import the good lines of a file of readings in one transaction."""
    return import_file(store, data, file, by=by, now=now, kind=READINGS_KIND)


def demo_folder() -> Path:
    """Return the folder of the demo season: inside an installed package, or beside it in a checkout.

    Raises: StoreError when it is in neither place.
    """
    package = Path(__file__).resolve().parents[1]
    for folder in (package / "_demo_data", package.parent / "demo_data"):
        if (folder / DEMO_CLOCK_FILE).is_file():
            return folder
    raise StoreError("the demo season is missing from this installation: install the program again")


def load_demo(store: Store) -> None:
    """Fill an empty store with the invented season and stop its clock on the demo's morning; all or nothing.

    Raises: StoreError when the store has drivers or places already.
    """
    anybody = len(store.all(Driver)) + len(store.all(Place))
    if anybody:
        raise StoreError(f"{store.path} holds a season already: the demo needs an empty store")
    folder = demo_folder()
    frozen_at = _demo_clock(folder)
    with store.transaction(DEMO_BY, "the invented demo season"):
        for kind in KINDS:
            file = f"{kind.name.replace(' ', '_')}.csv"
            data = (folder / file).read_bytes()
            report = import_file(store, data, file, by=DEMO_BY, now=frozen_at, kind=kind.name)
            if report.refused:
                raise StoreError(f"the demo season is damaged: {report.refused[0]}")
        store.set_setting(FROZEN_CLOCK, frozen_at.isoformat())


def start_empty(store: Store) -> None:
    """Begin without data: the clock is the real one, and the demo is not offered again."""
    store.set_setting(FROZEN_CLOCK, None)
    mark_begun_empty(store)


def _context(store: Store, now: datetime) -> FileContext:
    return FileContext(
        now=now.astimezone(UTC),
        drivers=tuple(store.all(Driver)),
        places=tuple(store.all(Place)),
        rounds=tuple(store.all(Round)),
        sessions=tuple(store.all(Session)),
        stays=tuple(store.all(Stay)),
    )


def _demo_clock(folder: Path) -> datetime:
    column = Column("clock_frozen_at", "the instant at which the demo's clock stands", required=True)
    data = (folder / DEMO_CLOCK_FILE).read_bytes()
    (row,) = read_table(data, DEMO_CLOCK_FILE, [column]).rows
    return read_instant(row.cells[column.name], None)


def _sorted_out(
    store: Store, kind: FileKind[Any], parsed: Parsed[Any], context: FileContext, file: str, by: str
) -> ImportReport:
    """Part the records that are new from those already there and those that contradict what is there."""
    held = set()
    if kind.remembered:
        held = {_comparable(values) for values in store.held_before(kind.record, *kind.key_fields)}
    known = {_key(kind, record): record for record in store.all(kind.record)}
    new: list[Any] = []
    already_there = 0
    no_longer = 0
    refused = list(parsed.refused)
    for record, line in zip(parsed.records, parsed.lines, strict=True):
        key = _key(kind, record)
        if key in known:
            contradictions = _contradictions(kind, record, known[key], context, file, line)
            refused += contradictions
            already_there += not contradictions
        elif key in held:
            already_there += 1
            no_longer += 1
        else:
            known[key] = record
            new.append(_signed(record, by))
    refused.sort(key=lambda fault: fault.line)
    notes = parsed.notes
    if no_longer:
        notes += (f"{no_longer} already there were corrected or removed since and are not brought back",)
    return ImportReport(file, kind.name, tuple(new), already_there, tuple(refused), notes)


def _key(kind: FileKind[Any], record: Any) -> tuple[Any, ...]:
    return _comparable(getattr(record, field) for field in kind.key_fields)


def _comparable(values: Iterable[Any]) -> tuple[Any, ...]:
    """Texts that differ only in case or spacing are the same name."""
    return tuple(folded(value) if isinstance(value, str) else value for value in values)


def _contradictions(
    kind: FileKind[Any], record: Any, known: Any, context: FileContext, file: str, line: int
) -> list[RefusedLineError]:
    """Name the columns in which the file says something else than what is there under the same key."""
    given, there = (
        {column: cell_text(cells[column]) for column in kind.compared}
        for cells in (kind.show(record, context), kind.show(known, context))
    )
    expected = "{} as already there; correct it in the program, not by an import"
    return [
        RefusedLineError(file, line, column, given[column], expected.format(there[column] or "nothing"))
        for column in kind.compared
        if given[column] != there[column]
    ]


def _signed(record: Any, by: str) -> Any:
    """Note who imported the record where the file does not say who typed it."""
    if getattr(record, "entered_by", None) == "":
        return replace(record, entered_by=by)
    return record
