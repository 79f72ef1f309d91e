"""What a person's readings say of that person: Bayesian updating on a grid, without sampling noise.

A reading is the person's own mean plus scatter; a small share of readings tells nothing (a cold finger, a
typing error) and may lie anywhere, which keeps one wild reading from dragging the range. The likelihood is
computed on a coarse grid over breathing strength and offset, device by device, and carried to a fine grid by
cubic interpolation: its logarithm is smooth, so that costs next to nothing in accuracy. The bias of each
device is summed out, which leaves the person.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from planner.checks import QUANTITIES, FloatArray, checked
from planner.errors import InputError
from planner.physiology.acclimatisation import _relaxed
from planner.physiology.air import standard_pressure_hpa
from planner.physiology.expectation import PLANNING_PRESSURE_SD_HPA, _scatter_variances
from planner.physiology.oxygen import inspired_po2_mmhg as inspired_from_pressure
from planner.physiology.person import Estimate, Latents, PersonPosterior, population_latents
from planner.physiology.population import POPULATION, Population
from planner.physiology.ventilation import _chain, _target

# The place and time at which "how much is the driver's own" is told: judgement.
REFERENCE_ELEVATION_M: Final = 2300.0
REFERENCE_DAYS: Final = 2.0
HIGH_ELEVATION_M: Final = 1500.0
# Readings within this time of the first of them share one day's shift: judgement.
SAME_DAY_H: Final = 6.0

COARSE_BREATHING: Final = np.linspace(-3.6, 3.6, 13)
FINE_BREATHING: Final = np.linspace(-3.6, 3.6, 81)
REACH_SD: Final = 4.0  # of the offset's standard deviation
COARSE_OFFSETS: Final = 21
FINE_OFFSETS: Final = 201
ADMIXTURE_NODES: Final = 41
ROWS_PER_PRODUCT: Final = 9  # of FINE_BREATHING; see _product
READINGS_PER_BLOCK: Final = 512  # a block's likelihoods stay in the processor's cache


@dataclass(frozen=True)
class _Grids:
    """Posterior weights on the fine grid: over (breathing, admixture), and by device (breathing, offset)."""

    admixture: FloatArray
    offset: FloatArray
    person: FloatArray
    devices: dict[str, FloatArray]
    bias: dict[str, Estimate]


def learned(
    inspired_po2_mmhg: FloatArray,
    ventilatory_state: FloatArray,
    spo2_pct: FloatArray,
    devices: NDArray[np.str_] | NDArray[np.object_] | list[str],
    at_h: FloatArray,
    pressure_sd_hpa: float = PLANNING_PRESSURE_SD_HPA,
) -> PersonPosterior:
    """What the readings of one person, awake and at rest, say of that person.

    Parameters:
        inspired_po2_mmhg: oxygen tension breathed at each reading [mmHg], (n,).
        ventilatory_state: the population's state of acclimatisation on the same itinerary [1], (n,).
        spo2_pct: readings [%], (n,).
        devices: name of the oximeter of each reading [word], (n,).
        at_h: instants from any origin, ascending [h], (n,).
        pressure_sd_hpa: how unsure the pressures are, standard deviation [hPa].
    Returns:
        PersonPosterior; without readings it equals the population.
    Raises:
        InputError: an input out of range or lengths that differ.
    Valid:
        Readings that may teach: awake, at rest, properly taken, not in sickness.
    Source:
        Bayes' rule on a grid (common practice); priors fitted (computed) or judgement.
    """
    inspired = checked("inspired_po2_mmhg", inspired_po2_mmhg)
    state = checked("ventilatory_state", ventilatory_state)
    readings = checked("spo2_pct", spo2_pct)
    if not inspired.shape == state.shape == readings.shape == np.shape(at_h) == (len(devices),):
        raise InputError("spo2_pct", readings.shape, f"as many readings as devices, {len(devices)}")
    pressure_sd = float(checked("pressure_sd_hpa", pressure_sd_hpa))
    names, device_of = np.unique(np.asarray(devices, dtype=np.str_), return_inverse=True)
    grids = _grids(inspired, state, readings, names, device_of, np.asarray(at_h), pressure_sd, POPULATION)
    usual = str(names[np.bincount(device_of).argmax()]) if names.size else None
    by_device = {name: _latents(weights, grids.offset) for name, weights in grids.devices.items()}
    new_device = _new_device(grids, POPULATION)
    latents = by_device[usual] if usual is not None else new_device
    high = inspired < _plain_air_mmhg(HIGH_ELEVATION_M)
    admixture = _estimate(grids.admixture, grids.person.sum(axis=0))
    return PersonPosterior(
        new_device=new_device,
        breathing=_estimate(FINE_BREATHING, grids.person.sum(axis=1)),
        admixture_pct=Estimate(POPULATION.venous_admixture_pct + admixture.mean, admixture.sd),
        by_device=by_device,
        device_bias_pct=grids.bias,
        usual_device=usual,
        readings=readings.size,
        readings_above_1500_m=int(high.sum()),
        own_share=_own_share(latents, POPULATION) if readings.size else 0.0,
    )


def _grids(
    inspired: FloatArray,
    state: FloatArray,
    readings: FloatArray,
    names: NDArray[np.str_],
    device_of: NDArray[np.intp],
    at_h: FloatArray,
    pressure_sd_hpa: float,
    population: Population,
) -> _Grids:
    reach = REACH_SD * float(np.hypot(population.admixture_sd_pct, population.device_bias_sd_pct))
    coarse = np.linspace(-reach, reach, COARSE_OFFSETS)
    offset = np.linspace(-reach, reach, FINE_OFFSETS)
    admixture = population.admixture_sd_pct * np.linspace(-REACH_SD, REACH_SD, ADMIXTURE_NODES)
    miss, sd, weight = _misses(inspired, state, readings, at_h, pressure_sd_hpa, population)
    to_breathing = _cubic(COARSE_BREATHING, FINE_BREATHING)
    to_offset = _cubic(coarse, offset)
    # A device's bias is offset plus admixture's deviation; rows are offsets, columns admixtures.
    bias = offset[:, None] + admixture
    of_bias = np.exp(-0.5 * (bias / population.device_bias_sd_pct) ** 2)
    prior = -0.5 * FINE_BREATHING[:, None] ** 2 - 0.5 * (admixture / population.admixture_sd_pct) ** 2
    likelihoods: list[FloatArray] = []  # logarithms, (breathing, offset)
    summed_out: list[FloatArray] = []  # logarithms with the bias summed out, (breathing, admixture)
    for device in range(names.size):
        ours = device_of == device
        coarse_log = _log_likelihood(miss[:, ours], sd[:, ours], weight[ours], coarse, population)
        likelihoods.append(to_breathing @ coarse_log @ to_offset.T)
        rows, top = _rows_scaled(likelihoods[device])
        summed_out.append(top + np.log(_product(rows, of_bias)))
    person = _normalised(prior + sum(summed_out))
    devices: dict[str, FloatArray] = {}
    biases: dict[str, Estimate] = {}
    for device, name in enumerate(names):
        rest, top = _rows_scaled(prior + sum(s for i, s in enumerate(summed_out) if i != device))
        of_offset = _product(rest, of_bias.T)
        weights = _normalised(likelihoods[device] + top + np.log(of_offset))
        devices[str(name)] = weights
        mean, square = (
            float((weights * _product(rest, (of_bias * bias**power).T) / of_offset).sum()) for power in (1, 2)
        )
        biases[str(name)] = Estimate(mean, float(np.sqrt(max(square - mean**2, 0.0))))
    return _Grids(admixture, offset, person, devices, biases)


def _misses(
    inspired: FloatArray,
    state: FloatArray,
    readings: FloatArray,
    at_h: FloatArray,
    pressure_sd_hpa: float,
    population: Population,
) -> tuple[NDArray[np.float32], NDArray[np.float32], NDArray[np.float32]]:
    """Reading less expected and its scatter at each coarse breathing strength (k, n), and weights (n,).

    Readings close together share one day's shift, so together they say less than as many days would: each of
    k such readings counts by its share of the independent information.
    """
    chain = _chain(inspired, state, COARSE_BREATHING[:, None], asleep=False, population=population)
    day, noise, pressure = _scatter_variances(chain, np.asarray(pressure_sd_hpa), population)
    shared = (day + pressure)[COARSE_BREATHING.size // 2]
    single = noise[COARSE_BREATHING.size // 2]
    together = _read_together(at_h)
    weight = (shared + single) / (together * shared + single)
    miss = readings - chain.saturation
    sd = np.sqrt(day + noise + pressure)
    return miss.astype(np.float32), sd.astype(np.float32), weight.astype(np.float32)


def _read_together(at_h: FloatArray) -> NDArray[np.intp]:
    """How many readings share the day's shift with each one, itself included, (n,); ascending hours.

    Counted from the first of them, not from one to the next: somebody who measures every few hours all week
    would otherwise have measured on one day.
    """
    sitting = np.empty(at_h.size, dtype=np.intp)
    first_h, number = -np.inf, -1
    for i, hour in enumerate(at_h.tolist()):
        if hour - first_h > SAME_DAY_H:
            first_h, number = hour, number + 1
        sitting[i] = number
    return np.asarray(np.bincount(sitting)[sitting] if at_h.size else sitting)


def _log_likelihood(
    miss: NDArray[np.float32],
    sd: NDArray[np.float32],
    weight: NDArray[np.float32],
    offset: FloatArray,
    population: Population,
) -> FloatArray:
    """Logarithm of the likelihood of one device's readings on the coarse grid (breathing, offset)."""
    reach = QUANTITIES["spo2_pct"]
    anywhere = np.float32(population.faulty_share / (reach.high - reach.low))
    sound = np.float32((1.0 - population.faulty_share) / np.sqrt(2.0 * np.pi))
    at = offset.astype(np.float32)[:, None]
    total = np.zeros((len(miss), offset.size))
    for first in range(0, miss.shape[1], READINGS_PER_BLOCK):
        block = slice(first, first + READINGS_PER_BLOCK)
        for node in range(len(miss)):
            inverse = np.float32(1.0) / sd[node, block]
            density = (miss[node, block] - at) * inverse
            np.multiply(density, density, out=density)
            density *= np.float32(-0.5)
            np.exp(density, out=density)
            density *= sound * inverse
            density += anywhere
            np.log(density, out=density)
            total[node] += density @ weight[block]
    return total


def _product(left: FloatArray, right: FloatArray) -> FloatArray:
    """Matrix product in slices so small that the linear algebra library starts no threads for them.

    Threads gain nothing at this size, and on a busy machine their waiting made it many times slower.
    """
    slices = left.reshape(-1, ROWS_PER_PRODUCT, left.shape[1])
    return np.asarray(slices @ right).reshape(left.shape[0], right.shape[1])


def _cubic(coarse: FloatArray, fine: FloatArray) -> FloatArray:
    """Matrix (fine, coarse) of cubic interpolation through the four nodes around each point."""
    spacing = coarse[1] - coarse[0]
    first = np.clip(np.floor((fine - coarse[0]) / spacing).astype(int) - 1, 0, coarse.size - 4)
    matrix = np.zeros((fine.size, coarse.size))
    for own in range(4):
        value = np.ones(fine.size)
        for other in range(4):
            if other != own:
                value *= (fine - coarse[first + other]) / ((own - other) * spacing)
        matrix[np.arange(fine.size), first + own] = value
    return matrix


def _latents(weights: FloatArray, offset: FloatArray) -> Latents:
    """Breathing and the offset's mean and spread at each node, from weights (breathing, offset)."""
    weight = weights.sum(axis=1)
    divisor = np.where(weight > 0.0, weight, 1.0)
    mean = weights @ offset / divisor
    square = weights @ offset**2 / divisor
    return Latents(FINE_BREATHING, weight, mean, np.sqrt(np.maximum(square - mean**2, 0.0)))


def _new_device(grids: _Grids, population: Population) -> Latents:
    of_admixture = _latents(grids.person, grids.admixture)
    return Latents(
        of_admixture.breathing,
        of_admixture.weight,
        -of_admixture.offset_mean_pct,
        np.hypot(of_admixture.offset_sd_pct, population.device_bias_sd_pct),
    )


def _estimate(values: FloatArray, weight: FloatArray) -> Estimate:
    mean = float(weight @ values)
    return Estimate(mean, float(np.sqrt(weight @ (values - mean) ** 2)))


def _own_share(latents: Latents, population: Population) -> float:
    before = _own_variance(population_latents(population), population)
    return max(1.0 - _own_variance(latents, population) / before, 0.0)


def _own_variance(latents: Latents, population: Population) -> float:
    """Variance of the person's own mean reading at the reference place and time."""
    home = np.asarray(_plain_air_mmhg(0.0))
    there = np.asarray(_plain_air_mmhg(REFERENCE_ELEVATION_M))
    days = np.asarray(REFERENCE_DAYS)
    state = _relaxed(_target(home, population), _target(there, population), days, population)
    chain = _chain(there, state, latents.breathing, asleep=False, population=population)
    own = chain.saturation + latents.offset_mean_pct
    centre = latents.weight @ own
    return float(latents.weight @ ((own - centre) ** 2 + latents.offset_sd_pct**2))


def _plain_air_mmhg(elevation_m: float) -> float:
    return float(inspired_from_pressure(standard_pressure_hpa(elevation_m)))


def _rows_scaled(logarithm: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Each row over its own largest value, and the logarithm of that: no row vanishes, however unlikely."""
    top = logarithm.max(axis=1, keepdims=True)
    return np.exp(logarithm - top), top


def _normalised(logarithm: FloatArray) -> FloatArray:
    """Weights that sum to 1. From logarithms: readings of two devices may contradict each other so much that
    every product of their likelihoods is too small for a double."""
    weights = np.exp(logarithm - logarithm.max())
    return np.asarray(weights / weights.sum())
