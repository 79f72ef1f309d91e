"""The pressure that the model atmosphere gives a place, and whether a measured one can be the place's."""

from __future__ import annotations

from math import isfinite
from typing import Final

from planner.errors import InputError
from planner.physiology.air import site_pressure
from planner.record_checks import Problem
from planner.season.model import Place

# Further from the model than this no pressure is the place's own: judgement. Deep lows and strong highs move
# it by about 4 %; one reduced to sea level is 20 % off at 2 000 m.
IMPLAUSIBLE_SHARE: Final = 0.06


def model_pressure_hpa(place: Place) -> float:
    """Return the pressure at the track by the model atmosphere for its latitude."""
    return float(site_pressure(place.track_elevation_m, place.latitude_deg).pressure_hpa)


def pressure_problem(place: Place, pressure_hpa: float) -> Problem:
    """Return what is wrong with a station pressure as that of a place, None when it can be."""
    model_hpa = model_pressure_hpa(place)
    if not isfinite(pressure_hpa) or abs(pressure_hpa / model_hpa - 1.0) <= IMPLAUSIBLE_SHARE:
        return None
    low, high = ((1.0 + sign * IMPLAUSIBLE_SHARE) * model_hpa for sign in (-1, 1))
    expected = (
        f"{low:.0f} to {high:.0f} hPa at {place.name}; "
        "a pressure reduced to sea level is not what the air there weighs"
    )
    return InputError("pressure_hpa", pressure_hpa, expected)
