"""How the invented bodies behave: published formulas and a few fixed figures, not the program's fitted model.

So the season does not move when the model is fitted anew, and the model is not tried on what it said itself.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from planner.physiology.air import site_pressure
from planner.physiology.blood import saturation_pct
from planner.physiology.heat import body_surface_area_m2
from planner.physiology.oxygen import alveolar_po2_mmhg, inspired_po2_mmhg, paco2_mmhg
from planner.season.model import Driver, Place

# Judgement, all of them, chosen so that published rows near 2 240 m come out.
PH_AT_SEA_LEVEL: Final = 7.40
PH_PER_KM: Final = 0.014  # alkaline up high
ALVEOLAR_ARTERIAL_MMHG: Final = 8.0  # at sea level; smaller up high
ALVEOLAR_ARTERIAL_PER_KM: Final = -1.4
ASLEEP_PACO2_RISE_MMHG: Final = 4.0
PACO2_SD_MMHG: Final = 2.5  # between people
SCATTER_PCT: Final = 0.9  # day to day and oximeter
RESIDENT_DAYS: Final = 60.0

# Near to what Gonzalez 2009 predicts for a full suit at 37 to 47 C in the cockpit (computed).
SWEAT_L_PER_H_M2: Final = 0.44  # at 40 C and 25 %
SWEAT_PER_C: Final = 0.007
SWEAT_PER_PCT: Final = 0.0013


def spo2_pct(place: Place, days: float, breathing: float, *, asleep: bool) -> float:
    """Return what somebody shows at rest after some days at a place, before noise.

    `breathing` says by how many standard deviations the person breathes more than others.
    """
    elevation_m = max(place.bed_elevation_m, 0.0)
    elevation_km = elevation_m / 1000.0
    pressure_hpa = site_pressure(elevation_m, place.latitude_deg).pressure_hpa
    paco2 = float(paco2_mmhg(elevation_m, days)) - PACO2_SD_MMHG * breathing
    if asleep:
        paco2 += ASLEEP_PACO2_RISE_MMHG
    alveolar = float(alveolar_po2_mmhg(inspired_po2_mmhg(pressure_hpa), paco2))
    difference = ALVEOLAR_ARTERIAL_MMHG + ALVEOLAR_ARTERIAL_PER_KM * elevation_km
    return float(saturation_pct(alveolar - difference, PH_AT_SEA_LEVEL + PH_PER_KM * elevation_km))


def sweat_l_per_h(driver: Driver, air_temperature_c: float, humidity_pct: float) -> float:
    """Return the sweat rate of an average driver of this size in a full suit."""
    surface_m2 = float(np.asarray(body_surface_area_m2(driver.mass_kg, driver.height_cm)))
    hotter = SWEAT_PER_C * (air_temperature_c - 40.0) + SWEAT_PER_PCT * (humidity_pct - 25.0)
    return (SWEAT_L_PER_H_M2 + hotter) * surface_m2
