"""The Driver page: the sentence, the chart, one reading explained, the next high round."""

from __future__ import annotations

import pytest
from screens import first_line, open_page, said
from streamlit.testing.v1 import AppTest

from planner.season.model import Driver, Place
from planner.store.store import Store


@pytest.fixture
def at(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> AppTest:
    monkeypatch.setenv("PLANNER_STORE", str(demo_store.path))
    opened = open_page("driver")
    assert not opened.exception
    return opened


def test_the_first_line_says_how_much_is_the_drivers_own(at: AppTest) -> None:
    line = first_line(at)
    assert line.startswith("Bastien Corvelle: ")
    assert "readings" in line
    assert line.endswith("his own.")


def test_the_last_reading_is_explained_first(at: AppTest) -> None:
    shown = said(at)
    assert "refer" in shown
    assert "Tell the team physician today." in shown
    assert "points from the middle of the range" in shown
    assert "full alveolar gas equation" in shown
    assert "Severinghaus 1979" in shown
    assert "between people" in shown


def test_another_reading_can_be_chosen(at: AppTest) -> None:
    before = said(at)
    [choice] = [box for box in at.selectbox if box.label.startswith("Press a mark")]
    choice.select_index(20).run()
    assert not at.exception
    assert said(at) != before


@pytest.mark.parametrize("window", ["12 weeks", "season", "all"])
def test_the_chart_is_drawn_for_every_window(at: AppTest, window: str) -> None:
    at.segmented_control(key="driver_window").set_value(window).run()
    assert not at.exception
    assert [error.value for error in at.error] == []
    assert len(at.get("vega_lite_chart")) == 1


def test_the_next_high_round_and_the_model_are_shown(at: AppTest) -> None:
    shown = said(at)
    assert "Sumaqara Round, 3 200 m" in shown
    assert "race morning" in shown
    assert "Wilderness Medical Society 2024" in shown
    assert "time constant of acclimatisation" in shown
    assert "Muhm 2007" in shown
    assert "judgement" in shown


def test_every_driver_of_the_demo_can_be_shown(at: AppTest) -> None:
    box = at.selectbox(key="driver_shown")
    for i in range(len(box.options)):
        at.selectbox(key="driver_shown").select_index(i).run()
        assert not at.exception
        assert [error.value for error in at.error] == []


def test_a_driver_without_readings_or_stays(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    home = store.add(Place("Vallmora", "Europe/Madrid", 100.0, 100.0, 41.0, 1.5), by="coach")
    store.add(Driver("Nova Nobody", "woman", home.id, 60.0, 168.0), by="coach")
    monkeypatch.setenv("PLANNER_STORE", str(store.path))
    at = open_page("driver")
    assert not at.exception
    assert [error.value for error in at.error] == []
    assert "Nova Nobody: no reading teaches yet" in first_line(at)
    assert "No reading here yet. Type the first one on Readings." in said(at)
    assert "No high round ahead." in said(at)


def test_without_drivers_it_says_what_to_do(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    store.set_setting("begun_empty", "2026-01-01")
    monkeypatch.setenv("PLANNER_STORE", str(store.path))
    assert first_line(open_page("driver")).startswith("No drivers yet.")
