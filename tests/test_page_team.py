"""The Team page: what is typed is kept, refused with its field named, removed and put back."""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, date, datetime, time

import pytest
from screens import first_line, open_page, press, said
from streamlit.testing.v1 import AppTest

from planner.errors import InputError
from planner.physiology.drinking import DEFAULT_CAP_L_PER_H
from planner.season.model import Commitment, Driver, Place, Round, Session
from planner.services.fluids import next_session, plan_session, sessions_in_order
from planner.services.limits import drinks_cap_l_per_h, keep_limits, kept_limits, season_limits
from planner.services.season import read_calendar
from planner.services.team import begin_own_team
from planner.services.workspace import choose_units, is_demo, last_name, mark_begun_empty
from planner.store.store import Store
from planner.wording import UnitChoice

VENUE = Place("Alto Cerro", "America/Bogota", 2250.0, 2300.0, 4.0, -74.0)


@pytest.fixture(autouse=True)
def begun(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    mark_begun_empty(store)
    monkeypatch.setenv("PLANNER_STORE", str(store.path))


def opened(part: str = "") -> AppTest:
    at = open_page("team")
    assert not at.exception
    return turn_to(at, part) if part else at


def turn_to(at: AppTest, part: str) -> AppTest:
    at.segmented_control(key="team_part").set_value(part)
    at.run()
    assert not at.exception
    return at


def field(at: AppTest, kind: str, label: str):  # type: ignore[no-untyped-def]
    [found] = [element for element in getattr(at, kind) if element.label.startswith(label)]
    return found


def type_place(at: AppTest, name: str, track: float, zone: str = "Europe/Madrid") -> AppTest:
    field(at, "text_input", "Name").set_value(name)
    field(at, "selectbox", "Time zone").set_value(zone)
    field(at, "number_input", "Elevation of the track").set_value(track)
    field(at, "number_input", "Elevation of the beds").set_value(120.0)
    field(at, "number_input", "Latitude").set_value(41.0)
    field(at, "number_input", "Longitude").set_value(1.5)
    at = press(at, "Keep")
    assert not at.exception
    return at


def test_an_empty_team_is_told_what_to_do_first() -> None:
    at = opened()
    assert first_line(at) == "Nobody in the team yet: add places first, then drivers, then rounds."
    assert field(at, "text_input", "Name").value == ""
    assert "Add the drivers" in said(turn_to(at, "Drivers"))


def test_a_place_is_kept_and_the_next_form_is_empty(store: Store) -> None:
    at = type_place(opened("Places"), "  Vallmora ", 100.0)
    assert [place.name for place in store.all(Place)] == ["Vallmora"]
    assert "Kept: Vallmora." in said(at)
    assert field(at, "text_input", "Name").value == ""


def test_a_refused_place_names_the_field_and_keeps_what_was_typed(store: Store) -> None:
    at = type_place(opened("Places"), "Vallmora", 99999.0)
    assert store.all(Place) == []
    [error] = at.error
    assert "Elevation of the track" in error.value
    assert "99999" in error.value
    assert field(at, "text_input", "Name").value == "Vallmora"
    assert field(at, "number_input", "Latitude").value == 41.0
    field(at, "number_input", "Elevation of the track").set_value(100.0)
    at = press(at, "Keep")
    assert [place.track_elevation_m for place in store.all(Place)] == [100.0]


def test_what_was_half_typed_is_there_after_another_page(store: Store) -> None:
    at = opened("Places")
    field(at, "text_input", "Name").set_value("Vallmora")
    field(at, "selectbox", "Time zone").set_value("Europe/Madrid")
    field(at, "number_input", "Elevation of the track").set_value(100.0)
    at.run()
    for page in ("season", "team"):
        at = at.switch_page(f"../pages/{page}.py").run()
        assert not at.exception
    assert field(at, "text_input", "Name").value == "Vallmora"
    assert field(at, "selectbox", "Time zone").value == "Europe/Madrid"
    assert field(at, "number_input", "Elevation of the track").value == 100.0
    assert store.all(Place) == []


def test_a_record_that_somebody_else_changed_is_shown_as_it_is_now(store: Store) -> None:
    kept = store.add(VENUE, by="coach")
    at = opened("Places")
    at.selectbox(key="place_chosen").set_value(kept.id)
    at.run()
    store.change(replace(kept, track_elevation_m=2260.0), by="physician")
    assert field(at.run(), "number_input", "Elevation of the track").value == 2260.0


def test_a_place_is_typed_in_feet_and_kept_unchanged_when_not_touched(store: Store) -> None:
    store.add(VENUE, by="coach")
    choose_units(store, last_name(store), UnitChoice(elevation="ft"))
    at = opened("Places")
    field(at, "selectbox", "Add or change a place").select_index(1)
    at.run()
    # computed: 2250 m and 2300 m / 0.3048, to whole feet
    assert field(at, "number_input", "Elevation of the track").value == 7382.0
    assert field(at, "number_input", "Elevation of the beds").value == 7546.0
    field(at, "number_input", "Elevation of the beds").set_value(7000.0)
    press(at, "Keep")
    [kept] = store.all(Place)
    assert kept.track_elevation_m == 2250.0
    assert kept.bed_elevation_m == pytest.approx(2133.6)


def test_a_driver_is_added_changed_removed_and_put_back(store: Store) -> None:
    home = store.add(VENUE, by="coach")
    at = opened("Drivers")
    field(at, "text_input", "Name").set_value("Ines Corvo")
    field(at, "selectbox", "Sex").set_value("woman")
    field(at, "selectbox", "Home").set_value(home.id)
    field(at, "number_input", "Body mass").set_value(60.0)
    field(at, "number_input", "Height").set_value(168.0)
    at = press(at, "Keep")
    assert not at.exception
    [driver] = store.all(Driver)
    assert (driver.name, driver.sex, driver.mass_kg, driver.bottle_ml) == (
        "Ines Corvo",
        "woman",
        60.0,
        1000.0,
    )

    field(at, "selectbox", "Add or change a driver").set_value(driver.id)
    at.run()
    field(at, "number_input", "Highest bed").set_value(2500.0)
    field(at, "date_input", "Iron checked on").set_value(date(2026, 5, 4))
    at = press(at, "Keep")
    [driver] = store.all(Driver)
    assert (driver.highest_bed_elevation_m, driver.iron_checked_on) == (2500.0, date(2026, 5, 4))

    at = press(at, "Remove")
    assert not at.exception
    assert store.all(Driver) == []
    at = press(at, "Put back Ines Corvo")
    assert not at.exception
    assert store.all(Driver) == [driver]


@pytest.mark.parametrize("missing", ["Sex", "Home"])
def test_a_driver_without_what_is_needed_is_refused(store: Store, missing: str) -> None:
    home = store.add(VENUE, by="coach")
    at = opened("Drivers")
    field(at, "text_input", "Name").set_value("Ines Corvo")
    if missing != "Sex":
        field(at, "selectbox", "Sex").set_value("woman")
    if missing != "Home":
        field(at, "selectbox", "Home").set_value(home.id)
    field(at, "number_input", "Body mass").set_value(60.0)
    field(at, "number_input", "Height").set_value(168.0)
    at = press(at, "Keep")
    [error] = at.error
    assert error.value.startswith(missing.lower())
    assert store.all(Driver) == []


def test_a_place_in_use_cannot_be_removed(store: Store) -> None:
    home = store.add(VENUE, by="coach")
    store.add(Driver("Ines Corvo", "woman", home.id, 60.0, 168.0), by="coach")
    at = opened("Places")
    field(at, "selectbox", "Add or change a place").set_value(home.id)
    at.run()
    at = press(at, "Remove")
    assert len(at.error) == 1
    assert store.all(Place) == [home]


def test_a_round_and_its_session_in_the_venues_time(store: Store) -> None:
    venue = store.add(VENUE, by="coach")
    at = opened("Rounds")
    field(at, "text_input", "Name").set_value("Cerro Round")
    field(at, "selectbox", "Place").set_value(venue.id)
    at = press(at, "Keep")
    [given] = store.all(Round)
    assert (given.number, given.name) == (1, "Cerro Round")

    field(at, "selectbox", "Add or change a round").set_value(given.id)
    at.run()
    [_, name] = [element for element in at.text_input if element.label == "Name"]
    name.set_value("Night race")
    field(at, "segmented_control", "Kind").set_value("race")
    field(at, "date_input", "Day at").set_value(date(2026, 6, 7))
    field(at, "time_input", "Starts").set_value(time(23))
    field(at, "time_input", "Ends").set_value(time(1))
    [_, keep] = [button for button in at.button if button.label == "Keep"]
    keep.click()
    at.run()
    assert not at.exception
    [session] = store.all(Session)
    # computed by hand: Bogota is five hours behind UTC all year; the end is on the next day
    assert session.starts_at == datetime(2026, 6, 8, 4, tzinfo=UTC)
    assert session.ends_at == datetime(2026, 6, 8, 6, tzinfo=UTC)
    assert (session.round_id, session.kind) == (given.id, "race")


def test_a_commitment_that_ends_before_it_starts_is_refused(store: Store) -> None:
    venue = store.add(VENUE, by="coach")
    driver = store.add(Driver("Ines Corvo", "woman", venue.id, 60.0, 168.0), by="coach")
    at = opened("Commitments")
    field(at, "text_input", "Name").set_value("Factory day")
    at = press(at, "Keep")
    assert at.error[0].value.startswith("driver and place")
    field(at, "selectbox", "Driver").set_value(driver.id)
    field(at, "selectbox", "Place").set_value(venue.id)
    field(at, "date_input", "First day").set_value(date(2026, 6, 10))
    field(at, "date_input", "Last day").set_value(date(2026, 6, 9))
    at = press(at, "Keep")
    assert at.error[0].value.startswith("end")
    assert field(at, "text_input", "Name").value == "Factory day"
    field(at, "date_input", "Last day").set_value(date(2026, 6, 10))
    at = press(at, "Keep")
    assert [each.name for each in store.all(Commitment)] == ["Factory day"]


def test_limits_are_kept_and_carry_their_source(store: Store) -> None:
    at = opened("Limits")
    assert "judgement" in said(at)
    assert "Wilderness Medical Society 2024" in said(at)
    at.number_input(key="limit_lowest_race_spo2_pct").set_value(92.0)
    at.number_input(key="limit_largest_clock_offset_h").set_value(2.0)
    at = press(at, "Keep")
    assert not at.exception
    assert season_limits(store).lowest_race_spo2_pct == 92.0
    assert season_limits(store).largest_clock_offset_h == 2.0
    assert season_limits(store).shortest_landing_to_session_h == 15.0


def test_an_empty_limit_is_no_limit_where_that_is_allowed(store: Store) -> None:
    values = kept_limits(store) | {"largest_clock_offset_h": None, "most_nights_away": 7.0}
    keep_limits(store, values)
    assert season_limits(store).largest_clock_offset_h is None
    assert season_limits(store).most_nights_away == 7
    assert drinks_cap_l_per_h(store) == DEFAULT_CAP_L_PER_H
    with pytest.raises(InputError, match=r"^Shortest time between landing"):
        keep_limits(store, values | {"shortest_landing_to_session_h": None})
    with pytest.raises(InputError, match=r"^Highest risk class"):
        keep_limits(store, values | {"highest_risk": "some"})


def test_a_limit_out_of_range_is_refused_and_nothing_is_kept(store: Store) -> None:
    before = kept_limits(store)
    at = opened("Limits")
    at.number_input(key="limit_lowest_race_spo2_pct").set_value(92.0)
    at.number_input(key="limit_drinks_cap_l_per_h").set_value(3.0)
    at = press(at, "Keep")
    [error] = at.error
    assert error.value.startswith("Most to drink in the car")
    assert at.number_input(key="limit_lowest_race_spo2_pct").value == 92.0
    assert kept_limits(store) == before


def test_units_are_chosen_for_the_name(store: Store) -> None:
    at = opened("Units")
    assert {"Elevation", "Pressure", "Mass"} <= {control.label for control in at.segmented_control}


def test_the_demo_is_opened_from_an_empty_team(store: Store) -> None:
    at = press(opened("Data"), "Open the demo season")
    assert not at.exception
    assert first_line(at) == "8 drivers, 19 rounds."
    assert is_demo(store)


def test_the_demo_is_left_and_can_be_undone(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PLANNER_STORE", str(demo_store.path))
    drivers = demo_store.all(Driver)
    at = opened("Data")
    at.checkbox(key="leave_demo_sure").check()
    at.run()
    at = press(at, "Begin with my own team")
    assert not at.exception
    assert first_line(at).startswith("Nobody in the team yet")
    assert demo_store.all(Driver) == []
    assert not is_demo(demo_store)
    assert demo_store.check() == []
    last = demo_store.last_change_set()
    assert last is not None
    demo_store.undo(last.id, by="coach")
    assert demo_store.all(Driver) == drivers


def test_putting_the_demo_aside_is_one_change_set(demo_store: Store) -> None:
    before = demo_store.last_change_set()
    done = begin_own_team(demo_store, by="coach")
    assert before is not None
    assert done == before.id + 1
    assert demo_store.all(Place) == []
    assert demo_store.all(Round) == []


def test_the_drinking_limit_holds_in_the_plan_of_a_session(demo_store: Store) -> None:
    calendar = read_calendar(demo_store)
    now = datetime(2026, 6, 6, 14, tzinfo=UTC)
    at = next_session(sessions_in_order(calendar), now)
    assert at is not None
    keep_limits(demo_store, kept_limits(demo_store) | {"drinks_cap_l_per_h": 0.3})
    planned = plan_session(demo_store, calendar, at, now=now)
    assert planned.rows
    for row in planned.rows:
        assert float(row.plan.in_car_ml.high) <= 300.0 * at.hours + 1e-6
