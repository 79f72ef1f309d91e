"""Why each number of a drinks plan is what it is, in short sentences."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from planner.checks import FloatLike
from planner.hydration.cockpit import ClothingEnsemble
from planner.hydration.learning import LIKE_ENOUGH
from planner.hydration.model import CockpitConditions
from planner.hydration.plan import DrinksPlan, Setting
from planner.physiology.drinking import HIGHEST_LOSS_PCT, NEXT_IS_NEAR_H
from planner.physiology.ranges import Range
from planner.wording import METRIC, UnitChoice, counted, number, number_range, per_cent, temperature, volume


def sweat_words(rate: Range, units: UnitChoice = METRIC) -> str:
    """A sweat rate with its range, in litres or fluid ounces an hour."""
    low, best, high = _numbers(rate)
    if units.volume == "mL":
        return f"{number(best, 2)} L/h ({number_range(low, high, 2)})"
    ounces = [value * 1000.0 for value in (low, best, high)]
    return f"{volume(ounces[1], units)}/h ({volume(ounces[0], units)}–{volume(ounces[2], units)})"


def order_of_trust(plan: DrinksPlan) -> str:
    """Where the sweat rate comes from: own weighings in like conditions, own ratio, or the prediction."""
    weighings, like = int(_number(plan.weighings)), int(_number(plan.like_conditions))
    if weighings == 0:
        return "predicted from heat balance, no own weighings yet"
    share = f"{per_cent(100.0 * _number(plan.own_share))} of the range is the driver's own"
    if like >= LIKE_ENOUGH:
        return f"own rate from {counted(like, 'weighing')} in like conditions; {share}"
    return (
        f"own ratio {number(_number(plan.ratio), 2)} of the predicted rate, from "
        f"{counted(weighings, 'weighing')}; {share}"
    )


def plan_reasons(
    plan: DrinksPlan,
    setting: Setting,
    conditions: CockpitConditions,
    ensemble: ClothingEnsemble,
    units: UnitChoice = METRIC,
) -> tuple[str, ...]:
    """The reasons of one driver's plan (floats), in the order of its numbers."""
    return (
        f"Sweat {sweat_words(plan.sweat_rate_l_per_h, units)}: {order_of_trust(plan)}.",
        _conditions_reason(conditions, ensemble, units),
        *_sea_level_reason(plan, units),
        *_validity_reason(plan),
        _before_reason(setting),
        _in_car_reason(plan, setting, units),
        _loss_reason(plan, setting),
        _after_reason(setting),
        _sodium_reason(setting),
    )


def _conditions_reason(conditions: CockpitConditions, ensemble: ClothingEnsemble, units: UnitChoice) -> str:
    how = "measured" if conditions.measured else "an estimate (judgement): put a thermometer in"
    return (
        f"Cockpit {temperature(conditions.air_temperature_c, units)}, "
        f"{per_cent(conditions.humidity_pct)} humidity, {how}; clothing {ensemble.name}, "
        f"{number(ensemble.insulation_clo, 2)} clo, vapour permeability "
        f"{number_range(ensemble.permeability_low, ensemble.permeability_high, 2)} ({ensemble.source})."
    )


def _sea_level_reason(plan: DrinksPlan, units: UnitChoice) -> Sequence[str]:
    raised = _number(plan.raised_to_sea_level_l_per_h)
    if raised <= 0.0:
        return ()
    amount = f"{number(raised, 2)} L/h" if units.volume == "mL" else f"{volume(raised * 1000.0, units)}/h"
    return (
        f"In this thin air {amount} less sweat is predicted; the plan keeps the figure of sea level, since "
        "breath and kidneys take more water here and urine misleads.",
    )


def _validity_reason(plan: DrinksPlan) -> Sequence[str]:
    if _number(plan.beyond_validity) == 0.0:
        return ()
    return ("Such heat or clothing lies beyond what the formula was fitted to: an extrapolation.",)


def _before_reason(setting: Setting) -> str:
    dark = _number(setting.urine_dark)
    rule = "Before: 5–7 mL/kg four hours ahead"
    if math.isnan(dark):
        return f"{rule}; 3–5 mL/kg more two hours ahead only if urine is dark or absent."
    if dark > 0.0:
        return f"{rule}, and 3–5 mL/kg two hours ahead since urine is dark."
    return f"{rule}; urine is pale, so no more two hours ahead."


def _in_car_reason(plan: DrinksPlan, setting: Setting, units: UnitChoice) -> str:
    hours = _number(setting.session_hours)
    low_sweat_ml = _number(plan.sweat_rate_l_per_h.low) * hours * 1000.0
    cap = _number(setting.drink_cap_l_per_h)
    bottles_ml = _number(setting.stints) * _number(setting.bottle_ml)
    least = min(low_sweat_ml, cap * hours * 1000.0, bottles_ml)
    if least == bottles_ml:
        limit = f"the bottle, {counted(int(_number(setting.stints)), 'filling')} of " + volume(
            _number(setting.bottle_ml), units
        )
    elif least == low_sweat_ml:
        limit = "the low end of the expected sweat, so that nobody gains mass"
    else:
        rate = f"{number(cap, 1)} L" if units.volume == "mL" else volume(cap * 1000.0, units)
        limit = f"{rate} an hour, what the stomach passes on in a car (judgement)"
    return f"In the car: no more than {limit}."


def _loss_reason(plan: DrinksPlan, setting: Setting) -> str:
    sweat = _number(plan.sweat_rate_l_per_h.best)
    mass = _number(setting.mass_kg)
    two = per_cent(HIGHEST_LOSS_PCT)
    dry = mass * HIGHEST_LOSS_PCT / 100.0 / sweat if sweat > 0.0 else math.inf
    low, best, _ = _numbers(plan.hours_to_two_pct)
    with_drink = f"after {_duration(best)}" if math.isfinite(best) else "never"
    at_worst = f", at the high end of the sweat after {_duration(low)}" if math.isfinite(low) else ""
    without = f"after {_duration(dry)}" if math.isfinite(dry) else "never"
    return (
        f"{two} of body mass would be lost {with_drink} with this drink{at_worst}; without a drop {without}."
    )


def _after_reason(setting: Setting) -> str:
    gap = _number(setting.hours_to_next)
    if gap <= NEXT_IS_NEAR_H:
        return (
            f"After: 1.25–1.5 L for each kg lost, with salt, since the next session is {_duration(gap)} "
            "away; the weigh-out counts, and nobody starts it heavier than this one."
        )
    return "After: what the weigh-out shows as lost, with meals, in no hurry (judgement)."


def _sodium_reason(setting: Setting) -> str:
    if math.isnan(_number(setting.sweat_sodium_mmol_l)):
        return "Sodium: the range of 506 people (Baker 2016), since this driver's sweat was never measured."
    return "Sodium: from the driver's own sweat sodium; salted food covers most of it."


def _duration(hours: float) -> str:
    minutes = round(hours * 60.0)
    return f"{minutes} min" if minutes < 60 else f"{minutes // 60} h {minutes % 60:02d}"


def _number(value: FloatLike) -> float:
    return float(np.asarray(value))


def _numbers(given: Range) -> tuple[float, float, float]:
    return _number(given.low), _number(given.best), _number(given.high)
