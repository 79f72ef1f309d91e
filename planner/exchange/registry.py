"""Every kind of file, in the order in which they refer to each other, and how to tell them apart."""

from __future__ import annotations

from typing import Any, Final

from planner.errors import InputError
from planner.exchange.body_files import COCKPIT_CONDITIONS, MORNING_MARKS, NOTICES, SICK_PERIODS, WEIGHINGS
from planner.exchange.kinds import FileKind
from planner.exchange.readings_file import READINGS
from planner.exchange.season_files import (
    COMMITMENTS,
    DRIVERS,
    LEGS,
    PLACES,
    PRESSURES,
    ROUNDS,
    SESSIONS,
    STAYS,
)
from planner.exchange.tables import header_names

KINDS: Final[tuple[FileKind[Any], ...]] = (
    PLACES,
    DRIVERS,
    ROUNDS,
    SESSIONS,
    COMMITMENTS,
    STAYS,
    LEGS,
    PRESSURES,
    SICK_PERIODS,
    READINGS,
    NOTICES,
    COCKPIT_CONDITIONS,
    WEIGHINGS,
    MORNING_MARKS,
)


def kind_called(name: str) -> FileKind[Any]:
    """Return the kind of file of that name.

    Raises: InputError listing the kinds when there is none.
    """
    for kind in KINDS:
        if kind.name == name:
            return kind
    raise InputError("kind", name, ", ".join(kind.name for kind in KINDS))


def recognised(data: bytes, file: str) -> FileKind[Any]:
    """Tell the kind of a file by its header: all required columns there, and the fewest names unknown.

    Raises: InputError when no kind fits, or several fit equally.
    """
    names = header_names(data, file, [column for kind in KINDS for column in kind.columns])
    fitting = [(unknown, kind) for kind in KINDS if (unknown := _unknown_names(kind, names)) is not None]
    fewest = min((unknown for unknown, _ in fitting), default=0)
    best = [kind for unknown, kind in fitting if unknown == fewest]
    if len(best) == 1:
        return best[0]
    expected = "the columns of one kind: " + ", ".join(kind.name for kind in best or KINDS)
    raise InputError(f"{file}, header", ", ".join(names), expected)


def _unknown_names(kind: FileKind[Any], names: tuple[str, ...]) -> int | None:
    """Return how many names the kind does not know, None if a required column is missing."""
    given = set(names)
    for column in kind.columns:
        if column.required and given.isdisjoint({column.name, *column.aliases}):
            return None
    return len(given - {name for column in kind.columns for name in (column.name, *column.aliases)})
