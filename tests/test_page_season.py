"""The Season page with the demo, with nothing, and with rounds but nobody to drive."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest
import streamlit as st
from streamlit.testing.v1 import AppTest

from planner.season.model import Place, Round, Session
from planner.services.importing import load_demo
from planner.services.workspace import mark_begun_empty
from planner.store.store import Store

PAGE = Path(__file__).parents[1] / "pages" / "season.py"


@pytest.fixture(autouse=True)
def page_of_this_store(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    st.cache_resource.clear()
    st.cache_data.clear()
    monkeypatch.setenv("PLANNER_STORE", str(store.path))


def run() -> AppTest:
    at = AppTest.from_file(str(PAGE), default_timeout=20)
    at.run()
    assert not at.exception
    return at


def texts(at: AppTest) -> str:
    return " ".join(str(element.proto.body) for element in at.get("html"))


def test_an_empty_store_is_offered_a_start(store: Store) -> None:
    assert "No drivers yet" in texts(run())


def test_without_rounds_it_says_what_to_do_first(store: Store) -> None:
    mark_begun_empty(store)
    assert "No rounds yet" in texts(run())


def test_the_demo_shows_the_high_rounds_and_where_everybody_is(store: Store) -> None:
    load_demo(store)
    at = run()
    shown = texts(at)
    assert "19 rounds, 5 of them high. On: Talquime Round" in shown
    assert "What the present plan gives Bastien Corvelle" in shown
    assert "Sumaqara Round" in shown
    assert "Where everybody is on Sat 6 Jun" in shown
    assert "nan" not in shown
    assert "None" not in shown
    assert len(at.get("vega_lite_chart")) == 1


def test_another_driver_can_be_chosen(store: Store) -> None:
    load_demo(store)
    at = run()
    at.selectbox[0].select_index(1).run()
    assert not at.exception
    assert "What the present plan gives Ilse Varnholt" in texts(at)


def test_rounds_without_drivers_are_drawn_all_the_same(store: Store) -> None:
    mark_begun_empty(store)
    place = store.add(Place("Alto Cerro", "America/Bogota", 2240.0, 2240.0, 4.0, -74.0), by="coach")
    given = store.add(Round(1, "Cerro Round", place.id), by="coach")
    start = datetime.now(UTC) + timedelta(days=30)
    store.add(Session(given.id, "race", "Race", start, start + timedelta(hours=2)), by="coach")
    shown = texts(run())
    assert "1 round, 1 of them high. Next: Cerro Round" in shown
    assert "No drivers yet. Add them on Team." in shown
