"""Properties of the air formulas, and two independent libraries and CIPM-2007 beside them."""

from __future__ import annotations

import ambiance
import fluids
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.errors import InputError
from planner.physiology import air

ELEVATIONS = st.floats(-430.0, 9000.0)
PRESSURES = st.floats(300.0, 1100.0)
LATITUDES = st.one_of(st.floats(-90.0, 90.0), st.just(float("nan")))
FEW = settings(max_examples=60, deadline=None)


# Independent libraries -------------------------------------------------------------------------------------


def test_standard_atmosphere_agrees_with_ambiance() -> None:
    # Computed by ambiance (ICAO 1993, geometric height); found within 0.0003 hPa, 3.3e-7 kg/m3.
    elevation = np.linspace(-400.0, 9000.0, 471)
    other = ambiance.Atmosphere(elevation)
    np.testing.assert_allclose(air.standard_pressure_hpa(elevation), other.pressure / 100.0, atol=5e-4)
    np.testing.assert_allclose(air.standard_air_density_kg_m3(elevation), other.density, atol=5e-7)


def test_standard_atmosphere_agrees_with_fluids() -> None:
    # Computed by fluids (US Standard Atmosphere 1976, geometric height); its rounded gas constant differs.
    for elevation in np.linspace(-400.0, 9000.0, 95):
        other = fluids.ATMOSPHERE_1976(float(elevation))
        assert air.standard_pressure_hpa(float(elevation)) == pytest.approx(other.P / 100.0, abs=0.001)
        assert air.standard_air_density_kg_m3(float(elevation)) == pytest.approx(other.rho, abs=2e-6)


def cipm_2007_density_kg_m3(pressure_pa: float, celsius: float, humidity: float) -> float:
    """Picard et al. 2008, Metrologia 45:149, for 0.0004 of carbon dioxide; constants from memory.

    The two rows of moist_air.csv that were computed elsewhere confirm them.
    """
    kelvin = celsius + 273.15
    saturation = np.exp(1.2378847e-5 * kelvin**2 - 1.9121316e-2 * kelvin + 33.93711047 - 6.3431645e3 / kelvin)
    enhancement = 1.00062 + 3.14e-8 * pressure_pa + 5.6e-7 * celsius**2
    vapour = humidity * enhancement * saturation / pressure_pa
    compressibility = (
        1.0
        - pressure_pa
        / kelvin
        * (
            1.58123e-6
            - 2.9331e-8 * celsius
            + 1.1043e-10 * celsius**2
            + (5.707e-6 - 2.051e-8 * celsius) * vapour
            + (1.9898e-4 - 2.376e-6 * celsius) * vapour**2
        )
        + (pressure_pa / kelvin) ** 2 * (1.83e-11 - 0.765e-8 * vapour**2)
    )
    dry_molar_mass, water_molar_mass, gas_constant = 28.96546e-3, 18.01528e-3, 8.314472
    return float(
        pressure_pa
        * dry_molar_mass
        / (compressibility * gas_constant * kelvin)
        * (1.0 - vapour * (1.0 - water_molar_mass / dry_molar_mass))
    )


def test_cipm_2007_as_written_here_gives_the_values_computed_elsewhere() -> None:
    # Computed with CIPM-2007 by others, to four decimals.
    assert cipm_2007_density_kg_m3(101325.0, 20.0, 0.5) == pytest.approx(1.1993, abs=5e-5)
    assert cipm_2007_density_kg_m3(77500.0, 25.0, 0.4) == pytest.approx(0.9002, abs=5e-5)


@pytest.mark.parametrize("pressure_hpa", [600.0, 770.0, 900.0, 1013.25, 1100.0])
@pytest.mark.parametrize("air_temperature_c", [15.0, 20.0, 27.0])
@pytest.mark.parametrize("humidity_pct", [0.0, 50.0, 100.0])
def test_moist_air_agrees_with_cipm_2007(
    pressure_hpa: float, air_temperature_c: float, humidity_pct: float
) -> None:
    other = cipm_2007_density_kg_m3(100.0 * pressure_hpa, air_temperature_c, humidity_pct / 100.0)
    ours = air.moist_air_density_kg_m3(pressure_hpa, air_temperature_c, humidity_pct)
    assert ours == pytest.approx(other, rel=6e-4)
    assert ours < other, "the ideal mixture leaves out the compressibility, which makes air denser"


def test_saturation_vapour_pressure_agrees_with_cipm_2007() -> None:
    for celsius in (15.0, 20.0, 27.0):
        kelvin = celsius + 273.15
        other = np.exp(1.2378847e-5 * kelvin**2 - 1.9121316e-2 * kelvin + 33.93711047 - 6.3431645e3 / kelvin)
        assert air.saturation_vapour_pressure_kpa(celsius) == pytest.approx(other / 1000.0, rel=2e-3)


# Inverse pairs and direction -------------------------------------------------------------------------------


@FEW
@given(ELEVATIONS)
def test_standard_pair_round_trips(elevation_m: float) -> None:
    there = air.standard_pressure_hpa(elevation_m)
    assert air.standard_elevation_m(there) == pytest.approx(elevation_m, abs=1e-8)


@FEW
@given(PRESSURES)
def test_standard_pair_round_trips_from_pressure(pressure_hpa: float) -> None:
    elevation_m = np.clip(air.standard_elevation_m(pressure_hpa), -430.0, 9000.0)
    if air.standard_pressure_hpa(9000.0) <= pressure_hpa <= air.standard_pressure_hpa(-430.0):
        assert air.standard_pressure_hpa(float(elevation_m)) == pytest.approx(pressure_hpa, rel=1e-12)


@FEW
@given(ELEVATIONS)
def test_low_latitude_pair_round_trips(elevation_m: float) -> None:
    there = air.low_latitude_pressure_hpa(elevation_m)
    assert air.low_latitude_elevation_m(there) == pytest.approx(elevation_m, abs=1e-8)


@FEW
@given(LATITUDES, st.floats(-430.0, 8999.0), st.floats(0.01, 200.0))
def test_site_pressure_falls_strictly_with_elevation(latitude: float, elevation: float, rise: float) -> None:
    higher = min(elevation + rise, 9000.0)
    low = air.site_pressure(elevation, latitude).pressure_hpa
    assert air.site_pressure(higher, latitude).pressure_hpa < low


def test_site_pressure_falls_at_every_metre_of_the_hand_over() -> None:
    elevation = np.arange(1400.0, 2101.0)
    for latitude in np.linspace(0.0, 40.0, 41):
        assert (np.diff(air.site_pressure(elevation, latitude).pressure_hpa) < -0.05).all(), latitude


def test_site_pressure_has_no_step_in_latitude() -> None:
    latitude = np.linspace(-90.0, 90.0, 18001)
    pressure = air.site_pressure(2240.0, latitude).pressure_hpa
    # 11.8 hPa between the two models over 5 degrees: 0.024 hPa per hundredth of a degree.
    assert np.abs(np.diff(pressure)).max() < 0.03
    np.testing.assert_allclose(pressure, pressure[::-1], rtol=1e-12)


def test_altimeter_setting_of_the_standard_atmosphere_is_the_standard_pressure() -> None:
    # The altimeter takes the elevation for geopotential height: 0.07 hPa at 2240 m (computed with ambiance).
    station = air.station_pressure_from_altimeter_setting_hpa(1013.25, 2240.0)
    geometric = float(ambiance.Atmosphere.geop2geom_height(np.array([2240.0]))[0])
    assert station == pytest.approx(air.standard_pressure_hpa(geometric), abs=1e-6)
    assert air.station_pressure_from_altimeter_setting_hpa(1013.25, 0.0) == pytest.approx(1013.25)


@FEW
@given(st.floats(870.0, 1089.0), st.floats(0.0, 8000.0))
def test_altimeter_setting_rises_with_setting_and_falls_with_elevation(
    setting: float, elevation: float
) -> None:
    here = air.station_pressure_from_altimeter_setting_hpa(setting, elevation)
    assert air.station_pressure_from_altimeter_setting_hpa(setting + 1.0, elevation) > here
    assert air.station_pressure_from_altimeter_setting_hpa(setting, elevation + 1.0) < here


@FEW
@given(st.floats(500.0, 1099.0), st.floats(-20.0, 49.0), st.floats(0.0, 99.0))
def test_density_rises_with_pressure_and_falls_with_heat_and_damp(p: float, t: float, rh: float) -> None:
    here = air.moist_air_density_kg_m3(p, t, rh)
    assert air.moist_air_density_kg_m3(p + 1.0, t, rh) > here
    assert air.moist_air_density_kg_m3(p, t + 1.0, rh) < here
    assert air.moist_air_density_kg_m3(p, t, rh + 1.0) < here


# Which model -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("elevation_m", "latitude_deg", "measured", "pressure_from"),
    [
        # The rule is published as within about 30-35 degrees, above about 1500-2000 m; edges are a judgement.
        (2240.0, 19.0, np.nan, "model atmosphere for low latitudes (West 1996)"),
        (2240.0, -19.0, np.nan, "model atmosphere for low latitudes (West 1996)"),
        (2000.0, 30.0, np.nan, "model atmosphere for low latitudes (West 1996)"),
        (2240.0, 47.0, np.nan, "standard atmosphere (ISO 2533)"),
        (2240.0, 35.0, np.nan, "standard atmosphere (ISO 2533)"),
        (1500.0, 0.0, np.nan, "standard atmosphere (ISO 2533)"),
        (1750.0, 10.0, np.nan, "between the two model atmospheres"),
        (2500.0, 32.0, np.nan, "between the two model atmospheres"),
        (2240.0, np.nan, np.nan, "standard atmosphere (ISO 2533), latitude not known"),
        (2240.0, 19.0, 780.0, "measured at the station"),
        (2240.0, np.nan, 780.0, "measured at the station"),
        (np.nan, 19.0, np.nan, "not known"),
    ],
)
def test_source_of_the_pressure_in_words(
    elevation_m: float, latitude_deg: float, measured: float, pressure_from: str
) -> None:
    found = air.site_pressure(elevation_m, latitude_deg, measured)
    assert found.pressure_from == pressure_from
    assert type(found.pressure_from) is str


def test_measured_pressure_beats_both_models() -> None:
    assert air.site_pressure(2240.0, 19.0, 780.0).pressure_hpa == 780.0
    assert air.site_pressure(2240.0, 19.0, 780.0).sd_hpa < air.site_pressure(2240.0, 19.0).sd_hpa


def test_not_knowing_the_latitude_widens_the_spread_only_where_the_models_differ() -> None:
    high, low = 2240.0, 800.0
    assert air.site_pressure(high).sd_hpa > air.site_pressure(high, 47.0).sd_hpa
    assert air.site_pressure(low).sd_hpa == air.site_pressure(low, 47.0).sd_hpa


def test_site_pressure_of_many_sites_equals_each_alone() -> None:
    elevation = np.array([[100.0, 1750.0], [2240.0, 3200.0]])
    latitude = np.array([47.0, 19.0])
    measured = np.array([[np.nan, np.nan], [775.0, np.nan]])
    many = air.site_pressure(elevation, latitude, measured)
    for row in range(2):
        for column in range(2):
            one = air.site_pressure(
                float(elevation[row, column]), float(latitude[column]), float(measured[row, column])
            )
            assert many.pressure_hpa[row, column] == one.pressure_hpa
            assert many.sd_hpa[row, column] == one.sd_hpa
            assert many.pressure_from[row, column] == one.pressure_from


# Shapes, NaN and ranges ------------------------------------------------------------------------------------

FORMULAS = [
    (air.standard_pressure_hpa, (2240.0,)),
    (air.standard_elevation_m, (771.6,)),
    (air.low_latitude_pressure_hpa, (2240.0,)),
    (air.low_latitude_elevation_m, (783.4,)),
    (air.station_pressure_from_altimeter_setting_hpa, (1025.0, 2240.0)),
    (air.saturation_vapour_pressure_kpa, (20.0,)),
    (air.moist_air_density_kg_m3, (775.0, 25.0, 40.0)),
    (air.standard_air_density_kg_m3, (2240.0,)),
]


@pytest.mark.parametrize(("formula", "values"), FORMULAS, ids=lambda v: getattr(v, "__name__", ""))
def test_scalar_array_shape_and_nan(formula, values) -> None:
    single = formula(*values)
    assert type(single) is float
    first = np.array([[values[0], np.nan, values[0]]])
    many = formula(first, *values[1:])
    assert many.shape == (1, 3)
    assert many[0, 0] == many[0, 2] == pytest.approx(single, rel=1e-14)
    assert np.isnan(many[0, 1])
    assert np.isnan(formula(float("nan"), *values[1:]))


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: air.standard_pressure_hpa(99999.0), r"elevation_m: 99999\.0 .* -430 to 9000 m "),
        (lambda: air.standard_elevation_m(30.0), r"pressure_hpa: 30\.0 .* 300 to 1100 hPa "),
        (lambda: air.low_latitude_elevation_m(1200.0), r"pressure_hpa: 1200\.0 .* 300 to 1100 hPa "),
        (lambda: air.site_pressure(0.0, 91.0), r"latitude_deg: 91\.0 .* -90 to 90 deg "),
        (lambda: air.site_pressure(0.0, 0.0, 29.92), r"measured_pressure_hpa: 29\.92 .* 300 to 1100 hPa "),
        (
            lambda: air.station_pressure_from_altimeter_setting_hpa(2992.0, 0.0),
            r"altimeter_setting_hpa: 2992\.0 .* 870 to 1090 hPa ",
        ),
        (lambda: air.moist_air_density_kg_m3(1000.0, 20.0, 120.0), r"humidity_pct: 120\.0 .* 0 to 100 % "),
        (
            lambda: air.moist_air_density_kg_m3(1000.0, np.array([20.0, 293.15]), 50.0),
            r"air_temperature_c: 293\.15 .* -60 to 75 C ",
        ),
    ],
)
def test_out_of_range_names_value_range_and_unit(call, message: str) -> None:
    with pytest.raises(InputError, match=message):
        call()
