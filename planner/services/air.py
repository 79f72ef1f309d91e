"""The air at an elevation and what it does to somebody who came straight from sea level."""

from __future__ import annotations

from dataclasses import dataclass
from math import isfinite, nan

import numpy as np

from planner.checks import QUANTITIES, FloatLike, checked, like
from planner.constants import HOURS_PER_DAY
from planner.monitoring.model import Wakefulness
from planner.physiology.acclimatisation import ExposureHistory
from planner.physiology.air import (
    site_pressure,
    standard_air_density_kg_m3,
    standard_elevation_m,
    standard_pressure_hpa,
)
from planner.physiology.capacity import aerobic_capacity_pct, aerobic_capacity_range_pct
from planner.physiology.expectation import Expectation, expected_spo2
from planner.physiology.oxygen import inspired_po2_mmhg
from planner.physiology.ventilation import REFERENCE_INSPIRED_PO2_MMHG


@dataclass(frozen=True)
class SiteAir:
    """The air at one elevation: pressure and its origin, density, inspired oxygen.

    Density is that of dry air at the standard temperature of this elevation and at this pressure.
    """

    elevation_m: float
    pressure_hpa: float
    pressure_from: str
    measured: bool
    pressure_sd_hpa: float
    air_density_kg_m3: float
    inspired_po2_mmhg: float

    @property
    def density_share_pct(self) -> float:
        """Density in per cent of that of the standard atmosphere at sea level."""
        return 100.0 * self.air_density_kg_m3 / float(standard_air_density_kg_m3(0.0))

    @property
    def oxygen_share_pct(self) -> float:
        """Inspired oxygen tension in per cent of that at standard sea level."""
        return 100.0 * self.inspired_po2_mmhg / REFERENCE_INSPIRED_PO2_MMHG


def site_air(elevation_m: float, *, latitude_deg: float = nan, measured_pressure_hpa: float = nan) -> SiteAir:
    """Return the air at a site; a measured station pressure beats the model atmospheres.

    Raises: InputError naming what lies out of range.
    """
    pressure = site_pressure(elevation_m, latitude_deg, measured_pressure_hpa)
    pressure_hpa = float(pressure.pressure_hpa)
    # The standard temperature is kept whatever the pressure came from, so density goes with pressure.
    ratio = pressure_hpa / float(standard_pressure_hpa(elevation_m))
    return SiteAir(
        elevation_m=elevation_m,
        pressure_hpa=pressure_hpa,
        pressure_from=str(pressure.pressure_from),
        measured=isfinite(measured_pressure_hpa),
        pressure_sd_hpa=float(pressure.sd_hpa),
        air_density_kg_m3=float(standard_air_density_kg_m3(elevation_m)) * ratio,
        inspired_po2_mmhg=float(inspired_po2_mmhg(pressure_hpa)),
    )


def straight_from_sea_level(
    air: SiteAir, days: FloatLike, *, wakefulness: Wakefulness = "awake"
) -> Expectation:
    """Return what to expect of the population after so many days there, straight from sea level.

    The result has the shape of `days`.
    Raises: InputError when a number of days is out of range.
    """
    at_h = checked("days", days) * HOURS_PER_DAY
    history = ExposureHistory(
        start_h=np.array([-HOURS_PER_DAY, 0.0]),
        inspired_po2_mmhg=np.array([REFERENCE_INSPIRED_PO2_MMHG, air.inspired_po2_mmhg]),
    )
    return expected_spo2(
        history, like(at_h, days), wakefulness=wakefulness, pressure_sd_hpa=air.pressure_sd_hpa
    )


@dataclass(frozen=True)
class Capacity:
    """Aerobic capacity in per cent of the person's own at sea level, with the range of 95 % of people."""

    mean_pct: FloatLike
    low_pct: FloatLike
    high_pct: FloatLike


def capacity_there(air: SiteAir, days: FloatLike) -> Capacity:
    """Return the aerobic capacity after so many days there, straight from sea level.

    The published curves go by elevation; a measured pressure counts as the standard elevation it stands for.
    """
    elevation_m: FloatLike = air.elevation_m
    if air.measured:
        # A pressure may stand for an elevation just beyond those that the curves accept: take their end.
        known = QUANTITIES["elevation_m"]
        elevation_m = like(
            np.clip(standard_elevation_m(air.pressure_hpa), known.low, known.high), air.pressure_hpa
        )
    low, high = aerobic_capacity_range_pct(elevation_m, days)
    return Capacity(aerobic_capacity_pct(elevation_m, days), low, high)
