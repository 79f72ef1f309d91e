"""The constants of the population model: what the fit wrote, with how sure each of them is.

`python -m planner.physiology.fit_population` writes `population.json`; nothing else holds these numbers.
"""

from __future__ import annotations

import json
from dataclasses import dataclass, fields
from functools import cache
from importlib import resources
from typing import Any, Final

CONSTANTS_FILE: Final = "population.json"


@dataclass(frozen=True)
class Population:
    """The population model's constants; meanings, priors and sources stand in `fit_parameters.PARAMETERS`."""

    sea_level_paco2_mmhg: float
    paco2_fall_per_mmhg: float
    acute_asymptote_mmhg: float
    acute_half_mmhg: float
    rise_time_d: float
    fall_time_d: float
    venous_admixture_pct: float
    respiratory_quotient: float
    quotient_rise: float
    chronic_buffering: float
    sleep_paco2_rise_mmhg: float
    breathing_sd: float
    setpoint_sd_mmhg: float
    admixture_sd_pct: float
    day_alveolar_sd_mmhg: float
    day_sd_pct: float
    device_bias_sd_pct: float
    oximeter_noise_sd_pct: float
    oximeter_noise_slope: float
    faulty_share: float


@dataclass(frozen=True)
class ParameterRow:
    """One constant for display. `kind` is "computed" for a fitted one; sd 0 = chosen, not fitted."""

    name: str
    meaning: str
    unit: str
    value: float
    sd: float
    prior: float
    prior_sd: float
    kind: str
    source: str


@dataclass(frozen=True)
class ResidualRow:
    """One published row beside the model: residual = fitted - expected, in the row's unit."""

    case: str
    quantity: str
    expected: float
    fitted: float
    residual: float
    use: str
    note: str
    kind: str
    study: str
    source: str


@dataclass(frozen=True)
class LeftOutRow:
    """One study predicted from all the others: root mean square error over its rows of one unit."""

    study: str
    unit: str
    rows: int
    rmse: float


@dataclass(frozen=True)
class ModelSummary:
    """What a screen shows of the model behind a range."""

    formulas: tuple[str, ...]
    parameters: tuple[ParameterRow, ...]
    residuals: tuple[ResidualRow, ...]
    left_out: tuple[LeftOutRow, ...]
    saturation_rmse_pct: float


FORMULAS: Final = (
    "Missing oxygen: inspired tension at standard sea level less the inspired tension here.",
    "Ventilation once acclimatised: PaCO2 falls in proportion to the missing oxygen; alveolar ventilation "
    "equation.",
    "On arrival: a share of that rise within minutes, a hyperbola in inspired oxygen (after Weil 1970); "
    "the rest over days, with one time constant up and a longer one down.",
    "Acidity: Henderson-Hasselbalch; little buffering of what is new, the kidneys' compensation of what "
    "lasts.",
    "Alveolar oxygen: full alveolar gas equation.",
    "Saturation: Severinghaus 1979 with the Bohr shift, less a venous admixture constant in points.",
    "Asleep: the same with PaCO2 raised.",
)


def _stored_constants() -> dict[str, Any]:
    """The constants file as it was written: parameters, residuals, sources."""
    text = resources.files("planner.physiology").joinpath(CONSTANTS_FILE).read_text(encoding="utf-8")
    constants: dict[str, Any] = json.loads(text)
    return constants


def _population_of(constants: dict[str, Any]) -> Population:
    """The model's constants out of the content of a constants file."""
    parameters = {row["name"]: float(row["value"]) for row in constants["parameters"]}
    return Population(**{f.name: parameters[f.name] for f in fields(Population)})


@cache
def population_model_summary() -> ModelSummary:
    """The model as data for display: formulas, constants, residual table, studies left out in turn.

    Returns:
        ModelSummary as the fit wrote it.
    Valid:
        Describes the constants in use.
    Source:
        `python -m planner.physiology.fit_population` (computed).
    """
    constants = _stored_constants()
    return ModelSummary(
        formulas=FORMULAS,
        parameters=tuple(ParameterRow(**row) for row in constants["parameters"]),
        residuals=tuple(ResidualRow(**row) for row in constants["residuals"]),
        left_out=tuple(LeftOutRow(**row) for row in constants["left_out"]),
        saturation_rmse_pct=float(constants["saturation_rmse_pct"]),
    )


POPULATION: Final = _population_of(_stored_constants())
