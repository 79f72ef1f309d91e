"""The heat balance and the sweat to expect of one person in stated conditions."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from planner.checks import QUANTITIES
from planner.constants import SEA_LEVEL_PRESSURE_HPA
from planner.hydration.cockpit import EFFORT_WITHIN, FULL_SUIT
from planner.physiology.air import site_pressure
from planner.physiology.ranges import Range
from planner.physiology.sweat import HeatInputs, predicted_sweat

PERMEABILITY_WITHIN = FULL_SUIT.permeability_high - FULL_SUIT.permeability


@dataclass(frozen=True)
class Sweat:
    """What evaporation the heat balance asks for and lets pass, and the sweat predicted."""

    required_w_m2: float
    maximal_w_m2: float
    sweat_rate_l_per_h: float
    low_sweat_rate_l_per_h: float
    high_sweat_rate_l_per_h: float
    notes: tuple[str, ...]


def sweat_in(
    *,
    air_c: float,
    radiant_c: float,
    humidity_pct: float,
    air_speed_m_s: float,
    metabolic_w_m2: float,
    clo: float,
    im: float,
    mass_kg: float,
    height_cm: float,
    elevation_m: float | None = None,
) -> Sweat:
    """Predict the sweat; the conditions are taken as exact, effort and permeability within their range.

    Raises: InputError naming the figure that cannot be.
    """
    pressure_hpa = SEA_LEVEL_PRESSURE_HPA
    if elevation_m is not None:
        pressure_hpa = float(np.asarray(site_pressure(elevation_m).pressure_hpa))
    found = predicted_sweat(
        HeatInputs(
            Range.exactly(air_c),
            Range.exactly(radiant_c),
            Range.exactly(humidity_pct),
            Range.exactly(air_speed_m_s),
            _around("metabolic_w_m2", metabolic_w_m2, EFFORT_WITHIN * metabolic_w_m2),
            Range.exactly(clo),
            _around("permeability", im, PERMEABILITY_WITHIN),
        ),
        mass_kg,
        height_cm,
        pressure_hpa,
    )
    rate = found.sweat_rate_l_per_h
    notes = [
        f"The range holds nine of ten: the formula's scatter, effort within {EFFORT_WITHIN:.0%}, "
        f"im within {PERMEABILITY_WITHIN:.2f}, clothing in thin air unknown.",
    ]
    if found.beyond_validity:
        notes.append("Such heat or clothing lies beyond what the formula was fitted to: an extrapolation.")
    if pressure_hpa < SEA_LEVEL_PRESSURE_HPA:
        notes.append("A drinks plan does not take less than at sea level: `drink` keeps the larger figure.")
    return Sweat(
        required_w_m2=float(found.required_w_m2),
        maximal_w_m2=float(found.maximal_w_m2),
        sweat_rate_l_per_h=float(rate.best),
        low_sweat_rate_l_per_h=float(rate.low),
        high_sweat_rate_l_per_h=float(rate.high),
        notes=tuple(notes),
    )


def _around(quantity: str, value: float, within: float) -> Range:
    known = QUANTITIES[quantity]
    if not known.low <= value <= known.high:
        return Range.exactly(value)  # refused by name further down
    return Range(max(value - within, known.low), value, min(value + within, known.high))
