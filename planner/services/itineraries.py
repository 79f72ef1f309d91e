"""What every plan rests on, and the one way in which an itinerary is written into the store."""

from __future__ import annotations

from datetime import datetime

from planner.season.evaluate import Setting
from planner.season.itinerary import Fixed, Itinerary, differences, fixed_points
from planner.season.model import Driver
from planner.season.travel import LegTimes
from planner.services.driver import driver_view
from planner.services.season import Calendar
from planner.store.store import Store


def fixed_of(calendar: Calendar, driver: Driver) -> list[Fixed]:
    """Everything that ties a driver to a place, in time order."""
    sessions = [session for each in calendar.sessions.values() for session in each]
    return fixed_points(calendar.rounds, sessions, calendar.commitments, driver_id=driver.id)


def planning_setting(store: Store, calendar: Calendar, driver: Driver, at: datetime) -> Setting:
    """What an itinerary is evaluated with: places, travel times, pressures, what readings taught by `at`."""
    return Setting(
        driver=driver,
        places=calendar.places,
        times=LegTimes(calendar.places, calendar.legs),
        track_days=calendar.days_at_the_track,
        pressures=calendar.pressures,
        person=driver_view(store, calendar, driver, at).person,
    )


def write_itinerary(store: Store, planned: Itinerary, changed: Itinerary, *, by: str) -> None:
    """Write what differs between two itineraries of a driver; call it inside a transaction."""
    found = differences(planned, changed)
    for entry in found.removed:
        store.remove(entry, by=by)
    for entry in found.changed:
        store.change(entry, by=by)
    store.add_all(found.added, by=by)
