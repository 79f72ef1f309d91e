"""Calendar files in and out: a driver's itinerary to send, a season's rounds to read."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from datetime import datetime, timedelta
from typing import Final, TypeVar

from planner.errors import InputError
from planner.exchange.calendar_files import CalendarParts, write_itinerary
from planner.exchange.calendar_rounds import ProposedRound, ReadRounds, confirmed, read_rounds
from planner.exchange.context import folded
from planner.season.clock_course import LightDay, clock_course, light_days
from planner.season.itinerary import ends_at
from planner.season.model import Driver, Leg, Place, Round, Stay
from planner.services.arrival_choice import ascent_reason_kept
from planner.services.season import Calendar, read_calendar
from planner.services.workspace import now
from planner.store.store import Store

# What lies further back is left out of a calendar; what was taken out of the plan is cancelled as far back.
LOOK_BACK: Final = timedelta(days=30)
E = TypeVar("E", Stay, Leg)


@dataclass(frozen=True)
class RoundsReport:
    """What an import of rounds did: the rounds kept, and the names of those that were there before."""

    kept: tuple[Round, ...]
    already_there: tuple[str, ...]


def driver_calendar(store: Store, driver: Driver, *, reminders: bool = True, light: bool = False) -> bytes:
    """A driver's itinerary from a month ago on as an iCalendar file.

    Parameters: `reminders` adds a morning's measuring at high rounds, `light` the light to seek and avoid
    after journeys across time zones.
    """
    calendar, at = read_calendar(store), now(store)
    since = at - LOOK_BACK
    itinerary = calendar.itinerary_of(driver)
    parts = CalendarParts(
        reminders=reminders,
        light=tuple(_light(calendar, driver, since)) if light else (),
        cancelled=tuple(_taken_out(store, driver, since)),
        note=_ascent_notes(store, calendar, driver, since),
    )
    return write_itinerary(
        driver,
        [entry for entry in itinerary.entries if ends_at(entry) > since],
        calendar.places,
        store_uid=store.uid,
        sequence=store.version(),
        now=at,
        parts=parts,
    )


def preview_rounds(store: Store, data: bytes, file: str) -> ReadRounds:
    """What a calendar file holds of rounds, with the places that its locations may mean; writes nothing.

    Raises: InputError when the file is no calendar.
    """
    return read_rounds(data, file, store.all(Place))


def is_there(store: Store, proposed: ProposedRound) -> bool:
    """Whether a round of that name is kept already."""
    return folded(proposed.name) in {folded(each.name) for each in store.all(Round)}


def import_rounds(
    store: Store, proposed: tuple[ProposedRound, ...], place_of: Mapping[str, Place], *, by: str, file: str
) -> RoundsReport:
    """Keep rounds with the places that the coach has confirmed, `place_of` by location; all or none.

    A round whose name is known is left as it is.
    Raises: InputError naming the first location without a place, or what cannot be kept.
    """
    known = {folded(each.name): each for each in store.all(Round)}
    new = tuple(each for each in proposed if folded(each.name) not in known)
    first = max((each.number for each in known.values()), default=0) + 1
    kept: list[Round] = []
    with store.transaction(by, f"rounds from {file}"):
        for given, sessions in confirmed(new, place_of, first):
            stored = store.add(given, by=by)
            names: set[str] = set()
            for session in sessions:
                if folded(session.name) in names:
                    raise InputError("session", session.name, f"a name once in {given.name}")
                names.add(folded(session.name))
            store.add_all([replace(session, round_id=stored.id) for session in sessions], by=by)
            kept.append(stored)
    there = tuple(each.name for each in proposed if folded(each.name) in known)
    return RoundsReport(tuple(kept), there)


def _taken_out(store: Store, driver: Driver, since: datetime) -> list[Stay | Leg]:
    """What was planned for the driver and is no more, so that a calendar that holds it lets it go."""

    def gone(kind: type[E]) -> list[E]:
        planned = {entry.id for entry in store.all(kind, driver_id=driver.id)}
        every = store.all(kind, include_removed=True, driver_id=driver.id)
        return [entry for entry in every if entry.id not in planned and ends_at(entry) > since]

    return [*gone(Stay), *gone(Leg)]


def _light(calendar: Calendar, driver: Driver, since: datetime) -> list[LightDay]:
    """The light windows after each journey of the itinerary, until the next one."""
    course = clock_course(calendar.itinerary_of(driver), calendar.places)
    found: list[LightDay] = []
    for i, point in enumerate(course):
        until = course[i + 1].arrived_at if i + 1 < len(course) else point.arrived_at + LOOK_BACK
        if until > since:
            days = light_days(driver, course[: i + 1], until, calendar.places)
            found += [day for day in days if i + 1 == len(course) or day.day < course[i + 1].arrived_on]
    return found


def _ascent_notes(store: Store, calendar: Calendar, driver: Driver, since: datetime) -> str:
    """For which rounds ahead the ascent rule was set aside, and why; empty when for none."""
    found = []
    for each in calendar.rounds:
        reason = ascent_reason_kept(store, calendar, driver, each) if calendar.ends_at(each) > since else ""
        if reason:
            found.append(f"{each.name}: ascent rule above 3 000 m set aside: {reason}.")
    return " ".join(found)
