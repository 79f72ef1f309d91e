"""Sweat: predicted from the heat balance with its range, and measured on the scale with its error."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from planner.checks import FloatArray, FloatLike, checked, like
from planner.constants import DEVIATIONS_95, SEA_LEVEL_PRESSURE_HPA
from planner.physiology.heat import (
    ALTITUDE_EXPONENT,
    body_surface_area_m2,
    heat_balance,
    humidity_in_warmer_air_pct,
)
from planner.physiology.ranges import Range, checked_range

# Gonzalez 2009, J Appl Physiol 107:379 (published).
GONZALEZ_INTERCEPT: Final = 147.0
GONZALEZ_REQUIRED: Final = 1.527
GONZALEZ_MAXIMAL: Final = -0.87
GONZALEZ_SEE_G_M2_H: Final = 95.0  # published as below 100; the figure itself is a judgement
GONZALEZ_COOLEST_C: Final = 15.0
GONZALEZ_HOTTEST_C: Final = 46.0
ISO_THICKEST_CLO: Final = 1.0

# ISO 7933:2023 (published): most that the glands give, as evaporative heat.
ACCLIMATISED_CAP_W_M2: Final = 500.0
UNACCLIMATISED_CAP_W_M2: Final = 400.0
LATENT_HEAT_J_G: Final = 2430.0  # of sweat at skin temperature (from memory)

SCALE_SD_G: Final = 50.0  # of one weighing on a good platform scale (judgement)

# The stated ranges hold nine of ten: 1.645 standard deviations either way.
RANGE_SD: Final = 1.645


@dataclass(frozen=True)
class HeatInputs:
    """What the heat balance needs, each with its range; scalars or arrays that broadcast.

    The default exponent carries the whole unknown of clothing in thin air.
    """

    air_temperature_c: Range
    radiant_temperature_c: Range
    humidity_pct: Range
    air_speed_m_s: Range
    metabolic_w_m2: Range
    insulation_clo: Range
    permeability: Range
    altitude_exponent: Range = Range(0.0, ALTITUDE_EXPONENT, 1.0)  # noqa: RUF009 (a frozen value)


@dataclass(frozen=True)
class SweatPrediction:
    """Predicted sweat of somebody without own weighings, and how unsure it is and why.

    `person_sd_l_per_h` is what weighings of the same person in the same suit can take away (the formula's
    scatter, metabolic rate, clothing); `conditions_sd_l_per_h` is what only a thermometer can.
    """

    required_w_m2: FloatLike
    maximal_w_m2: FloatLike
    sweat_rate_l_per_h: Range
    person_sd_l_per_h: FloatLike
    conditions_sd_l_per_h: FloatLike
    beyond_validity: FloatLike  # 1 where air or clothing lie outside what the formula was fitted to, else 0


def gonzalez_sweat_g_m2_h(required_w_m2: FloatLike, maximal_w_m2: FloatLike) -> FloatLike:
    """Sweat over the body surface from required and maximal evaporation.

    147 + 1.527 Ereq - 0.87 Emax, not below 0.

    Parameters:
        required_w_m2: evaporation that would keep the heat balance [W/m2], scalar or array.
        maximal_w_m2: evaporation that air and clothing let pass [W/m2], scalar or array.
    Returns:
        Sweat [g/(m2 h)], the common shape of the inputs.
    Raises:
        InputError: an input out of range.
    Valid:
        Air of 15 to 46 C; standard error of estimate below 100 g/(m2 h).
    Source:
        Gonzalez et al. 2009, J Appl Physiol 107:379 (published).
    Example:
        >>> round(gonzalez_sweat_g_m2_h(300.0, 150.0), 1)
        474.6
    """
    required = checked("required_w_m2", required_w_m2)
    maximal = checked("maximal_w_m2", maximal_w_m2)
    return like(_gonzalez_g_m2_h(required, maximal), required_w_m2, maximal_w_m2)


def sweat_cap_g_m2_h(acclimatised: bool) -> float:
    """Most that the sweat glands give over the body surface.

    Parameters:
        acclimatised: whether the person is used to heat [1].
    Returns:
        Sweat [g/(m2 h)].
    Valid:
        A bound for predictions; a rate measured on the person counts more.
    Source:
        ISO 7933:2023, 500 and 400 W/m2 (published); latent heat 2430 J/g (from memory).
    Example:
        >>> round(sweat_cap_g_m2_h(acclimatised=False))
        593
    """
    heat_w_m2 = ACCLIMATISED_CAP_W_M2 if acclimatised else UNACCLIMATISED_CAP_W_M2
    return heat_w_m2 * 3600.0 / LATENT_HEAT_J_G


def predicted_sweat(
    inputs: HeatInputs,
    mass_kg: FloatLike,
    height_cm: FloatLike,
    pressure_hpa: FloatLike = SEA_LEVEL_PRESSURE_HPA,
    *,
    acclimatised: bool = True,
) -> SweatPrediction:
    """Sweat rate of a seated, clothed person without own weighings, with its range.

    The heat balance is solved with every input at its best figure and with one at a time at either end; the
    half-spans, as standard deviations, are added in squares with the formula's own scatter. Air and
    radiant temperature move together; the water in the air stays when its temperature moves.

    Parameters:
        inputs: conditions, effort and clothing, each with its range [object].
        mass_kg: body mass [kg], scalar or array.
        height_cm: body height [cm], scalar or array.
        pressure_hpa: air pressure at the station [hPa], scalar or array.
        acclimatised: whether the person is used to heat [1]; chooses the cap.
    Returns:
        SweatPrediction in L/h; the range holds nine of ten.
    Raises:
        InputError: an input out of range, or low, best and high out of order.
    Valid:
        Air of 15 to 46 C and clothing up to 1.0 clo; beyond it is an extrapolation, as beyond_validity says.
    Source:
        Gonzalez et al. 2009, J Appl Physiol 107:379, and caps of ISO 7933:2023 (published); the way the
        ranges are added: judgement.
    """
    surface = np.asarray(body_surface_area_m2(mass_kg, height_cm)) / 1000.0  # per m2 and g to L
    pressure = checked("pressure_hpa", pressure_hpa)
    air = checked_range("air_temperature_c", inputs.air_temperature_c)
    radiant = checked_range("radiant_temperature_c", inputs.radiant_temperature_c)
    humidity = checked_range("humidity_pct", inputs.humidity_pct)
    speed = checked_range("air_speed_m_s", inputs.air_speed_m_s)
    metabolic = checked_range("metabolic_w_m2", inputs.metabolic_w_m2)
    clo = checked_range("insulation_clo", inputs.insulation_clo)
    permeable = checked_range("permeability", inputs.permeability)
    exponent = checked_range("altitude_exponent", inputs.altitude_exponent)
    ranges = (air, radiant, humidity, speed, metabolic, clo, permeable, exponent)

    humidity_when_cooler = np.asarray(humidity_in_warmer_air_pct(humidity[1], air[1], air[0]))
    humidity_when_hotter = np.asarray(humidity_in_warmer_air_pct(humidity[1], air[1], air[2]))
    best = tuple(each[1] for each in ranges)
    ends = [
        (air[0], radiant[0], humidity_when_cooler, *best[3:]),
        (air[2], radiant[2], humidity_when_hotter, *best[3:]),
    ]
    for position in range(2, len(ranges)):
        ends += [(*best[:position], ranges[position][end], *best[position + 1 :]) for end in (0, 2)]
    # One call over a leading axis: the best figures first, then the pairs of ends. The balance is per body
    # surface, so the people come in only afterwards.
    shape = np.broadcast_shapes(pressure.shape, *(part.shape for each in ranges for part in each))
    stacked = [np.empty((1 + len(ends), *shape)) for _ in ranges]
    for row, variant in enumerate((best, *ends)):
        for each, value in zip(stacked, variant, strict=True):
            each[row] = value
    balance = heat_balance(*stacked[:7], pressure_hpa=pressure, altitude_exponent=stacked[7])
    required = np.asarray(balance.required_w_m2)
    maximal = np.asarray(balance.maximal_w_m2)
    sweat = _gonzalez_g_m2_h(required, maximal)

    # The ends of a working range are read as the 2.5th and 97.5th percentile (judgement).
    spans = np.abs(sweat[2::2] - sweat[1::2]) / (2.0 * DEVIATIONS_95)
    conditions_sd = np.sqrt((spans[:3] ** 2).sum(axis=0))
    person_sd = np.sqrt((spans[3:] ** 2).sum(axis=0) + GONZALEZ_SEE_G_M2_H**2)
    highest = sweat_cap_g_m2_h(acclimatised)
    expected = np.minimum(sweat[0], highest)
    low, high = nine_of_ten(expected, np.hypot(person_sd, conditions_sd))
    beyond = (best[0] < GONZALEZ_COOLEST_C) | (best[0] > GONZALEZ_HOTTEST_C) | (best[5] > ISO_THICKEST_CLO)

    given = (mass_kg, height_cm, pressure_hpa, *(part for each in ranges for part in each))
    return SweatPrediction(
        required_w_m2=like(required[0], *given),
        maximal_w_m2=like(maximal[0], *given),
        sweat_rate_l_per_h=Range(
            like(low * surface, *given),
            like(expected * surface, *given),
            like(np.minimum(high, highest) * surface, *given),
        ),
        person_sd_l_per_h=like(person_sd * surface, *given),
        conditions_sd_l_per_h=like(conditions_sd * surface, *given),
        beyond_validity=like(np.where(beyond, 1.0, 0.0), *given),
    )


def nine_of_ten(best: FloatArray, sd: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Low and high of a figure that cannot be negative, around its best value.

    High = best + 1.645 sd; low = best exp(-1.645 sd / best), which is the same for a small sd and stays
    above 0 for a large one.

    Parameters:
        best: the best figure, not negative [any unit], array.
        sd: its standard deviation [same unit], array.
    Returns:
        Two arrays [same unit].
    Valid:
        best 0 gives low 0.
    Source:
        Normal quantile 1.645 (published tables); the lower form is a judgement.
    """
    relative = np.divide(sd, best, out=np.full(np.shape(sd + best), np.inf), where=best > 0.0)
    return best * np.exp(-RANGE_SD * relative), best + RANGE_SD * sd


def sweat_from_weighing_l_per_h(
    mass_before_kg: FloatLike,
    mass_after_kg: FloatLike,
    hours: FloatLike,
    *,
    drink_ml: FloatLike = 0.0,
    food_g: FloatLike = 0.0,
    urine_ml: FloatLike = 0.0,
    breath_g_per_h: FloatLike = 0.0,
) -> FloatLike:
    """Sweat rate from two weighings: (before - after + drink + food - urine) / h - breath, 1 kg = 1 L.

    Parameters:
        mass_before_kg: body mass before, bladder empty [kg], scalar or array.
        mass_after_kg: body mass after, skin towelled [kg], scalar or array.
        hours: time between the two weighings [h], scalar or array, above 0.
        drink_ml: drunk in between [mL], scalar or array.
        food_g: eaten in between [g], scalar or array.
        urine_ml: urine and stool in between [mL], scalar or array.
        breath_g_per_h: respiratory water and gas exchange [g/h], scalar or array.
    Returns:
        Sweat rate [L/h], the common shape of the inputs; negative if the figures say so. NaN at 0 hours.
    Raises:
        InputError: an input out of range.
    Valid:
        Nude or with towelled skin; sweat held in clothes is not seen.
    Source:
        Baker 2017, Sports Med 47(S1):111 (published).
    Example:
        >>> round(sweat_from_weighing_l_per_h(70.0, 69.2, 1.0, drink_ml=750.0, urine_ml=100.0), 2)
        1.45
    """
    before = checked("mass_kg", mass_before_kg, "mass_before_kg")
    after = checked("mass_kg", mass_after_kg, "mass_after_kg")
    time = checked("hours", hours)
    drink = checked("drink_ml", drink_ml)
    food = checked("food_g", food_g)
    urine = checked("urine_ml", urine_ml)
    lost_l = before - after + (drink + food - urine) / 1000.0
    rate = lost_l / np.where(time > 0.0, time, np.nan) - np.asarray(breath_g_per_h) / 1000.0
    given = (mass_before_kg, mass_after_kg, hours, drink_ml, food_g, urine_ml, breath_g_per_h)
    return like(rate, *given)


def weighing_error_l_per_h(
    hours: FloatLike, scale_sd_g: FloatLike = SCALE_SD_G, other_sd_g: FloatLike = 0.0
) -> FloatLike:
    """Standard error of a measured sweat rate: two weighings and whatever else was weighed, over the time.

    Parameters:
        hours: time between the two weighings [h], scalar or array, above 0.
        scale_sd_g: error of one weighing [g], scalar or array.
        other_sd_g: error of drink, urine and clothes together [g], scalar or array.
    Returns:
        Standard error [L/h], the common shape of the inputs; NaN at 0 hours.
    Raises:
        InputError: a time out of range.
    Valid:
        Independent errors.
    Source:
        Propagation of errors (computed).
    Example:
        >>> round(weighing_error_l_per_h(40.0 / 60.0), 2)
        0.11
    """
    time = checked("hours", hours)
    error_g = np.sqrt(2.0 * np.asarray(scale_sd_g) ** 2 + np.asarray(other_sd_g) ** 2)
    return like(error_g / 1000.0 / np.where(time > 0.0, time, np.nan), hours, scale_sd_g, other_sd_g)


def _gonzalez_g_m2_h(required: FloatArray, maximal: FloatArray) -> FloatArray:
    sweat = GONZALEZ_INTERCEPT + GONZALEZ_REQUIRED * required + GONZALEZ_MAXIMAL * maximal
    return np.maximum(sweat, 0.0)
