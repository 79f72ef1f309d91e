"""Reading tests/published/*.csv: every row becomes one test case with its source and kind in the failure."""

from __future__ import annotations

import csv
from dataclasses import dataclass
from pathlib import Path

import pytest

FOLDER = Path(__file__).parent / "published"
KINDS = ("published", "from memory", "computed", "common practice", "judgement")


@dataclass(frozen=True)
class Row:
    """One expected value with its inputs, tolerance and provenance."""

    case: str
    given: dict[str, str]
    expected: float
    tolerance: float
    kind: str
    source: str

    def __getitem__(self, name: str) -> float:
        """An input as a number; an empty cell is not known."""
        return float(self.given[name]) if self.given[name] else float("nan")

    def check(self, value: float) -> None:
        """Assert that the value is the expected one within the row's tolerance."""
        # A hair is allowed for the binary form of decimal tolerances.
        assert abs(value - self.expected) <= self.tolerance * (1.0 + 1e-9), (
            f"{self.case}: got {value}, expected {self.expected} +- {self.tolerance} "
            f"({self.kind}: {self.source})"
        )


def read(subject: str) -> list[Row]:
    """All rows of tests/published/<subject>.csv."""
    with (FOLDER / f"{subject}.csv").open(encoding="utf-8", newline="") as file:
        rows = []
        for line in csv.DictReader(file):
            rows.append(
                Row(
                    case=line.pop("case"),
                    expected=float(line.pop("expected")),
                    tolerance=float(line.pop("tolerance")),
                    kind=line.pop("kind"),
                    source=line.pop("source"),
                    given=line,
                )
            )
    return rows


def cases(subject: str, **equals: str) -> pytest.MarkDecorator:
    """A parametrisation over the rows of a subject whose columns equal the given words."""
    chosen = [row for row in read(subject) if all(row.given[name] == word for name, word in equals.items())]
    assert chosen, f"no row of {subject}.csv has {equals}"
    return pytest.mark.parametrize("row", [pytest.param(row, id=row.case) for row in chosen])
