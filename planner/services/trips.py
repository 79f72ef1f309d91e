"""A stay away from home typed by hand, and called off again: each driver's itinerary stays whole."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import datetime, timedelta
from typing import Final

from planner.errors import InputError
from planner.season.itinerary import (
    Itinerary,
    begins_in,
    ends_at,
    ends_in,
    insert_trip,
    starts_at,
)
from planner.season.model import Driver, Leg, Stay
from planner.season.travel import LegTimes
from planner.services.itineraries import fixed_of, write_itinerary
from planner.services.season import Calendar, read_calendar
from planner.services.typed import local_instant
from planner.store.store import Store

# An itinerary that did not reach so far is given home on both sides of the trip for so long: judgement.
AT_HOME_AROUND: Final = timedelta(days=30)
FIELD_NAMES: Final = {"arrive_at": "arrives", "leave_at": "leaves", "place_id": "place"}


@dataclass(frozen=True)
class TypedTrip:
    """What the form holds; the times are the wall clock at the place."""

    driver_ids: Sequence[int]
    place_id: int | None
    arrives: datetime
    leaves: datetime


def plan_trip(store: Store, typed: TypedTrip, *, by: str) -> int:
    """Put the trip into the itinerary of each driver, the way there and back by the travel times known.

    Returns: the change set's id, by which all of it is taken back.
    Raises: InputError naming the field, and the driver for whom it cannot be; nothing is kept then.
    """
    calendar = read_calendar(store)
    if not typed.driver_ids:
        raise InputError("drivers", "", "at least one")
    if typed.place_id is None:
        raise InputError("place", "", "one of the team's places")
    zone = calendar.places[typed.place_id].zone
    arrive_at = local_instant("arrives", typed.arrives.date(), typed.arrives.time(), zone)
    leave_at = local_instant("leaves", typed.leaves.date(), typed.leaves.time(), zone)
    times = LegTimes(calendar.places, calendar.legs)
    with store.transaction(by, f"stay in {calendar.places[typed.place_id].name}") as change_set_id:
        for driver in calendar.drivers:
            if driver.id in typed.driver_ids:
                _plan(store, calendar, driver, typed.place_id, arrive_at, leave_at, times, by)
    return change_set_id


def stays_away(calendar: Calendar, since: datetime, until: datetime) -> list[Stay]:
    """The stays away from home that touch a stretch of time, of drivers who are in the team, by arrival."""
    homes = {driver.id: driver.home_place_id for driver in calendar.drivers}
    ours = [s for s in calendar.stays if s.place_id != homes.get(s.driver_id, s.place_id)]
    return sorted(
        (s for s in ours if s.arrive_at < until and s.depart_at > since),
        key=lambda s: (s.arrive_at, s.place_id, s.driver_id),
    )


def call_off(store: Store, stay: Stay, *, by: str) -> int:
    """Take a stay and its two legs out: the driver stays where the way there began.

    Returns: the change set's id.
    Raises: InputError when the stay does not lie between two stays at one and the same place.
    """
    calendar = read_calendar(store)
    driver = next(each for each in calendar.drivers if each.id == stay.driver_id)
    planned = calendar.itinerary_of(driver)
    i = planned.entries.index(stay) if stay in planned.entries else -1
    around = planned.entries[max(i - 2, 0) : i + 3] if i >= 0 else ()
    match around:
        case (Stay() as before, Leg(), _, Leg(), Stay() as after) if before.place_id == after.place_id:
            rest = (*planned.entries[: i - 2], replace(before, depart_at=after.depart_at))
            changed = Itinerary(driver.id, (*rest, *planned.entries[i + 3 :]))
        case _:
            name = calendar.places[stay.place_id].name
            raise InputError(
                "stay", name, "one that leads from a place and back to it; plan others on Arrival"
            )
    with store.transaction(by, f"stay in {calendar.places[stay.place_id].name} called off") as change_set_id:
        write_itinerary(store, planned, changed, by=by)
    return change_set_id


def _plan(
    store: Store,
    calendar: Calendar,
    driver: Driver,
    place_id: int,
    arrive_at: datetime,
    leave_at: datetime,
    times: LegTimes,
    by: str,
) -> None:
    planned = calendar.itinerary_of(driver)
    fixed = fixed_of(calendar, driver)
    base = _reaching(planned, driver, arrive_at - AT_HOME_AROUND, leave_at + AT_HOME_AROUND, times)
    try:
        changed = insert_trip(base, place_id, arrive_at, leave_at, times, fixed)
    except InputError as problem:
        field = f"{driver.name}, {FIELD_NAMES.get(problem.field, problem.field)}"
        raise InputError(field, problem.value, problem.expected) from None
    write_itinerary(store, planned, changed, by=by)


def _reaching(
    planned: Itinerary, driver: Driver, since: datetime, until: datetime, times: LegTimes
) -> Itinerary:
    """The itinerary, led on at both ends so that it covers a stretch: at home where it said nothing."""
    home = driver.home_place_id
    if not planned.entries:
        return Itinerary(driver.id, (Stay(driver.id, home, since, until),))
    entries = list(planned.entries)
    first, last = entries[0], entries[-1]
    if since < starts_at(first):
        if begins_in(first) != home:
            out = times.leg(driver.id, home, begins_in(first), arrive_at=starts_at(first))
            entries = [
                Stay(driver.id, home, min(since, out.depart_at - AT_HOME_AROUND), out.depart_at),
                out,
                *entries,
            ]
        elif isinstance(first, Stay):
            entries[0] = replace(first, arrive_at=since)
        else:
            entries.insert(0, Stay(driver.id, home, since, starts_at(first)))
    if until > ends_at(last):
        if ends_in(last) != home:
            arrives = ends_at(last) + timedelta(hours=times.between(ends_in(last), home).hours)
            entries.append(times.leg(driver.id, ends_in(last), home, arrive_at=arrives))
            entries.append(Stay(driver.id, home, arrives, max(until, arrives + AT_HOME_AROUND)))
        elif isinstance(last, Stay):
            entries[-1] = replace(entries[-1], depart_at=until)
        else:
            entries.append(Stay(driver.id, home, ends_at(last), until))
    return Itinerary(driver.id, tuple(entries))
