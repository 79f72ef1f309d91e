"""One line of a file on its way to becoming a record: cells are taken by meaning, every fault is kept."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Mapping
from datetime import UTC, date, datetime, timedelta
from math import nan
from typing import Final, Protocol, TypeVar

from planner.errors import InputError, RefusedLineError
from planner.exchange.context import folded
from planner.exchange.tables import Row, unprotected
from planner.exchange.times import read_date, read_instant

NO_ZONE: Final = ""  # no place tells the zone of this line: its times need their offset
_NUMBER: Final = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d{1,3})?", re.ASCII | re.IGNORECASE)
_WHOLE: Final = re.compile(r"-?\d{1,9}", re.ASCII)
_NUMBER_AHEAD: Final = re.compile(r"[+-]?\d+([.,]\d+)?(?=\s*[^\d\s.,])", re.ASCII)
_UNREAD: Final = datetime(1970, 1, 1, tzinfo=UTC)  # stands in for a time that was refused
_FIRST_MEASUREMENT: Final = datetime(2000, 1, 1, tzinfo=UTC)
_YES: Final = frozenset({"yes", "y", "true", "1"})
_NO: Final = frozenset({"no", "n", "false", "0"})


class Named(Protocol):
    """A record that files refer to by its name."""

    @property
    def name(self) -> str:
        """The name, unique among its like."""


N = TypeVar("N", bound=Named)
W = TypeVar("W", bound=str)
V = TypeVar("V")


class Line:
    """Takes the cells of one line. What cannot be used is noted in `faults` and a stand-in returned, so that
    all faults of the line are found; a line with faults yields no record.
    """

    def __init__(self, row: Row, file: str, decimal_comma: bool, now: datetime) -> None:
        self.faults: list[RefusedLineError] = []
        self.number_in_file = row.line
        self._cells: Mapping[str, str] = row.cells
        self._file = file
        self._decimal_comma = decimal_comma
        self._now = now

    def refuse(self, column: str, expected: str) -> None:
        """Note that the cell cannot be used and what was expected there."""
        value = self._cells.get(column, "")
        self.faults.append(RefusedLineError(self._file, self.number_in_file, column, value, expected))

    def note(self, problems: Iterable[InputError]) -> None:
        """Note what the domain finds wrong with the record; cells refused already are not named again."""
        by_column = {problem.field.removesuffix("_id"): problem for problem in problems}
        for column in sorted(by_column, key=self.given, reverse=True):
            refused = {fault.field for fault in self.faults}
            # What is wrong with a value that stands in for an empty cell follows from another cell.
            if column not in refused and (self.given(column) or not refused):
                self.refuse(column, by_column[column].expected)

    def given(self, column: str) -> bool:
        """Tell whether the cell is there and filled."""
        return bool(self._cells.get(column))

    def text(self, column: str, default: str = "") -> str:
        """Return the text of the cell, `default` if it is empty."""
        return unprotected(self._cells.get(column, "")) or default

    def number(self, column: str, default: float = nan) -> float:
        """Return the number in the cell, `default` if it is empty."""
        return self._taken(column, self._read_number, default)

    def optional_number(self, column: str) -> float | None:
        """Return the number in the cell, None if it is empty."""
        return self.number(column) if self.given(column) else None

    def percentage(self, column: str) -> float:
        """Return the percentage in the cell; a fraction is refused rather than guessed at."""
        value = self.number(column)
        if 0.0 < value <= 1.0:
            self.refuse(column, f"a percentage, not a fraction: write {value * 100.0:g}")
        return value

    def whole_number(self, column: str) -> int | None:
        """Return the whole number in the cell, None if it is empty."""

        def read(cell: str) -> int:
            if not _WHOLE.fullmatch(cell):
                raise InputError(column, cell, "a whole number")
            return int(cell)

        return self._taken(column, read, None)

    def word(self, column: str, allowed: tuple[W, ...], default: W) -> W:
        """Return which of the allowed words the cell holds, `default` if it is empty."""

        def read(cell: str) -> W:
            for each in allowed:
                if folded(each) == folded(cell):
                    return each
            raise InputError(column, cell, " or ".join(allowed))

        return self._taken(column, read, default)

    def optional_yes(self, column: str) -> bool | None:
        """Return True for yes, False for no, None for an empty cell."""

        def read(cell: str) -> bool:
            if cell.casefold() in _YES | _NO:
                return cell.casefold() in _YES
            raise InputError(column, cell, "yes or no")

        return self._taken(column, read, None)

    def yes(self, column: str, default: bool) -> bool:
        """Return True for yes, False for no, `default` for an empty cell."""
        answer = self.optional_yes(column)
        return default if answer is None else answer

    def day(self, column: str) -> date | None:
        """Return the day in the cell, None if it is empty."""
        return self._taken(column, read_date, None)

    def instant(self, column: str, zone: str | None) -> datetime:
        """Return the instant in the cell. Wall-clock times are read in `zone`; None says that the place was
        refused: the line is lost, so any zone will do to find what else is wrong with it.
        """
        return self._taken(column, lambda cell: read_instant(cell, "UTC" if zone is None else zone), _UNREAD)

    def optional_instant(self, column: str, zone: str | None) -> datetime | None:
        """Return the instant in the cell, None if it is empty."""
        return self.instant(column, zone) if self.given(column) else None

    def measured_at(self, column: str, zone: str | None) -> datetime:
        """Return the instant of something measured: not before 2000, not later than a day from now."""
        moment = self.instant(column, zone)
        latest = self._now + timedelta(days=1)
        if moment is not _UNREAD and not _FIRST_MEASUREMENT <= moment <= latest:
            self.refuse(column, f"a time between 2000 and now ({self._now:%Y-%m-%d}), at most a day ahead")
        return moment

    def named(self, column: str, what: str, known: Mapping[str, N]) -> N | None:
        """Return the record of that name (`known`: by folded name); None, and a fault, if there is none."""

        def read(cell: str) -> N:
            record = known.get(folded(unprotected(cell)))
            if record is None:
                names = sorted(each.name for each in known.values())
                listed = ", ".join(names[:12]) + (" and others" if len(names) > 12 else "")
                raise InputError(column, cell, f"{what} known here ({listed or 'there is none yet'})")
            return record

        return self._taken(column, read, None)

    def _taken(self, column: str, read: Callable[[str], V], default: V) -> V:
        """Return what `read` makes of a filled cell; a refusal becomes a fault of this line."""
        cell = self._cells.get(column, "")
        if not cell:
            return default
        try:
            return read(cell)
        except InputError as refusal:
            self.refuse(column, refusal.expected)
            return default

    def _read_number(self, cell: str) -> float:
        text = cell.replace("−", "-")
        if self._decimal_comma and text.count(",") == 1 and "." not in text:
            text = text.replace(",", ".")
        if not _NUMBER.fullmatch(text):
            bare = _NUMBER_AHEAD.match(text)
            hint = f" without unit or sign: {bare.group()}" if bare else " with a decimal point"
            raise InputError("number", cell, f"a number{hint}")
        return float(text)
