"""The Places page: it answers in its first line, shows what a typed pressure changes, keeps it on request."""

from __future__ import annotations

from datetime import UTC, datetime

import pytest
from screens import first_line, open_page, press, said
from streamlit.testing.v1 import AppTest

from planner.season.model import Driver, Place, PressureMeasurement
from planner.services.workspace import choose_units, last_name
from planner.store.store import Store
from planner.wording import UnitChoice

NOW = datetime(2026, 5, 14, 6, tzinfo=UTC)


@pytest.fixture(autouse=True)
def page_of_this_store(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PLANNER_STORE", str(store.path))
    store.set_setting("clock_frozen_at", NOW.isoformat())


@pytest.fixture
def high(store: Store) -> Place:
    home = store.add(Place("Vallmora", "Europe/Madrid", 100.0, 100.0, 41.0, 1.5), by="coach")
    store.add(Driver("Ines Corvo", "woman", home.id, 60.0, 168.0), by="coach")
    return store.add(Place("Alto Cerro", "America/Bogota", 2240.0, 2000.0, 19.0, -75.0), by="coach")


def opened() -> AppTest:
    at = open_page("places")
    assert not at.exception
    return at


def test_the_first_line_answers(high: Place) -> None:
    at = opened()
    shown = said(at)
    assert "Alto Cerro: 783" in first_line(at)  # computed: West 1996, 783.46 hPa
    assert "of the oxygen at sea level" in shown
    assert "low latitudes (West 1996)" in shown
    assert "On arrival" in shown
    assert "Day 14" in shown


def test_a_typed_pressure_shows_what_it_changes_and_is_kept_only_on_the_button(
    store: Store, high: Place
) -> None:
    at = opened()
    at.number_input[0].set_value(770.0).run()
    assert not at.exception
    assert "with what you typed" in said(at)
    assert store.all(PressureMeasurement) == []
    at = press(at, "Keep this pressure")
    assert not at.exception
    [kept] = store.all(PressureMeasurement)
    assert (kept.place_id, kept.pressure_hpa, kept.measured_at) == (high.id, 770.0, NOW)
    assert "Pressure measured at the track" in said(at)

    at = press(at, "Take back the newest")
    assert not at.exception
    assert store.all(PressureMeasurement) == []
    assert "low latitudes (West 1996)" in said(at)


def test_an_impossible_pressure_is_refused_and_stays_typed(store: Store, high: Place) -> None:
    at = opened()
    at.number_input[0].set_value(1013.0).run()
    assert not at.exception
    assert len(at.error) == 1
    assert "station pressure" in at.error[0].value
    assert at.number_input[0].value == 1013.0
    assert "Keep this pressure" not in [button.label for button in at.button]
    assert store.all(PressureMeasurement) == []


def test_the_other_units_are_used_where_they_were_chosen(store: Store, high: Place) -> None:
    choose_units(store, last_name(store), UnitChoice(elevation="ft", pressure="mmHg"))
    at = opened()
    # computed: 2240 m / 0.3048; 783.5 hPa / 1.33322
    assert "7 349 ft" in said(at)
    assert "588 mmHg" in said(at)
    at.number_input[0].set_value(585.0).run()
    assert "with what you typed" in said(at)
