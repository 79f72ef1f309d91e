"""The strip of mornings: a mark a reading, its shape by outcome and sleep, and words for the same."""

from __future__ import annotations

import re
from dataclasses import replace
from datetime import UTC, date, datetime

import pytest

from planner.charts.strip import floor_pct, in_words, strip
from planner.monitoring.model import Outcome, Reading
from planner.monitoring.mornings import JudgedReading, Morning
from planner.monitoring.outcome import ExpectedRange

EXPECTED = ExpectedRange(90.0, 93.0, 96.0)


def mark(spo2_pct: float = 93.0, outcome: Outcome = "in range", **changes: object) -> JudgedReading:
    reading = replace(Reading(1, 1, datetime(2031, 5, 14, 12, tzinfo=UTC), spo2_pct), **changes)
    return JudgedReading(reading, outcome, "Wed 14 May, 07:00", 'a reason with "quotes" & <signs>')


def day_with(*marks: JudgedReading, on: int = 14) -> Morning:
    return Morning(date(2031, 5, on), EXPECTED, marks)


@pytest.mark.parametrize(
    ("judged", "classes"),
    [
        (mark(), "in-range circle"),
        (mark(outcome="repeat"), "repeat circle open"),
        (mark(outcome="refer"), "refer triangle"),
        (mark(outcome="urgent"), "urgent square"),
        (mark(outcome="refer", wakefulness="asleep"), "refer diamond"),
        (mark(outcome="repeat", left_out="typing error"), "left-out cross"),
    ],
)
def test_the_shape_tells_the_outcome(judged: JudgedReading, classes: str) -> None:
    assert f'class="m {classes}"' in strip([day_with(judged)])


def test_words_in_marks_cannot_become_markup() -> None:
    drawn = strip([day_with(mark())])
    assert "<signs>" not in drawn
    assert "&lt;signs&gt;" in drawn
    assert "&quot;quotes&quot;" in drawn


def test_the_text_alternative_reads_the_values_in_order() -> None:
    mornings = [day_with(mark(91.0), on=13), day_with(mark(93.0), mark(94.0))]
    said = in_words(mornings).replace("\u00a0", " ")
    assert said == "SpO2 of the last 2 mornings, oldest first: 91 %, 93 %, 94 %."
    assert in_words([day_with()]) == "No readings in the last 1 morning."


def test_a_higher_saturation_lies_higher() -> None:
    def bottom(spo2_pct: float) -> float:
        drawn = strip([day_with(mark(spo2_pct))], low_pct=80.0)
        found = re.search(r'class="m [^"]*" title="[^"]*" style="left:50\.00%;bottom:([\d.]+)%', drawn)
        assert found is not None
        return float(found.group(1))

    assert 0.0 < bottom(85.0) < bottom(90.0) < bottom(100.0) <= 100.0


def test_the_bottom_lies_under_everything_and_shows_at_least_some_points() -> None:
    assert floor_pct([day_with(mark(84.0))]) == 83.0
    assert floor_pct([Morning(date(2031, 5, 14), ExpectedRange(95.0, 97.0, 99.0))]) == 92.0
    assert floor_pct([]) == 92.0


def test_nothing_is_drawn_of_nothing() -> None:
    assert strip([]) == ""
