"""The one error tree. Every message is a single line that says what to do."""

from __future__ import annotations

from typing import Final

LONGEST_SHOWN: Final = 80


def _shown(value: object) -> str:
    """The value on one line; a text is cut where it would drown the rest of the message."""
    if isinstance(value, str) and len(value) > LONGEST_SHOWN:
        return repr(f"{value[:LONGEST_SHOWN]}…")
    return repr(value)


class PlannerError(Exception):
    """Root of all errors that a user may see; its text is one plain line."""


class InputError(PlannerError):
    """A value that cannot be used: names the field, the value and what was expected."""

    def __init__(self, field: str, value: object, expected: str) -> None:
        self.field = field
        self.value = value
        self.expected = expected
        super().__init__(f"{field}: {_shown(value)} cannot be used, expected {expected}")


class RefusedLineError(InputError):
    """A line of a file that cannot be used: file, line (1 = the header), column, value, what was wanted."""

    def __init__(self, file: str, line: int, column: str, value: object, expected: str) -> None:
        super().__init__(column, value, expected)
        self.file = file
        self.line = line
        self.args = (f"{file}, line {line}, column {column}: {_shown(value)} refused, expected {expected}",)


class NotFoundError(PlannerError):
    """Something was asked for by a name or number that the store does not hold."""


class StoreError(PlannerError):
    """The database cannot be opened, is newer than this program, or refused a write."""
