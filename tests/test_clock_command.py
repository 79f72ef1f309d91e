"""`clock`: the windows of the published table, day by day, and mistakes in one line."""

from __future__ import annotations

import json

import pytest

from planner.__main__ import main


def rows(capsys: pytest.CaptureFixture[str], *words: str) -> list[dict[str, object]]:
    assert main(["clock", *words, "--json"]) == 0
    found: list[dict[str, object]] = json.loads(capsys.readouterr().out)
    return found


def test_published_windows_on_the_day_of_arrival(capsys: pytest.CaptureFixture[str]) -> None:
    # Published, after Reilly & Waterhouse: 6 east avoid 03-09, seek 11-17; 6 west avoid 23-05, seek 15-21.
    assert rows(capsys, "6")[0] == {
        "day": 1, "offset_h": 6.0,
        "seek_from": "11:00", "seek_to": "17:00", "avoid_from": "03:00", "avoid_to": "09:00",
    }  # fmt: skip
    west = rows(capsys, "-6")[0]
    assert (west["seek_from"], west["seek_to"]) == ("15:00", "21:00")
    assert (west["avoid_from"], west["avoid_to"]) == ("23:00", "05:00")


@pytest.mark.parametrize(("zones", "days", "second"), [("8", 9, 7.05), ("-9", 6, -9.0 + 92.0 / 60.0)])
def test_a_row_a_day_until_adapted(
    zones: str, days: int, second: float, capsys: pytest.CaptureFixture[str]
) -> None:
    # Computed by hand from the published rates: 57 min a day east, 92 west.
    found = rows(capsys, zones)
    assert [r["day"] for r in found] == list(range(1, days + 1))
    assert found[1]["offset_h"] == pytest.approx(second)
    assert list(found[0]) == ["day", "offset_h", "seek_from", "seek_to", "avoid_from", "avoid_to"]


def test_ten_east_is_led_west_and_waking_moves_the_windows(capsys: pytest.CaptureFixture[str]) -> None:
    assert rows(capsys, "10")[0]["offset_h"] == -14.0
    assert rows(capsys, "6", "--wake", "08:30")[0]["seek_from"] == "12:30"
    assert rows(capsys, "0") == []


def test_notes_say_what_is_uncertain(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["clock", "9"]) == 0
    said = capsys.readouterr().out
    assert "other way" in said
    assert "physician" in said
    assert main(["clock", "2"]) == 0
    assert "Below 3 zones" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["30"], "ZONES: 30.0 cannot be used, expected -14 to 14 h"),
        (["3", "--wake", "25:00"], "--wake: '25:00' cannot be used, expected a time of day as HH:MM"),
    ],
)
def test_mistakes_are_one_line(words: list[str], said: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["clock", *words]) == 2
    error = capsys.readouterr().err
    assert said in error
    assert error.count("\n") == 1
