"""The search panel and the calendar files of the Season page, without a browser."""

from __future__ import annotations

import pytest
from screens import open_page, press, said
from streamlit.testing.v1 import AppTest

from planner.season.model import Round
from planner.services.importing import demo_folder
from planner.services.season import read_calendar
from planner.store.store import Store


@pytest.fixture
def at(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> AppTest:
    monkeypatch.setenv("PLANNER_STORE", str(demo_store.path))
    opened = open_page("season")
    opened.toggle(key="season_search_shown").set_value(True).run()
    assert not opened.exception
    return opened


def searched(at: AppTest, most: float = 6.0) -> AppTest:
    at.number_input(key="season_most").set_value(most)
    return press(at, "Search")


def test_a_search_shows_the_trade_off_and_what_changes(at: AppTest, demo_store: Store) -> None:
    version = demo_store.version()
    found = searched(at)
    assert not found.exception
    assert len(found.get("vega_lite_chart")) == 2
    text = said(found)
    assert "worth a look: from" in text
    assert "What it gives and costs, hour by hour" in text
    assert "Sumaqara Round, SpO2 on race morning" in text
    assert demo_store.version() == version


def test_a_plan_becomes_the_itinerary_and_is_undone(at: AppTest, demo_store: Store) -> None:
    driver = read_calendar(demo_store).drivers[0]
    before = read_calendar(demo_store).itinerary_of(driver)
    found = press(searched(at), "Make it the plan")
    assert not found.exception
    assert "Kept: the new plan of Bastien Corvelle" in said(found)
    assert read_calendar(demo_store).itinerary_of(driver) != before
    assert "search again" in said(found)
    undone = press(found, "Undo the new plan")
    assert not undone.exception
    assert read_calendar(demo_store).itinerary_of(driver) == before
    assert demo_store.check() == []


def test_what_stands_in_the_way_is_named(at: AppTest) -> None:
    floor = next(n for n in at.number_input if str(n.key).startswith("season_floor_"))
    floor.set_value(99.0)
    found = searched(at)
    assert "No plan keeps every limit." in said(found)
    assert "In the way: the lowest race-morning SpO2 at Sumaqara Round." in said(found)


def test_another_question_asks_for_another_search(at: AppTest) -> None:
    found = searched(at)
    found.number_input(key="season_rate_flight").set_value(2.0).run()
    assert "search again for what is asked now" in said(found)


def test_a_page_left_keeps_nothing(at: AppTest, demo_store: Store) -> None:
    version = demo_store.version()
    searched(at)
    elsewhere = at.switch_page("../pages/places.py").run()
    assert not elsewhere.exception
    assert demo_store.version() == version


def test_the_calendar_of_a_driver_can_be_downloaded(at: AppTest) -> None:
    assert any(button.proto.label.startswith("Calendar of Bastien") for button in at.get("download_button"))


def test_rounds_that_are_there_already_are_told(at: AppTest, demo_store: Store) -> None:
    rounds = len(demo_store.all(Round))
    data = (demo_folder() / "calendar.ics").read_bytes()
    read = at.file_uploader(key="ics_upload").upload("calendar.ics", data, "text/calendar").run()
    assert not read.exception
    assert "0 rounds to take, 19 already there, 0 entries refused." in said(read)
    assert len(demo_store.all(Round)) == rounds


def test_the_iron_check_is_due_before_the_next_round_that_asks_for_it(at: AppTest) -> None:
    # From memory: four to six weeks ahead; the first session at Sumaqara is on 7 August.
    assert "Iron of Bastien Corvelle is to be looked at from Fri 26 Jun to Fri 10 Jul" in said(at)
