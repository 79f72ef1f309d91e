"""The rules from a reading to its outcome.

Expected outcomes are this house's judgement (see the module), except the Lake Louise rule, which is published
(Roach et al. 2018, High Alt Med Biol 19:4).
"""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, datetime, timedelta

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.monitoring.model import Reading, SickPeriod
from planner.monitoring.outcome import (
    ADVICE,
    SEVERITY,
    ExpectedRange,
    Judgement,
    Sample,
    is_far_below,
    judge,
    quality_fault,
    shown,
)
from planner.wording import NO_BREAK

AT = datetime(2031, 5, 14, 11, 12, tzinfo=UTC)
RANGE = ExpectedRange(low_pct=90.0, mean_pct=93.0, high_pct=96.0, words="for her on day 2")
LOW, FAR, IN, HIGH = 88.0, 83.0, 93.0, 98.0
MINUTE, HOUR = timedelta(minutes=1), timedelta(hours=1)


def sample(spo2_pct: float, before: timedelta = timedelta(), **changes: object) -> Sample:
    reading = Reading(driver_id=1, place_id=1, taken_at=AT - before, spo2_pct=spo2_pct)
    return Sample(replace(reading, **changes), RANGE, elevation_m=2250.0, hours_there=40.0)


def spoken(judgement: Judgement) -> list[str]:
    """The reasons with plain spaces, as they are read."""
    return [reason.replace(NO_BREAK, " ") for reason in judgement.reasons]


SCORES = {"mild": (1, 1, 1, 0), "moderate": (2, 2, 2, 0), "severe": (3, 3, 2, 2), "not AMS": (0, 2, 2, 2)}


def scored(spo2_pct: float, score: str, before: timedelta = timedelta()) -> Sample:
    headache, gut, fatigue, dizziness = SCORES[score]
    return sample(spo2_pct, before, headache=headache, gut=gut, fatigue=fatigue, dizziness=dizziness)


def after_a_session(spo2_pct: float) -> Sample:
    return sample(spo2_pct, circumstance="after a session")


RULES = {
    "inside": (sample(IN), [], "in range"),
    "on the lower limit": (sample(90.0), [], "in range"),
    "on the upper limit": (sample(96.0), [], "in range"),
    "low once": (sample(LOW), [], "repeat"),
    "far below once, not yet confirmed": (sample(FAR), [], "repeat"),
    "above": (sample(HIGH), [], "repeat"),
    "low again within the hour": (sample(LOW), [sample(LOW, 10 * MINUTE)], "refer"),
    "low two mornings running": (sample(LOW), [sample(LOW, 24 * HOUR)], "refer"),
    "the other low one is too old": (sample(LOW), [sample(LOW, 31 * HOUR)], "repeat"),
    "it was put right": (sample(LOW), [sample(LOW, 24 * HOUR), sample(IN, 23 * HOUR)], "repeat"),
    "measured again, inside": (sample(IN), [sample(LOW, 10 * MINUTE)], "in range"),
    "the first had a cold hand": (sample(LOW), [sample(LOW, HOUR, warm_hand=False)], "repeat"),
    "the first is left out": (sample(LOW), [sample(LOW, HOUR, left_out="typing error")], "repeat"),
    "the first was asleep": (sample(LOW), [sample(LOW, HOUR, wakefulness="asleep")], "repeat"),
    "low twice, now far below": (sample(FAR), [sample(LOW, HOUR)], "urgent"),
    "low twice, only one was scored": (scored(LOW, "not AMS"), [sample(LOW, HOUR)], "refer"),
    "cold hand": (sample(LOW, warm_hand=False), [], "repeat"),
    "after a session": (after_a_session(IN), [], "repeat"),
    "after a session is no confirmation": (after_a_session(LOW), [sample(LOW, HOUR)], "repeat"),
    "hand moved": (sample(IN, quality_note="hand moved"), [], "repeat"),
    "left out never passes for measured": (sample(IN, left_out="typing error"), [], "repeat"),
    "mild score": (scored(IN, "mild"), [], "refer"),
    "moderate score, inside": (scored(IN, "moderate"), [], "refer"),
    "moderate score and low": (scored(LOW, "moderate"), [], "urgent"),
    "severe score": (scored(IN, "severe"), [], "urgent"),
    "a total of 6 without headache is not AMS": (scored(IN, "not AMS"), [], "in range"),
    "a score of an hour before stands": (sample(IN), [scored(IN, "mild", HOUR)], "refer"),
    "a score of the day before does not": (sample(IN), [scored(IN, "mild", 13 * HOUR)], "in range"),
    "asked again, better": (scored(IN, "not AMS"), [scored(IN, "mild", HOUR)], "in range"),
    "sign": (sample(IN, emergency_signs=("cough",)), [], "urgent"),
    "sign of an hour before stands": (sample(IN), [sample(IN, HOUR, emergency_signs=("cough",))], "urgent"),
    "sign of the day before": (sample(IN), [sample(IN, 13 * HOUR, emergency_signs=("cough",))], "in range"),
}


@pytest.mark.parametrize(("now", "earlier", "outcome"), RULES.values(), ids=RULES)
def test_outcome_of_each_rule(now: Sample, earlier: list[Sample], outcome: str) -> None:
    assert judge(now, earlier).outcome == outcome


@pytest.mark.parametrize(
    ("now_pct", "outcome"), [(83.0, "refer"), (81.1, "refer"), (81.0, "urgent"), (79.0, "urgent")]
)
def test_two_low_readings_that_fall_three_points_are_urgent(now_pct: float, outcome: str) -> None:
    wide = ExpectedRange(low_pct=85.0, mean_pct=92.0, high_pct=98.0)  # far below begins under 81
    first = replace(sample(84.0, HOUR), expected=wide)
    assert judge(replace(sample(now_pct), expected=wide), [first]).outcome == outcome


def test_two_low_readings_with_more_symptoms_are_urgent() -> None:
    def with_dizziness(dizziness: int, before: timedelta) -> Sample:
        return sample(LOW, before, headache=0, gut=1, fatigue=1, dizziness=dizziness)

    first = with_dizziness(1, HOUR)
    assert judge(with_dizziness(1, 0 * HOUR), [first]).outcome == "refer"
    assert judge(with_dizziness(2, 0 * HOUR), [first]).outcome == "urgent"


def test_every_reading_names_its_range() -> None:
    for now in (sample(IN), sample(LOW), sample(HIGH), sample(LOW, warm_hand=False), scored(IN, "severe")):
        assert any("expected 90–96 % for her on day 2" in reason for reason in spoken(judge(now)))


def test_the_worst_reason_comes_first() -> None:
    judgement = judge(sample(LOW, emergency_signs=("blue_lips",)))
    assert judgement.reasons[0] == "Emergency sign stated: blue lips."
    assert spoken(judgement)[1] == "88 %, expected 90–96 % for her on day 2: below it, once so far."
    assert judgement.advice == ADVICE["urgent"]


def test_a_low_reading_is_told_with_the_one_that_it_confirms() -> None:
    assert spoken(judge(sample(LOW), [sample(87.0, 10 * MINUTE)])) == [
        "88 %, expected 90–96 % for her on day 2: below it again (87 % 10 min before)."
    ]


def test_no_mountain_sickness_within_six_hours_of_the_gain() -> None:
    """Published: at least six hours (Roach et al. 2018)."""
    assert judge(replace(scored(IN, "mild"), hours_there=5.0)).outcome == "in range"
    assert judge(replace(scored(IN, "mild"), hours_there=6.0)).outcome == "refer"


def test_symptoms_on_low_ground_are_not_called_mountain_sickness() -> None:
    judgement = judge(replace(scored(IN, "severe"), elevation_m=300.0))
    assert judgement.outcome == "refer"
    assert "mountain sickness" not in " ".join(judgement.reasons)


def test_in_a_sick_period_the_physician_decides() -> None:
    ill = SickPeriod(driver_id=1, starts_at=AT - 9 * HOUR, ends_at=None, marked_by="the physician")
    judgement = judge(sample(IN), ill=ill)
    assert judgement.outcome == "refer"
    assert judgement.reasons[0] == "Marked ill by the physician: the physician decides."


@pytest.mark.parametrize(
    ("changes", "fault"),
    [
        ({}, ""),
        ({"circumstance": "after a session"}, "taken after a session"),
        ({"warm_hand": False}, "taken with a cold hand"),
        ({"quality_note": "hand moved"}, "hand moved"),
    ],
)
def test_quality_faults_in_words(changes: dict[str, object], fault: str) -> None:
    assert quality_fault(sample(IN, **changes).reading) == fault


def test_a_decimal_is_shown_where_rounding_would_mislead() -> None:
    """89.6 rounds to the limit of 90 but lies below it: judged as it is, and the sentence shows why."""
    close = sample(89.6)
    assert judge(close).outcome == "repeat"
    assert shown(close).replace(NO_BREAK, " ") == "89.6 %, expected 90.0–96.0 % for her on day 2"


def test_far_below_is_more_than_an_oximeter_may_err() -> None:
    """Four points, ISO 80601-2-61 (from memory), counted from the lower limit of 90 (judgement)."""
    assert is_far_below(sample(85.9))
    assert not is_far_below(sample(86.0))


readings = st.builds(
    sample,
    st.floats(60.0, 100.0),
    st.timedeltas(min_value=MINUTE, max_value=40 * HOUR),
    warm_hand=st.booleans(),
    headache=st.none() | st.integers(0, 3),
    gut=st.integers(0, 3),
    fatigue=st.integers(0, 3),
    dizziness=st.integers(0, 3),
    emergency_signs=st.sampled_from([(), ("cough",), ("confusion", "blue_lips")]),
)


@settings(max_examples=150, deadline=None)
@given(st.floats(60.0, 100.0), st.lists(readings, max_size=4))
def test_a_sign_always_makes_it_urgent_and_nothing_is_called_safe(
    spo2_pct: float, earlier: list[Sample]
) -> None:
    plain, signed = sample(spo2_pct), sample(spo2_pct, emergency_signs=("confusion",))
    assert judge(signed, earlier).outcome == "urgent"
    judgement = judge(plain, earlier)
    assert SEVERITY[judgement.outcome] <= SEVERITY["urgent"]
    said = " ".join((*judgement.reasons, judgement.advice)).lower()
    assert judgement.reasons
    assert not any(word in said for word in ("safe", "fit to", "cleared", "healthy", "normal"))


@settings(max_examples=100, deadline=None)
@given(st.floats(60.0, 96.0), st.floats(0.0, 20.0), st.lists(readings, max_size=3))
def test_a_lower_number_is_never_judged_milder(
    spo2_pct: float, further_down: float, earlier: list[Sample]
) -> None:
    lower = judge(sample(max(spo2_pct - further_down, 40.0)), earlier)
    assert SEVERITY[lower.outcome] >= SEVERITY[judge(sample(spo2_pct), earlier).outcome]
