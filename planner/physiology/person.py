"""What is known of one person: the population's spread, sharpened by that person's readings.

Two things differ between people: how strongly they breathe (a factor on the rise of ventilation, log-normal,
and with it the PaCO2 at sea level) and the venous admixture, seen as the alveolar-arterial difference. A
device adds its bias. Admixture and bias both shift readings by a constant number of points, so for one device
they act as one offset.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Final

import numpy as np

from planner.checks import FloatArray
from planner.physiology.population import POPULATION, Population

# Nodes of the breathing strength in standard deviations between people. Sums over evenly spaced nodes with
# normal weights are exact to many digits (the trapezoid rule on a bell curve): there is no sampling noise.
PRIOR_NODES: Final = np.linspace(-3.6, 3.6, 25)


@dataclass(frozen=True)
class Latents:
    """What is believed of one person read with one device.

    `breathing` (k,) nodes of how strongly the person breathes in standard deviations between people, `weight`
    (k,) that sum to 1, `offset_mean_pct` and `offset_sd_pct` (k,) of the offset (device bias less admixture's
    deviation) at each node, in points of saturation.
    """

    breathing: FloatArray
    weight: FloatArray
    offset_mean_pct: FloatArray
    offset_sd_pct: FloatArray


@dataclass(frozen=True)
class Estimate:
    """Mean and standard deviation of a latent value."""

    mean: float
    sd: float


@dataclass(frozen=True)
class PersonPosterior:
    """A person as learned from readings.

    `by_device` holds latents for every device that read the person, `new_device` those for a device never
    used before; `usual_device` is the one with most readings. `breathing` is in standard deviations between
    people (0 = the median), `admixture_pct` in points of saturation (the population's mean is
    `venous_admixture_pct`), `device_bias_pct` in points. `own_share` [1] is the part of the population's
    variance between people and devices, at the reference place of `learning`, that the readings have removed.
    """

    new_device: Latents
    breathing: Estimate
    admixture_pct: Estimate
    by_device: Mapping[str, Latents] = field(default_factory=dict)
    device_bias_pct: Mapping[str, Estimate] = field(default_factory=dict)
    usual_device: str | None = None
    readings: int = 0
    readings_above_1500_m: int = 0
    own_share: float = 0.0

    def latents(self, device: str | None = None) -> Latents:
        """Latents for a device; None = the usual one, a device never used = the population of devices."""
        name = self.usual_device if device is None else device
        return self.new_device if name is None else self.by_device.get(name, self.new_device)


def population_latents(population: Population = POPULATION) -> Latents:
    """Somebody of whom nothing is known yet, read with any device.

    Parameters:
        population: constants of the population model [object].
    Returns:
        Latents with the population's weights.
    Valid:
        Healthy lowlanders and moderate-altitude residents.
    Source:
        Spread fitted (computed) to published standard deviations; see population_model_summary.
    """
    weight = np.exp(-0.5 * PRIOR_NODES**2)
    offset_sd = np.hypot(population.admixture_sd_pct, population.device_bias_sd_pct)
    return Latents(
        breathing=PRIOR_NODES,
        weight=weight / weight.sum(),
        offset_mean_pct=np.zeros(PRIOR_NODES.shape),
        offset_sd_pct=np.full(PRIOR_NODES.shape, offset_sd),
    )
