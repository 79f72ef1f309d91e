"""Checks of single fields of a record: each returns the problem as an InputError, or None when there is none.

Returned rather than raised, so that the preview of a file can show every problem of a line at once.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable
from datetime import UTC, date, datetime
from functools import lru_cache
from typing import TypeAlias
from zoneinfo import ZoneInfo

from planner.checks import QUANTITIES, checked, in_unit
from planner.errors import InputError

Problem: TypeAlias = InputError | None

# Judgement: nobody's records reach outside; a year typed as 0026 or 2206 does.
EARLIEST = datetime(1950, 1, 1, tzinfo=UTC)
LATEST = datetime(2100, 1, 1, tzinfo=UTC)

LONGEST_NAME = 200
LONGEST_TEXT = 10_000

_WALL_CLOCK = re.compile(r"([01]\d|2[0-3]):[0-5]\d")


def number(field: str, value: object, quantity: str, *, optional: bool = False) -> Problem:
    """A finite number in the range of a row of `checks.QUANTITIES`."""
    if value is None and optional:
        return None
    known = QUANTITIES[quantity]
    if isinstance(value, float | int) and not isinstance(value, bool):
        if known.low <= value <= known.high:
            return None
        if value != value:
            return InputError(field, value, f"a finite number{in_unit(known.unit)} ({known.meaning})")
        try:
            checked(quantity, value, field)
        except InputError as problem:
            return problem
    return InputError(field, value, f"a number{in_unit(known.unit)} ({known.meaning})")


def whole(field: str, value: object, low: int, high: int, *, optional: bool = False) -> Problem:
    """A whole number from low to high."""
    if value is None and optional:
        return None
    if isinstance(value, int) and not isinstance(value, bool) and low <= value <= high:
        return None
    return InputError(field, value, f"a whole number from {low} to {high}")


def reference(field: str, value: object, *, optional: bool = False) -> Problem:
    """The id of a stored record (whether it exists is for the store to say)."""
    if value is None and optional:
        return None
    if isinstance(value, int) and not isinstance(value, bool) and value > 0:
        return None
    return InputError(field, value, "the id of a stored record")


def flag(field: str, value: object, *, optional: bool = False) -> Problem:
    """True or False."""
    if isinstance(value, bool) or (optional and value is None):
        return None
    return InputError(field, value, "yes or no")


def text(field: str, value: object, *, longest: int = LONGEST_TEXT) -> Problem:
    """Any text, also none, that a file in UTF-8 can hold."""
    if not isinstance(value, str):
        return InputError(field, value, "text")
    if len(value) > longest:
        return InputError(field, value[:40] + "…", f"at most {longest} characters")
    if not value.isascii() and any("\ud800" <= character <= "\udfff" for character in value):
        return InputError(field, value, "text without broken characters")
    if "\0" in value:
        return InputError(field, value, "text without null characters")
    return None


def name(field: str, value: object) -> Problem:
    """A text on one line that is not empty and has no blanks around it."""
    problem = text(field, value, longest=LONGEST_NAME)
    if problem is not None:
        return problem
    if not isinstance(value, str) or not value or value != value.strip() or not value.isprintable():
        return InputError(field, value, "a name on one line, without blanks around it")
    return None


def word(field: str, value: object, allowed: Collection[str]) -> Problem:
    """One of a few words."""
    if isinstance(value, str) and value in allowed:
        return None
    return InputError(field, value, "one of: " + ", ".join(allowed))


def words(field: str, value: object, allowed: Collection[str]) -> Problem:
    """A tuple of different words out of a few."""
    if value == ():
        return None
    if not isinstance(value, tuple) or not all(isinstance(each, str) for each in value):
        return InputError(field, value, "a tuple of words")
    unknown = [each for each in value if each not in allowed]
    if unknown:
        return InputError(field, unknown[0], "words out of: " + ", ".join(allowed))
    if len(set(value)) != len(value):
        return InputError(field, value, "each word once")
    return None


def instant(field: str, value: object, *, optional: bool = False) -> Problem:
    """A date and time that knows its zone, within living memory."""
    if value is None and optional:
        return None
    if not isinstance(value, datetime):
        return InputError(field, value, "a date and time")
    if value.tzinfo is None or value.utcoffset() is None:
        return InputError(field, value.isoformat(sep=" "), "a date and time with its zone")
    if not EARLIEST <= value < LATEST:
        return InputError(field, value.isoformat(sep=" "), f"a date from {EARLIEST:%Y} to {LATEST.year - 1}")
    return None


def after(field: str, value: object, earlier_field: str, earlier: object) -> Problem:
    """An instant later than another field's; whether the two are instants is not said here."""
    if not isinstance(value, datetime) or not isinstance(earlier, datetime):
        return None
    if (value.tzinfo is None) != (earlier.tzinfo is None) or value > earlier:
        return None
    return InputError(field, value.isoformat(sep=" "), f"a time after {earlier_field}")


def day(field: str, value: object, *, optional: bool = False) -> Problem:
    """A date without a time, within living memory."""
    if value is None and optional:
        return None
    if not isinstance(value, date) or isinstance(value, datetime):
        return InputError(field, value, "a date")
    if not EARLIEST.year <= value.year < LATEST.year:
        return InputError(field, value.isoformat(), f"a date from {EARLIEST:%Y} to {LATEST.year - 1}")
    return None


def wall_clock(field: str, value: object) -> Problem:
    """A time of day as HH:MM."""
    if isinstance(value, str) and _WALL_CLOCK.fullmatch(value):
        return None
    return InputError(field, value, "a time of day from 00:00 to 23:59")


@lru_cache(maxsize=1024)
def _is_zone(key: str) -> bool:
    try:
        ZoneInfo(key)
    except (ValueError, OSError):  # ZoneInfoNotFoundError is a KeyError on top of these
        return False
    except KeyError:
        return False
    return True


def zone(field: str, value: object) -> Problem:
    """An IANA time zone that this machine knows."""
    if isinstance(value, str) and value and _is_zone(value):
        return None
    return InputError(field, value, "an IANA time zone such as Europe/Vienna")


def found(problems: Iterable[Problem]) -> list[InputError]:
    """The problems that there are."""
    return [problem for problem in problems if problem is not None]
