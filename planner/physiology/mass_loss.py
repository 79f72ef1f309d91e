"""Body mass that is lost without sweating: water with the breath, and carbon dioxide for oxygen."""

from __future__ import annotations

from typing import Final

import numpy as np

from planner.checks import FloatLike, checked, like

# Mitchell 1972 (published) and the gas exchange (from memory): g/min from oxygen uptake in L/min.
BREATH_WATER_G_PER_L_MMHG: Final = 0.019
EXPIRED_VAPOUR_MMHG: Final = 44.0
CARBON_DIOXIDE_G_PER_L: Final = 1.9769
OXYGEN_G_PER_L: Final = 1.42904
METABOLIC_LOSS_G_PER_KCAL: Final = 0.20  # Cheuvront & Montain 2017 (published): breath and gases together
EXERCISE_QUOTIENT: Final = 0.9  # respiratory quotient at a driver's effort (judgement)


def oxygen_uptake_l_min(
    metabolic_w_m2: FloatLike, surface_m2: FloatLike, respiratory_quotient: FloatLike = EXERCISE_QUOTIENT
) -> FloatLike:
    """Oxygen uptake from metabolic rate: M A = 60 x 5.88 (0.23 RQ + 0.77) VO2.

    Parameters:
        metabolic_w_m2: metabolic rate [W/m2], scalar or array.
        surface_m2: body surface area [m2], scalar or array.
        respiratory_quotient: carbon dioxide given off over oxygen taken up [1], scalar or array.
    Returns:
        Oxygen uptake [L/min], standard conditions, the common shape of the inputs.
    Raises:
        InputError: an input out of range.
    Valid:
        Aerobic work.
    Source:
        ISO 8996:2004, energetic equivalent of oxygen (from memory).
    Example:
        >>> round(oxygen_uptake_l_min(230.0, 1.97), 2)
        1.31
    """
    metabolic = checked("metabolic_w_m2", metabolic_w_m2)
    surface = checked("surface_m2", surface_m2)
    quotient = checked("respiratory_quotient", respiratory_quotient)
    watts_per_l_min = 60.0 * 5.88 * (0.23 * quotient + 0.77)
    return like(metabolic * surface / watts_per_l_min, metabolic_w_m2, surface_m2, respiratory_quotient)


def respiratory_water_g_min(oxygen_uptake_l_min: FloatLike, vapour_pressure_mmhg: FloatLike) -> FloatLike:
    """Water lost with the breath: 0.019 VO2 (44 - pa).

    Parameters:
        oxygen_uptake_l_min: oxygen uptake [L/min], scalar or array.
        vapour_pressure_mmhg: vapour pressure of the air breathed in [mmHg], scalar or array.
    Returns:
        Water [g/min], not below 0, the common shape of the inputs.
    Raises:
        InputError: an input out of range.
    Valid:
        Ventilation in proportion to oxygen uptake, as near sea level; at altitude more is lost.
    Source:
        Mitchell et al. 1972, J Appl Physiol 32:474 (published).
    Example:
        >>> round(60 * respiratory_water_g_min(2.5, 10.0), 1)
        96.9
    """
    uptake = checked("oxygen_uptake_l_min", oxygen_uptake_l_min)
    vapour = checked("vapour_pressure_mmhg", vapour_pressure_mmhg)
    water = BREATH_WATER_G_PER_L_MMHG * uptake * np.maximum(EXPIRED_VAPOUR_MMHG - vapour, 0.0)
    return like(water, oxygen_uptake_l_min, vapour_pressure_mmhg)


def gas_exchange_g_min(
    oxygen_uptake_l_min: FloatLike, respiratory_quotient: FloatLike = EXERCISE_QUOTIENT
) -> FloatLike:
    """Mass lost because carbon dioxide out weighs more than oxygen in: VO2 (1.9769 RER - 1.42904).

    Parameters:
        oxygen_uptake_l_min: oxygen uptake [L/min], scalar or array.
        respiratory_quotient: carbon dioxide given off over oxygen taken up [1], scalar or array.
    Returns:
        Mass [g/min], the common shape of the inputs; below RER 0.723 a gain, negative.
    Raises:
        InputError: an input out of range.
    Valid:
        Standard temperature and pressure, dry.
    Source:
        Gas densities as used by Mitchell 1972 (from memory).
    Example:
        >>> round(60 * gas_exchange_g_min(2.5, 0.9), 1)
        52.5
    """
    uptake = checked("oxygen_uptake_l_min", oxygen_uptake_l_min)
    quotient = checked("respiratory_quotient", respiratory_quotient)
    mass = uptake * (CARBON_DIOXIDE_G_PER_L * quotient - OXYGEN_G_PER_L)
    return like(mass, oxygen_uptake_l_min, respiratory_quotient)


def metabolic_mass_loss_g(energy_kcal: FloatLike) -> FloatLike:
    """Mass lost by breath and gas exchange together, from the energy turned over: 0.20 g per kcal.

    Parameters:
        energy_kcal: energy turned over [kcal], scalar or array.
    Returns:
        Mass [g], the shape of energy_kcal.
    Raises:
        InputError: an energy out of range.
    Valid:
        Ordinary air and effort; respiratory_water_g_min and gas_exchange_g_min tell the two apart.
    Source:
        Cheuvront & Montain 2017 (published).
    Example:
        >>> round(metabolic_mass_loss_g(3000.0))
        600
    """
    return like(METABOLIC_LOSS_G_PER_KCAL * checked("energy_kcal", energy_kcal), energy_kcal)
