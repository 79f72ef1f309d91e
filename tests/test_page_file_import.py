"""A whole season brought in by files, one kind after another, and taken back."""

from __future__ import annotations

from pathlib import Path

import pytest
from screens import ROOT, first_line, open_page, press, said
from streamlit.testing.v1 import AppTest

from planner.season.model import Driver, Stay
from planner.services.workspace import mark_begun_empty
from planner.store.store import Store

DEMO = ROOT / "demo_data"


@pytest.fixture(autouse=True)
def _begun(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    mark_begun_empty(store)
    monkeypatch.setenv("PLANNER_STORE", str(store.path))


def data_part() -> AppTest:
    at = open_page("team")
    at.segmented_control(key="team_part").set_value("Data")
    return at.run()


def given(at: AppTest, path: Path) -> AppTest:
    at.file_uploader[0].set_value((path.name, path.read_bytes(), "text/csv"))
    at.run()
    assert not at.exception
    return at


def test_a_season_comes_in_by_files_in_their_order(store: Store) -> None:
    at = data_part()
    for kind in ("places", "drivers", "stays"):
        at = given(at, DEMO / f"{kind}.csv")
        assert not at.error
        taken = next(button.label for button in at.button if button.label.startswith("Take "))
        assert taken.endswith(kind)
        at = press(at, taken)
    assert first_line(at).startswith("8 drivers")  # the demo's team
    stays = len(store.all(Stay))
    assert stays > 8
    at = press(at, "Undo the import")
    assert store.all(Stay) == []
    assert len(store.all(Driver)) == 8
    assert f"Take {stays} stays" in {button.label for button in at.button}


def test_a_file_before_its_turn_is_refused_line_by_line(store: Store) -> None:
    at = given(data_part(), DEMO / "drivers.csv")
    assert "0 drivers to take, 0 already there, 8 lines refused." in said(at)
    assert store.all(Driver) == []


def test_a_file_of_no_kind_is_one_line(tmp_path: Path) -> None:
    path = tmp_path / "shopping.csv"
    path.write_text("item,amount\nice,3\n", encoding="utf-8")
    at = given(data_part(), path)
    (error,) = at.error
    assert "shopping" in error.value
    assert "\n" not in error.value
