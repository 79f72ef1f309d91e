"""The team's records: kept, removed and put back, with errors in the words of the screen."""

from __future__ import annotations

from dataclasses import replace
from typing import Final, TypeVar

from planner.errors import InputError
from planner.season.model import Commitment, Driver, Place, Round, Session
from planner.store.store import Store

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
