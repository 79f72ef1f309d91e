"""The water of a whole day, and the signs in the morning that there was too little of it.

No figure here is a clinical cut-off.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from planner.checks import FloatLike, checked, like
from planner.errors import InputError
from planner.physiology.ranges import Range

# Total water a day, food included [mL]: EFSA 2010 and IOM 2005 (published).
EFSA_WATER_ML: Final = {"woman": 2000.0, "man": 2500.0}
IOM_WATER_ML: Final = {"woman": 2700.0, "man": 3700.0}
ALTITUDE_BREATH_ML: Final = 200.0  # published
# From an elevation, in the first days there (judgement): includes the breath's share.
ALTITUDE_ADD_ON_ML: Final = ((1500.0, 200.0), (2500.0, 500.0), (3500.0, 1000.0))
ALTITUDE_FIRST_DAYS: Final = 4.0
CABIN_ML_PER_H: Final = (15.0, 20.0)  # published; not the popular 250

# The morning rule (Cheuvront & Sawka 2005, from memory) and its marks. Colour: Armstrong 1994 (published),
# sensitivity 89 %, specificity 85 % for a 2 % loss. Specific gravity: published.
MASS_SIGN_PCT: Final = -1.0
DARK_URINE_COLOUR: Final = (
    5.0  # Armstrong 1994 (published): sensitivity 89 %, specificity 85 % for a 2 % loss
)
CONCENTRATED_SPECIFIC_GRAVITY: Final = 1.020
SERIOUS_SPECIFIC_GRAVITY: Final = 1.030
LIKELIHOODS: Final = ("none", "unclear", "likely", "very likely")


def day_respiratory_water_ml(energy_kcal: FloatLike) -> FloatLike:
    """Water lost with the breath in a day, near sea level: 0.107 per kcal + 92.2 mL.

    Parameters:
        energy_kcal: energy turned over in the day [kcal], scalar or array.
    Returns:
        Water [mL], the shape of energy_kcal.
    Raises:
        InputError: an energy out of range.
    Valid:
        Temperate air; about 200 mL a day more at altitude.
    Source:
        IOM 2005 (from memory).
    Example:
        >>> round(day_respiratory_water_ml(3000.0))
        413
    """
    return like(0.107 * checked("energy_kcal", energy_kcal) + 92.2, energy_kcal)


def day_water_ml(sex: str, elevation_m: FloatLike, days: FloatLike, flight_hours: FloatLike = 0.0) -> Range:
    """Total water of a day, food included, without the sweat of sessions.

    Parameters:
        sex: "woman" or "man" [word].
        elevation_m: elevation of the place [m], scalar or array.
        days: days already spent there [d], scalar or array.
        flight_hours: time in a cabin that day [h], scalar or array.
    Returns:
        Range [mL], the common shape of the inputs. A fifth usually comes with food.
    Raises:
        InputError: an input out of range, or another word.
    Valid:
        Temperate weather, light activity. More drink does not undo the plasma loss of altitude.
    Source:
        EFSA 2010 low, IOM 2005 high (published), their mean best (judgement); breath at altitude and cabin
        air: published; the first days' add-on: judgement.
    Example:
        >>> day_water_ml("woman", 2600.0, 1.0)
        Range(low=2200.0, best=2850.0, high=3200.0)
    """
    if sex not in EFSA_WATER_ML:
        raise InputError("sex", sex, "one of: woman, man")
    elevation = checked("elevation_m", elevation_m)
    time = checked("days", days)
    cabin = checked("hours", flight_hours, "flight_hours")
    breath = np.where(elevation >= ALTITUDE_ADD_ON_ML[0][0], ALTITUDE_BREATH_ML, 0.0)
    add_on = np.zeros(np.shape(elevation))
    for from_m, millilitres in ALTITUDE_ADD_ON_ML:
        add_on = np.where(elevation >= from_m, millilitres, add_on)
    add_on = np.where(time < ALTITUDE_FIRST_DAYS, add_on, breath)
    least, most = EFSA_WATER_ML[sex], IOM_WATER_ML[sex]
    cabin_least, cabin_most = CABIN_ML_PER_H
    known = np.where(np.isnan(elevation) | np.isnan(time), np.nan, 0.0)
    given = (elevation_m, days, flight_hours)
    return Range(
        like(least + breath + cabin_least * cabin + known, *given),
        like(0.5 * (least + most) + add_on + 0.5 * (cabin_least + cabin_most) * cabin + known, *given),
        like(most + add_on + cabin_most * cabin + known, *given),
    )


def dehydration_signs(
    mass_change_pct: FloatLike = np.nan,
    urine_colour: FloatLike = np.nan,
    urine_specific_gravity: FloatLike = np.nan,
    thirsty: FloatLike = np.nan,
) -> FloatLike:
    """Number of the three signs present: mass down 1 % or more, urine dark or concentrated, thirst.

    Parameters:
        mass_change_pct: change against the own morning baseline, a loss negative [%], scalar or array.
        urine_colour: colour on the scale 1 to 8 [1], scalar or array.
        urine_specific_gravity: specific gravity [1], scalar or array.
        thirsty: 1 thirsty, 0 not [1], scalar or array.
    Returns:
        0 to 3 [1], the common shape of the inputs; what is not known (NaN) counts as no sign.
    Raises:
        InputError: an input out of range.
    Valid:
        First thing in the morning. Altitude diuresis makes urine read wetter: trust mass and thirst there.
    Source:
        Cheuvront & Sawka 2005 (from memory); colour 5: Armstrong 1994, specific gravity 1.020 (published).
    Example:
        >>> LIKELIHOODS[int(dehydration_signs(-1.2, 6.0, thirsty=0.0))]
        'likely'
    """
    change = checked("mass_change_pct", mass_change_pct)
    colour = checked("urine_colour", urine_colour)
    gravity = checked("urine_specific_gravity", urine_specific_gravity)
    thirst = checked("yes_or_no", thirsty, "thirsty")
    urine = (colour >= DARK_URINE_COLOUR) | (gravity > CONCENTRATED_SPECIFIC_GRAVITY)
    signs = (change <= MASS_SIGN_PCT) * 1.0 + urine * 1.0 + (thirst > 0.0) * 1.0
    return like(np.asarray(signs), mass_change_pct, urine_colour, urine_specific_gravity, thirsty)
