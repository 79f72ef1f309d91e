"""The Season page with the demo, with nothing, and with rounds but nobody to drive."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta

import pytest
from screens import first_line, open_page, said

from planner.season.model import Place, Round, Session
from planner.services.workspace import mark_begun_empty
from planner.store.store import Store


def test_without_rounds_it_says_what_to_do_first(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PLANNER_STORE", str(store.path))
    mark_begun_empty(store)
    assert first_line(open_page("season")).startswith("No rounds yet.")


def test_the_demo_shows_the_high_rounds_and_where_everybody_is(
    demo_store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("PLANNER_STORE", str(demo_store.path))
    at = open_page("season")
    assert not at.exception
    assert first_line(at).startswith("19 rounds, 5 of them high. On now: Talquime Round")
    shown = said(at)
    assert "What the present plan gives Bastien Corvelle" in shown
    assert "Sumaqara Round" in shown
    assert "Where everybody is on Sat 6 Jun" in shown
    assert len(at.get("vega_lite_chart")) == 1
    at.selectbox[0].select_index(1).run()
    assert not at.exception
    assert "What the present plan gives Ilse Varnholt" in said(at)


def test_rounds_without_drivers_are_drawn_all_the_same(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PLANNER_STORE", str(store.path))
    mark_begun_empty(store)
    place = store.add(Place("Alto Cerro", "America/Bogota", 2240.0, 2240.0, 4.0, -74.0), by="coach")
    given = store.add(Round(1, "Cerro Round", place.id), by="coach")
    start = datetime.now(UTC) + timedelta(days=30)
    store.add(Session(given.id, "race", "Race", start, start + timedelta(hours=2)), by="coach")
    at = open_page("season")
    assert not at.exception
    assert first_line(at).startswith("1 round, 1 of them high. Next: Cerro Round")
    assert "No drivers yet. Add them on Team." in said(at)
