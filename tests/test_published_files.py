"""Every file of published figures says where each of its rows comes from."""

from __future__ import annotations

import csv

import pytest
from published_rows import FOLDER, KINDS

FILES = sorted(FOLDER.glob("*.csv"))


@pytest.mark.parametrize("path", FILES, ids=[path.stem for path in FILES])
def test_every_row_has_a_source_a_kind_and_a_tolerance(path) -> None:
    with path.open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert rows, "a file without rows checks nothing"
    for row in rows:
        assert row["kind"] in KINDS, row
        assert row["source"].strip(), row
        assert None not in row, f"more cells than columns: {row}"
        assert float(row["tolerance"]) >= 0.0, row
    outcome = {"expected", "tolerance", "kind", "source"}
    inputs = [tuple(cell for name, cell in row.items() if name not in outcome) for row in rows]
    assert len(set(inputs)) == len(inputs), "the same case stands twice"
