"""The chain from elevation to saturation: its parts, its blocks, and where it is known to fail."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.constants import HPA_PER_MMHG
from planner.errors import InputError
from planner.physiology.air import site_pressure
from planner.physiology.blood import saturation_pct
from planner.physiology.chain import BLOCK, elevation_to_saturation_pct
from planner.physiology.oxygen import alveolar_po2_mmhg, inspired_po2_mmhg, paco2_mmhg

FEW = settings(max_examples=40, deadline=None)


def one_after_the_other(elevation_m, days, latitude_deg, ph):
    """The chain by the public functions."""
    inspired = inspired_po2_mmhg(site_pressure(elevation_m, latitude_deg).pressure_hpa)
    alveolar = alveolar_po2_mmhg(inspired, paco2_mmhg(elevation_m, days))
    return saturation_pct(alveolar - 6.0, ph)


@FEW
@given(
    st.floats(-400.0, 5000.0),
    st.floats(0.0, 40.0),
    st.one_of(st.floats(-90.0, 90.0), st.just(float("nan"))),
    st.floats(7.3, 7.6),
)
def test_is_the_composition_of_the_public_functions(
    h: float, days: float, latitude: float, ph: float
) -> None:
    whole = elevation_to_saturation_pct(h, days, latitude, ph)
    assert whole == pytest.approx(one_after_the_other(h, days, latitude, ph), rel=1e-12)


@pytest.mark.parametrize("length", [1, BLOCK - 1, BLOCK, BLOCK + 1, 3 * BLOCK + 7])
def test_blocks_leave_no_seam(length: int) -> None:
    elevation = np.linspace(0.0, 4500.0, length)
    days = np.linspace(0.0, 20.0, length)
    many = elevation_to_saturation_pct(elevation, days, 19.0)
    np.testing.assert_allclose(many, one_after_the_other(elevation, days, 19.0, 7.4), rtol=1e-12)


def test_shapes_broadcast_across_blocks() -> None:
    elevation, days = np.linspace(0.0, 4500.0, 3000)[:, None], np.arange(7.0)
    many = elevation_to_saturation_pct(elevation, days)
    assert many.shape == (3000, 7)
    assert many[1234, 5] == pytest.approx(
        elevation_to_saturation_pct(float(elevation[1234, 0]), 5.0), rel=1e-14
    )


def test_scalar_is_a_float_and_nan_passes() -> None:
    assert type(elevation_to_saturation_pct(2240.0)) is float
    assert np.isnan(elevation_to_saturation_pct(float("nan")))
    many = elevation_to_saturation_pct(np.array([2240.0, np.nan]), 3.0, 19.0)
    assert many[0] == elevation_to_saturation_pct(2240.0, 3.0, 19.0)
    assert np.isnan(many[1])


@pytest.mark.parametrize("latitude_deg", [np.nan, 0.0, 32.0, 60.0])
def test_falls_with_elevation(latitude_deg: float) -> None:
    elevation = np.arange(0.0, 5000.0, 5.0)
    assert (np.diff(elevation_to_saturation_pct(elevation, 0.0, latitude_deg)) < 0.0).all()


def test_rises_with_days_there() -> None:
    assert (np.diff(elevation_to_saturation_pct(2300.0, np.arange(30.0))) > 0.0).all()


def test_out_of_range_names_value_range_and_unit() -> None:
    elevation = np.zeros(2 * BLOCK)
    elevation[-1] = 99999.0
    with pytest.raises(InputError, match=r"elevation_m: 99999\.0 .* -430 to 9000 m "):
        elevation_to_saturation_pct(elevation)


# What is known to go wrong when the chain is fed with fixed gas tensions (computed by others from the same
# equations), against measurements on arrival: Muhm 2007, NEJM 357:18 (a fall of 4.4 points from about 97) and
# Beidleman 2009, High Alt Med Biol 10:253 (80 at 446 mmHg), both published.
MEASURED_2438_M, MEASURED_446_MMHG = 97.0 - 4.4, 80.0


def by_fixed_tensions(pressure_mmhg: float, paco2: float, difference: float, ph: float) -> float:
    inspired = inspired_po2_mmhg(pressure_mmhg * HPA_PER_MMHG)
    return saturation_pct(alveolar_po2_mmhg(inspired, paco2) - difference, ph)


def test_fixed_sea_level_tensions_read_low_as_known() -> None:
    low, high = (site_pressure(h, 45.0).pressure_hpa / HPA_PER_MMHG for h in (2438.0, 4300.0))
    assert MEASURED_2438_M - by_fixed_tensions(low, 39.0, 6.0, 7.40) == pytest.approx(3.0, abs=0.5)
    assert MEASURED_446_MMHG - by_fixed_tensions(high, 39.0, 6.0, 7.40) == pytest.approx(17.0, abs=0.5)


def test_tensions_of_arrival_match_at_2438_m() -> None:
    cabin = site_pressure(2438.0, 45.0).pressure_hpa / HPA_PER_MMHG
    assert by_fixed_tensions(cabin, 36.0, 4.0, 7.44) == pytest.approx(MEASURED_2438_M, abs=0.5)


def test_the_published_lines_read_low_on_arrival_by_what_is_stated() -> None:
    # Regression: the distances that the docstring states.
    assert MEASURED_2438_M - elevation_to_saturation_pct(2438.0) == pytest.approx(1.3, abs=0.1)
    assert MEASURED_446_MMHG - elevation_to_saturation_pct(4300.0) == pytest.approx(6.9, abs=0.1)
