"""The constants of the population model: what the fit wrote, with how sure each of them is.

`python -m planner.physiology.fit_population` writes `population.json`; nothing else holds these numbers.
"""

from __future__ import annotations

import json
from dataclasses import dataclass, fields
from importlib import resources
from typing import Any, Final

CONSTANTS_FILE: Final = "population.json"


@dataclass(frozen=True)
class Population:
    """The population model's constants; meanings, priors and sources stand in `fit_population`."""

    sea_level_paco2_mmhg: float
    ventilation_gain_per_mmhg: float
    acute_half_mmhg: float
    acute_width_mmhg: float
    rise_time_d: float
    fall_time_d: float
    venous_admixture_pct: float
    respiratory_quotient: float
    chronic_buffering: float
    sleep_paco2_rise_mmhg: float
    breathing_sd: float
    admixture_sd_pct: float
    day_alveolar_sd_mmhg: float
    day_sd_pct: float
    device_bias_sd_pct: float
    oximeter_noise_sd_pct: float
    oximeter_noise_slope: float


def stored_constants() -> dict[str, Any]:
    """The constants file as it was written: parameters, residuals, sources."""
    text = resources.files("planner.physiology").joinpath(CONSTANTS_FILE).read_text(encoding="utf-8")
    constants: dict[str, Any] = json.loads(text)
    return constants


def population_of(constants: dict[str, Any]) -> Population:
    """The model's constants out of the content of a constants file."""
    parameters = constants["parameters"]
    return Population(**{f.name: float(parameters[f.name]["value"]) for f in fields(Population)})


POPULATION: Final = population_of(stored_constants())
