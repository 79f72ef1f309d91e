"""What was typed, on its way into the house's units and instants."""

from __future__ import annotations

import re
from datetime import date, datetime, time
from typing import Final
from zoneinfo import ZoneInfo

from planner.checks import QUANTITIES
from planner.errors import InputError
from planner.units import from_house, to_house

_NUMBER: Final = re.compile(r"[+-]?(\d+([.,]\d*)?|[.,]\d+)", re.ASCII)


def typed_number(field: str, text: str, expected: str) -> float | None:
    """Return the number in a line of text, None when it is blank; a decimal comma and a per cent sign pass.

    Raises: InputError naming the field and what was expected for anything else.
    """
    bare = "".join(text.split()).removesuffix("%")
    if not bare:
        return None
    if not _NUMBER.fullmatch(bare):
        raise InputError(field, text, expected)
    return float(bare.replace(",", "."))


def typed_value(field: str, value: float | None, quantity: str, kind: str, unit: str) -> float:
    """Return a typed value in the house unit, or refuse it in the unit in which it was typed.

    Parameters: `quantity` is a row of `checks.QUANTITIES` and gives the range; `kind` and `unit` are
    those of `units.TO_HOUSE`.
    Raises: InputError naming the field, the value as typed, and the range in the typed unit.
    """
    known = QUANTITIES[quantity]
    wanted = f"{from_house(kind, known.low, unit):.0f} to {from_house(kind, known.high, unit):.0f} {unit}"
    if value is None:
        raise InputError(field, "", wanted)
    in_house = to_house(kind, value, unit)
    if not known.low <= in_house <= known.high:
        raise InputError(field, value, wanted)
    return in_house


def local_instant(field: str, day: date, wall: time, zone: str) -> datetime:
    """Return the UTC instant of a wall-clock time in a zone.

    Raises: InputError when the clocks skip this time on that day.
    """
    local = ZoneInfo(zone)
    instant = datetime.combine(day, wall, local).astimezone(ZoneInfo("UTC"))
    if instant.astimezone(local).time() != wall:
        raise InputError(field, f"{day} {wall:%H:%M}", f"a time that the clocks of {zone} show on that day")
    return instant
