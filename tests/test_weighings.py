"""Weighings: what is refused and why, what a finished one says, and the habits found in several."""

from __future__ import annotations

import math
from dataclasses import replace
from datetime import UTC, datetime, timedelta

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.errors import InputError
from planner.hydration.cockpit import FULL_SUIT
from planner.hydration.findings import drink_findings
from planner.hydration.model import Weighing
from planner.hydration.weighings import Occasion, Weighed, check_weighing, evidence_for, weigh_up
from planner.physiology.ranges import Range
from planner.physiology.sweat import HeatInputs, predicted_sweat
from planner.season.model import Driver
from planner.units import KG_PER_POUND
from planner.wording import UnitChoice

START = datetime(2031, 5, 14, 12, 0, tzinfo=UTC)
HOUR = timedelta(hours=1)
DRIVER = Driver("Somebody", "woman", 1, 62.0, 170.0, id=1)
GOOD = Weighing(
    1,
    1,
    START,
    START + HOUR,
    62.0,
    61.4,
    drink_ml=500.0,
    urine_ml=100.0,
    air_temperature_c=42.0,
    radiant_temperature_c=47.0,
    humidity_pct=25.0,
    air_speed_m_s=0.5,
    id=1,
)


def test_a_proper_weighing_passes() -> None:
    check_weighing(GOOD, DRIVER)
    check_weighing(replace(GOOD, ends_at=None, mass_after_kg=None), DRIVER)


@pytest.mark.parametrize(
    ("wrong", "field", "expected"),
    [
        ({"mass_before_kg": 7.9}, "mass_before_kg", r"35 to 150 kg"),
        ({"mass_before_kg": 790.0}, "mass_before_kg", r"35 to 150 kg"),
        ({"mass_before_kg": 62.0 / KG_PER_POUND}, "mass_before_kg", r"lb would be 62\.0 kg"),
        ({"mass_before_kg": 80.0}, "mass_before_kg", r"within 15% of the driver's 62 kg"),
        ({"mass_after_kg": 61.4 / KG_PER_POUND}, "mass_after_kg", r"lb would be 61\.4 kg"),
        ({"mass_after_kg": 6.14}, "mass_after_kg", r"35 to 150 kg"),
        ({"mass_after_kg": 57.0}, "mass_after_kg", r"within 6% of mass_before_kg"),
        ({"mass_after_kg": math.nan}, "mass_after_kg", r"finite number"),
        ({"urine_ml": 5000.0}, "urine_ml", r"mL"),
        ({"urine_ml": 2500.0}, "urine_ml", r"0 to 2000 mL"),
        ({"urine_ml": -10.0}, "urine_ml", r"mL"),
        ({"drink_ml": 0.5}, "drink_ml", r"looks like litres"),
        ({"drink_ml": 8000.0}, "drink_ml", r"can be drunk in 1\.0 h"),
        ({"ends_at": START - HOUR}, "ends_at", r"after starts_at"),
        ({"ends_at": START}, "ends_at", r"after starts_at"),
        ({"ends_at": START + 30 * HOUR}, "ends_at", r"12 hours"),
        ({"ends_at": START + timedelta(minutes=1)}, "ends_at", r"10 minutes"),
        ({"ends_at": None}, "ends_at", r"weigh-out"),
        ({"starts_at": START.replace(tzinfo=None)}, "starts_at", r"zone"),
        ({"mass_after_kg": 58.6, "drink_ml": 3000.0}, "mass_after_kg", r"it is 6\.3 L/h"),
        ({"mass_after_kg": 64.0, "drink_ml": 0.0, "urine_ml": 0.0}, "mass_after_kg", r"it is -2\.0 L/h"),
        ({"humidity_pct": 140.0}, "humidity_pct", r"0 to 100"),
        ({"air_temperature_c": 110.0}, "air_temperature_c", r"75"),
    ],
)
def test_a_weighing_that_cannot_be_names_its_field(wrong: dict, field: str, expected: str) -> None:
    with pytest.raises(InputError, match=expected) as refusal:
        check_weighing(replace(GOOD, **wrong), DRIVER)
    assert refusal.value.field == field
    assert "\n" not in str(refusal.value)


def test_pounds_are_named_even_when_they_are_out_of_range_as_kilograms() -> None:
    heavy = replace(DRIVER, mass_kg=79.0)
    with pytest.raises(InputError, match=r"174 lb would be 78\.9 kg"):
        check_weighing(replace(GOOD, mass_before_kg=174.0), heavy)


def one(weighing: Weighing, driver: Driver = DRIVER) -> Weighed:
    (weighed,) = weigh_up([Occasion(weighing, driver, 1013.25, FULL_SUIT)])
    return weighed


def test_the_rate_of_a_weighing() -> None:
    found = one(GOOD)
    # Computed by hand: 0.6 + 0.5 - 0.1 kg, less breath and gases of 230 W/m2 over 1.72 m2, air of 15.4 mmHg:
    # VO2 1.148 L/min; 0.019 x 1.148 x 28.6 x 60 = 37.4 g and 1.148 x 0.350 x 60 = 24.1 g.
    assert found.sweat_l_per_h == pytest.approx(1.0 - 0.0615, abs=0.002)
    # Computed by hand: 50 g twice, 20 g of drink, 10 g of urine over one hour.
    assert found.error_l_per_h == pytest.approx(0.0742, abs=0.0005)
    assert found.mass_change_pct == pytest.approx(-0.968, abs=0.001)
    assert found.left_out == ""


def test_the_prediction_beside_it_is_that_of_the_heat_balance() -> None:
    inputs = HeatInputs(*map(Range.exactly, (42.0, 47.0, 25.0, 0.5, 230.0, 1.56, 0.34)))
    expected = predicted_sweat(inputs, 62.0, 170.0).sweat_rate_l_per_h.best
    assert one(GOOD).predicted_l_per_h == pytest.approx(expected)


@pytest.mark.parametrize(
    ("of", "why"),
    [
        ({"clothes": "suit"}, "weighed in the suit"),
        ({"air_temperature_c": None}, "not noted"),
        ({"humidity_pct": None}, "not noted"),
        (
            {"air_temperature_c": -5.0, "radiant_temperature_c": -5.0, "metabolic_w_m2": 60.0},
            "no sweat is predicted",
        ),
    ],
)
def test_some_weighings_teach_nothing_and_say_why(of: dict, why: str) -> None:
    found = one(replace(GOOD, **of))
    assert why in found.left_out
    assert evidence_for([1], [found]).measured_l_per_h.shape == (1, 1, 0)


def test_the_clothes_widen_the_error() -> None:
    assert one(replace(GOOD, clothes="underwear")).error_l_per_h > one(GOOD).error_l_per_h


def test_evidence_is_padded_by_driver() -> None:
    second = replace(GOOD, driver_id=2, id=2)
    weighed = weigh_up(
        [Occasion(w, DRIVER, 1013.25, FULL_SUIT) for w in (GOOD, second, replace(second, id=3))]
        + [Occasion(replace(GOOD, ends_at=None, mass_after_kg=None), DRIVER, 1013.25, FULL_SUIT)]
    )
    assert len(weighed) == 3
    rows = evidence_for([2, 1, 9], weighed).measured_l_per_h
    assert rows.shape == (3, 1, 2)
    assert np.isfinite(rows).sum(axis=-1).tolist() == [[2], [1], [0]]
    assert weigh_up([]) == []


@settings(max_examples=100, deadline=None)
@given(
    before=st.floats(35.0, 150.0),
    loss=st.floats(-3.0, 6.0),
    minutes=st.floats(1.0, 900.0),
    drink=st.floats(0.0, 9000.0),
    urine=st.floats(0.0, 3000.0),
)
def test_whatever_passes_gives_a_finite_rate(before, loss, minutes, drink, urine) -> None:
    weighing = replace(
        GOOD,
        mass_before_kg=before,
        mass_after_kg=before - loss,
        ends_at=START + timedelta(minutes=minutes),
        drink_ml=drink,
        urine_ml=urine,
    )
    driver = replace(DRIVER, mass_kg=before)
    refused = ""
    try:
        check_weighing(weighing, driver)
    except InputError as refusal:
        refused = refusal.field
    if refused:
        assert refused in {"mass_before_kg", "mass_after_kg", "ends_at", "drink_ml", "urine_ml"}
        return
    found = one(weighing, driver)
    assert -1.5 <= found.sweat_l_per_h <= 5.5
    assert found.error_l_per_h > 0.0


# Habits -----------------------------------------------------------------------------------------------------


def session(day: int, change_kg: float, drink_ml: float, urine_ml: float = 0.0) -> Weighing:
    starts_at = START + timedelta(days=day)
    return replace(
        GOOD,
        id=day + 1,
        starts_at=starts_at,
        ends_at=starts_at + HOUR,
        mass_after_kg=62.0 + change_kg,
        drink_ml=drink_ml,
        urine_ml=urine_ml,
    )


def habits(*weighings: Weighing):
    return drink_findings(weigh_up([Occasion(w, DRIVER, 1013.25, FULL_SUIT) for w in weighings]))


def test_who_drinks_more_than_is_lost_is_found_and_told() -> None:
    (finding,) = habits(session(0, 0.3, 1300), session(1, -0.2, 700), session(2, 0.4, 1400))
    assert finding.kind == "drinks more than is lost"
    assert finding.weighing_ids == (1, 3)
    assert "2 sessions of the last 3" in finding.sentence
    assert "0.4" in finding.sentence
    assert "physician" in finding.sentence


def test_urine_passed_does_not_hide_a_gain() -> None:
    (finding,) = habits(session(0, 0.0, 1400, 400), session(1, -0.1, 1400, 500))
    assert finding.kind == "drinks more than is lost"


def test_who_hardly_drinks_is_found_and_told() -> None:
    (finding,) = habits(session(0, -1.0, 100), session(1, -1.3, 0), session(2, -0.4, 600))
    assert finding.kind == "drinks too little"
    assert finding.weighing_ids == (1, 2)
    assert "2.1" in finding.sentence


def test_one_bad_day_is_no_habit_and_a_small_gain_no_finding() -> None:
    assert habits(session(0, 0.5, 1400), session(1, -0.3, 600)) == []
    assert habits(session(0, 0.1, 900), session(1, 0.1, 900)) == []  # within two errors of the scale
    assert habits(session(0, -0.4, 50), session(1, -0.4, 50)) == []  # little drunk, but little lost
    assert drink_findings([]) == []


def test_findings_speak_in_the_readers_units() -> None:
    weighed = weigh_up([Occasion(session(day, -1.3, 0), DRIVER, 1013.25, FULL_SUIT) for day in (0, 1)])
    (finding,) = drink_findings(weighed, UnitChoice(volume="fl oz", mass="lb"))
    assert "fl oz" in finding.sentence
    assert "mL" not in finding.sentence
