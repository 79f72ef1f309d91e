"""The team's records: checked when they are typed, changed and removed so that nothing is lost."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from datetime import date, datetime, time, timedelta
from typing import Final, TypeAlias, TypeVar
from zoneinfo import ZoneInfo, available_timezones

from planner.checks import QUANTITIES
from planner.errors import InputError, NotFoundError
from planner.season.model import Commitment, Driver, Place, Round, Session, Stay
from planner.store.store import Store
from planner.units import from_house, to_house

TeamRecord: TypeAlias = Driver | Place | Round | Session | Commitment
R = TypeVar("R", Driver, Place, Round, Session, Commitment)

# A session longer than this is a slip of the keyboard: judgement (endurance races last 24 h).
LONGEST_SESSION: Final = timedelta(hours=25)
LONGEST_NAME: Final = 80
SMALLEST_BOTTLE_ML, LARGEST_BOTTLE_ML = 100.0, 5000.0
# Sweat sodium on record runs from 12.6 to 104.8 mmol/L (Baker 2016, published): room on either side.
LOWEST_SWEAT_SODIUM, HIGHEST_SWEAT_SODIUM = 5.0, 150.0


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


def checked_place(place: Place) -> Place:
    """Return the place with its name trimmed.

    Raises: InputError naming the field that cannot be used.
    """
    _within("latitude", place.latitude_deg, "latitude_deg")
    _within("longitude", place.longitude_deg, "longitude_deg")
    _within("track elevation", place.track_elevation_m, "elevation_m")
    _within("bed elevation", place.bed_elevation_m, "elevation_m")
    if place.zone not in available_timezones():
        raise InputError("time zone", place.zone, "an IANA name such as Europe/Paris")
    return replace(place, name=_named(place.name))


def checked_driver(driver: Driver) -> Driver:
    """Return the driver with the name trimmed.

    Raises: InputError naming the field that cannot be used.
    """
    _within("mass", driver.mass_kg, "mass_kg")
    _within("height", driver.height_cm, "height_cm")
    if not SMALLEST_BOTTLE_ML <= driver.bottle_ml <= LARGEST_BOTTLE_ML:
        expected = f"{SMALLEST_BOTTLE_ML:.0f} to {LARGEST_BOTTLE_ML:.0f} mL"
        raise InputError("drinks bottle", driver.bottle_ml, expected)
    sodium = driver.sweat_sodium_mmol_l
    if sodium is not None and not LOWEST_SWEAT_SODIUM <= sodium <= HIGHEST_SWEAT_SODIUM:
        expected = f"{LOWEST_SWEAT_SODIUM:.0f} to {HIGHEST_SWEAT_SODIUM:.0f} mmol/L, or nothing"
        raise InputError("sweat sodium", sodium, expected)
    if driver.highest_bed_elevation_m is not None:
        _within("highest bed elevation", driver.highest_bed_elevation_m, "elevation_m")
    try:
        time.fromisoformat(driver.wake_time)
    except ValueError:
        raise InputError("usual waking time", driver.wake_time, "a time as 07:00") from None
    return replace(driver, name=_named(driver.name), tent_note=driver.tent_note.strip())


def checked_round(given: Round) -> Round:
    """Return the round with its name trimmed.

    Raises: InputError naming the field that cannot be used.
    """
    if given.number < 1:
        raise InputError("round number", given.number, "1 or more")
    return replace(given, name=_named(given.name))


def checked_session(session: Session) -> Session:
    """Return the session with its name trimmed.

    Raises: InputError when it ends before it starts or lasts too long.
    """
    _ordered(session.starts_at, session.ends_at)
    if session.ends_at - session.starts_at > LONGEST_SESSION:
        raise InputError("ends at", _plain(session.ends_at), "an end within 25 hours of the start")
    return replace(session, name=_named(session.name))


def checked_commitment(commitment: Commitment) -> Commitment:
    """Return the commitment with its name trimmed.

    Raises: InputError when it ends before it starts.
    """
    _ordered(commitment.starts_at, commitment.ends_at)
    return replace(commitment, name=_named(commitment.name))


def checked(record: R) -> R:
    """Return the record checked by the rules of its kind.

    Raises: InputError naming the field that cannot be used.
    """
    if isinstance(record, Place):
        return checked_place(record)
    if isinstance(record, Driver):
        return checked_driver(record)
    if isinstance(record, Round):
        return checked_round(record)
    if isinstance(record, Session):
        return checked_session(record)
    return checked_commitment(record)


def save(store: Store, record: R, *, by: str) -> R:
    """Check a record, then add it (its id is 0) or change the one that is stored.

    Raises: InputError naming the field; a name that is taken is one.
    """
    ready = checked(record)
    _refuse_taken_name(store, ready)
    if ready.id:
        return store.change(ready, by=by)
    return store.add(ready, by=by)


def remove(store: Store, record: TeamRecord, *, by: str) -> None:
    """Take a record out of sight; `removed` lists it and `restore` brings it back.

    Raises: InputError when other records still need it.
    """
    needed_by = _needed_by(store, record)
    if needed_by:
        raise InputError(record.name, "remove", "nothing that needs it any more: " + ", ".join(needed_by))
    store.remove(record, by=by)


def removed(store: Store, kind: type[R]) -> list[R]:
    """Return the records of a kind that were removed and can be restored."""
    kept = {record.id for record in store.all(kind)}
    return [record for record in store.all(kind, include_removed=True) if record.id not in kept]


def restore(store: Store, record: R, *, by: str) -> R:
    """Bring a removed record back.

    Raises: InputError when its name has been given to another one since.
    """
    _refuse_taken_name(store, record)
    return store.restore(type(record), record.id, by=by)


def local_instant(day: date, wall: time, place: Place) -> datetime:
    """Return the UTC instant of a wall-clock time at a place.

    Raises: InputError when the clocks skip this time on that day.
    """
    zone = ZoneInfo(place.zone)
    instant = datetime.combine(day, wall, zone).astimezone(ZoneInfo("UTC"))
    if instant.astimezone(zone).time() != wall:
        raise InputError("time", f"{day} {wall:%H:%M}", f"a time that exists in {place.zone} on that day")
    return instant


def _within(field: str, value: float, quantity: str) -> None:
    known = QUANTITIES[quantity]
    if not known.low <= value <= known.high:
        raise InputError(field, value, f"{known.low:g} to {known.high:g} {known.unit}")


def _named(name: str) -> str:
    trimmed = " ".join(name.split())
    if not trimmed or len(trimmed) > LONGEST_NAME:
        raise InputError("name", name, f"1 to {LONGEST_NAME} characters")
    return trimmed


def _ordered(starts_at: datetime, ends_at: datetime) -> None:
    if ends_at <= starts_at:
        raise InputError("ends at", _plain(ends_at), f"an end after the start {_plain(starts_at)}")


def _plain(instant: datetime) -> str:
    return f"{instant:%Y-%m-%d %H:%M} UTC"


def _refuse_taken_name(store: Store, record: TeamRecord) -> None:
    if isinstance(record, Session | Commitment):
        return
    same = [
        other
        for other in store.all(type(record))
        if other.id != record.id and other.name.casefold() == record.name.casefold()
    ]
    if same:
        raise InputError("name", record.name, "a name that no other one bears")


def _needed_by(store: Store, record: TeamRecord) -> list[str]:
    """Return in words what still points to a record, so that removing it would leave a hole."""
    if isinstance(record, Place):
        return [
            *_named_users("home of", store.all(Driver, home_place_id=record.id)),
            *_named_users("place of round", store.all(Round, place_id=record.id)),
            *_named_users("place of", store.all(Commitment, place_id=record.id)),
            *_counted("stays", store.all(Stay, place_id=record.id)),
        ]
    if isinstance(record, Round):
        return _counted("sessions", store.all(Session, round_id=record.id))
    return []


def _named_users(relation: str, users: Iterable[Driver | Round | Commitment]) -> list[str]:
    return [f"{relation} {user.name}" for user in users]


def _counted(what: str, users: list[Stay] | list[Session]) -> list[str]:
    return [f"{len(users)} {what}"] if users else []


def found(store: Store, kind: type[R], name: str) -> R:
    """Return the record of that name (or, for a round, that number), whatever its capitals.

    Raises: NotFoundError listing the names there are.
    """
    records = store.all(kind)
    for record in records:
        if record.name.casefold() == name.strip().casefold():
            return record
        if isinstance(record, Round) and name.strip() == str(record.number):
            return record
    names = ", ".join(record.name for record in records) or "none stored yet"
    raise NotFoundError(f"{kind.__name__.lower()} {name!r} not found, there are: {names}")
