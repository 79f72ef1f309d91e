"""What a kind of file is: its columns, how a line becomes a record and a record a line again."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from typing import Final, Generic, TypeVar

from planner.errors import InputError, RefusedLineError
from planner.exchange.context import FileContext
from planner.exchange.lines import Line
from planner.exchange.tables import Cell, Column, read_table, write_table

R = TypeVar("R")

# So many faults are no slips of typing but another kind of file (judgement).
MOST_FAULTS: Final = 50_000


@dataclass(frozen=True)
class FileKind(Generic[R]):
    """One kind of CSV file: a line is one record."""

    name: str  # in words, and the stem of the file's name
    record: type[R]
    columns: tuple[Column, ...]
    take: Callable[[Line, FileContext], R]
    show: Callable[[R, FileContext], Mapping[str, Cell]]
    problems: Callable[[R], list[InputError]]  # what the domain says against a record
    key_fields: tuple[str, ...]  # two records that agree in these fields are the same thing
    compared: tuple[str, ...] = ()  # columns in which two records of the same key must agree
    remembered: bool = True  # one that was corrected or removed since is not brought back by an import


@dataclass(frozen=True)
class Parsed(Generic[R]):
    """The records of a file with the line of each, the lines refused, and what the user should know."""

    records: tuple[R, ...]
    lines: tuple[int, ...]
    refused: tuple[RefusedLineError, ...]
    notes: tuple[str, ...]


def read_records(kind: FileKind[R], data: bytes, file: str, context: FileContext) -> Parsed[R]:
    """Read a file of one kind: good lines become records, of the others every fault is given.

    Raises: RefusedLineError when the file as a whole cannot be used (see tables.read_table), or has more than
    MOST_FAULTS.
    """
    table = read_table(data, file, kind.columns)
    records: list[R] = []
    lines: list[int] = []
    refused = list(table.refused)
    order = {column.name: number for number, column in enumerate(kind.columns)}
    for row in table.rows:
        line = Line(row, file, table.decimal_comma, context.now)
        for column in kind.columns:
            if column.required and not line.given(column.name):
                line.refuse(column.name, column.wanted)
        record = kind.take(line, context)
        line.note(kind.problems(record))
        if line.faults:
            refused += sorted(line.faults, key=lambda fault: order[fault.field])
            if len(refused) > MOST_FAULTS:
                expected = f"a file of {kind.name}; put the first faults right, the others may be like them"
                raise RefusedLineError(file, row.line, "file", f"more than {MOST_FAULTS} faults", expected)
        else:
            records.append(record)
            lines.append(row.line)
    refused.sort(key=lambda fault: fault.line)
    return Parsed(tuple(records), tuple(lines), tuple(refused), table.notes)


def write_records(kind: FileKind[R], records: Iterable[R], context: FileContext, heading: str = "") -> bytes:
    """Write records as a file of their kind; `heading` becomes comment lines at the top."""
    return write_table(kind.columns, (kind.show(record, context) for record in records), heading)
