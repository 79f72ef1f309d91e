"""Properties of the oxygen formulas."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from planner.constants import AIR_OXYGEN_FRACTION, HPA_PER_MMHG
from planner.errors import InputError
from planner.physiology import oxygen
from planner.physiology.air import site_pressure

FEW = settings(max_examples=60, deadline=None)
LATITUDES = st.one_of(st.floats(-90.0, 90.0), st.just(float("nan")))


def test_water_vapour_is_taken_off() -> None:
    # Published: 47 mmHg at 37 C, whatever the pressure.
    per_mmhg = oxygen.inspired_po2_mmhg(800.0 + HPA_PER_MMHG, 1.0) - oxygen.inspired_po2_mmhg(800.0, 1.0)
    assert per_mmhg == pytest.approx(1.0)
    assert oxygen.inspired_po2_mmhg(760.0 * HPA_PER_MMHG, 1.0) == pytest.approx(760.0 - 47.0)


def test_plain_air_lies_between_the_published_fractions() -> None:
    # Published: 0.2093 to 0.2095.
    assert 0.2093 <= AIR_OXYGEN_FRACTION <= 0.2095


@FEW
@given(st.floats(-430.0, 9000.0), LATITUDES)
@example(9000.0, 31.6875)
def test_equivalent_elevation_of_plain_air_is_where_one_stands(elevation_m: float, latitude: float) -> None:
    inspired = oxygen.inspired_po2_mmhg(site_pressure(elevation_m, latitude).pressure_hpa)
    assert oxygen.equivalent_elevation_m(inspired, latitude) == pytest.approx(elevation_m, abs=1e-6)


@FEW
@given(st.floats(70.0, 148.0), st.floats(0.1, 5.0), LATITUDES)
def test_less_oxygen_is_higher_up(inspired: float, less: float, latitude: float) -> None:
    here = oxygen.equivalent_elevation_m(inspired, latitude)
    assert oxygen.equivalent_elevation_m(inspired - less, latitude) > here


def test_a_tent_counts_with_the_pressure_of_the_place_where_it_stands() -> None:
    # Computed by hand: 0.16 (PB - 47) is less at 1600 m than at sea level, so the tent there is higher.
    low, high = (
        oxygen.equivalent_elevation_m(
            oxygen.inspired_po2_mmhg(site_pressure(h, 47.0).pressure_hpa, 0.16), 47.0
        )
        for h in (0.0, 1600.0)
    )
    assert high - low > 1400.0


@FEW
@given(st.floats(60.0, 150.0), st.floats(15.0, 45.0), st.floats(0.1, 0.3), st.floats(0.7, 0.99))
def test_alveolar_direction(inspired: float, paco2: float, fraction: float, quotient: float) -> None:
    here = oxygen.alveolar_po2_mmhg(inspired, paco2, fraction, quotient)
    assert oxygen.alveolar_po2_mmhg(inspired + 1.0, paco2, fraction, quotient) > here or here == 0.0
    assert oxygen.alveolar_po2_mmhg(inspired, paco2 + 1.0, fraction, quotient) < here or here == 0.0
    assert oxygen.alveolar_po2_mmhg(inspired, paco2, fraction, quotient + 0.01) > here or here == 0.0
    assert here <= inspired


def test_alveolar_with_equal_exchange_is_inspired_less_carbon_dioxide() -> None:
    # Computed: with R = 1 the bracket is 1 for every oxygen fraction.
    assert oxygen.alveolar_po2_mmhg(120.0, 35.0, 0.21, 1.0) == pytest.approx(85.0)
    assert oxygen.alveolar_po2_mmhg(120.0, 35.0, 0.14, 1.0) == pytest.approx(85.0)


def test_alveolar_oxygen_is_never_negative() -> None:
    assert oxygen.alveolar_po2_mmhg(20.0, 40.0) == 0.0


@FEW
@given(st.floats(330.0, 9000.0), st.floats(0.0, 60.0))
def test_paco2_falls_with_elevation_and_with_time_there(elevation_m: float, days: float) -> None:
    here = oxygen.paco2_mmhg(elevation_m, days)
    assert oxygen.paco2_mmhg(elevation_m - 1.0, days) > here
    assert oxygen.paco2_mmhg(elevation_m, days + 1.0) <= here


def test_time_constant_and_asymptote_are_those_of_the_rows_by_day() -> None:
    # Computed by a search over time constants with the other two in closed form, through the lowlanders at
    # 3600 m of Wachsmuth 2013, Br J Sports Med 47:i93 (published): 2 h, day 3, days 5-7, day 12.
    days, measured = np.array([2.0 / 24.0, 3.0, 6.0, 12.0]), np.array([39.1, 35.8, 32.4, 30.7])
    constants = np.arange(2.0, 12.0, 0.05)
    fits = [np.polynomial.Polynomial.fit(np.exp(-days / c), measured, 1).convert() for c in constants]
    misses = [((f(np.exp(-days / c)) - measured) ** 2).sum() for f, c in zip(fits, constants, strict=True)]
    best = int(np.argmin(misses))
    assert constants[best] == pytest.approx(oxygen.PACO2_TIME_CONSTANT_D, abs=0.4)
    # The acclimatised line, published on its own by others, meets that asymptote.
    assert fits[best].coef[0] == pytest.approx(oxygen.paco2_mmhg(3600.0, 3650.0), abs=0.4)


def test_paco2_goes_two_thirds_of_the_way_in_one_time_constant() -> None:
    # Computed: 1 - 1/e of the way from the acute to the acclimatised line after 5.9 days.
    acute, later, full = (oxygen.paco2_mmhg(3000.0, days) for days in (0.0, 5.9, 3650.0))
    assert (acute - later) / (acute - full) == pytest.approx(1.0 - np.exp(-1.0))


FORMULAS = [
    (oxygen.inspired_po2_mmhg, (771.6, AIR_OXYGEN_FRACTION)),
    (oxygen.alveolar_po2_mmhg, (112.0, 33.0, 0.2094, 0.85)),
    (oxygen.equivalent_elevation_m, (112.0, 19.0)),
    (oxygen.paco2_mmhg, (2240.0, 4.0)),
]


@pytest.mark.parametrize(("formula", "values"), FORMULAS, ids=lambda v: getattr(v, "__name__", ""))
def test_scalar_array_shape_and_nan(formula, values) -> None:
    single = formula(*values)
    assert type(single) is float
    many = formula(np.array([[values[0]], [np.nan]]), *values[1:])
    assert many.shape == (2, 1)
    assert many[0, 0] == pytest.approx(single, rel=1e-14)
    assert np.isnan(many[1, 0])
    assert np.isnan(formula(float("nan"), *values[1:]))
    crossed = formula(np.full((2, 1), values[0]), np.full(3, values[1]), *values[2:])
    assert crossed.shape == (2, 3)
    assert np.allclose(crossed, single, rtol=1e-14)


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: oxygen.inspired_po2_mmhg(760.0, 20.9), r"oxygen_fraction: 20\.9 .* 0\.05 to 1 "),
        (lambda: oxygen.inspired_po2_mmhg(101325.0), r"pressure_hpa: 101325\.0 .* 300 to 1100 hPa "),
        (lambda: oxygen.alveolar_po2_mmhg(150.0, 4.0), r"paco2_mmhg: 4\.0 .* 5 to 90 mmHg "),
        (
            lambda: oxygen.alveolar_po2_mmhg(150.0, 40.0, 0.21, 0.0),
            r"respiratory_quotient: 0\.0 .* 0\.65 to 1\.3",
        ),
        (
            lambda: oxygen.equivalent_elevation_m(300.0),
            r"inspired_po2_mmhg: 300\.0 .* mmHg .* -430 and 9000 m",
        ),
        (lambda: oxygen.equivalent_elevation_m(20.0, 19.0), r"inspired_po2_mmhg: 20\.0 .* -430 and 9000 m"),
        (lambda: oxygen.paco2_mmhg(2000.0, -1.0), r"days: -1\.0 .* 0 to 3650 d "),
    ],
)
def test_out_of_range_names_value_range_and_unit(call, message: str) -> None:
    with pytest.raises(InputError, match=message):
        call()
