"""Calendars of the demo: sent, sent again, read back; rounds taken over with the coach's confirmation."""

from __future__ import annotations

from dataclasses import replace
from datetime import timedelta

import pytest
from icalendar import Calendar as ICalendar

from planner.errors import InputError
from planner.exchange.calendar_files import read_itinerary
from planner.season.itinerary import ends_at
from planner.season.model import Driver, Place, Round, Session, Stay
from planner.services.calendars import driver_calendar, import_rounds, is_there, preview_rounds
from planner.services.importing import demo_folder
from planner.services.season import read_calendar
from planner.services.workspace import now
from planner.store.store import Store


def driver_called(store: Store, name: str) -> Driver:
    return next(d for d in store.all(Driver) if d.name.startswith(name))


def uids(data: bytes) -> dict[str, str]:
    return {str(e["uid"]): str(e.get("status", "")) for e in ICalendar.from_ical(data).walk("VEVENT")}


def test_a_drivers_calendar_comes_back_as_the_same_itinerary(demo_store: Store) -> None:
    driver = driver_called(demo_store, "Ilse")
    data = driver_calendar(demo_store, driver, light=True)
    stays, legs = read_itinerary(data, "ilse.ics", driver_id=driver.id, places=demo_store.all(Place))
    planned = read_calendar(demo_store).itinerary_of(driver)
    since = now(demo_store) - timedelta(days=30)
    # The demo's times are whole minutes, over the clock changes of October on both sides of the ocean.
    assert stays == [replace(s, id=0) for s in planned.stays if ends_at(s) > since]
    assert legs == [replace(leg, id=0) for leg in planned.legs if ends_at(leg) > since]
    kinds = {str(e.get("X-PLANNER-KIND")) for e in ICalendar.from_ical(data).walk("VEVENT")}
    assert kinds == {"stay", "leg", "measure", "seek", "avoid"}


def test_light_windows_are_unique_and_optional(demo_store: Store) -> None:
    driver = driver_called(demo_store, "Jory")
    with_light = driver_calendar(demo_store, driver, reminders=False, light=True)
    without = driver_calendar(demo_store, driver, reminders=False)
    events = [str(e["uid"]) for e in ICalendar.from_ical(with_light).walk("VEVENT")]
    assert len(events) == len(set(events))
    assert not any(uid.startswith(("seek", "avoid", "measure")) for uid in uids(without))


def test_sent_again_it_updates_and_cancels(demo_store: Store) -> None:
    driver = driver_called(demo_store, "Ilse")
    first = uids(driver_calendar(demo_store, driver, reminders=False))
    gone = max(demo_store.all(Stay, driver_id=driver.id), key=lambda s: s.arrive_at)
    demo_store.remove(gone, by="coach")
    again = uids(driver_calendar(demo_store, driver, reminders=False))
    assert set(again) == set(first)
    assert [uid for uid, status in again.items() if status == "CANCELLED"] == [
        f"stay-{gone.id}@{demo_store.uid}"
    ]


def test_the_demos_rounds_from_its_calendar_file(demo_store: Store, store: Store) -> None:
    for place in demo_store.all(Place):
        store.add(replace(place, id=0), by="coach")
    data = (demo_folder() / "calendar.ics").read_bytes()
    version = store.version()
    read = preview_rounds(store, data, "calendar.ics")
    assert store.version() == version
    assert read.refused == ()
    place_of = {r.location: r.place for r in read.rounds if r.place}
    report = import_rounds(store, read.rounds, place_of, by="coach", file="calendar.ics")
    assert len(report.kept) == 19

    def told(of: Store) -> list[tuple[object, ...]]:
        names = {p.id: p.name for p in of.all(Place)}
        rounds = {r.id: r for r in of.all(Round)}
        return sorted(
            (rounds[s.round_id].number, rounds[s.round_id].name, names[rounds[s.round_id].place_id],
             s.kind, s.name, s.starts_at, s.ends_at)
            for s in of.all(Session)
        )  # fmt: skip

    assert told(store) == told(demo_store)
    assert store.check() == []
    # A second time adds nothing.
    assert all(is_there(store, r) for r in read.rounds)
    again = import_rounds(store, read.rounds, place_of, by="coach", file="calendar.ics")
    assert (again.kept, len(again.already_there)) == ((), 19)


def test_without_a_confirmed_place_nothing_is_kept(demo_store: Store, store: Store) -> None:
    data = (demo_folder() / "calendar.ics").read_bytes()
    read = preview_rounds(store, data, "calendar.ics")
    assert not any(r.certain for r in read.rounds)
    store.add(replace(demo_store.all(Place)[0], id=0), by="coach")
    version = store.version()
    with pytest.raises(InputError, match="a confirmed place for"):
        import_rounds(store, read.rounds, {}, by="coach", file="calendar.ics")
    assert store.version() == version
    assert store.all(Round) == []
