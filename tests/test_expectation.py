"""What an oximeter is expected to read: figures held back, what always holds, and the arithmetic."""

from __future__ import annotations

import json
from dataclasses import fields

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from published_rows import Row, cases
from simulated_drivers import LONG_AGO_H, history_of, inspired_at, straight_to

from planner.__main__ import main
from planner.errors import InputError
from planner.physiology.acclimatisation import ExposureHistory, ventilatory_state_at
from planner.physiology.blood import saturation_pct
from planner.physiology.expectation import expected_spo2
from planner.physiology.oxygen import alveolar_po2_mmhg, inspired_po2_mmhg
from planner.physiology.population import POPULATION
from planner.physiology.ventilation import arterial_gases

ELEVATIONS = st.floats(0.0, 5000.0)
DAYS = st.floats(0.0, 30.0)
EXAMPLES = settings(max_examples=40, deadline=None)


@cases("expected_saturation")
def test_figures_held_back_from_the_fit(row: Row) -> None:
    stage = row.given["stage_elevation_m"]
    stays = [(LONG_AGO_H, 0.0), (0.0, row["elevation_m"])]
    if stage:
        stays.insert(1, (-24.0 * row["stage_days"], float(stage)))
    history = history_of(*stays, latitude_deg=row["latitude_deg"])
    expected = expected_spo2(history, 24.0 * row["days"], wakefulness=row.given["wakefulness"])
    row.check(expected.mean_spo2_pct)


@pytest.mark.parametrize("hours", [0.0, 3.0, 12.0, 20.0])
def test_the_chambers_fall_also_for_somebody_straight_from_the_sea(hours: float) -> None:
    """published: 4.4 points, 95 % interval 3.9-4.9, 198 to 2438 m, 3-20 h (Muhm 2007, NEJM 357:18)."""
    low, high = (expected_spo2(straight_to(e), hours).mean_spo2_pct for e in (198.0, 2438.0))
    assert 3.9 <= low - high <= 4.9


@pytest.mark.parametrize("wakefulness", ["awake", "asleep"])
@EXAMPLES
@given(elevation=ELEVATIONS, higher=st.floats(1.0, 500.0), days=DAYS)
def test_falls_with_elevation(wakefulness: str, elevation: float, higher: float, days: float) -> None:
    low, high = (
        expected_spo2(straight_to(e), 24.0 * days, wakefulness=wakefulness)
        for e in (elevation, elevation + higher)
    )
    assert high.mean_spo2_pct < low.mean_spo2_pct
    assert high.low_spo2_pct < low.low_spo2_pct
    assert high.high_spo2_pct <= low.high_spo2_pct


@pytest.mark.parametrize("wakefulness", ["awake", "asleep"])
@EXAMPLES
@given(elevation=st.floats(50.0, 5000.0), days=DAYS, more=st.floats(0.1, 10.0))
def test_rises_with_days_there(wakefulness: str, elevation: float, days: float, more: float) -> None:
    at_h = 24.0 * np.array([days, days + more])
    expected = expected_spo2(straight_to(elevation), at_h, wakefulness=wakefulness)
    assert np.diff(expected.mean_spo2_pct) > 0.0
    assert np.diff(expected.low_spo2_pct) > 0.0


@EXAMPLES
@given(elevation=ELEVATIONS, state=st.floats(0.0, 0.5), more=st.floats(0.001, 0.1))
def test_more_acclimatisation_is_never_worse(elevation: float, state: float, more: float) -> None:
    inspired = inspired_at(elevation)
    less_of_it, more_of_it = (arterial_gases(inspired, s).saturation_pct for s in (state, state + more))
    assert more_of_it > less_of_it


def test_a_night_in_a_tent_helps_later_aloft() -> None:
    tent = float(inspired_po2_mmhg(1013.25, 0.15))
    nights = [(24.0 * d + h, p) for d in range(5) for h, p in ((-124.0, tent), (-115.0, inspired_at(0.0)))]
    start = np.array([LONG_AGO_H, *(h for h, _ in nights), 0.0])
    inspired = np.array([inspired_at(0.0), *(p for _, p in nights), inspired_at(2300.0)])
    with_tent = expected_spo2(ExposureHistory(start, inspired), 12.0)
    without = expected_spo2(straight_to(2300.0), 12.0)
    assert without.mean_spo2_pct < with_tent.mean_spo2_pct < without.mean_spo2_pct + 1.0


def test_in_the_tent_itself_a_reading_is_lower() -> None:
    tent = ExposureHistory(
        np.array([LONG_AGO_H, 0.0]), np.array([inspired_at(0.0), float(inspired_po2_mmhg(1013.25, 0.15))])
    )
    assert expected_spo2(tent, 4.0).mean_spo2_pct < expected_spo2(straight_to(0.0), 4.0).mean_spo2_pct - 3.0


def test_a_flight_lowers_readings_aboard_and_barely_acclimatises() -> None:
    home = (LONG_AGO_H, 0.0)
    aboard = history_of(home, (0.0, 2200.0), (9.0, 0.0))
    assert expected_spo2(aboard, 4.0).mean_spo2_pct < expected_spo2(aboard, -4.0).mean_spo2_pct - 3.0
    flown = history_of(home, (-9.0, 2200.0), (0.0, 2300.0))
    gain = expected_spo2(flown, 6.0).mean_spo2_pct - expected_spo2(straight_to(2300.0), 6.0).mean_spo2_pct
    assert 0.0 < gain < 0.3


def test_a_week_at_sea_level_loses_some_of_it_but_not_all() -> None:
    stays = ((LONG_AGO_H, 0.0), (-24.0 * 14, 2300.0))
    kept = expected_spo2(history_of(*stays), 12.0).mean_spo2_pct
    after_a_week = expected_spo2(history_of(*stays, (-24.0 * 7, 0.0), (0.0, 2300.0)), 12.0).mean_spo2_pct
    never = expected_spo2(straight_to(2300.0), 12.0).mean_spo2_pct
    assert never < after_a_week < kept


def test_somebody_who_lives_at_1500_m_is_no_sea_level_person() -> None:
    from_home = expected_spo2(straight_to(2300.0, home_m=1500.0), 6.0)
    from_the_sea = expected_spo2(straight_to(2300.0), 6.0)
    assert from_home.mean_spo2_pct > from_the_sea.mean_spo2_pct + 0.3
    assert from_home.ventilatory_state > from_the_sea.ventilatory_state


def test_asleep_falls_away_from_awake_as_it_gets_higher() -> None:
    gaps = [
        expected_spo2(straight_to(e), 24.0).mean_spo2_pct
        - expected_spo2(straight_to(e), 24.0, wakefulness="asleep").mean_spo2_pct
        for e in range(0, 5001, 500)
    ]
    assert gaps[0] > 0.0
    assert np.all(np.diff(gaps) > 0.0)


@pytest.mark.parametrize("days", [0, 3, 14])
@pytest.mark.parametrize("elevation", [800, 2300, 3600])
def test_the_command_line_agrees(days: int, elevation: int, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["air", str(elevation), "--latitude", "47", "--days", str(days), "--json"]) == 0
    printed = json.loads(capsys.readouterr().out)
    expected = expected_spo2(straight_to(float(elevation)), 24.0 * days)
    assert printed["expected_spo2_pct"] == pytest.approx(expected.mean_spo2_pct, abs=0.01)
    assert printed["paco2_mmhg"] == pytest.approx(expected.paco2_mmhg, abs=0.01)


@pytest.mark.parametrize("elevation", [0.0, 1600.0, 2300.0, 3500.0, 5000.0])
def test_the_chain_shown_is_the_chain_of_the_other_formulas(elevation: float) -> None:
    """computed: the full alveolar gas equation and the dissociation curve, by the functions for any blood."""
    e = expected_spo2(straight_to(elevation), 60.0)
    missing = POPULATION.paco2_fall_per_mmhg * (inspired_at(0.0) - e.inspired_po2_mmhg)
    gap = missing / (1.0 - missing) - e.ventilatory_state
    quotient = POPULATION.respiratory_quotient + POPULATION.quotient_rise * gap
    alveolar = alveolar_po2_mmhg(e.inspired_po2_mmhg, e.paco2_mmhg, respiratory_quotient=quotient)
    assert e.alveolar_po2_mmhg == pytest.approx(alveolar, abs=0.01)
    arterial = saturation_pct(alveolar, e.ph) - POPULATION.venous_admixture_pct
    assert saturation_pct(e.arterial_po2_mmhg, e.ph) == pytest.approx(arterial, abs=0.01)
    # Henderson-Hasselbalch, the other way round: bicarbonate stays in what people have at altitude.
    assert 14.0 < 0.0307 * e.paco2_mmhg * 10.0 ** (e.ph - 6.1) < 25.0


@pytest.mark.parametrize("elevation", [0.0, 2300.0, 4300.0])
@pytest.mark.parametrize("days", [0.0, 5.0])
def test_range_equals_brute_force_sampling_people(elevation: float, days: float) -> None:
    """computed: plain sampling with a fixed seed; its error in a 2.5 % quantile is about 0.02 points here."""
    history = straight_to(elevation)
    e = expected_spo2(history, 24.0 * days, pressure_sd_hpa=3.0)
    random = np.random.default_rng(20)
    breathing = random.normal(size=400_000)
    p = POPULATION
    gases = arterial_gases(e.inspired_po2_mmhg, e.ventilatory_state, breathing)
    # What a day or the weather changes acts on the alveoli at unchanged breathing.
    above, below = (saturation_pct(gases.alveolar_po2_mmhg + d, gases.ph) for d in (0.05, -0.05))
    slope = (above - below) / 0.1
    lost = np.maximum(100.0 - p.venous_admixture_pct - gases.saturation_pct, 0.0)
    sd = np.sqrt(
        p.admixture_sd_pct**2
        + p.device_bias_sd_pct**2
        + p.day_sd_pct**2
        + (p.day_alveolar_sd_mmhg * slope) ** 2
        + (p.oximeter_noise_sd_pct + p.oximeter_noise_slope * lost) ** 2
        + (0.2094 / 1.33322 * 3.0 * slope) ** 2
    )
    read = gases.saturation_pct + sd * random.normal(size=breathing.size)
    low, high = np.quantile(read, [0.025, 0.975])
    assert e.mean_spo2_pct == pytest.approx(read.mean(), abs=0.03)
    assert e.low_spo2_pct == pytest.approx(low, abs=0.1)
    assert e.high_spo2_pct == pytest.approx(min(high, 100.0), abs=0.1)
    parts = (e.between_people_sd_pct, e.day_to_day_sd_pct, e.oximeter_sd_pct, e.pressure_sd_pct)
    assert np.sqrt(np.sum(np.square(parts))) == pytest.approx(read.std(), rel=0.02)


def test_spread_grows_with_elevation_as_measured() -> None:
    """published: 1-2 points below 2500 m, 2-4 at 3000-4500 m between people read once awake at rest."""
    for elevation, low, high in ((0.0, 1.0, 2.0), (2300.0, 1.0, 2.0), (3500.0, 2.0, 4.0), (4300.0, 2.0, 4.0)):
        e = expected_spo2(straight_to(elevation), 6.0)
        parts = (e.between_people_sd_pct, e.day_to_day_sd_pct, e.oximeter_sd_pct, e.pressure_sd_pct)
        assert low <= np.sqrt(np.sum(np.square(parts))) <= high


def test_scalars_arrays_and_shapes() -> None:
    history = straight_to(2300.0)
    at_h = np.array([[0.0, 24.0, 48.0], [72.0, 96.0, 120.0]])
    together = expected_spo2(history, at_h)
    for field in fields(together):
        value = getattr(together, field.name)
        assert np.shape(value) == at_h.shape
        alone = getattr(expected_spo2(history, 96.0), field.name)
        assert isinstance(alone, bool if field.name == "beyond_validity" else float)
        assert value[1, 1] == pytest.approx(alone)


def test_no_range_reaches_above_100_and_far_places_are_flagged() -> None:
    rich = ExposureHistory(np.array([0.0]), np.array([inspired_at(-400.0)]))
    assert expected_spo2(rich, 0.0, pressure_sd_hpa=20.0).high_spo2_pct <= 100.0
    assert not expected_spo2(straight_to(5000.0), 1.0).beyond_validity
    assert expected_spo2(straight_to(6500.0), 1.0).beyond_validity
    assert np.isfinite(expected_spo2(straight_to(9000.0), 1.0).low_spo2_pct)


def test_what_is_not_known_stays_unknown() -> None:
    e = expected_spo2(straight_to(2300.0), np.array([np.nan, 24.0]))
    assert np.isnan(e.mean_spo2_pct[0])
    assert np.isnan(e.low_spo2_pct[0])
    assert e.mean_spo2_pct[1] == pytest.approx(expected_spo2(straight_to(2300.0), 24.0).mean_spo2_pct)
    assert np.isnan(arterial_gases(np.nan, 0.1).saturation_pct)


@pytest.mark.parametrize("wakefulness", ["awake", "asleep"])
@pytest.mark.parametrize("breathing", [-6.0, 6.0])
@pytest.mark.parametrize("state", [0.0, 5.0])
@pytest.mark.parametrize("inspired", [0.0, 20.0, 760.0])
def test_the_chain_stays_finite_where_nobody_lives(
    inspired: float, state: float, breathing: float, wakefulness: str
) -> None:
    gases = arterial_gases(inspired, state, breathing, wakefulness)
    assert 0.0 <= gases.saturation_pct <= 100.0
    assert np.isfinite(gases.arterial_po2_mmhg)


def test_wrong_words_are_refused() -> None:
    with pytest.raises(InputError, match="awake or asleep"):
        expected_spo2(straight_to(0.0), 0.0, wakefulness="drowsy")
    with pytest.raises(InputError, match="pressure_sd_hpa"):
        expected_spo2(straight_to(0.0), 0.0, pressure_sd_hpa=-1.0)
    with pytest.raises(
        InputError, match=r"pressure_sd_hpa: \(2,\) .* one number or the shape \(3,\) of at_h"
    ):
        expected_spo2(straight_to(0.0), np.arange(3.0), pressure_sd_hpa=np.array([1.0, 2.0]))
    with pytest.raises(InputError, match="at_h: 'noon' cannot be used, expected a number in h"):
        expected_spo2(straight_to(0.0), "noon")


def test_state_at_home_is_steady() -> None:
    history = straight_to(1500.0, home_m=1500.0)
    states = ventilatory_state_at(history, np.array([LONG_AGO_H - 100.0, 0.0, 500.0]))
    assert np.ptp(states) == pytest.approx(0.0, abs=1e-12)
