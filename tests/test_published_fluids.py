"""Heat, sweat and drink against the rows of tests/published, one case a row."""

from __future__ import annotations

import pytest
from published_rows import Row, cases
from pythermalcomfort.models import phs

from planner.physiology.air import standard_pressure_hpa
from planner.physiology.body_water import day_respiratory_water_ml, day_water_ml, dehydration_signs
from planner.physiology.drinking import (
    after_ml,
    four_hours_before_ml,
    hours_to_loss,
    mass_lost_kg,
    two_hours_before_ml,
    whole_body_sodium_mmol_l,
)
from planner.physiology.heat import heat_balance, vapour_pressure_kpa, wbgt_c
from planner.physiology.mass_loss import (
    gas_exchange_g_min,
    metabolic_mass_loss_g,
    oxygen_uptake_l_min,
    respiratory_water_g_min,
)
from planner.physiology.ranges import Range
from planner.physiology.sweat import (
    gonzalez_sweat_g_m2_h,
    sweat_from_weighing_l_per_h,
    weighing_error_l_per_h,
)

MMHG_PER_KPA = 7.50062


@cases("heat_balance")
def test_heat_balance(row: Row) -> None:
    balance = heat_balance(
        row["air_temperature_c"],
        row["radiant_temperature_c"],
        row["humidity_pct"],
        row["air_speed_m_s"],
        row["metabolic_w_m2"],
        row["insulation_clo"],
        row["permeability"],
    )
    if row.given["quantity"] == "sweat_g_m2_h":
        row.check(gonzalez_sweat_g_m2_h(balance.required_w_m2, balance.maximal_w_m2))
    else:
        row.check(getattr(balance, row.given["quantity"]))


@cases("thin_air_exchange")
def test_exchange_in_thin_air(row: Row) -> None:
    high, low = (
        getattr(
            heat_balance(
                30.0, 30.0, 30.0, 0.5, 230.0, 0.0, 0.35, pressure_hpa=standard_pressure_hpa(elevation)
            ),
            row.given["quantity"],
        )
        for elevation in (row["elevation_m"], 0.0)
    )
    row.check(100.0 * (high / low - 1.0))


@cases("wet_bulb_globe")
def test_wet_bulb_globe_temperature(row: Row) -> None:
    row.check(wbgt_c(row["wet_bulb_c"], row["radiant_temperature_c"], row["air_temperature_c"]))


@cases("sweat_prediction")
def test_gonzalez(row: Row) -> None:
    row.check(gonzalez_sweat_g_m2_h(row["required_w_m2"], row["maximal_w_m2"]))


@cases("mass_loss")
def test_mass_lost_without_sweat(row: Row) -> None:
    first, second = row["first"], row["second"]
    # The energetic equivalent of oxygen for one square metre turns watts into litres a minute.
    uptake = oxygen_uptake_l_min(first, 1.0) if "by_power" in row.given["quantity"] else first
    vapour_25_c_65_pct = vapour_pressure_kpa(25.0, 65.0) * MMHG_PER_KPA
    row.check(
        {
            "respiratory_water_g_h": lambda: 60.0 * respiratory_water_g_min(uptake, second),
            "gas_exchange_g_h": lambda: 60.0 * gas_exchange_g_min(uptake, second),
            "metabolic_g": lambda: metabolic_mass_loss_g(first),
            "respiratory_water_by_power_g_h": lambda: (
                60.0 * respiratory_water_g_min(uptake, vapour_25_c_65_pct)
            ),
            "day_breath_ml": lambda: day_respiratory_water_ml(first),
        }[row.given["quantity"]]()
    )


@cases("weighed_sweat", quantity="rate_l_per_h")
def test_weighed_sweat(row: Row) -> None:
    row.check(
        sweat_from_weighing_l_per_h(
            row["mass_before_kg"],
            row["mass_after_kg"],
            row["minutes"] / 60.0,
            drink_ml=row["drink_ml"],
            urine_ml=row["urine_ml"],
        )
    )


@cases("weighed_sweat", quantity="error_l_per_h")
def test_weighing_error(row: Row) -> None:
    row.check(weighing_error_l_per_h(row["minutes"] / 60.0))


@cases("drinking")
def test_drinking(row: Row) -> None:
    given = row.given
    first = float("nan") if given["first"] in ("woman", "man") else row["first"]
    second, third = row["second"], row["third"]
    row.check(
        {
            "four_hours_low_ml": lambda: four_hours_before_ml(first).low,
            "four_hours_high_ml": lambda: four_hours_before_ml(first).high,
            "two_hours_low_ml": lambda: two_hours_before_ml(first, second).low,
            "two_hours_high_ml": lambda: two_hours_before_ml(first, second).high,
            "mass_lost_kg": lambda: mass_lost_kg(Range.exactly(first), second, third).best,
            "after_low_ml": lambda: after_ml(Range.exactly(first), second).low,
            "after_high_ml": lambda: after_ml(Range.exactly(first), second).high,
            "whole_body_mmol_l": lambda: whole_body_sodium_mmol_l(first),
            "hours_to_loss": lambda: hours_to_loss(first, second, third),
            "day_low_ml": lambda: day_water_ml(given["first"], second, third).low,
            "day_high_ml": lambda: day_water_ml(given["first"], second, third).high,
        }[given["quantity"]]()
    )


@cases("morning_water")
def test_morning_rule(row: Row) -> None:
    row.check(
        dehydration_signs(
            row["mass_change_pct"], row["urine_colour"], row["urine_specific_gravity"], row["thirsty"]
        )
    )


@cases("predicted_heat_strain")
def test_the_second_estimate_reproduces_its_published_cases(row: Row) -> None:
    """The reference itself, so that comparing with it below means something."""
    strain = phs(
        tdb=row["air_temperature_c"],
        tr=row["radiant_temperature_c"],
        v=row["air_speed_m_s"],
        rh=row["humidity_pct"],
        met=row["metabolic_met"],
        clo=row["insulation_clo"],
        posture=row.given["posture"],
        acclimatized=100 if row.given["acclimatised"] == "yes" else 0,
        model="7933-2004",
    )
    row.check(float(getattr(strain, row.given["quantity"])))


@pytest.mark.parametrize("quantity", ["convection_w_m2", "maximal_w_m2"])
def test_still_air_at_sea_level_is_the_base_of_thin_air(quantity: str) -> None:
    # Computed: at P = P0 every pressure factor is one, whatever the exponent of the clothing.
    figures = {
        getattr(heat_balance(30.0, 35.0, 40.0, 0.5, 230.0, 1.0, 0.35, altitude_exponent=x), quantity)
        for x in (0.0, 0.5, 1.0)
    }
    assert len(figures) == 1
