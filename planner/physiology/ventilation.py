"""How breathing answers thin air: from inspired oxygen and the state of acclimatisation to arterial blood.

What drives breathing is the inspired oxygen missing against sea level. Once acclimatised, PaCO2 has fallen in
proportion to it: that sets the target of alveolar ventilation. Of the gap between target and state a share is
answered within minutes by the carotid bodies, the more the thinner the air (a hyperbola, as their response
is); the state itself moves to the target over days. PaCO2 follows by the alveolar ventilation equation, pH by
Henderson-Hasselbalch, with little buffering of what came within minutes and the kidneys' compensation of what
the state has made lasting. Alveolar oxygen follows from the full alveolar gas equation, in which the
respiratory quotient is higher while breathing is still answering. Arterial saturation is that of blood in
balance with the alveoli less a venous admixture, constant in points of saturation at rest (shunt fraction
times the oxygen taken from the blood), so the alveolar-arterial difference in mmHg is large at sea level and
small on the steep part of the curve, as measured.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal, TypeAlias

import numpy as np

from planner.checks import FloatArray, FloatLike, checked, like
from planner.constants import AIR_OXYGEN_FRACTION, SEA_LEVEL_PRESSURE_HPA
from planner.errors import InputError
from planner.physiology.blood import (
    STANDARD_BODY_TEMPERATURE_C,
    STANDARD_PH,
    _at_standard,
    _standard_saturation_pct,
    _standard_slope_pct_per_mmhg,
    po2_mmhg,
)
from planner.physiology.oxygen import _alveolar_po2_mmhg
from planner.physiology.oxygen import inspired_po2_mmhg as inspired_from_pressure
from planner.physiology.population import POPULATION, Population

Wakefulness: TypeAlias = Literal["awake", "asleep"]

REFERENCE_INSPIRED_PO2_MMHG: Final = float(inspired_from_pressure(SEA_LEVEL_PRESSURE_HPA))

# Henderson-Hasselbalch at 37 C: pK 6.1 and the solubility of CO2 (published, every textbook).
PK: Final = 6.1
CO2_SOLUBILITY_MMOL_L_PER_MMHG: Final = 0.0307
# Bicarbonate that makes pH 7.40 with each person's own PaCO2 at sea level.
SEA_LEVEL_BICARBONATE_PER_MMHG: Final = 10.0 ** (STANDARD_PH - PK) * CO2_SOLUBILITY_MMOL_L_PER_MMHG
# Fall of bicarbonate per mmHg of PaCO2 lost within minutes, by the buffers alone (from memory: 2 mmol/L per
# 10 mmHg, the textbook rule for acute respiratory alkalosis).
ACUTE_BUFFERING: Final = 0.2
# These keep the chain finite where nobody lives.
HIGHEST_PH: Final = 7.8
LOWEST_ALVEOLAR_PO2_MMHG: Final = 1.0
LARGEST_PACO2_FALL: Final = 0.8


@dataclass(frozen=True)
class ArterialGases:
    """The chain at rest: tensions [mmHg], pH [1], saturation [%]."""

    paco2_mmhg: FloatLike
    ph: FloatLike
    alveolar_po2_mmhg: FloatLike
    saturation_pct: FloatLike
    arterial_po2_mmhg: FloatLike


@dataclass(frozen=True)
class _Chain:
    """The same inside, without the arterial tension, plus the slope of saturation by inspired oxygen."""

    paco2: FloatArray
    ph: FloatArray
    alveolar: FloatArray
    saturation: FloatArray
    slope_pct_per_mmhg: FloatArray


def ventilatory_target(inspired_po2_mmhg: FloatLike) -> FloatLike:
    """Rise of alveolar ventilation that somebody fully acclimatised to an inspired oxygen tension has.

    Parameters:
        inspired_po2_mmhg: oxygen tension of moist inspired gas [mmHg], scalar or array.
    Returns:
        Rise relative to sea level [1], the shape of the input; 0 from sea level's tension upwards.
    Raises:
        InputError: a tension out of range.
    Valid:
        75 to 150 mmHg, the fit's data. Lifelong highlanders may breathe less.
    Source:
        Fitted (computed) to residents' and by-day PaCO2; see population_model_summary.
    Example:
        >>> ventilatory_target(150.0)
        0.0
    """
    inspired = checked("inspired_po2_mmhg", inspired_po2_mmhg)
    return like(_target(inspired, POPULATION), inspired_po2_mmhg)


def acute_share(inspired_po2_mmhg: FloatLike) -> FloatLike:
    """Share of the gap between ventilatory target and state that is answered within minutes.

    Parameters:
        inspired_po2_mmhg: oxygen tension of moist inspired gas [mmHg], scalar or array.
    Returns:
        Share from 0 to 1 [1], the shape of the input.
    Raises:
        InputError: a tension out of range.
    Valid:
        75 to 150 mmHg, the fit's data.
    Source:
        A hyperbola after Weil et al. 1970, J Clin Invest 49:1061 (from memory), here in inspired oxygen;
        constants fitted (computed) to PaCO2 and saturation on arrival.
    Example:
        >>> acute_share(150.0) < 0.1
        True
    """
    inspired = checked("inspired_po2_mmhg", inspired_po2_mmhg)
    return like(_share(inspired, POPULATION), inspired_po2_mmhg)


def arterial_gases(
    inspired_po2_mmhg: FloatLike,
    ventilatory_state: FloatLike,
    breathing: FloatLike = 0.0,
    wakefulness: Wakefulness = "awake",
) -> ArterialGases:
    """Arterial blood at rest for a state of acclimatisation.

    Parameters:
        inspired_po2_mmhg: oxygen tension of moist inspired gas [mmHg], scalar or array.
        ventilatory_state: lasting rise of alveolar ventilation of the population [1], scalar or array.
        breathing: how strongly the person breathes, in standard deviations between people [1], scalar or
            array.
        wakefulness: "awake" or "asleep" [word].
    Returns:
        ArterialGases, each field in the common shape of the inputs.
    Raises:
        InputError: an input out of range or another word.
    Valid:
        Rest, 0 to 5000 m and 75 to 150 mmHg; healthy lungs; no carbon monoxide.
    Source:
        The chain of this module with constants fitted (computed) to published rows.
    Example:
        >>> round(float(arterial_gases(149.2, 0.0).saturation_pct))
        97
    """
    inspired = checked("inspired_po2_mmhg", inspired_po2_mmhg)
    state = checked("ventilatory_state", ventilatory_state)
    strength = checked("breathing", breathing)
    chain = _chain(inspired, state, strength, asleep=_is_asleep(wakefulness), population=POPULATION)
    given = (inspired_po2_mmhg, ventilatory_state, breathing)
    arterial = po2_mmhg(chain.saturation, chain.ph)
    return ArterialGases(
        paco2_mmhg=like(chain.paco2, *given),
        ph=like(chain.ph, *given),
        alveolar_po2_mmhg=like(chain.alveolar, *given),
        saturation_pct=like(chain.saturation, *given),
        arterial_po2_mmhg=like(np.asarray(arterial), *given),
    )


def resting_saturation_pct(
    inspired_po2_mmhg: FloatLike, ventilatory_state: FloatLike, breathing: FloatLike = 0.0
) -> FloatLike:
    """Arterial saturation awake at rest for a state of acclimatisation: arterial_gases without the tensions.

    Parameters:
        inspired_po2_mmhg: oxygen tension of moist inspired gas [mmHg], scalar or array.
        ventilatory_state: lasting rise of alveolar ventilation of the population [1], scalar or array.
        breathing: how strongly the person breathes, in standard deviations between people [1], scalar or
            array.
    Returns:
        Saturation [%], the common shape of the inputs.
    Raises:
        InputError: an input out of range.
    Valid:
        As arterial_gases, of which it is a third of the work.
    Source:
        The chain of this module with constants fitted (computed) to published rows.
    Example:
        >>> round(resting_saturation_pct(149.2, 0.0))
        97
    """
    inspired = checked("inspired_po2_mmhg", inspired_po2_mmhg)
    state = checked("ventilatory_state", ventilatory_state)
    strength = checked("breathing", breathing)
    chain = _chain(inspired, state, strength, asleep=False, population=POPULATION)
    return like(chain.saturation, inspired_po2_mmhg, ventilatory_state, breathing)


def _is_asleep(wakefulness: str) -> bool:
    if wakefulness not in ("awake", "asleep"):
        raise InputError("wakefulness", wakefulness, "awake or asleep")
    return wakefulness == "asleep"


def _target(inspired: FloatArray, population: Population) -> FloatArray:
    # PaCO2 over sea level's is `left`; ventilation goes with its inverse.
    left = np.asarray(inspired - REFERENCE_INSPIRED_PO2_MMHG)
    left *= population.paco2_fall_per_mmhg
    left += 1.0
    np.clip(left, 1.0 - LARGEST_PACO2_FALL, 1.0, out=left)
    np.divide(1.0, left, out=left)
    left -= 1.0
    return left


def _share(inspired: FloatArray, population: Population) -> FloatArray:
    above = np.maximum(inspired - population.acute_asymptote_mmhg, 0.0)
    return np.asarray(population.acute_half_mmhg / (population.acute_half_mmhg + above))


def _chain(
    inspired: FloatArray, state: FloatArray, breathing: FloatArray, *, asleep: bool, population: Population
) -> _Chain:
    """The chain on arrays without guards: the one place where it is written down."""
    gap = np.maximum(_target(inspired, population) - state, 0.0)
    response = np.exp(population.breathing_sd * breathing)
    sea_level_paco2 = population.sea_level_paco2_mmhg - population.setpoint_sd_mmhg * breathing
    lasting = response * state
    ventilation = response * (state + _share(inspired, population) * gap)
    lasting_paco2 = sea_level_paco2 / (1.0 + lasting)
    paco2 = sea_level_paco2 / (1.0 + ventilation)
    if asleep:
        paco2 = paco2 + population.sleep_paco2_rise_mmhg
    bicarbonate = (
        SEA_LEVEL_BICARBONATE_PER_MMHG * sea_level_paco2
        - population.chronic_buffering * (sea_level_paco2 - lasting_paco2)
        - ACUTE_BUFFERING * (lasting_paco2 - paco2)
    )
    ph = np.minimum(PK + np.log10(bicarbonate / (CO2_SOLUBILITY_MMOL_L_PER_MMHG * paco2)), HIGHEST_PH)
    quotient = population.respiratory_quotient + population.quotient_rise * gap
    alveolar = _alveolar_po2_mmhg(inspired, paco2, np.asarray(AIR_OXYGEN_FRACTION), quotient)
    alveolar = np.maximum(alveolar, LOWEST_ALVEOLAR_PO2_MMHG)
    standard = _at_standard(alveolar, ph, np.asarray(STANDARD_BODY_TEMPERATURE_C))
    saturation = np.maximum(_standard_saturation_pct(standard) - population.venous_admixture_pct, 0.0)
    # The Bohr shift hardly changes with the tension: its derivative is left out of the slope.
    slope = _standard_slope_pct_per_mmhg(standard) * standard / alveolar
    return _Chain(paco2, ph, alveolar, saturation, slope)
