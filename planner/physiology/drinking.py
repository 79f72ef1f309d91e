"""How much to drink before, during and after a session, and the sodium lost.

No figure here is a clinical cut-off. Ranges are low, best and high.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from planner.checks import QUANTITIES, FloatArray, FloatLike, checked, like
from planner.physiology.ranges import Range, checked_range

# ACSM 2007, Med Sci Sports Exerc 39:377, and NATA 2017, J Athl Train 52:877 (published).
FOUR_HOURS_BEFORE_ML_KG: Final = (5.0, 7.0)
TWO_HOURS_BEFORE_ML_KG: Final = (3.0, 5.0)  # only if urine is dark or absent
HIGHEST_LOSS_PCT: Final = 2.0
AFTER_L_PER_KG: Final = (1.25, 1.5)
# Away from the next session the loss comes back with food and drink: once the loss, a quarter more at most,
# since some is passed as urine (judgement).
UNHURRIED_L_PER_KG: Final = (1.0, 1.25)
NEXT_IS_NEAR_H: Final = 12.0  # recovery time below which the faster rule applies (ACSM 2007, from memory)
DEFAULT_CAP_L_PER_H: Final = 0.8  # in a car (judgement)
HIGHEST_CAP_L_PER_H: Final = 1.0  # gastric emptying is 1.0 to 1.2 L/h at best (from memory)

# Baker 2016 (published): forearm patch, n=506, and whole body = 0.57 forearm + 11.05.
FOREARM_SODIUM_MMOL_L: Final = 43.6
FOREARM_SODIUM_SD_MMOL_L: Final = 18.2
WHOLE_BODY_SLOPE: Final = 0.57
WHOLE_BODY_INTERCEPT_MMOL_L: Final = 11.05
SODIUM_MG_PER_MMOL: Final = 22.99
OWN_SODIUM_SPREAD: Final = 0.15  # of a driver's own measured figure, either way (judgement)
SPREAD_SD: Final = 1.645  # ranges hold nine of ten

# Stop signs (published; the physician decides).
TOO_MUCH_WATER_SIGNS: Final = ("nausea", "vomiting", "headache", "confusion", "seizure")
TOO_MUCH_WATER_WORDS: Final = (
    "Mass gained, or headache, nausea or confusion after heavy drinking: stop drinking and call the "
    "physician; too much water can be as dangerous as too little."
)
HEAT_STOP_SIGNS: Final = (
    "confusion",
    "odd radio talk",
    "collapse",
    "seizure",
    "vomiting",
    "chills in the heat",
    "unsteady on the feet",
)
HEAT_STOP_WORDS: Final = (
    "Confusion, odd radio talk, collapse, seizure, vomiting, chills in the heat or unsteadiness: stop, call "
    "the physician and the emergency services, cool first (cold water), transport second."
)


def four_hours_before_ml(mass_kg: FloatLike) -> Range:
    """Drink at least four hours ahead: 5 to 7 mL/kg.

    Parameters:
        mass_kg: body mass [kg], scalar or array.
    Returns:
        Range [mL], each part the shape of mass_kg.
    Raises:
        InputError: a mass out of range.
    Valid:
        Healthy adults with free access to food.
    Source:
        ACSM 2007, Med Sci Sports Exerc 39:377 (published); the middle is the best figure (judgement).
    Example:
        >>> four_hours_before_ml(80.0)
        Range(low=400.0, best=480.0, high=560.0)
    """
    return _per_kg(FOUR_HOURS_BEFORE_ML_KG, checked("mass_kg", mass_kg), mass_kg)


def two_hours_before_ml(mass_kg: FloatLike, urine_dark: FloatLike) -> Range:
    """Drink about two hours ahead if urine is dark or absent: 3 to 5 mL/kg.

    Parameters:
        mass_kg: body mass [kg], scalar or array.
        urine_dark: 1 dark or absent, 0 pale, NaN not known [1], scalar or array.
    Returns:
        Range [mL]: 0 if pale; if not known 0 is best and the rule's upper end is high.
    Raises:
        InputError: an input out of range.
    Valid:
        Healthy adults. Altitude diuresis makes urine read paler than it should.
    Source:
        ACSM 2007, Med Sci Sports Exerc 39:377 (published).
    Example:
        >>> two_hours_before_ml(80.0, 1.0)
        Range(low=240.0, best=320.0, high=400.0)
    """
    mass, dark = np.broadcast_arrays(
        checked("mass_kg", mass_kg), checked("yes_or_no", urine_dark, "urine_dark")
    )
    rule = _per_kg(TWO_HOURS_BEFORE_ML_KG, mass, mass)
    surely = dark > 0.0
    perhaps = surely | np.isnan(dark)
    return Range(
        like(np.asarray(rule.low) * surely, mass_kg, urine_dark),
        like(np.asarray(rule.best) * surely, mass_kg, urine_dark),
        like(np.asarray(rule.high) * perhaps, mass_kg, urine_dark),
    )


def in_car_ml(
    mass_kg: FloatLike,
    sweat_rate_l_per_h: Range,
    session_hours: FloatLike,
    *,
    stints: FloatLike = 1.0,
    bottle_ml: FloatLike = 1000.0,
    drink_cap_l_per_h: FloatLike = DEFAULT_CAP_L_PER_H,
) -> Range:
    """Drink in the car: as much as is safe, and at least what keeps the loss within 2 %.

    Best and high are the same figure, the most that is safe: the hourly cap, the low end of the expected
    sweat (so that no one gains mass) and one bottle a stint, whichever is least. Low is what keeps the loss
    at the expected sweat within 2 % of body mass, as far as that limit allows.

    Parameters:
        mass_kg: body mass [kg], scalar or array.
        sweat_rate_l_per_h: expected sweat [L/h], range.
        session_hours: time in the car [h], scalar or array.
        stints: stints between which the bottle is filled again [1], scalar or array, at least 1.
        bottle_ml: capacity of the bottle [mL], scalar or array.
        drink_cap_l_per_h: most that is drunk in an hour [L/h], scalar or array, at most 1.0.
    Returns:
        Range [mL] over the whole session.
    Raises:
        InputError: an input out of range.
    Valid:
        Sessions up to 12 h.
    Source:
        ACSM 2007 and NATA 2017 (published): within 2 %, never gain mass; the caps are judgement.
    Example:
        >>> in_car_ml(75.0, Range(0.75, 1.0, 1.25), 2.0, stints=2.0)
        Range(low=500.0, best=1500.0, high=1500.0)
    """
    mass = checked("mass_kg", mass_kg)
    low_rate, best_rate, _ = checked_range("sweat_rate_l_per_h", sweat_rate_l_per_h)
    hours = checked("session_hours", session_hours)
    number = checked("stints", stints)
    bottle = checked("bottle_ml", bottle_ml)
    cap = checked("drink_cap_l_per_h", drink_cap_l_per_h)
    most = np.minimum(np.minimum(low_rate, cap) * hours * 1000.0, number * bottle)
    needed = (best_rate * hours - mass * HIGHEST_LOSS_PCT / 100.0) * 1000.0
    least = np.clip(needed, 0.0, most)
    given = (mass_kg, low_rate, best_rate, session_hours, stints, bottle_ml, drink_cap_l_per_h)
    return Range(like(least, *given), like(most + 0.0 * least, *given), like(most + 0.0 * least, *given))


def mass_lost_kg(sweat_rate_l_per_h: Range, session_hours: FloatLike, drunk_ml: FloatLike) -> Range:
    """Body mass lost in a session by sweat, less what is drunk; 1 L = 1 kg, not below 0.

    Parameters:
        sweat_rate_l_per_h: expected sweat [L/h], range.
        session_hours: time in the car [h], scalar or array.
        drunk_ml: what is drunk in the session [mL], scalar or array.
    Returns:
        Range [kg].
    Raises:
        InputError: an input out of range.
    Valid:
        Breath and gas exchange, some 0.05 to 0.1 kg/h, come on top and need no drink of their own.
    Source:
        Mass balance (computed).
    Example:
        >>> mass_lost_kg(Range(0.8, 1.0, 1.2), 1.0, 500.0).best
        0.5
    """
    rates = checked_range("sweat_rate_l_per_h", sweat_rate_l_per_h)
    hours = checked("session_hours", session_hours)
    drunk_l = checked("planned_drink_ml", drunk_ml, "drunk_ml") / 1000.0
    given = (*rates, session_hours, drunk_ml)
    low, best, high = (like(np.maximum(rate * hours - drunk_l, 0.0), *given) for rate in rates)
    return Range(low, best, high)


def hours_to_loss(
    mass_kg: FloatLike,
    sweat_rate_l_per_h: FloatLike,
    drink_rate_l_per_h: FloatLike,
    loss_pct: float = HIGHEST_LOSS_PCT,
) -> FloatLike:
    """Time until sweat less drink has taken a share of the body mass.

    Parameters:
        mass_kg: body mass [kg], scalar or array.
        sweat_rate_l_per_h: sweat [L/h], scalar or array.
        drink_rate_l_per_h: drink [L/h], scalar or array.
        loss_pct: share of the body mass [%].
    Returns:
        Time [h], the common shape of the inputs; infinite when as much is drunk as is lost.
    Raises:
        InputError: an input out of range.
    Valid:
        Constant rates.
    Source:
        Mass balance (computed).
    Example:
        >>> hours_to_loss(75.0, 1.0, 0.0)
        1.5
    """
    mass = checked("mass_kg", mass_kg)
    sweat = checked("sweat_rate_l_per_h", sweat_rate_l_per_h)
    drink = checked("drink_rate_l_per_h", drink_rate_l_per_h)
    net = np.asarray(sweat - drink)
    allowed = np.asarray(mass * loss_pct / 100.0)
    # A net loss of less than a drop an hour never gets there; dividing by it would overflow.
    never = np.full(np.broadcast_shapes(net.shape, allowed.shape), np.inf)
    time = np.divide(allowed, net, out=never, where=~(net <= 1e-6))
    return like(time, mass_kg, sweat_rate_l_per_h, drink_rate_l_per_h)


def after_ml(lost_kg: Range, hours_to_next: FloatLike = np.nan) -> Range:
    """Drink after a session: 1.25 to 1.5 L per kg lost when the next one is within 12 hours.

    Otherwise once the loss, with meals, in no hurry.

    Parameters:
        lost_kg: body mass lost [kg], range.
        hours_to_next: time until the next session [h], scalar or array; NaN = none.
    Returns:
        Range [mL] over the whole time until then.
    Raises:
        InputError: an input out of range.
    Valid:
        With sodium, by food or in the drink; the loss as weighed counts more than the one expected.
    Source:
        ACSM 2007; NATA 2017 (published); 12 hours: ACSM 2007 (from memory); the unhurried figures: judgement.
    Example:
        >>> after_ml(Range(0.5, 1.0, 2.0), 4.0)
        Range(low=625.0, best=1375.0, high=3000.0)
    """
    low, best, high = checked_range("mass_lost_kg", lost_kg)
    near = checked("hours", hours_to_next, "hours_to_next") <= NEXT_IS_NEAR_H
    near_low, near_high = AFTER_L_PER_KG
    calm_low, calm_high = UNHURRIED_L_PER_KG
    given = (low, best, high, hours_to_next)
    return Range(
        like(np.where(near, near_low, calm_low) * low * 1000.0, *given),
        like(np.where(near, 0.5 * (near_low + near_high), calm_low) * best * 1000.0, *given),
        like(np.where(near, near_high, calm_high) * high * 1000.0, *given),
    )


def whole_body_sodium_mmol_l(forearm_mmol_l: FloatLike) -> FloatLike:
    """Sodium of the whole body's sweat from a forearm patch: 0.57 forearm + 11.05.

    Parameters:
        forearm_mmol_l: sodium measured in a patch on the forearm [mmol/L], scalar or array.
    Returns:
        Sodium [mmol/L], the shape of forearm_mmol_l.
    Raises:
        InputError: a concentration out of range.
    Valid:
        12.6 to 104.8 mmol/L at the forearm.
    Source:
        Baker et al. 2016, n=506 (published).
    Example:
        >>> round(whole_body_sodium_mmol_l(60.0), 2)
        45.25
    """
    forearm = checked("sweat_sodium_mmol_l", forearm_mmol_l, "forearm_mmol_l")
    return like(WHOLE_BODY_SLOPE * forearm + WHOLE_BODY_INTERCEPT_MMOL_L, forearm_mmol_l)


def sodium_range_mmol_l(measured_mmol_l: FloatLike) -> Range:
    """Sodium of a driver's sweat: the own figure with its spread, or the population's range.

    Parameters:
        measured_mmol_l: the driver's whole-body figure [mmol/L], scalar or array; NaN = never measured.
    Returns:
        Range [mmol/L], the shape of measured_mmol_l.
    Raises:
        InputError: a concentration out of range.
    Valid:
        Adults; within one person sodium rises with the sweat rate.
    Source:
        Population: Baker et al. 2016, n=506 (published); the spread of an own figure: judgement.
    Example:
        >>> round(sodium_range_mmol_l(float("nan")).best, 1)
        35.9
    """
    measured = checked("sweat_sodium_mmol_l", measured_mmol_l)
    known = QUANTITIES["sweat_sodium_mmol_l"]
    middle = WHOLE_BODY_SLOPE * FOREARM_SODIUM_MMOL_L + WHOLE_BODY_INTERCEPT_MMOL_L
    half = SPREAD_SD * WHOLE_BODY_SLOPE * FOREARM_SODIUM_SD_MMOL_L
    unknown = np.isnan(measured)
    own_low = np.maximum(measured * (1.0 - OWN_SODIUM_SPREAD), known.low)
    own_high = np.minimum(measured * (1.0 + OWN_SODIUM_SPREAD), known.high)
    return Range(
        like(np.where(unknown, middle - half, own_low), measured_mmol_l),
        like(np.where(unknown, middle, measured), measured_mmol_l),
        like(np.where(unknown, middle + half, own_high), measured_mmol_l),
    )


def sodium_lost_mg(sweat_l: Range, sodium_mmol_l: Range) -> Range:
    """Sodium lost with the sweat of a session, mg = L x mmol/L x 22.99.

    The two ranges are taken as independent: their relative half-widths are added in squares.

    Parameters:
        sweat_l: sweat of the session [L], range.
        sodium_mmol_l: sodium of the whole body's sweat [mmol/L], range.
    Returns:
        Range [mg], to be put back with food and drink over the following hours.
    Raises:
        InputError: an input out of range.
    Valid:
        A loss, not an order: salted food covers most of it.
    Source:
        Molar mass of sodium (published).
    Example:
        >>> round(sodium_lost_mg(Range.exactly(1.0), Range.exactly(40.0)).best)
        920
    """
    sweat = checked_range("sweat_l", sweat_l)
    sodium = checked_range("sweat_sodium_mmol_l", sodium_mmol_l)
    best = sweat[1] * sodium[1] * SODIUM_MG_PER_MMOL
    down = np.hypot(_relative(sweat[1] - sweat[0], sweat[1]), _relative(sodium[1] - sodium[0], sodium[1]))
    up = np.hypot(_relative(sweat[2] - sweat[1], sweat[1]), _relative(sodium[2] - sodium[1], sodium[1]))
    given = (*sweat, *sodium)
    return Range(
        like(best * np.maximum(1.0 - down, 0.0), *given), like(best, *given), like(best * (1.0 + up), *given)
    )


def _per_kg(rule: tuple[float, float], mass: FloatArray, *given: FloatLike) -> Range:
    low, high = rule
    return Range(like(low * mass, *given), like(0.5 * (low + high) * mass, *given), like(high * mass, *given))


def _relative(part: FloatArray, whole: FloatArray) -> FloatArray:
    part, whole = np.broadcast_arrays(part, whole)
    return np.divide(part, whole, out=np.zeros(part.shape), where=whole > 0.0)
