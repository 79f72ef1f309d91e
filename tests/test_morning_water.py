"""The morning's mass, urine and thirst against the driver's own baseline, as one of the four outcomes."""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, datetime, timedelta

import pytest

from planner.hydration.model import MorningMark
from planner.hydration.morning import baseline_kg, judge_morning
from planner.wording import UnitChoice

NOW = datetime(2031, 5, 14, 6, 30, tzinfo=UTC)
EARLIER = [MorningMark(1, NOW - timedelta(days=day), 80.0 + 0.2 * (day % 3 - 1)) for day in range(1, 8)]


def mark(
    change_pct: float | None = None,
    colour: int | None = None,
    gravity: float | None = None,
    thirsty: bool | None = None,
) -> MorningMark:
    mass = None if change_pct is None else 80.0 * (1.0 + change_pct / 100.0)
    return MorningMark(1, NOW, mass, colour, gravity, thirsty)


@pytest.mark.parametrize(
    ("marks", "likelihood", "outcome"),
    [
        # From memory, Cheuvront & Sawka 2005: the three worked cases. The outcomes are judgement.
        (mark(-1.2, 6, thirsty=False), "likely", "repeat"),
        (mark(-0.4, 3, thirsty=False), "none", "in range"),
        (mark(-1.5, 6, thirsty=True), "very likely", "refer"),
        (mark(-1.2, 3, thirsty=False), "unclear", "repeat"),
        (mark(-0.4, 6, thirsty=False), "unclear", "in range"),
        (mark(-2.1, 3, thirsty=False), "unclear", "refer"),
        (mark(0.9, 3, thirsty=False), "none", "in range"),
        # Published: specific gravity over 1.030 is serious. Judgement: beyond 3 % the entry is doubted first.
        (mark(0.0, None, 1.031, thirsty=False), "unclear", "refer"),
        (mark(0.0, None, 1.025, thirsty=True), "likely", "repeat"),
        (mark(-3.2, 6, thirsty=True), "likely", "refer"),
        (mark(-3.2, 6, thirsty=False), "unclear", "repeat"),
        (mark(3.2, 3, thirsty=False), "none", "repeat"),
        (mark(None, 6, thirsty=True), "likely", "repeat"),
    ],
)
def test_the_rule(marks: MorningMark, likelihood: str, outcome: str) -> None:
    found = judge_morning(marks, EARLIER)
    assert (found.likelihood, found.outcome) == (likelihood, outcome)
    assert (found.advice == "") == (outcome == "in range")


def test_a_doubted_mass_is_weighed_again_and_counts_for_nothing() -> None:
    found = judge_morning(mark(-3.5, 3, thirsty=False), EARLIER)
    assert found.likelihood == "none"
    assert "Weigh again" in found.advice
    assert "80.0 kg" in found.reasons[0].replace("\u00a0", " ")


def test_two_mornings_make_no_baseline() -> None:
    found = judge_morning(mark(-5.0, 3, thirsty=False), EARLIER[:2])
    assert found.baseline_kg is None
    assert found.mass_change_pct is None
    assert found.outcome == "in range"
    assert "no baseline yet" in found.reasons[0]


def test_the_baseline_is_the_median_of_four_weeks_before() -> None:
    old = MorningMark(1, NOW - timedelta(days=40), 95.0)
    later = MorningMark(1, NOW + timedelta(days=1), 95.0)
    empty = MorningMark(1, NOW - timedelta(days=9), None)
    odd = MorningMark(1, NOW - timedelta(days=10), 60.0)
    marks = [*EARLIER, old, later, empty, odd]
    assert baseline_kg(NOW, marks) == pytest.approx(80.0, abs=0.2)


def test_up_high_pale_urine_is_not_trusted() -> None:
    pale = judge_morning(mark(-0.4, 2, thirsty=False), EARLIER, elevation_m=2600.0)
    assert any("trust mass and thirst" in reason for reason in pale.reasons)
    dark = judge_morning(mark(-0.4, 6, thirsty=False), EARLIER, elevation_m=2600.0)
    low = judge_morning(mark(-0.4, 2, thirsty=False), EARLIER, elevation_m=300.0)
    for other in (dark, low):
        assert not any("trust mass and thirst" in reason for reason in other.reasons)


def test_nothing_noted_is_said_so() -> None:
    found = judge_morning(mark(), EARLIER)
    assert found.outcome == "in range"
    assert found.reasons == ("mass not taken",)


def test_pounds_by_choice() -> None:
    found = judge_morning(replace(mark(-1.2), urine_colour=6), EARLIER, units=UnitChoice(mass="lb"))
    assert "176.4" in found.reasons[0]
    assert "urine colour 6 of 8" in found.reasons
