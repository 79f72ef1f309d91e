"""The state of acclimatisation: its closed form against plain steps, and what always holds."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from simulated_drivers import history_of, inspired_at

from planner.errors import InputError
from planner.physiology.acclimatisation import (
    ExposureHistory,
    evolve,
    ventilatory_state_after,
    ventilatory_state_at,
)
from planner.physiology.population import POPULATION
from planner.physiology.ventilation import ventilatory_target

STAYS = ((-500.0, 300.0), (0.0, 2300.0), (7.5, 2000.0), (50.0, 3600.0), (200.0, 0.0), (333.3, 1600.0))


def test_closed_form_equals_small_steps() -> None:
    """computed: Euler's method in steps of a hundredth of an hour over the same itinerary."""
    history = history_of(*STAYS)
    at_h = np.array([-600.0, 0.0, 5.0, 49.0, 120.0, 333.3, 500.0])
    closed = ventilatory_state_at(history, at_h)
    step_h = 0.01
    state = float(ventilatory_target(inspired_at(300.0)))
    found = {}
    for i in range(round(500.0 / step_h) + 1):
        now = i * step_h
        for at in at_h:
            if abs(now - at) < step_h / 2:
                found[at] = state
        elevation = max((s for s in STAYS if s[0] <= now), key=lambda s: s[0])[1]
        gap = float(TARGETS[elevation]) - state
        days = POPULATION.rise_time_d if gap > 0.0 else POPULATION.fall_time_d
        state += gap * step_h / (24.0 * days)
    for at, value in zip(at_h, closed, strict=True):
        expected = found.get(at, float(TARGETS[300.0]))
        assert value == pytest.approx(expected, abs=2e-5)


TARGETS = {elevation: ventilatory_target(inspired_at(elevation)) for _, elevation in STAYS}


@settings(max_examples=50, deadline=None)
@given(
    state=st.floats(0.0, 0.6),
    elevation=st.floats(0.0, 5000.0),
    hours=st.floats(0.0, 500.0),
    share=st.floats(0.0, 1.0),
)
def test_two_stretches_equal_one_and_never_overshoot(
    state: float, elevation: float, hours: float, share: float
) -> None:
    inspired = inspired_at(elevation)
    once = ventilatory_state_after(state, inspired, hours)
    half_way = ventilatory_state_after(state, inspired, share * hours)
    assert ventilatory_state_after(half_way, inspired, (1.0 - share) * hours) == pytest.approx(once, abs=1e-9)
    target = ventilatory_target(inspired)
    assert min(state, target) - 1e-12 <= once <= max(state, target) + 1e-12


@settings(max_examples=50, deadline=None)
@given(state=st.floats(0.0, 0.6), more=st.floats(0.001, 0.2), elevation=st.floats(0.0, 5000.0))
def test_more_state_stays_more(state: float, more: float, elevation: float) -> None:
    """What lets a search over days carry the number alone and compare plans by it."""
    inspired = inspired_at(elevation)
    less, greater = (ventilatory_state_after(s, inspired, 24.0) for s in (state, state + more))
    assert greater > less


def test_many_itineraries_day_by_day_equal_one_at_a_time() -> None:
    random = np.random.default_rng(3)
    inspired = random.uniform(80.0, 150.0, size=(10, 5000))
    start = random.uniform(0.0, 0.4, size=5000)
    hours = random.uniform(1.0, 30.0, size=10)
    states = evolve(start, inspired, hours)
    for column in (0, 4095, 4096, 4999):
        state = float(start[column])
        for step in range(10):
            state = float(ventilatory_state_after(state, inspired[step, column], hours[step]))
            assert states[step, column] == pytest.approx(state, rel=1e-12)


def test_before_the_first_stay_the_home_counts() -> None:
    history = history_of((0.0, 1500.0), (10.0, 2300.0))
    home = ventilatory_target(inspired_at(1500.0))
    assert ventilatory_state_at(history, -1000.0) == pytest.approx(home)
    assert ventilatory_state_at(history, 10.0) == pytest.approx(home)


def test_time_constants() -> None:
    """published: 4 to 7 days up; judgement: 22 days down, within 20 to 25."""
    up = ventilatory_state_after(0.0, inspired_at(3600.0), 24.0 * POPULATION.rise_time_d)
    assert up / ventilatory_target(inspired_at(3600.0)) == pytest.approx(1.0 - math.exp(-1.0))
    assert 4.0 <= POPULATION.rise_time_d <= 7.0
    assert ventilatory_state_after(0.3, inspired_at(0.0), 24.0 * 22.0) == pytest.approx(0.3 * math.exp(-1.0))


def test_unusable_histories_are_refused() -> None:
    ok = np.array([140.0, 150.0])
    with pytest.raises(InputError, match="ascending"):
        ExposureHistory(np.array([5.0, 1.0]), ok)
    with pytest.raises(InputError, match="one start for each"):
        ExposureHistory(np.array([5.0]), ok)
    with pytest.raises(InputError, match="one start for each"):
        ExposureHistory(np.array([]), np.array([]))
    with pytest.raises(InputError, match="finite"):
        ExposureHistory(np.array([0.0, np.nan]), ok)
    with pytest.raises(InputError, match="inspired_po2_mmhg"):
        ExposureHistory(np.array([0.0, 1.0]), np.array([140.0, -5.0]))


def test_shapes_that_do_not_fit_are_refused() -> None:
    with pytest.raises(InputError, match="steps"):
        evolve(np.zeros(3), np.full((2, 4), 120.0))
