"""The team's records: kept, removed and put back, with errors in the words of the screen."""

from __future__ import annotations

from dataclasses import replace
from datetime import date, datetime, time
from typing import Final, TypeVar
from zoneinfo import ZoneInfo

from planner.checks import QUANTITIES
from planner.errors import InputError
from planner.season.model import Commitment, Driver, Place, Round, Session
from planner.store.store import Store
from planner.units import from_house, to_house

R = TypeVar("R", Driver, Place, Round, Session, Commitment)

# What the screen calls a field of a record.
FIELD_NAMES: Final = {
    "zone": "time zone",
    "track_elevation_m": "elevation of the track",
    "bed_elevation_m": "elevation of the beds",
    "latitude_deg": "latitude",
    "longitude_deg": "longitude",
    "home_place_id": "home",
    "place_id": "place",
    "round_id": "round",
    "driver_id": "driver",
    "mass_kg": "body mass",
    "height_cm": "height",
    "bottle_ml": "drinks bottle",
    "sweat_sodium_mmol_l": "sweat sodium",
    "altitude_history": "altitude illness before",
    "highest_bed_elevation_m": "highest bed the physician allows",
    "tent_note": "physician's note on a tent",
    "iron_checked_on": "iron checked on",
    "wake_time": "usual waking time",
    "starts_at": "start",
    "ends_at": "end",
}


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


def save(store: Store, record: R, *, by: str) -> R:
    """Add a record (its id is 0) or change the stored one; blanks around its name are dropped.

    Raises: InputError with the field as the screen calls it.
    """
    ready = replace(record, name=" ".join(record.name.split()))
    try:
        return store.change(ready, by=by) if ready.id else store.add(ready, by=by)
    except InputError as problem:
        field = FIELD_NAMES.get(problem.field, problem.field)
        raise InputError(field, problem.value, problem.expected) from None


def removed(store: Store, kind: type[R]) -> list[R]:
    """Return the records of a kind that were removed and can be put back."""
    kept = {record.id for record in store.all(kind)}
    return [record for record in store.all(kind, include_removed=True) if record.id not in kept]


def local_instant(field: str, day: date, wall: time, zone: str) -> datetime:
    """Return the UTC instant of a wall-clock time in a zone.

    Raises: InputError when the clocks skip this time on that day.
    """
    local = ZoneInfo(zone)
    instant = datetime.combine(day, wall, local).astimezone(ZoneInfo("UTC"))
    if instant.astimezone(local).time() != wall:
        raise InputError(field, f"{day} {wall:%H:%M}", f"a time that the clocks of {zone} show on that day")
    return instant
