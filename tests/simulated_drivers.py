"""What several tests of expectation share: histories, and drivers whose latent values are known.

Everything random has a fixed seed.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from planner.checks import FloatArray
from planner.physiology.acclimatisation import ExposureHistory, ventilatory_state_at
from planner.physiology.air import site_pressure
from planner.physiology.expectation import _scatter_variances
from planner.physiology.oxygen import inspired_po2_mmhg
from planner.physiology.population import POPULATION
from planner.physiology.ventilation import _chain

LONG_AGO_H = -24.0 * 400
PRESSURE_SD_HPA = 2.0


def inspired_at(elevation_m: float, latitude_deg: float = np.nan) -> float:
    """Inspired oxygen tension [mmHg] of the model atmosphere."""
    return float(inspired_po2_mmhg(site_pressure(elevation_m, latitude_deg).pressure_hpa))


def history_of(*stays: tuple[float, float], latitude_deg: float = np.nan) -> ExposureHistory:
    """A history from (start [h], elevation [m]) pairs; the first elevation is the home."""
    return ExposureHistory(
        start_h=np.array([start for start, _ in stays]),
        inspired_po2_mmhg=np.array([inspired_at(elevation, latitude_deg) for _, elevation in stays]),
    )


def straight_to(elevation_m: float, home_m: float = 0.0) -> ExposureHistory:
    """From home to an elevation, arriving at hour 0."""
    return history_of((LONG_AGO_H, home_m), (0.0, elevation_m))


@dataclass(frozen=True)
class SimulatedDriver:
    """True latent values: breathing [standard deviations], admixture's deviation and device bias [points]."""

    breathing: float
    admixture: float
    bias: float

    @classmethod
    def drawn(cls, random: np.random.Generator) -> SimulatedDriver:
        """A driver drawn from the population, with a device drawn from all devices."""
        return cls(
            breathing=float(random.normal()),
            admixture=float(random.normal(0.0, POPULATION.admixture_sd_pct)),
            bias=float(random.normal(0.0, POPULATION.device_bias_sd_pct)),
        )

    @property
    def offset(self) -> float:
        return self.bias - self.admixture

    def readings(
        self,
        history: ExposureHistory,
        at_h: FloatArray,
        random: np.random.Generator,
        *,
        faulty: bool = False,
    ) -> FloatArray:
        """One reading at each instant, each on its own day; with `faulty` a small share tells nothing."""
        inspired = history.inspired_at(at_h)
        state = np.asarray(ventilatory_state_at(history, at_h))
        chain = _chain(inspired, state, np.asarray(self.breathing), asleep=False, population=POPULATION)
        variance = sum(_scatter_variances(chain, np.asarray(PRESSURE_SD_HPA), POPULATION))
        read = chain.saturation + self.offset + np.sqrt(variance) * random.normal(size=at_h.shape)
        if faulty:
            wild = random.random(at_h.shape) < POPULATION.faulty_share
            read = np.where(wild, random.uniform(40.0, 100.0, at_h.shape), read)
        return np.clip(read, 40.0, 100.0)


def uniform_at_1_pct(values: FloatArray) -> bool:
    """Kolmogorov's test that values come from a uniform distribution on 0-1, at the 1 % level."""
    ordered = np.sort(values)
    n = ordered.size
    above = np.arange(1, n + 1) / n - ordered
    below = ordered - np.arange(n) / n
    return bool(max(above.max(), below.max()) < 1.628 / np.sqrt(n))
