"""The nomenclature in DEVELOPERS.md and the one in the code are the same."""

from __future__ import annotations

from pathlib import Path

from planner.checks import QUANTITIES

DEVELOPERS = Path(__file__).parents[1] / "DEVELOPERS.md"
HEADING = "## Nomenclature"


def rows_in_the_code() -> list[str]:
    """The table as the code would have it, a Markdown row a quantity."""
    return [f"| `{q.name}` | {q.meaning} | {q.unit} | {q.low:g} to {q.high:g} |" for q in QUANTITIES.values()]


def rows_in_the_page() -> list[str]:
    """The rows that stand in DEVELOPERS.md."""
    page = DEVELOPERS.read_text(encoding="utf-8")
    section = page.split(HEADING, 1)[1].split("\n## ", 1)[0]
    return [line.strip() for line in section.splitlines() if line.startswith("| `")]


def test_table_in_the_page_equals_the_code() -> None:
    code, page = rows_in_the_code(), rows_in_the_page()
    to_add, to_remove = ([row for row in code if row not in page], [row for row in page if row not in code])
    assert not to_add, "\n".join(["add to DEVELOPERS.md:", *to_add])
    assert not to_remove, "\n".join(["no longer in planner/checks.py:", *to_remove])
    assert page == code, "same rows, other order"


def test_units_are_the_ones_that_names_carry() -> None:
    ending = {
        "_m": "m",
        "_hpa": "hPa",
        "_mmhg": "mmHg",
        "_c": "C",
        "_pct": "%",
        "_deg": "deg",
        "_kg": "kg",
        "_cm": "cm",
        "_bpm": "1/min",
        "_kg_m3": "kg/m3",
        "_w_m2": "W/m2",
        "_ml": "mL",
        "_l_per_h": "L/h",
    }
    for quantity in QUANTITIES.values():
        for suffix, unit in ending.items():
            if quantity.name.endswith(suffix):
                assert quantity.unit == unit, quantity.name
