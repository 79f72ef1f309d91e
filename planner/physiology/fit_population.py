"""Fit the population model to the published rows, and write its constants with their uncertainties.

Run `python -m planner.physiology.fit_population` to see the constants, the residual table and the table of
studies left out in turn, and to write `population.json`; `--dry-run` writes nothing.

The fit is the most probable set of constants given priors and rows (least squares over both, by
Levenberg-Marquardt), with the normal approximation at the optimum for the uncertainties.
"""

from __future__ import annotations

import argparse
import json
import sys
from collections.abc import Sequence
from dataclasses import asdict, dataclass, fields
from pathlib import Path
from typing import Any, Final

import numpy as np

from planner.checks import FloatArray
from planner.physiology.fit_parameters import PARAMETERS
from planner.physiology.fit_rows import SATURATION_QUANTITIES, FitRow, _unit_of, predicted, read_rows
from planner.physiology.population import CONSTANTS_FILE, LeftOutRow, ParameterRow, Population, ResidualRow

LARGEST_STEPS: Final = 60
STEP_FOR_SLOPES: Final = 1e-4  # in prior standard deviations
ENOUGH: Final = 1e-7
FIRST_DAMPING: Final = 1e-2
DIGITS: Final = 6  # significant digits written


FITTED: Final = tuple(p for p in PARAMETERS if p.prior_sd > 0.0)


@dataclass(frozen=True)
class Fit:
    """The most probable constants and, for the fitted ones in the order of `FITTED`, their sd."""

    population: Population
    sd: FloatArray


def fit(rows: Sequence[FitRow]) -> Fit:
    """The most probable constants given the priors and the rows.

    Parameters:
        rows: published rows to fit [object].
    Returns:
        Fit with the constants and their standard deviations.
    Valid:
        Rows whose quantities the model knows.
    Source:
        Levenberg-Marquardt and the normal approximation at the optimum (common practice); computed.
    """
    expected = np.array([row.expected for row in rows])
    fit_sd = np.array([row.fit_sd for row in rows])

    def misses(steps: FloatArray) -> FloatArray:
        return np.concatenate([(predicted(rows, _population_at(steps)) - expected) / fit_sd, steps])

    at = np.zeros(len(FITTED))
    miss = misses(at)
    damping = FIRST_DAMPING
    for _ in range(LARGEST_STEPS):
        slopes = _slopes(misses, at, miss)
        curvature = slopes.T @ slopes
        step = np.linalg.solve(curvature + damping * np.eye(at.size), -slopes.T @ miss)
        tried = misses(at + step)
        if tried @ tried < miss @ miss:
            at, miss, damping = at + step, tried, damping / 5.0
        else:
            damping *= 4.0
        if np.abs(step).max() < ENOUGH:
            break
    slopes = _slopes(misses, at, miss)
    prior_sd = np.array([p.prior_sd for p in FITTED])
    sd = prior_sd * np.sqrt(np.diag(np.linalg.inv(slopes.T @ slopes)))
    return Fit(_population_at(at), sd)


def residual_table(rows: Sequence[FitRow], population: Population) -> list[ResidualRow]:
    """Every row beside the model, those that were not fitted too.

    Parameters:
        rows: published rows [object].
        population: constants to compare [object].
    Returns:
        One ResidualRow for each row.
    Valid:
        As predicted.
    Source:
        Computed.
    """
    values = predicted(rows, population)
    return [
        ResidualRow(
            case=row.case,
            quantity=row.quantity,
            expected=row.expected,
            fitted=_rounded(float(value)),
            residual=_rounded(float(value) - row.expected),
            use=row.use,
            note=row.note,
            kind=row.kind,
            study=row.study,
            source=row.source,
        )
        for row, value in zip(rows, values, strict=True)
    ]


def left_out_table(rows: Sequence[FitRow]) -> list[LeftOutRow]:
    """Each study in turn predicted by a fit to all the others.

    Parameters:
        rows: the fitted rows [object].
    Returns:
        One LeftOutRow for each study and unit; rows of spread are not counted.
    Valid:
        At least two studies.
    Source:
        Leave-one-study-out (common practice); computed.
    """
    table: list[LeftOutRow] = []
    for study in dict.fromkeys(row.study for row in rows):
        held_back = [row for row in rows if row.study == study and not _is_spread(row)]
        if not held_back:
            continue
        others = fit([row for row in rows if row.study != study])
        residuals = predicted(held_back, others.population) - [row.expected for row in held_back]
        units = np.array([_unit_of(row.quantity) for row in held_back])
        for unit in dict.fromkeys(units.tolist()):
            of_unit = residuals[units == unit]
            table.append(LeftOutRow(study, unit, of_unit.size, _rounded(_rms(of_unit))))
    return table


def pooled_rmse(left_out: Sequence[LeftOutRow], unit: str) -> float:
    """Root mean square error over all rows of all studies left out, of one unit.

    Parameters:
        left_out: the table of studies left out [object].
        unit: "points" or "mmHg" [word].
    Returns:
        The error in that unit [1].
    Valid:
        A unit that the table holds.
    Source:
        Computed.
    """
    ours = [row for row in left_out if row.unit == unit]
    return float(np.sqrt(sum(r.rows * r.rmse**2 for r in ours) / sum(r.rows for r in ours)))


def constants() -> dict[str, Any]:
    """The content of the constants file, computed anew.

    Returns:
        Parameters, residuals and the table of studies left out, as they are written.
    Valid:
        Takes some seconds.
    Source:
        Fitted (computed) to `published/expectation.csv`.
    """
    rows = read_rows()
    fitted_rows = [row for row in rows if row.use == "fit"]
    result = fit(fitted_rows)
    residuals = residual_table(rows, result.population)
    counted = [r.residual for r in residuals if r.use == "fit" and r.quantity in SATURATION_QUANTITIES]
    return {
        "written_by": "python -m planner.physiology.fit_population",
        "parameters": [asdict(row) for row in _parameter_rows(result)],
        "saturation_rmse_pct": _rounded(_rms(np.array(counted))),
        "residuals": [asdict(row) for row in residuals],
        "left_out": [asdict(row) for row in left_out_table(fitted_rows)],
    }


def _population_at(steps: FloatArray) -> Population:
    """The constants at so many prior standard deviations from the priors."""
    values = {p.name: p.prior for p in PARAMETERS}
    for parameter, step in zip(FITTED, steps, strict=True):
        values[parameter.name] += parameter.prior_sd * float(step)
    return Population(**{f.name: values[f.name] for f in fields(Population)})


def _slopes(misses: Any, at: FloatArray, miss: FloatArray) -> FloatArray:
    steps = STEP_FOR_SLOPES * np.eye(at.size)
    return np.stack([(misses(at + step) - miss) / STEP_FOR_SLOPES for step in steps], axis=1)


def _parameter_rows(result: Fit) -> list[ParameterRow]:
    sd = {p.name: float(s) for p, s in zip(FITTED, result.sd, strict=True)}
    return [
        ParameterRow(
            name=p.name,
            meaning=p.meaning,
            unit=p.unit,
            value=_rounded(float(getattr(result.population, p.name))),
            sd=_rounded(sd.get(p.name, 0.0)),
            prior=p.prior,
            prior_sd=p.prior_sd,
            kind=p.kind,
            source=p.source,
        )
        for p in PARAMETERS
    ]


def _is_spread(row: FitRow) -> bool:
    return "_sd_" in row.quantity


def _rms(values: FloatArray) -> float:
    return float(np.sqrt(np.mean(values**2)))


def _rounded(value: float) -> float:
    return float(f"{value:.{DIGITS}g}")


def _printed(content: dict[str, Any]) -> str:
    lines = ["Constants", f"{'name':24s}{'value':>10s}{'sd':>9s}{'prior':>9s}{'sd':>8s}  unit"]
    for p in content["parameters"]:
        lines.append(
            f"{p['name']:24s}{p['value']:10.4g}{p['sd']:9.2g}{p['prior']:9.3g}{p['prior_sd']:8.2g}"
            f"  {p['unit']}"
        )
    lines += ["", "Residuals (fitted - expected)"]
    for r in content["residuals"]:
        lines.append(
            f"{r['study']:22s}{r['case']:46s}{r['quantity']:21s}{r['expected']:8.2f}{r['fitted']:8.2f}"
            f"{r['residual']:+7.2f}  {r['use']}"
        )
    lines.append(f"Root mean square over the fitted saturations: {content['saturation_rmse_pct']:.2f} points")
    lines += ["", "Each study left out and predicted from the others"]
    left_out = [LeftOutRow(**row) for row in content["left_out"]]
    for row in left_out:
        lines.append(f"{row.study:22s}{row.rows:3d} rows  rmse {row.rmse:5.2f} {row.unit}")
    for unit in ("points", "mmHg"):
        lines.append(f"all studies: rmse {pooled_rmse(left_out, unit):.2f} {unit}")
    return "\n".join(lines)


def main(arguments: Sequence[str] | None = None) -> int:
    """Fit, print the tables and write the constants.

    Parameters:
        arguments: command-line words [word]; None = those of the process.
    Returns:
        Exit status [1].
    Valid:
        Run from a checkout: it writes beside this module.
    Source:
        None needed: the entry of the script; its numbers are computed.
    """
    parser = argparse.ArgumentParser(prog="python -m planner.physiology.fit_population", description=__doc__)
    parser.add_argument("--dry-run", action="store_true", help="write nothing")
    options = parser.parse_args(arguments)
    content = constants()
    sys.stdout.write(_printed(content) + "\n")
    if not options.dry_run:
        target = Path(__file__).with_name(CONSTANTS_FILE)
        target.write_text(json.dumps(content, indent=1, ensure_ascii=False) + "\n", encoding="utf-8")
        sys.stdout.write(f"written: {target.name}\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
