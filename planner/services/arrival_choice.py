"""A way to a round becomes the itinerary: one change set, refused when it is out of date, undone."""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass, replace
from typing import Final

from planner.errors import InputError, StoreError
from planner.season.arrival import Option, limit_failures
from planner.season.evaluate import COUNTED_BEFORE, ascent_warnings
from planner.season.itinerary import Itinerary, broken, problems
from planner.season.model import Driver, Round
from planner.season.nights import ascent_to, nights_of
from planner.services.arrival import Arrival
from planner.services.itineraries import fixed_of, write_itinerary
from planner.services.season import Calendar, read_calendar
from planner.store.history import in_force
from planner.store.store import Store

SETTING: Final = "chosen ways to rounds"
LONGEST_REASON: Final = 300


@dataclass(frozen=True)
class Choice:
    """A way that was chosen. `ascent_reason` is why the ascent rule was set aside; empty = it holds."""

    change_set_id: int
    driver_id: int
    round_id: int
    title: str
    by: str
    ascent_reason: str = ""


def ascent_failures(found: Arrival, option: Option) -> list[str]:
    """What of the rule above 3 000 m an option breaks, one sentence each: set aside with a reason only."""
    if option.outlook is None or option.costs is None:
        return []
    held, set_aside = (
        limit_failures(option.outlook, option.costs, replace(found.limits, ascent_override=reason))
        for reason in ("", "any reason")
    )
    return [sentence for sentence in held if sentence not in set_aside]


def refused(found: Arrival, option: Option, ascent_reason: str = "") -> list[str]:
    """What keeps an option from being chosen, one sentence each; empty = it can be."""
    excused = ascent_failures(found, option) if ascent_reason.strip() else []
    return [sentence for sentence in option.why if sentence not in excused]


def is_planned(found: Arrival, option: Option) -> bool:
    """Whether an option is what the store holds already."""
    return option.itinerary == found.planned


def choose(store: Store, found: Arrival, option: Option, *, by: str, ascent_reason: str = "") -> Choice:
    """Make an option the driver's itinerary, in one change set that `undo` takes back.

    Only the stretch between the last fixed appointment and the round is written anew.
    Raises: InputError naming what stands against the option; StoreError when the plan, the calendar, a place
    or the driver has changed since the options were worked out. Then nothing is written.
    """
    reason = " ".join(ascent_reason.split())
    if len(reason) > LONGEST_REASON:
        raise InputError("reason", reason, f"at most {LONGEST_REASON} characters")
    against = refused(found, option, reason)
    if option.itinerary is None or against:
        raise InputError("way", option.title, f"one that nothing stands against: {' '.join(against)}")
    if is_planned(found, option):
        raise InputError("way", option.title, "another one than what is planned already")
    if not ascent_failures(found, option):
        reason = ""
    why = f"{found.driver.name} to {found.round.name}: {option.title}"
    if reason:
        why = f"{why}; ascent rule set aside: {reason}"
    with store.transaction(by, why) as change_set_id:
        _refuse_if_stale(store, found)
        _refuse_unless_whole(found, option.itinerary)
        write_itinerary(store, found.planned, option.itinerary, by=by)
        choice = Choice(change_set_id, found.driver.id, found.round.id, option.title, by, reason)
        kept = [asdict(each) for each in (*_kept(store), choice)]
        store.set_setting(SETTING, json.dumps(kept, ensure_ascii=False))
    return choice


def undo(store: Store, choice: Choice, *, by: str) -> None:
    """Put back exactly what was planned before a choice.

    Raises: StoreError when it was undone already, or something newer changed what it wrote.
    """
    store.undo(choice.change_set_id, by=by)


def choices(store: Store, driver: Driver, given: Round) -> list[Choice]:
    """The choices in force for a driver and a round, the newest first."""
    ours = [c for c in _kept(store) if (c.driver_id, c.round_id) == (driver.id, given.id)]
    newest = store.change_sets(1)
    if not ours or not newest:
        return []
    # Change sets are numbered one after the other: these are all since the oldest choice.
    since = store.change_sets(newest[0].id - ours[0].change_set_id + 1)
    standing = {each.id for each in in_force(since)}
    return [choice for choice in reversed(ours) if choice.change_set_id in standing]


def ascent_reason_kept(store: Store, calendar: Calendar, driver: Driver, given: Round) -> str:
    """Why the ascent rule is set aside in the present plan for a round; empty while the plan keeps the rule.

    Whoever hands a plan on shows this beside it.
    """
    race_at, places = calendar.race_of(given).starts_at, calendar.places
    nights = nights_of(calendar.itinerary_of(driver), places, race_at - 3 * COUNTED_BEFORE, race_at)
    if not ascent_warnings(ascent_to(nights, places[driver.home_place_id])):
        return ""
    return next((choice.ascent_reason for choice in choices(store, driver, given)), "")


def _kept(store: Store) -> list[Choice]:
    return [Choice(**each) for each in json.loads(store.setting(SETTING) or "[]")]


def _refuse_if_stale(store: Store, found: Arrival) -> None:
    """Refuse a choice from a state of the season that is no more; readings since then do not matter."""
    calendar = read_calendar(store)
    driver = next((each for each in calendar.drivers if each.id == found.driver.id), None)
    same = (
        driver == found.driver
        and calendar.itinerary_of(found.driver) == found.planned
        and tuple(fixed_of(calendar, found.driver)) == found.fixed
        and calendar.places == found.calendar.places
    )
    if not same:
        raise StoreError(
            f"the season has changed since the ways to {found.round.name} were worked out; "
            "nothing was written: look at them anew and choose again"
        )


def _refuse_unless_whole(found: Arrival, chosen: Itinerary) -> None:
    """The last look before writing: the itinerary has no hole, and misses nothing that it kept before."""
    places = found.setting.places
    already = broken(found.gap.base, found.fixed, places)
    missed = [sentence for sentence in broken(chosen, found.fixed, places) if sentence not in already]
    wrong = [*problems(chosen, places), *missed]
    if wrong:
        raise InputError("way", found.round.name, f"an itinerary that is whole: {' '.join(wrong)}")
