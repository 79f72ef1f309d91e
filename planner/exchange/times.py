"""Times in files: an instant with its offset, or the wall clock of a place."""

from __future__ import annotations

import re
from datetime import UTC, date, datetime
from typing import Final
from zoneinfo import ZoneInfo

from planner.errors import InputError

_ISO: Final = re.compile(
    r"(?P<day>\d{4}-\d{2}-\d{2})[T ]+(?P<time>\d{1,2}:\d{2}(:\d{2}(\.\d{1,6})?)?)"
    r"\s?(?P<offset>Z|[+-]\d{2}:?\d{2})?",
    re.ASCII | re.IGNORECASE,
)
_DAY_FIRST: Final = re.compile(
    r"(?P<d>\d{1,2})\.(?P<m>\d{1,2})\.(?P<y>\d{4}) +(?P<time>\d{1,2}:\d{2}(:\d{2})?)", re.ASCII
)
WANTED: Final = "a date and time: 2026-05-14T07:12-06:00, or local 2026-05-14 07:12 or 14.05.2026 07:12"
YEARS: Final = (1900, 2199)


def read_instant(text: str, zone: str | None) -> datetime:
    """Return the instant in UTC that `text` names.

    Parameters: `text` is ISO 8601 with an offset, or a wall-clock time (ISO or DD.MM.YYYY HH:MM) in `zone`,
    an IANA name; without a zone only times with an offset can be read.
    Raises: InputError for anything else, and for a wall-clock time that occurs twice or not at all because
    the clocks change.
    """
    moment = _parsed(text)
    if moment is None:
        raise InputError("time", text, WANTED)
    if not YEARS[0] <= moment.year <= YEARS[1]:  # also keeps the conversion between zones from overflowing
        raise InputError("time", text, f"a year from {YEARS[0]} to {YEARS[1]}")
    if moment.tzinfo is not None:
        return moment.astimezone(UTC)
    if not zone:
        raise InputError("time", text, "a time with its offset from UTC, such as 2026-05-14T07:12-06:00")
    return _at_wall_clock(moment, zone, text)


def read_date(text: str) -> date:
    """Return the day that `text` names, as YYYY-MM-DD or DD.MM.YYYY.

    Raises: InputError for anything else.
    """
    day_first = re.fullmatch(r"(\d{1,2})\.(\d{1,2})\.(\d{4})", text, re.ASCII)
    try:
        if day_first:
            day, month, year = (int(part) for part in day_first.groups())
            return date(year, month, day)
        if re.fullmatch(r"\d{4}-\d{2}-\d{2}", text, re.ASCII):
            return date.fromisoformat(text)
    except ValueError:
        pass
    raise InputError("date", text, "a day such as 2026-05-14 or 14.05.2026")


def _parsed(text: str) -> datetime | None:
    iso = _ISO.fullmatch(text)
    day_first = None if iso else _DAY_FIRST.fullmatch(text)
    try:
        if iso:
            offset = (iso["offset"] or "").upper()
            return datetime.fromisoformat(f"{iso['day']}T{_two_digit_hour(iso['time'])}{offset}")
        if day_first:
            day = f"{int(day_first['y']):04d}-{int(day_first['m']):02d}-{int(day_first['d']):02d}"
            return datetime.fromisoformat(f"{day}T{_two_digit_hour(day_first['time'])}")
    except ValueError:  # a 30th of February, an hour 25
        pass
    return None


def _two_digit_hour(time: str) -> str:
    return time if time[2] == ":" else f"0{time}"


def _at_wall_clock(wall: datetime, zone: str, text: str) -> datetime:
    """Return the one instant at which the clocks of the zone show `wall`."""
    instants = [wall.replace(tzinfo=ZoneInfo(zone), fold=fold).astimezone(UTC) for fold in (0, 1)]
    if instants[0] == instants[1]:
        return instants[0]
    if instants[0].astimezone(ZoneInfo(zone)).replace(tzinfo=None) != wall:
        raise InputError("time", text, f"a time that exists: the clocks of {zone} jump over it that night")
    offsets = " or ".join(each.astimezone(ZoneInfo(zone)).strftime("%z") for each in instants)
    raise InputError("time", text, f"its offset as well ({offsets}): the clocks of {zone} show it twice")
