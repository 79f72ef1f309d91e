"""CSV: tolerant reading, strict writing. Bytes <-> rows of text; what the text means is the kinds' business.

Read: UTF-8 with or without a byte-order mark, UTF-16 with one, Windows-1252 as the last resort (and said so);
comma, semicolon or tab; any line ending; lines that start with # are comments, and so is a first line sep=;
that tells a spreadsheet the separator. Written: UTF-8 with a byte-order mark (a spreadsheet would otherwise
take it for Windows-1252), comma, decimal point, line feed.
"""

from __future__ import annotations

import codecs
import csv
import io
import re
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import date, datetime
from typing import Final, TypeAlias

from planner.errors import RefusedLineError

Cell: TypeAlias = str | float | bool | date | datetime | None

SEPARATORS: Final = (",", ";", "\t")
# A spreadsheet takes a cell that starts with one of these for a formula; # would be read back as a comment.
_UNSAFE_START: Final = re.compile(r"'*[=+\-@\t#]")
_SEPARATOR_HINT: Final = re.compile(r"sep=.?\s*", re.IGNORECASE)
_HEADER: Final = "header"
# More than a team writes in many seasons; memory and patience end somewhere above (judgement).
MOST_LINES: Final = 300_000


@dataclass(frozen=True)
class Column:
    """One column of a kind of file: its name, what is wanted in its cells, other names it may bear."""

    name: str
    wanted: str
    required: bool = False
    aliases: tuple[str, ...] = ()


@dataclass(frozen=True)
class Row:
    """One line under the header: its number as an editor shows it, and its cells by column name."""

    line: int
    cells: Mapping[str, str]


@dataclass(frozen=True)
class Table:
    """A file that was read: its rows, the lines that are no rows, and what the user should know."""

    rows: tuple[Row, ...]
    refused: tuple[RefusedLineError, ...]
    decimal_comma: bool  # a comma may stand for the decimal point: the separator is another
    notes: tuple[str, ...]


class _Lines:
    """The physical lines of a text, counted; comments are passed over unless a quoted cell is still open."""

    def __init__(self, text: str) -> None:
        self._lines = io.StringIO(text, newline="")
        self.number = 0
        self.first_of_record = 0
        self.comments = 0
        self._record_open = False

    def begin_record(self) -> None:
        self._record_open = False

    def __iter__(self) -> Iterator[str]:
        return self

    def __next__(self) -> str:
        for line in self._lines:
            self.number += 1
            if not self._record_open:
                if line.startswith("#"):
                    self.comments += 1
                    continue
                if not line.strip() or (self.number == 1 and _SEPARATOR_HINT.fullmatch(line)):
                    continue
                self._record_open = True
                self.first_of_record = self.number
            return line
        raise StopIteration


def read_table(data: bytes, file: str, columns: Sequence[Column]) -> Table:
    """Read the bytes of a CSV file; `columns` are those that this kind of file has.

    Raises: RefusedLineError when the file as a whole cannot be used: no text, no header, a required column
    missing or given twice, more than MOST_LINES. Single faulty lines are returned in `refused` instead.
    """
    text, notes = _decoded(data, file)
    lines = _Lines(text)
    separator, names = _header(lines, file, columns)
    present, ignored = _present_columns(names, lines.first_of_record, file, columns)
    if ignored:
        notes = (*notes, f"columns not known here and ignored: {', '.join(ignored)}")
    comments_above = lines.comments
    rows: list[Row] = []
    refused: list[RefusedLineError] = []
    reader = csv.reader(lines, delimiter=separator, strict=True)
    while True:
        lines.begin_record()
        try:
            cells = [cell.strip() for cell in next(reader)]
        except StopIteration:
            break
        except csv.Error as error:
            refused.append(_broken_quotes(file, lines, error))
            continue
        if not any(cells):
            continue
        if any(cells[len(names) :]):
            refused.append(_too_many_cells(file, lines.first_of_record, cells, len(names)))
            continue
        cells += [""] * (len(names) - len(cells))
        by_name = {name: cells[position] for position, name in present.items()}
        rows.append(Row(lines.first_of_record, by_name))
        if len(rows) > MOST_LINES:
            expected = f"at most {MOST_LINES} lines: split it into several files"
            raise RefusedLineError(file, lines.first_of_record, "file", "more lines", expected)
    passed_over = lines.comments - comments_above
    if passed_over:  # said, because a name could begin with # as well
        notes = (*notes, f"lines that start with # passed over as comments: {passed_over}")
    return Table(tuple(rows), tuple(refused), separator != ",", notes)


def header_names(data: bytes, file: str, columns: Sequence[Column]) -> tuple[str, ...]:
    """Return the names in the header line as written, lower case, for telling kinds of file apart.

    Raises: RefusedLineError when there is no header with at least one of `columns`.
    """
    text, _ = _decoded(data, file)
    return tuple(_header(_Lines(text), file, columns)[1])


def write_table(columns: Sequence[Column], rows: Iterable[Mapping[str, Cell]], heading: str = "") -> bytes:
    """Write rows as CSV in the one dialect of this program; `heading` becomes comment lines at the top."""
    out = io.StringIO(newline="")
    for line in heading.splitlines():
        out.write(f"# {line}\n")
    writer = csv.writer(out, lineterminator="\n")
    names = [column.name for column in columns]
    writer.writerow(names)
    for row in rows:
        writer.writerow([cell_text(row.get(name)) for name in names])
    return codecs.BOM_UTF8 + out.getvalue().encode("utf-8")


def cell_text(value: Cell) -> str:
    """Return a cell as it is written: text made safe for spreadsheets, its line ends plain; numbers exact."""
    if value is None:
        return ""
    if isinstance(value, str):
        return protected(value.strip().replace("\r\n", "\n").replace("\r", "\n"))
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, date):  # a datetime is one, too
        return value.isoformat()
    return repr(int(value)) if float(value).is_integer() else repr(float(value))


def protected(text: str) -> str:
    """Put an apostrophe before text that a spreadsheet would take for a formula; see `unprotected`."""
    return f"'{text}" if _UNSAFE_START.match(text) else text


def unprotected(text: str) -> str:
    """Undo `protected`; any other text stays as it is, with its apostrophes."""
    return text[1:] if text.startswith("'") and _UNSAFE_START.match(text) else text


def _decoded(data: bytes, file: str) -> tuple[str, tuple[str, ...]]:
    """Return the text and, when the encoding had to be guessed, a note that says so."""
    try:
        if data.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
            return data.decode("utf-16"), ()
        if b"\0" in data:
            raise _no_text(data, file)
        return data.decode("utf-8-sig"), ()
    except UnicodeDecodeError:
        pass
    try:
        return data.decode("cp1252"), ("not UTF-8: read as Windows-1252, check the accents in names",)
    except UnicodeDecodeError:
        raise _no_text(data, file) from None


def _no_text(data: bytes, file: str) -> RefusedLineError:
    start = data[:12].decode("ascii", errors="replace")
    return RefusedLineError(file, 1, "file", start, "a text file: save the sheet as CSV in UTF-8")


def _header(lines: _Lines, file: str, columns: Sequence[Column]) -> tuple[str, list[str]]:
    """Take the header line; the separator is the one that yields the most known names."""
    required = ", ".join(column.name for column in columns if column.required)
    wanted = f"a header line with the columns {required}" if required else "a header line with column names"
    line = next(lines, None)
    if line is None:
        raise RefusedLineError(file, 1, _HEADER, "", f"{wanted}; the file is empty")
    known = {name for column in columns for name in (column.name, *column.aliases)}
    splits = {separator: _split_header(line, separator) for separator in SEPARATORS}
    separator = max(SEPARATORS, key=lambda each: len(known.intersection(splits[each])))
    if known.isdisjoint(splits[separator]):
        raise RefusedLineError(file, lines.first_of_record, _HEADER, line.strip()[:80], wanted)
    return separator, splits[separator]


def _split_header(line: str, separator: str) -> list[str]:
    try:
        cells = next(csv.reader([line], delimiter=separator), [])
    except csv.Error:  # a cell longer than the reader takes: this is no header
        return []
    names = [re.sub(r"[\s\-]+", "_", cell.strip().lower()) for cell in cells]
    while names and not names[-1]:  # a spreadsheet leaves empty cells at the end
        names.pop()
    return names


def _present_columns(
    names: Sequence[str], line: int, file: str, columns: Sequence[Column]
) -> tuple[dict[int, str], list[str]]:
    """Return the position of every known column and the names of the others."""
    canonical = {alias: column.name for column in columns for alias in (column.name, *column.aliases)}
    present: dict[int, str] = {}
    ignored: list[str] = []
    for position, name in enumerate(names):
        if name not in canonical:
            ignored.append(name or f"(column {position + 1}, no name)")
        elif canonical[name] in present.values():
            raise RefusedLineError(file, line, _HEADER, name, f"one column {canonical[name]}, there are two")
        else:
            present[position] = canonical[name]
    missing = [column.name for column in columns if column.required and column.name not in present.values()]
    if missing:
        expected = f"the missing {', '.join(missing)} as well"
        raise RefusedLineError(file, line, _HEADER, ", ".join(names), expected)
    return present, ignored


def _broken_quotes(file: str, lines: _Lines, error: csv.Error) -> RefusedLineError:
    expected = "quotation marks around the whole cell, closed again"
    if lines.number > lines.first_of_record:
        expected += f"; this cell has swallowed everything to line {lines.number}"
    return RefusedLineError(file, lines.first_of_record, "line", str(error), expected)


def _too_many_cells(file: str, line: int, cells: Sequence[str], wanted: int) -> RefusedLineError:
    expected = f"{wanted} cells as in the header (a comma inside a cell needs quotation marks around it)"
    return RefusedLineError(file, line, "line", f"{len(cells)} cells", expected)
