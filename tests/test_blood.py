"""Properties of the dissociation curve, and Kelman's curve beside it."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.errors import InputError
from planner.physiology.blood import po2_mmhg, saturation_pct

FEW = settings(max_examples=80, deadline=None)
ACIDITIES = st.floats(6.8, 7.9)
TEMPERATURES = st.floats(30.0, 43.0)


def kelman_1966_saturation_pct(
    po2: np.ndarray, ph: float = 7.4, celsius: float = 37.0, pco2: float = 40.0
) -> np.ndarray:
    """Kelman 1966, J Appl Physiol 21:1375 (published constants)."""
    log_shift = 0.024 * (37.0 - celsius) + 0.40 * (ph - 7.4) + 0.06 * (np.log10(40.0) - np.log10(pco2))
    x = po2 * 10.0**log_shift
    above = x * (x * (x * (x - 67.073989) + 2121.4010) - 8532.2289)
    below = x * (x * (x * (x - 67.104406) + 2396.1674) - 31346.258) + 935960.87
    return 100.0 * above / below


def test_kelman_agrees_at_standard_conditions() -> None:
    # Agreement found: within 0.48 points at 45-150 mmHg, where people up to 4000 m are; within 1.11 at 30-45.
    high, low = np.linspace(45.0, 150.0, 211), np.linspace(30.0, 45.0, 61)
    assert np.abs(saturation_pct(high) - kelman_1966_saturation_pct(high)).max() < 0.55
    assert np.abs(saturation_pct(low) - kelman_1966_saturation_pct(low)).max() < 1.2


@pytest.mark.parametrize(("ph", "within"), [(7.45, 0.25), (7.5, 0.4), (7.35, 0.25)])
def test_kelman_agrees_on_what_acidity_changes(ph: float, within: float) -> None:
    # Kelman's factor is the same at every tension, ours is not; the changes they make are 0.5 to 5 points.
    tension = np.linspace(45.0, 110.0, 131)
    ours = saturation_pct(tension, ph) - saturation_pct(tension)
    other = kelman_1966_saturation_pct(tension, ph) - kelman_1966_saturation_pct(tension)
    assert np.abs(ours - other).max() < within
    assert np.abs(ours).max() > 3.0 * within


@pytest.mark.parametrize("celsius", [35.0, 38.5, 40.0])
def test_kelman_agrees_on_what_temperature_changes(celsius: float) -> None:
    # Our term is that of a closed sample: warming it also lowers its pH by 0.0147 and raises its PCO2 by a
    # factor of 10^0.019 per degree (from memory), which Kelman's curve must be told.
    warmer = celsius - 37.0
    tension = np.linspace(45.0, 80.0, 71)
    ours = saturation_pct(tension, 7.4, celsius) - saturation_pct(tension)
    carbon_dioxide = 40.0 * 10.0 ** (0.019 * warmer)
    other = kelman_1966_saturation_pct(tension, 7.4 - 0.0147 * warmer, celsius, carbon_dioxide)
    other = other - kelman_1966_saturation_pct(tension)
    assert np.abs(ours - other).max() < 0.2 * np.abs(other).max()


def test_half_saturation_is_where_textbooks_have_it() -> None:
    # From memory: P50 of normal adult blood 26.6 to 27 mmHg.
    assert 26.5 < po2_mmhg(50.0) < 27.1


def test_inverse_equals_the_published_cubic_root() -> None:
    # Ellis 1989 (from memory) in its printed form; ours is the same root written with hyperbolic functions.
    saturation = np.linspace(1.0, 99.5, 198)
    a = 11700.0 / (100.0 / saturation - 1.0)
    b = np.sqrt(50.0**3 + a**2)
    np.testing.assert_allclose(po2_mmhg(saturation), np.cbrt(b + a) - np.cbrt(b - a), rtol=1e-9)


@FEW
@given(st.floats(0.0, 300.0), ACIDITIES, TEMPERATURES)
def test_round_trip_from_tension(tension: float, ph: float, celsius: float) -> None:
    there = saturation_pct(tension, ph, celsius)
    assert po2_mmhg(there, ph, celsius) == pytest.approx(tension, rel=1e-9, abs=1e-9)


@FEW
@given(st.floats(0.0, 99.9), ACIDITIES, TEMPERATURES)
def test_round_trip_from_saturation(saturation: float, ph: float, celsius: float) -> None:
    tension = po2_mmhg(saturation, ph, celsius)
    if tension <= 760.0:
        assert saturation_pct(tension, ph, celsius) == pytest.approx(saturation, rel=1e-11, abs=1e-11)


@FEW
@given(st.floats(0.5, 700.0), st.floats(0.1, 50.0), ACIDITIES, TEMPERATURES)
def test_rises_with_tension(tension: float, more: float, ph: float, celsius: float) -> None:
    assert saturation_pct(tension + more, ph, celsius) > saturation_pct(tension, ph, celsius)


@FEW
@given(st.floats(5.0, 300.0), st.floats(6.8, 7.85), st.floats(30.0, 42.0))
def test_alkaline_and_cool_blood_hold_more(tension: float, ph: float, celsius: float) -> None:
    here = saturation_pct(tension, ph, celsius)
    assert saturation_pct(tension, ph + 0.05, celsius) > here
    assert saturation_pct(tension, ph, celsius + 1.0) < here


def test_no_oxygen_no_saturation() -> None:
    assert saturation_pct(0.0) == 0.0
    assert po2_mmhg(0.0) == 0.0
    assert po2_mmhg(0.0, 7.5, 39.0) == 0.0


@pytest.mark.parametrize("formula", [saturation_pct, po2_mmhg])
def test_scalar_array_shape_and_nan(formula) -> None:
    single = formula(60.0, 7.44, 37.5)
    assert type(single) is float
    many = formula(np.array([[60.0, np.nan], [60.0, 60.0]]), 7.44, 37.5)
    assert many.shape == (2, 2)
    assert many[1, 1] == pytest.approx(single, rel=1e-14)
    assert np.isnan(many[0, 1])
    assert formula(60.0, np.full(3, 7.4)).shape == (3,)
    assert formula(np.full((2, 1), 60.0), np.array([7.4, 7.5, 7.3])).shape == (2, 3)
    assert np.isnan(formula(60.0, float("nan")))
    assert np.isnan(formula(60.0, 7.4, float("nan")))
    assert np.isnan(formula(float("nan")))


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: saturation_pct(-1.0), r"po2_mmhg: -1\.0 .* 0 to 760 mmHg "),
        (lambda: saturation_pct(60.0, 74.0), r"ph: 74\.0 .* 6\.8 to 7\.9 "),
        (lambda: saturation_pct(60.0, 7.4, 98.6), r"body_temperature_c: 98\.6 .* 30 to 43 C "),
        (lambda: po2_mmhg(950.0), r"saturation_pct: 950\.0 .* 0 to 100 % "),
        (lambda: po2_mmhg(np.array([90.0, 100.0])), r"saturation_pct: 100\.0 .* below 100 %"),
    ],
)
def test_out_of_range_names_value_range_and_unit(call, message: str) -> None:
    with pytest.raises(InputError, match=message):
        call()
