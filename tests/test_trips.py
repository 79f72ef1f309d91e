"""Stays typed by hand: whole itineraries, for a team with nothing planned and inside the demo's season."""

from __future__ import annotations

from datetime import UTC, date, datetime, time, timedelta

import pytest
from screens import open_page, press, said

from planner.errors import InputError
from planner.season.itinerary import problems
from planner.season.model import Driver, Leg, Place, Stay
from planner.services.morning import this_morning
from planner.services.season import read_calendar
from planner.services.trips import TypedTrip, call_off, plan_trip, stays_away
from planner.services.workspace import mark_begun_empty, now
from planner.store.store import Store

NOW = datetime(2027, 3, 10, 13, 40, tzinfo=UTC)
WALL = datetime.combine(date(2027, 3, 8), time(18))  # the venue's wall clock


def own_team(store: Store) -> tuple[Driver, Place]:
    home = store.add(Place("Low Moor", "Europe/London", 80.0, 80.0, 51.9, -1.2), by="coach")
    venue = store.add(Place("Kuyumba", "America/Mexico_City", 2240.0, 2250.0, 19.4, -99.1), by="coach")
    driver = store.add(Driver("Ada Lind", "woman", home.id, 60.0, 170.0), by="coach")
    return driver, venue


def trip(driver: Driver, place_id: int | None, days: int = 6) -> TypedTrip:
    return TypedTrip((driver.id,), place_id, WALL, WALL + timedelta(days=days))


def test_a_stay_typed_for_a_team_with_nothing_planned_moves_the_range(store: Store) -> None:
    driver, venue = own_team(store)
    (at_home,) = this_morning(store, NOW).rows
    assert not at_home.where.is_planned
    plan_trip(store, trip(driver, venue.id), by="coach")
    calendar = read_calendar(store)
    itinerary = calendar.itinerary_of(driver)
    assert problems(itinerary, calendar.places) == []
    assert [type(entry) for entry in itinerary.entries] == [Stay, Leg, Stay, Leg, Stay]
    (there,) = this_morning(store, NOW).rows
    assert there.where.is_planned
    assert there.where.place.name == "Kuyumba"
    assert there.where.arrived_at == datetime(2027, 3, 9, 0, tzinfo=UTC)  # computed: 18:00 at UTC-6
    # Judgement: 2 250 m costs healthy people some five points of saturation; three is the least.
    assert there.expected.mean_pct < at_home.expected.mean_pct - 3.0
    assert there.expected.words == "for her on day 3"


def test_a_second_stay_leads_the_itinerary_on(store: Store) -> None:
    driver, venue = own_team(store)
    plan_trip(store, trip(driver, venue.id), by="coach")
    later = TypedTrip((driver.id,), venue.id, WALL + timedelta(days=90), WALL + timedelta(days=95))
    plan_trip(store, later, by="coach")
    earlier = TypedTrip((driver.id,), venue.id, WALL - timedelta(days=90), WALL - timedelta(days=85))
    plan_trip(store, earlier, by="coach")
    calendar = read_calendar(store)
    assert problems(calendar.itinerary_of(driver), calendar.places) == []
    assert len(stays_away(calendar, NOW - timedelta(days=200), NOW + timedelta(days=200))) == 3


def test_a_stay_is_called_off_and_that_undone(store: Store) -> None:
    driver, venue = own_team(store)
    plan_trip(store, trip(driver, venue.id), by="coach")
    planned = read_calendar(store).itinerary_of(driver)
    (stay,) = stays_away(read_calendar(store), NOW, NOW + timedelta(days=1))
    change_set_id = call_off(store, stay, by="coach")
    calendar = read_calendar(store)
    assert [type(entry) for entry in calendar.itinerary_of(driver).entries] == [Stay]
    store.undo(change_set_id, by="coach")
    assert read_calendar(store).itinerary_of(driver) == planned


def test_a_stay_that_cannot_be_is_refused_with_the_driver_and_nothing_is_kept(demo_store: Store) -> None:
    calendar = read_calendar(demo_store)
    driver = calendar.drivers[0]
    other = next(p for p in calendar.places.values() if p.name == "Sumaqara")
    wall = now(demo_store).replace(tzinfo=None)  # in the middle of the round at Talquime
    typed = TypedTrip(
        [each.id for each in calendar.drivers], other.id, wall + timedelta(hours=12), wall + timedelta(days=2)
    )
    before = (demo_store.all(Stay), demo_store.all(Leg))
    with pytest.raises(InputError, match=driver.name):
        plan_trip(demo_store, typed, by="coach")
    assert (demo_store.all(Stay), demo_store.all(Leg)) == before


def test_what_is_not_chosen_is_named(store: Store) -> None:
    driver, venue = own_team(store)
    with pytest.raises(InputError, match=r"^place: "):
        plan_trip(store, trip(driver, None), by="coach")
    with pytest.raises(InputError, match=r"^drivers: "):
        plan_trip(store, TypedTrip((), venue.id, WALL, WALL + timedelta(days=1)), by="coach")
    with pytest.raises(InputError, match="leaves"):
        plan_trip(store, trip(driver, venue.id, days=-1), by="coach")


def test_the_page_keeps_a_stay_and_undoes_it(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    driver, venue = own_team(store)
    mark_begun_empty(store)
    monkeypatch.setenv("PLANNER_STORE", str(store.path))
    at = open_page("team")
    at.segmented_control(key="team_part").set_value("Stays")
    at.run()
    assert "No stay away from home is planned" in said(at)
    at.button_group(key="stay_drivers_0").set_value([driver.id])
    at.selectbox(key="stay_place_0").set_value(venue.id)
    at = press(at.run(), "Keep the stay")
    assert not at.exception
    assert not at.error
    assert "Kept: 1 driver in Kuyumba." in said(at)
    (stay,) = [s for s in store.all(Stay) if s.place_id == venue.id]
    assert stay.arrive_at.astimezone(UTC).minute == 0
    at = press(at, "Undo")
    assert store.all(Stay) == []


def test_a_guessed_place_is_called_one_on_the_morning_and_the_reading(
    store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    own_team(store)
    mark_begun_empty(store)
    monkeypatch.setenv("PLANNER_STORE", str(store.path))
    assert "No stay is planned now for 1 driver" in said(open_page("this_morning"))
    at = open_page("readings")
    assert "at Low Moor, 80 m (guessed, no stay planned)" in said(at)
