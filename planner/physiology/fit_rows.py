"""The published rows behind the population model, and what the model says to each of them."""

from __future__ import annotations

import csv
from collections.abc import Sequence
from dataclasses import dataclass
from importlib import resources
from typing import Final

import numpy as np

from planner.checks import FloatArray
from planner.constants import HPA_PER_MMHG
from planner.physiology.acclimatisation import _relaxed
from planner.physiology.air import site_pressure
from planner.physiology.blood import po2_mmhg
from planner.physiology.expectation import _reading_parts, _scatter_variances
from planner.physiology.oxygen import inspired_po2_mmhg
from planner.physiology.person import population_latents
from planner.physiology.population import Population
from planner.physiology.ventilation import _Chain, _chain, _target

ROWS_FILE: Final = "published/expectation.csv"
SATURATION_QUANTITIES: Final = ("saturation_pct", "saturation_fall_pct")
RESIDENT: Final = "resident"


@dataclass(frozen=True)
class FitRow:
    """A published figure: who lived where, what came before, where and how long; and what was measured."""

    case: str
    quantity: str
    home_inspired_mmhg: float
    stage_inspired_mmhg: float  # equals the home's when nothing came between
    stage_days: float
    inspired_mmhg: float
    days: float
    expected: float
    fit_sd: float
    use: str
    note: str
    kind: str
    study: str
    source: str


def read_rows() -> list[FitRow]:
    """The published rows of `published/expectation.csv`.

    Returns:
        A list of FitRow in the order of the file.
    Valid:
        As each row's note says.
    Source:
        Named on each row, with its kind (published, computed, from memory).
    """
    text = resources.files("planner.physiology").joinpath(ROWS_FILE).read_text(encoding="utf-8")
    return [_row_of(line) for line in csv.DictReader(text.splitlines())]


def predicted(rows: Sequence[FitRow], population: Population) -> FloatArray:
    """What the model says to each row, as mean or spread over the population.

    Parameters:
        rows: published rows [object].
        population: constants to try [object].
    Returns:
        Values in each row's quantity, (rows,).
    Valid:
        The quantities named in the file.
    Source:
        The chain of `ventilation` (computed).
    """
    model = _Model(rows, population)
    by_quantity = {quantity: model.of(quantity) for quantity in {row.quantity for row in rows}}
    return np.array([by_quantity[row.quantity][i] for i, row in enumerate(rows)])


def _unit_of(quantity: str) -> str:
    """The unit in which a row's residual counts."""
    return "mmHg" if quantity.endswith("mmhg") else "points"


def _row_of(line: dict[str, str]) -> FitRow:
    latitude = float(line["latitude_deg"]) if line["latitude_deg"] else np.nan
    home = _inspired(line["home_elevation_m"], latitude)
    stage = _inspired(line["stage_elevation_m"], latitude) if line["stage_elevation_m"] else home
    pressure_mmhg = line["pressure_mmhg"]
    here = (
        float(inspired_po2_mmhg(float(pressure_mmhg) * HPA_PER_MMHG))
        if pressure_mmhg
        else _inspired(line["elevation_m"], latitude)
    )
    return FitRow(
        case=line["case"],
        quantity=line["quantity"],
        home_inspired_mmhg=home,
        stage_inspired_mmhg=stage,
        stage_days=float(line["stage_days"] or 0.0),
        inspired_mmhg=here,
        days=np.inf if line["days"] == RESIDENT else float(line["days"]),
        expected=float(line["expected"]),
        fit_sd=float(line["fit_sd"]),
        use=line["use"],
        note=line["note"],
        kind=line["kind"],
        study=line["study"],
        source=line["source"],
    )


def _inspired(elevation_m: str, latitude_deg: float) -> float:
    return float(inspired_po2_mmhg(site_pressure(float(elevation_m), latitude_deg).pressure_hpa))


class _Model:
    """The model evaluated at all rows at once; each quantity picks what it needs."""

    def __init__(self, rows: Sequence[FitRow], population: Population) -> None:
        def column(name: str) -> FloatArray:
            return np.array([getattr(row, name) for row in rows], dtype=np.float64)

        self.population = population
        self.home = column("home_inspired_mmhg")
        self.stage = column("stage_inspired_mmhg")
        self.here = column("inspired_mmhg")
        self.home_state = _target(self.home, population)
        self.stage_state = _relaxed(
            self.home_state, _target(self.stage, population), column("stage_days"), population
        )
        self.state = _relaxed(self.stage_state, _target(self.here, population), column("days"), population)
        latents = population_latents(population)
        self.breathing = latents.breathing[:, None]
        self.weight = latents.weight[:, None]
        self.latents = latents

    def of(self, quantity: str) -> FloatArray:
        if quantity == "saturation_pct":
            return self._mean(self._here().saturation)
        if quantity == "paco2_mmhg":
            return self._mean(self._here().paco2)
        if quantity == "ph":
            return self._mean(self._here().ph)
        if quantity == "arterial_po2_mmhg":
            here = self._here()
            return self._mean(np.asarray(po2_mmhg(here.saturation, here.ph)))
        if quantity == "saturation_fall_pct":
            at_home = self._chain(self.home, self.home_state).saturation
            return self._mean(at_home) - self._mean(self._here().saturation)
        if quantity == "sleep_fall_pct":
            asleep = self._chain(self.here, self.state, asleep=True).saturation
            return self._mean(self._here().saturation) - self._mean(asleep)
        if quantity == "kept_gain_pct":
            return self._kept_gain()
        if quantity == "paco2_sd_mmhg":
            return self._paco2_sd()
        return self._saturation_sd(with_oximeter=quantity == "reading_sd_pct")

    def _chain(self, inspired: FloatArray, state: FloatArray, *, asleep: bool = False) -> _Chain:
        return _chain(inspired, state, self.breathing, asleep=asleep, population=self.population)

    def _here(self) -> _Chain:
        return self._chain(self.here, self.state)

    def _mean(self, values: FloatArray) -> FloatArray:
        return np.asarray((self.weight * values).sum(axis=0))

    def _variance(self, values: FloatArray) -> FloatArray:
        return self._mean((values - self._mean(values)) ** 2)

    def _kept_gain(self) -> FloatArray:
        """Share of the saturation gained at the stage that a stay elsewhere has left, tried at the stage."""
        before, gained, left = (
            self._mean(self._chain(self.stage, state).saturation)
            for state in (self.home_state, self.stage_state, self.state)
        )
        gain = gained - before
        return np.asarray(100.0 * (left - before) / np.where(gain == 0.0, 1.0, gain))

    def _paco2_sd(self) -> FloatArray:
        exchanged = (self.here - self._here().alveolar) / self._here().paco2
        day = self._mean((self.population.day_alveolar_sd_mmhg / exchanged) ** 2)
        return np.sqrt(self._variance(self._here().paco2) + day)

    def _saturation_sd(self, *, with_oximeter: bool) -> FloatArray:
        nothing = np.zeros(self.here.shape)
        if with_oximeter:
            parts = _reading_parts(self.here, self.state, self.latents, False, nothing, self.population)[2]
            return np.sqrt(parts.between_people + parts.day_to_day + parts.oximeter)
        here = self._here()
        day = self._mean(_scatter_variances(here, nothing, self.population)[0])
        return np.sqrt(self._variance(here.saturation) + self.population.admixture_sd_pct**2 + day)
