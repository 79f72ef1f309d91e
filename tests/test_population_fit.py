"""The fit of the population model: re-run against the stored constants, and held against its targets."""

from __future__ import annotations

import csv
from dataclasses import fields
from importlib import resources

import numpy as np
import pytest
from published_rows import KINDS

from planner.physiology.fit_parameters import PARAMETERS
from planner.physiology.fit_population import (
    constants,
    fit,
    main,
    pooled_rmse,
    residual_table,
)
from planner.physiology.fit_rows import SATURATION_QUANTITIES, predicted, read_rows
from planner.physiology.population import (
    POPULATION,
    LeftOutRow,
    Population,
    ResidualRow,
    population_model_summary,
)

SUMMARY = population_model_summary()
AWAKE_ROWS = [r for r in SUMMARY.residuals if r.use == "fit" and r.quantity in SATURATION_QUANTITIES]
BY_DAY = [r for r in SUMMARY.residuals if r.study == "Wachsmuth 2013" and r.quantity == "paco2_mmhg"]


def case_of(row: ResidualRow) -> str:
    return f"{row.study}: {row.case}"


@pytest.fixture(scope="module")
def anew() -> dict[str, object]:
    return constants()


def test_fit_again_gives_the_stored_constants(anew: dict[str, object]) -> None:
    stored = {row.name: row for row in SUMMARY.parameters}
    for row in anew["parameters"]:
        kept = stored.pop(row["name"])
        assert row["value"] == pytest.approx(kept.value, rel=0.01)
        assert row["sd"] == pytest.approx(kept.sd, rel=0.01)
    assert not stored


def test_the_stored_tables_are_those_of_the_stored_constants(anew: dict[str, object]) -> None:
    for again, kept in zip(residual_table(read_rows(), POPULATION), SUMMARY.residuals, strict=True):
        assert again.case == kept.case
        assert again.fitted == pytest.approx(kept.fitted, rel=1e-4)
        assert kept.residual == pytest.approx(kept.fitted - kept.expected, abs=1e-4)
    for again, kept in zip(anew["left_out"], SUMMARY.left_out, strict=True):
        assert again["rmse"] == pytest.approx(kept.rmse, rel=0.01)


@pytest.mark.parametrize("row", AWAKE_ROWS, ids=[case_of(r) for r in AWAKE_ROWS])
def test_no_row_that_nothing_contradicts_is_missed_by_more_than_1_5_points(row: ResidualRow) -> None:
    assert abs(row.residual) <= 1.5, row.source


def test_root_mean_square_over_these_rows_is_at_most_one_point() -> None:
    assert np.sqrt(np.mean([r.residual**2 for r in AWAKE_ROWS])) <= 1.0


def test_chamber_drop_lies_in_its_published_interval() -> None:
    """published: 4.4 points, 95 % interval 3.9-4.9, from 198 to 2438 m (Muhm 2007, NEJM 357:18)."""
    (drop,) = (r for r in AWAKE_ROWS if r.study == "Muhm 2007")
    assert 3.9 <= drop.fitted <= 4.9


@pytest.mark.parametrize("row", BY_DAY, ids=[r.case for r in BY_DAY])
def test_paco2_by_day_at_3600_m(row: ResidualRow) -> None:
    """published: Wachsmuth 2013, Br J Sports Med 47:i93."""
    assert abs(row.residual) <= 1.5


@pytest.mark.parametrize("row", SUMMARY.left_out, ids=[f"{r.study} {r.unit}" for r in SUMMARY.left_out])
def test_each_study_is_predicted_by_the_others(row: LeftOutRow) -> None:
    assert row.rmse <= 1.5


def test_all_studies_left_out_together() -> None:
    assert pooled_rmse(SUMMARY.left_out, "points") <= 1.0


def test_capillary_oxygen_is_a_lower_bound() -> None:
    """published: Wachsmuth 2013; capillary blood reads low."""
    bounds = [r for r in SUMMARY.residuals if r.quantity == "arterial_po2_mmhg" and "lower bound" in r.note]
    assert len(bounds) == 4
    assert all(r.residual > 0.0 for r in bounds)


def test_contradicted_rows_say_by_what() -> None:
    contradicted = [r for r in SUMMARY.residuals if r.use == "contradicted"]
    assert contradicted
    assert all(len(r.note) > 30 for r in contradicted)


def test_no_constant_strays_far_from_its_prior() -> None:
    for row in SUMMARY.parameters:
        if row.prior_sd:
            assert abs(row.value - row.prior) <= 2.5 * row.prior_sd, row.name
            assert 0.0 < row.sd <= row.prior_sd
        else:
            assert row.value == row.prior


def test_every_constant_has_meaning_unit_and_source() -> None:
    names = [p.name for p in PARAMETERS]
    assert sorted(names) == sorted(f.name for f in fields(Population))
    assert all(p.meaning and p.unit and p.source for p in PARAMETERS)


def test_every_row_of_the_data_names_source_and_kind() -> None:
    text = resources.files("planner.physiology").joinpath("published/expectation.csv").read_text("utf-8")
    rows = list(csv.DictReader(text.splitlines()))
    assert len(rows) > 40
    for row in rows:
        assert row["source"].strip()
        assert row["kind"] in KINDS
        assert row["use"] in ("fit", "contradicted", "not fitted")
        assert None not in row


def test_the_fit_follows_its_data() -> None:
    """A made-up shift of one study moves the fit towards it: the rows are not decoration."""
    rows = [row for row in read_rows() if row.use == "fit"]
    moved = [
        type(row)(**{**vars(row), "expected": row.expected - 4.0}) if row.study == "Beidleman 2009" else row
        for row in rows
    ]
    ours = [i for i, row in enumerate(rows) if row.case == "4300 m within an hour"]
    before, after = (predicted(rows, fit(data).population)[ours[0]] for data in (rows, moved))
    assert after < before - 1.0


def test_the_script_prints_its_tables(
    anew: dict[str, object], capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("planner.physiology.fit_population.constants", lambda: anew)
    assert main(["--dry-run"]) == 0
    printed = capsys.readouterr().out
    for words in ("Constants", "Residuals", "Muhm 2007", "left out", "Root mean square"):
        assert words in printed
    assert "written" not in printed
