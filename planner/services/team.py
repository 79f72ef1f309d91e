"""The team's records: kept, removed and put back, with errors in the words of the screen."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Final, TypeAlias, TypeVar

from planner.errors import InputError
from planner.season.model import Commitment, Driver, Place, Round, Session
from planner.services.importing import start_empty
from planner.store.store import Store

TeamRecord: TypeAlias = Driver | Place | Round | Session | Commitment
R = TypeVar("R", bound=TeamRecord)

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


def begin_own_team(store: Store, *, by: str) -> int:
    """Put the demo season aside, with all that was typed into it, and start the real clock.

    Everything is removed in one change set, whose id is returned; undoing it brings the records back.
    """
    with store.transaction(by, "the demo season put aside") as change_set_id:
        for kind in (Driver, Round, Place):
            for record in store.all(kind):
                store.remove(record, by=by)
        start_empty(store)
    return change_set_id


def backup_bytes(store: Store) -> bytes:
    """Return a consistent copy of the whole store, as a file's content."""
    with TemporaryDirectory() as folder:
        copy = Path(folder) / "planner-backup.db"
        store.backup(copy)
        return copy.read_bytes()
