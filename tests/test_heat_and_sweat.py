"""Properties of the heat balance and of predicted sweat, and the independent second estimate."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from pythermalcomfort.models import phs
from pythermalcomfort.psychrometrics import wet_bulb_tmp

from planner.errors import InputError
from planner.physiology.air import saturation_vapour_pressure_kpa, standard_pressure_hpa
from planner.physiology.heat import (
    body_surface_area_m2,
    heat_balance,
    humidity_in_warmer_air_pct,
    vapour_pressure_kpa,
    wet_bulb_c,
)
from planner.physiology.ranges import Range, checked_range
from planner.physiology.sweat import (
    HeatInputs,
    nine_of_ten,
    predicted_sweat,
    sweat_cap_g_m2_h,
    sweat_from_weighing_l_per_h,
)

exactly = Range.exactly

conditions = {
    "air": st.floats(-20.0, 70.0),
    "radiant": st.floats(-20.0, 110.0),
    "humidity": st.floats(0.0, 100.0),
    "speed": st.floats(0.0, 10.0),
    "metabolic": st.floats(40.0, 450.0),
    "clo": st.floats(0.0, 4.0),
    "permeability": st.floats(0.05, 1.0),
    "pressure": st.floats(400.0, 1080.0),
    "exponent": st.floats(0.0, 1.0),
}


@settings(max_examples=60, deadline=None)
@given(**conditions)
def test_the_balance_closes(
    air, radiant, humidity, speed, metabolic, clo, permeability, pressure, exponent
) -> None:
    """Computed: what passes through the clothing by conduction leaves its surface, and the parts add up."""
    b = heat_balance(
        air,
        radiant,
        humidity,
        speed,
        metabolic,
        clo,
        permeability,
        pressure_hpa=pressure,
        altitude_exponent=exponent,
    )
    dry = b.convection_w_m2 + b.radiation_w_m2
    assert 36.0 - b.clothing_surface_c == pytest.approx(0.155 * clo * dry, abs=1e-5)
    parts = dry + b.breath_convection_w_m2 + b.breath_evaporation_w_m2 + b.required_w_m2
    assert parts == pytest.approx(metabolic, abs=1e-6)
    assert np.sign(b.maximal_w_m2) == np.sign(
        saturation_vapour_pressure_kpa(36.0) - vapour_pressure_kpa(air, humidity)
    )


@settings(max_examples=40, deadline=None)
@given(
    air=st.floats(15.0, 50.0),
    humidity=st.floats(0.0, 40.0),
    clo=st.floats(0.0, 2.0),
    low=st.floats(0.30, 0.38),
    high=st.floats(0.30, 0.38),
)
def test_a_more_permeable_suit_lets_more_pass(air, humidity, clo, low, high) -> None:
    low, high = sorted((low, high))
    tight, open_weave = (
        heat_balance(air, air, humidity, 0.5, 200.0, clo, im).maximal_w_m2 for im in (low, high)
    )
    assert open_weave >= tight


def test_arrays_give_what_scalars_give() -> None:
    air = np.array([[10.0, 30.0], [45.0, np.nan]])
    together = heat_balance(air, air + 5.0, 30.0, 0.5, 230.0, 1.56, 0.34).required_w_m2
    assert together.shape == air.shape
    assert np.isnan(together[1, 1])
    for place in ((0, 0), (0, 1), (1, 0)):
        alone = heat_balance(float(air[place]), float(air[place]) + 5.0, 30.0, 0.5, 230.0, 1.56, 0.34)
        assert isinstance(alone.required_w_m2, float)
        assert together[place] == pytest.approx(alone.required_w_m2, abs=1e-6)


@pytest.mark.parametrize(
    ("values", "field"),
    [
        ((99.0, 30.0, 40.0, 0.5, 230.0, 1.0, 0.35), "air_temperature_c"),
        ((30.0, 30.0, 140.0, 0.5, 230.0, 1.0, 0.35), "humidity_pct"),
        ((30.0, 30.0, 40.0, -1.0, 230.0, 1.0, 0.35), "air_speed_m_s"),
        ((30.0, 30.0, 40.0, 0.5, 2300.0, 1.0, 0.35), "metabolic_w_m2"),
        ((30.0, 30.0, 40.0, 0.5, 230.0, 10.0, 0.35), "insulation_clo"),
        ((30.0, 30.0, 40.0, 0.5, 230.0, 1.0, 35.0), "permeability"),
    ],
)
def test_a_figure_out_of_range_is_named(values: tuple[float, ...], field: str) -> None:
    with pytest.raises(InputError, match=field):
        heat_balance(*values)


# Wet bulb --------------------------------------------------------------------------------------------------


def energy_balance_wet_bulb_c(air: float, humidity: float, pressure_hpa: float) -> float:
    """Computed independently: the thermodynamic wet bulb of ASHRAE Fundamentals (from memory), by halving."""
    vapour = vapour_pressure_kpa(air, humidity) * 10.0
    ratio = 0.621945 * vapour / (pressure_hpa - vapour)
    low, high = -30.0, air
    for _ in range(60):
        wet = 0.5 * (low + high)
        saturated = saturation_vapour_pressure_kpa(wet) * 10.0
        saturated_ratio = 0.621945 * saturated / (pressure_hpa - saturated)
        found = ((2501.0 - 2.326 * wet) * saturated_ratio - 1.006 * (air - wet)) / (
            2501.0 + 1.86 * air - 4.186 * wet
        )
        low, high = (low, wet) if found > ratio else (wet, high)
    return 0.5 * (low + high)


@pytest.mark.parametrize("elevation_m", [0.0, 2300.0, 4000.0])
@pytest.mark.parametrize(("air", "humidity"), [(35.0, 30.0), (30.0, 10.0), (45.0, 15.0), (20.0, 80.0)])
def test_wet_bulb_against_the_energy_balance(elevation_m: float, air: float, humidity: float) -> None:
    pressure = standard_pressure_hpa(elevation_m)
    # 0.4 C: a ventilated psychrometer is not quite a thermodynamic wet bulb (judgement).
    assert wet_bulb_c(air, humidity, pressure) == pytest.approx(
        energy_balance_wet_bulb_c(air, humidity, pressure), abs=0.4
    )


def test_stull_is_for_sea_level_only() -> None:
    # Computed with pythermalcomfort (Stull 2011): 22.14 at 35 C 30 %; up to 3 C high in dry heat at 4000 m.
    assert wet_bulb_tmp(35.0, 30.0) == pytest.approx(22.14, abs=0.05)
    assert wet_bulb_c(35.0, 30.0) == pytest.approx(22.14, abs=1.0)  # Stull's own error reaches 1 C
    pressure = standard_pressure_hpa(4000.0)
    excess = [
        wet_bulb_tmp(air, humidity) - wet_bulb_c(air, humidity, pressure)
        for air in (25.0, 30.0, 35.0, 40.0)
        for humidity in (10.0, 15.0, 20.0)
    ]
    assert 2.0 < max(excess) < 3.5


@settings(max_examples=60, deadline=None)
@given(st.floats(-10.0, 60.0), st.floats(0.0, 100.0), st.floats(400.0, 1080.0))
def test_wet_bulb_lies_below_the_dry_one_and_falls_with_pressure(air, humidity, pressure) -> None:
    wet = wet_bulb_c(air, humidity, pressure)
    assert wet <= air + 1e-9
    assert wet_bulb_c(air, humidity, pressure - 50.0) <= wet + 1e-9


# Sweat -----------------------------------------------------------------------------------------------------


def in_a_suit(air: float, humidity: float, clo: float = 1.0, metabolic: float = 230.0) -> HeatInputs:
    return HeatInputs(
        exactly(air),
        exactly(air + 5.0),
        exactly(humidity),
        exactly(0.5),
        exactly(metabolic),
        exactly(clo),
        Range(0.30, 0.34, 0.38),
    )


@pytest.mark.parametrize(
    ("air", "humidity", "metabolic", "clo"),
    [
        (30.0, 40.0, 230.0, 1.0),
        (40.0, 30.0, 230.0, 1.0),
        (45.0, 20.0, 230.0, 1.0),
        (45.0, 25.0, 180.0, 1.0),
        (35.0, 40.0, 160.0, 0.8),
    ],
)
def test_the_second_estimate_lies_in_the_predicted_range(air, humidity, metabolic, clo) -> None:
    """Computed with pythermalcomfort, ISO 7933:2004, first hour, seated, 79 kg; within its limits."""
    strain = phs(
        tdb=air,
        tr=air + 5.0,
        v=0.5,
        rh=humidity,
        met=metabolic / 58.2,
        clo=clo,
        posture="sitting",
        acclimatized=100,
        model="7933-2004",
        duration=60,
        weight=79.0,
        height=1.78,
    )
    found = predicted_sweat(in_a_suit(air, humidity, clo, metabolic), 79.0, 178.0).sweat_rate_l_per_h
    assert found.low <= strain.sweat_loss_g / 1000.0 <= found.high


@settings(max_examples=40, deadline=None)
@given(
    air=conditions["air"],
    humidity=conditions["humidity"],
    clo=conditions["clo"],
    metabolic=conditions["metabolic"],
    mass=st.floats(40.0, 140.0),
    elevation=st.floats(0.0, 5000.0),
)
def test_a_prediction_is_ordered_and_within_the_cap(air, humidity, clo, metabolic, mass, elevation) -> None:
    found = predicted_sweat(
        in_a_suit(air, humidity, clo, metabolic), mass, 178.0, standard_pressure_hpa(elevation)
    ).sweat_rate_l_per_h
    highest = sweat_cap_g_m2_h(acclimatised=True) * body_surface_area_m2(mass, 178.0) / 1000.0
    assert 0.0 <= found.low <= found.best <= found.high <= highest + 1e-12


def test_a_wider_input_widens_the_range() -> None:
    narrow = in_a_suit(45.0, 20.0)
    wide = HeatInputs(
        Range(35.0, 45.0, 55.0),
        Range(40.0, 50.0, 60.0),
        Range(10.0, 20.0, 30.0),
        exactly(0.5),
        Range(180.0, 230.0, 300.0),
        exactly(1.0),
        Range(0.30, 0.34, 0.38),
    )
    one, two = (predicted_sweat(inputs, 79.0, 178.0) for inputs in (narrow, wide))
    assert two.conditions_sd_l_per_h > one.conditions_sd_l_per_h
    assert two.person_sd_l_per_h > one.person_sd_l_per_h
    assert two.sweat_rate_l_per_h.high > one.sweat_rate_l_per_h.high
    assert two.sweat_rate_l_per_h.low < one.sweat_rate_l_per_h.low
    assert two.sweat_rate_l_per_h.best == pytest.approx(one.sweat_rate_l_per_h.best)


def test_at_equal_vapour_pressure_sweat_falls_by_up_to_seven_per_cent_at_2300_m() -> None:
    # Computed elsewhere from the stated structure: 0 to 7 %, for the clothing of a driver, 1.0 clo and more.
    falls = []
    for clo in (1.0, 1.2, 1.56):
        for exponent in (0.0, 0.5, 1.0):
            for metabolic in (180.0, 230.0, 300.0):
                inputs = in_a_suit(40.0, 25.0, clo, metabolic)
                inputs = HeatInputs(
                    *(getattr(inputs, n) for n in list(HeatInputs.__dataclass_fields__)[:7]),
                    altitude_exponent=exactly(exponent),
                )
                sea, high = (
                    predicted_sweat(inputs, 79.0, 178.0, pressure).sweat_rate_l_per_h.best
                    for pressure in (1013.25, standard_pressure_hpa(2300.0))
                )
                falls.append(100.0 * (1.0 - high / sea))
    assert min(falls) >= 0.0
    assert max(falls) <= 7.0


def test_beyond_the_fitted_range_says_so() -> None:
    def beyond(air: float, clo: float) -> float:
        return predicted_sweat(in_a_suit(air, 20.0, clo), 79.0, 178.0).beyond_validity

    # Published: air of 15 to 46 C; ISO 7933 stops at 1.0 clo.
    assert [beyond(30.0, 1.0), beyond(50.0, 1.0), beyond(10.0, 1.0), beyond(30.0, 1.56)] == [
        0.0,
        1.0,
        1.0,
        1.0,
    ]


def test_humidity_of_warmed_air_keeps_its_water() -> None:
    warmed = humidity_in_warmer_air_pct(50.0, 30.0, 45.0)
    assert vapour_pressure_kpa(45.0, warmed) == pytest.approx(vapour_pressure_kpa(30.0, 50.0))


def test_a_range_out_of_order_is_refused() -> None:
    with pytest.raises(InputError, match=r"metabolic_w_m2.*ascending"):
        checked_range("metabolic_w_m2", Range(300.0, 230.0, 180.0))


def test_nothing_expected_keeps_a_range_above_nothing() -> None:
    low, high = nine_of_ten(np.array([0.0, 1.0]), np.array([0.2, 0.2]))
    assert low == pytest.approx([0.0, np.exp(-0.329)])  # computed by hand, 1.645 x 0.2
    assert high == pytest.approx([0.329, 1.329])


def test_no_time_between_weighings_gives_no_rate() -> None:
    assert np.isnan(sweat_from_weighing_l_per_h(80.0, 79.0, 0.0))
