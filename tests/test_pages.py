"""Every page, run without a browser: with the demo season, with nothing, and begun empty."""

from __future__ import annotations

import ast
import re
from dataclasses import replace

import pytest
from screens import PAGES, ROOT, first_line, html_of, open_page, press, said
from streamlit.testing.v1 import AppTest

from planner.physiology.illness import EMERGENCY_SIGNS
from planner.season.model import Driver, Leg
from planner.services.workspace import (
    FROZEN_CLOCK,
    choose_units,
    mark_begun_empty,
    remember_name,
    units_of,
)
from planner.store.store import Store
from planner.ui.cautions import WHO_DECIDES
from planner.ui.navigation import PAGES as MENU
from planner.wording import UnitChoice

NO_VALUE = re.compile(r"\b(nan|None|NaN|inf|NaT|Traceback)\b")


def opened(stem: str, store: Store, monkeypatch: pytest.MonkeyPatch) -> AppTest:
    monkeypatch.setenv("PLANNER_STORE", str(store.path))
    at = open_page(stem)
    assert not at.exception
    assert [error.value for error in at.error] == []
    return at


def test_every_page_is_in_the_menu() -> None:
    assert set(PAGES) <= {stem for stem, _ in MENU}
    assert "this_morning" in PAGES


@pytest.mark.parametrize("stem", PAGES)
def test_with_the_demo_it_answers_in_its_first_line(
    stem: str, demo_store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    at = opened(stem, demo_store, monkeypatch)
    assert len(first_line(at).split()) >= 3
    assert "No drivers yet" not in first_line(at)
    assert not NO_VALUE.search(said(at))


@pytest.mark.parametrize("stem", PAGES)
def test_an_empty_store_is_offered_the_demo_or_an_own_team(
    stem: str, store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    at = opened(stem, store, monkeypatch)
    assert first_line(at).startswith("No drivers yet.")
    assert {"Open the demo season", "Begin with my own team"} <= {button.label for button in at.button}


@pytest.mark.parametrize("stem", PAGES)
def test_begun_empty_it_says_what_to_do_first(
    stem: str, store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    mark_begun_empty(store)
    at = opened(stem, store, monkeypatch)
    assert len(first_line(at).split()) >= 3
    assert not NO_VALUE.search(said(at))


@pytest.mark.parametrize("stem", PAGES)
def test_under_every_screen_stand_the_cautions(
    stem: str, demo_store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    at = opened(stem, demo_store, monkeypatch)
    text = said(at)
    assert text.count(WHO_DECIDES) == 1
    assert "No diagnosis and no clearance to drive." in text
    # At the head behind one button, and again at the foot.
    for words in EMERGENCY_SIGNS.values():
        assert text.lower().count(words) >= 2


def test_the_demo_is_opened_by_its_button(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    at = press(opened("this_morning", store, monkeypatch), "Open the demo season")
    assert not at.exception
    assert first_line(at).startswith("8 drivers: ")


def test_an_own_team_begins_by_its_button_and_is_not_asked_again(
    store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    at = press(opened("this_morning", store, monkeypatch), "Begin with my own team")
    assert first_line(at).startswith("Nobody in the team yet: add places first")
    assert first_line(opened("this_morning", store, monkeypatch)) == "No drivers yet."
    assert "Open the demo season" not in {button.label for button in at.button}


def test_stored_text_is_shown_as_typed(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    driver = demo_store.all(Driver)[0]
    name = '<img src=x onerror="alert(1)"> **bold**'
    demo_store.change(replace(driver, name=name), by="coach")
    at = opened("this_morning", demo_store, monkeypatch)
    bodies = " ".join(html_of(at))
    assert "<img" not in bodies
    assert "&lt;img src=x onerror=&quot;alert(1)&quot;&gt; **bold**" in bodies
    driver_pills = opened("readings", demo_store, monkeypatch).button_group[1]
    assert any(option.startswith(r"\<img src") for option in driver_pills.options)
    assert not any(option.startswith("<") for option in driver_pills.options)


@pytest.mark.parametrize("stem", PAGES)
def test_stays_without_their_legs_break_no_page(
    stem: str, demo_store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    with demo_store.transaction("coach"):
        for leg in demo_store.all(Leg):
            demo_store.remove(leg, by="coach")
    opened(stem, demo_store, monkeypatch)


def test_a_spread_team_is_told_with_places_and_times(
    demo_store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    demo_store.set_setting(FROZEN_CLOCK, "2026-06-11T12:00:00+00:00")  # the demo's drivers are at their homes
    text = said(opened("this_morning", demo_store, monkeypatch))
    assert "The team is spread" in text
    assert "at Okunagi, 40 m, 21:00 JST" in text  # computed: 12:00 UTC at UTC+9


def test_a_fault_is_one_plain_line(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("planner.ui.cached.this_morning", lambda store, at: 1 / 0)
    monkeypatch.setenv("PLANNER_STORE", str(demo_store.path))
    at = open_page("this_morning")
    assert not at.exception
    (error,) = at.error
    assert "fault in the program" in error.value
    assert "Traceback" not in error.value
    assert "\n" not in error.value
    assert said(at).count(WHO_DECIDES) == 1


def test_a_store_that_cannot_be_opened_is_one_plain_line(
    store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    other = store.path.with_name("other.db")
    other.write_bytes(b"something else entirely, long enough to be looked at by the database library" * 20)
    monkeypatch.setenv("PLANNER_STORE", str(other))
    at = open_page("this_morning")
    assert not at.exception
    (error,) = at.error
    assert "not a database of this program" in error.value.replace("\\", "")


def test_the_name_and_the_units_are_kept(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    remember_name(demo_store, "  Ada   Lind ")
    choose_units(demo_store, "Ada Lind", UnitChoice(elevation="ft", pressure="mmHg"))
    assert units_of(demo_store, "somebody else") == UnitChoice()
    at = opened("this_morning", demo_store, monkeypatch)
    assert "7 382 ft" in said(at)  # computed: 2250 m / 0.3048
    assert "mmHg" in said(at)


@pytest.mark.parametrize("stem", PAGES)
def test_a_page_goes_through_services_and_not_around_them(stem: str) -> None:
    tree = ast.parse((ROOT / "pages" / f"{stem}.py").read_text(encoding="utf-8"))
    imported = {
        name
        for node in ast.walk(tree)
        if isinstance(node, ast.Import | ast.ImportFrom)
        for name in ([node.module] if isinstance(node, ast.ImportFrom) else [a.name for a in node.names])
    }
    imported.discard("planner.store.store")  # the type of what a service is handed
    around = ("sqlalchemy", "planner.store", "planner.exchange")
    assert [name for name in imported if name and name.startswith(around)] == []
