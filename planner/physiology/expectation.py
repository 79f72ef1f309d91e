"""What an oximeter is expected to read: history in, distribution out, with its 95 % range and its parts."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from planner.checks import FloatArray, FloatLike, checked, like, numbers
from planner.constants import AIR_OXYGEN_FRACTION, HPA_PER_MMHG
from planner.errors import InputError
from planner.physiology.acclimatisation import ExposureHistory, ventilatory_state_at
from planner.physiology.blood import po2_mmhg
from planner.physiology.normal import _mixture_quantile
from planner.physiology.person import Latents, PersonPosterior, population_latents
from planner.physiology.population import POPULATION, Population
from planner.physiology.ventilation import Wakefulness, _Chain, _chain, _is_asleep

LOW_PROBABILITY: Final = 0.025
HIGH_PROBABILITY: Final = 0.975
HIGHEST_READING_PCT: Final = 100.0
# How unsure the pressure of a reading is taken to be where nobody says it, standard deviation: judgement.
PLANNING_PRESSURE_SD_HPA: Final = 2.0
# A node below this weight cannot move a 2.5 % quantile by a hundredth of a point.
NEGLIGIBLE_WEIGHT: Final = 1e-7
# The published rows behind the fit end near 5000 m (75 mmHg); a few mmHg more for a low-pressure day.
LOWEST_VALID_INSPIRED_PO2_MMHG: Final = 72.0
HIGHEST_VALID_INSPIRED_PO2_MMHG: Final = 165.0


@dataclass(frozen=True)
class Expectation:
    """A reading to expect at each instant: mean and 95 % range [%], the parts of its spread, and the chain.

    The four parts are standard deviations of independent shares: their squares add up to the whole variance.
    The chain is that of the median person. `beyond_validity` marks instants outside the model's data.
    """

    mean_spo2_pct: FloatLike
    low_spo2_pct: FloatLike
    high_spo2_pct: FloatLike
    between_people_sd_pct: FloatLike
    day_to_day_sd_pct: FloatLike
    oximeter_sd_pct: FloatLike
    pressure_sd_pct: FloatLike
    inspired_po2_mmhg: FloatLike
    alveolar_po2_mmhg: FloatLike
    paco2_mmhg: FloatLike
    ph: FloatLike
    arterial_po2_mmhg: FloatLike
    ventilatory_state: FloatLike
    beyond_validity: NDArray[np.bool_] | bool


def expected_spo2(
    history: ExposureHistory,
    at_h: FloatLike,
    *,
    wakefulness: Wakefulness = "awake",
    person: PersonPosterior | None = None,
    device: str | None = None,
    pressure_sd_hpa: FloatLike = PLANNING_PRESSURE_SD_HPA,
) -> Expectation:
    """Distribution of an oximeter reading at rest at some instants of a history.

    Parameters:
        history: what was breathed [object].
        at_h: instants in the history's hours [h], scalar or array.
        wakefulness: "awake" or "asleep" [word].
        person: what was learned of the driver [object]; None = the population.
        device: name of the oximeter [word]; None = the one the person was read with most.
        pressure_sd_hpa: how unsure the pressure is, standard deviation [hPa], scalar or the shape of at_h.
    Returns:
        Expectation, its fields in the shape of at_h.
    Raises:
        InputError: a wakefulness that is neither word, a standard deviation below 0 or above 50 hPa or of
            another shape, instants that are no numbers.
    Valid:
        Rest, 0 to 5000 m (72 to 165 mmHg inspired); beyond that beyond_validity is set. Healthy people; a
        reading inside the range never proves safety.
    Source:
        Population model fitted (computed) to published rows; see population_model_summary.
    Example:
        >>> home = ExposureHistory(np.array([0.0]), np.array([149.2]))
        >>> round(expected_spo2(home, 24.0).mean_spo2_pct)
        97
    """
    at = numbers("at_h", at_h, "h")
    pressure_sd = checked("pressure_sd_hpa", pressure_sd_hpa)
    if pressure_sd.shape not in ((), at.shape):
        raise InputError("pressure_sd_hpa", pressure_sd.shape, f"one number or the shape {at.shape} of at_h")
    pressure_sd = np.broadcast_to(pressure_sd, at.shape).reshape(-1)
    flat = at.reshape(-1)
    inspired = history.inspired_at(flat)
    state = np.asarray(ventilatory_state_at(history, flat))
    latents = population_latents() if person is None else person.latents(device)
    asleep = _is_asleep(wakefulness)
    nodes, mean, parts = _reading_parts(inspired, state, latents, asleep, pressure_sd, POPULATION)
    weight = nodes.weight[:, None]
    centre = (weight * mean).sum(axis=0)
    total_sd = np.sqrt(parts.within_node)
    low = _mixture_quantile(LOW_PROBABILITY, weight, mean, total_sd)
    high = _mixture_quantile(HIGH_PROBABILITY, weight, mean, total_sd)
    median = _chain(inspired, state, np.asarray(0.0), asleep=asleep, population=POPULATION)

    def shaped(values: FloatArray) -> FloatLike:
        return like(values.reshape(at.shape), at_h)

    beyond = (inspired < LOWEST_VALID_INSPIRED_PO2_MMHG) | (inspired > HIGHEST_VALID_INSPIRED_PO2_MMHG)
    beyond = beyond.reshape(at.shape)
    return Expectation(
        mean_spo2_pct=shaped(centre),
        low_spo2_pct=shaped(low),
        high_spo2_pct=shaped(np.minimum(high, HIGHEST_READING_PCT)),
        between_people_sd_pct=shaped(np.sqrt(parts.between_people)),
        day_to_day_sd_pct=shaped(np.sqrt(parts.day_to_day)),
        oximeter_sd_pct=shaped(np.sqrt(parts.oximeter)),
        pressure_sd_pct=shaped(np.sqrt(parts.pressure)),
        inspired_po2_mmhg=shaped(inspired),
        alveolar_po2_mmhg=shaped(median.alveolar),
        paco2_mmhg=shaped(median.paco2),
        ph=shaped(median.ph),
        arterial_po2_mmhg=shaped(np.asarray(po2_mmhg(median.saturation, median.ph))),
        ventilatory_state=shaped(state),
        beyond_validity=bool(beyond) if np.ndim(at_h) == 0 else beyond,
    )


@dataclass(frozen=True)
class _Parts:
    """Variances [points squared], (n,): the four parts, and (k, n) the one around each node's mean."""

    between_people: FloatArray
    day_to_day: FloatArray
    oximeter: FloatArray
    pressure: FloatArray
    within_node: FloatArray


def _reading_parts(
    inspired: FloatArray,
    state: FloatArray,
    latents: Latents,
    asleep: bool,
    pressure_sd_hpa: FloatArray,
    population: Population,
) -> tuple[Latents, FloatArray, _Parts]:
    """The mixture that a reading is drawn from: the nodes that count, their means (k, n), the variances."""
    kept = latents.weight > NEGLIGIBLE_WEIGHT
    share = latents.weight[kept] / latents.weight[kept].sum()
    nodes = Latents(
        latents.breathing[kept], share, latents.offset_mean_pct[kept], latents.offset_sd_pct[kept]
    )
    chain = _chain(inspired, state, nodes.breathing[:, None], asleep=asleep, population=population)
    mean = chain.saturation + nodes.offset_mean_pct[:, None]
    day, noise, pressure = _scatter_variances(chain, pressure_sd_hpa, population)
    offset = nodes.offset_sd_pct[:, None] ** 2
    within = day + noise + pressure + offset
    weight = share[:, None]
    centre = (weight * mean).sum(axis=0)
    # The offset is a person's admixture and a device's bias together; readings cannot tell them apart, so
    # what is left of it is shared out in the proportion of the population's variances.
    of_device = population.device_bias_sd_pct**2 / (
        population.device_bias_sd_pct**2 + population.admixture_sd_pct**2
    )
    bias = of_device * float((share * nodes.offset_sd_pct**2).sum())
    people = (weight * (mean - centre) ** 2).sum(axis=0) + (weight * offset).sum(axis=0) - bias
    parts = _Parts(
        between_people=people,
        day_to_day=(weight * day).sum(axis=0),
        oximeter=(weight * noise).sum(axis=0) + bias,
        pressure=(weight * pressure).sum(axis=0),
        within_node=within,
    )
    return nodes, mean, parts


def _scatter_variances(
    chain: _Chain, pressure_sd_hpa: FloatArray, population: Population
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Variances of one reading around the person's own mean: day to day, oximeter noise, pressure."""
    day = population.day_sd_pct**2 + (population.day_alveolar_sd_mmhg * chain.slope_pct_per_mmhg) ** 2
    lost = np.maximum(HIGHEST_READING_PCT - population.venous_admixture_pct - chain.saturation, 0.0)
    noise = (population.oximeter_noise_sd_pct + population.oximeter_noise_slope * lost) ** 2
    pressure = (AIR_OXYGEN_FRACTION / HPA_PER_MMHG * pressure_sd_hpa * chain.slope_pct_per_mmhg) ** 2
    return day, noise, pressure
