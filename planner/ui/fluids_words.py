"""Drinks and rates as the Fluids page writes them."""

from __future__ import annotations

import math

import numpy as np

from planner.hydration.weighings import Weighed
from planner.physiology.ranges import Range
from planner.physiology.sweat import RANGE_SD
from planner.units import from_house
from planner.wording import DASH, UnitChoice, day_and_clock, number, number_range, per_cent, volume

STEP: dict[str, float] = {"mL": 50.0, "fl oz": 1.0}


def ends(given: Range) -> tuple[float, float, float]:
    """Low, best and high as plain numbers."""
    low, best, high = (float(np.asarray(each)) for each in (given.low, given.best, given.high))
    return low, best, high


def at_most(value_ml: float, units: UnitChoice) -> str:
    """A drink that must not be exceeded: rounded down."""
    step = STEP[units.volume]
    given = from_house("volume", value_ml, units.volume)
    # A hair up, so that 800 mL do not become 750 by binary arithmetic.
    return f"{number(step * math.floor(given / step + 1e-9))} {units.volume}"


def volume_range(given: Range, units: UnitChoice) -> str:
    """Low and high of a drink with one unit: "400–550 mL"; one figure when they are the same."""
    step = STEP[units.volume]
    low, _, high = ends(given)
    least, most = (step * round(from_house("volume", each, units.volume) / step) for each in (low, high))
    return f"{number(least) if least == most else number_range(least, most)} {units.volume}"


def rate(value_l_per_h: float, units: UnitChoice) -> str:
    """A sweat rate: "0.95 L/h", or fluid ounces an hour."""
    if not math.isfinite(value_l_per_h):
        return DASH
    if units.volume == "mL":
        return f"{number(value_l_per_h, 2)} L/h"
    return f"{number(from_house('volume', value_l_per_h * 1000.0, units.volume))} {units.volume}/h"


def rate_range(given: Range, units: UnitChoice) -> str:
    """A sweat rate's range."""
    low, _, high = ends(given)
    if units.volume == "mL":
        return f"{number_range(low, high, 2)} L/h"
    least, most = (from_house("volume", each * 1000.0, units.volume) for each in (low, high))
    return f"{number_range(least, most)} {units.volume}/h"


def change_range(given: Range) -> str:
    """A change of mass in per cent, one decimal: "−1.2 to −0.1 %"."""
    low, _, high = ends(given)
    return f"{number(low, 1)} to {per_cent(high, 1)}"


def signed_pct(value: float) -> str:
    """A change in per cent with its sign, one decimal: "+0.3 %"."""
    return f"{'+' if value >= 0.05 else ''}{per_cent(value, 1)}"


def bottles(amount: float) -> str:
    """So many bottles: "0.8 bottle", "1.5 bottles"."""
    return f"{number(amount, 1)} bottle{'s' if round(amount, 1) > 1.0 else ''}"


def weighed_words(weighed: Weighed, zone: str, units: UnitChoice) -> str:
    """A finished weighing on one line."""
    error = rate(RANGE_SD * weighed.error_l_per_h, units)
    sweat = rate(weighed.sweat_l_per_h, units).removesuffix(rate_unit(units)).rstrip()
    predicted = weighed.predicted_l_per_h
    beside = f", predicted {rate(predicted, units)}" if math.isfinite(predicted) else ""
    return (
        f"{day_and_clock(weighed.weighing.starts_at, zone)}: sweat {sweat} ± {error}{beside}; "
        f"drank {volume(weighed.weighing.drink_ml, units)}, mass {signed_pct(weighed.mass_change_pct)}"
    )


def rate_unit(units: UnitChoice) -> str:
    """The unit of a sweat rate."""
    return "L/h" if units.volume == "mL" else f"{units.volume}/h"
