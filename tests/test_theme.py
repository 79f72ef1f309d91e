"""The table of colours: contrast (WCAG 2.1, published formula), its copy in the configuration."""

from __future__ import annotations

import re
import tomllib
from itertools import product
from pathlib import Path

import pytest

from planner.charts.theme import (
    MARKS_ON_BANDS,
    MINIMUM_CONTRAST,
    OUTCOME_STYLES,
    TOKENS,
    colour,
    streamlit_options,
    style_variables,
)

ROOT = Path(__file__).resolve().parents[1]
THEME_FILE = ROOT / "planner" / "charts" / "theme.py"
MODES = ("light", "dark")


def luminance(hex_colour: str) -> float:
    """Relative luminance, WCAG 2.1 (published)."""
    parts = [int(hex_colour[i : i + 2], 16) / 255.0 for i in (1, 3, 5)]
    red, green, blue = (p / 12.92 if p <= 0.03928 else ((p + 0.055) / 1.055) ** 2.4 for p in parts)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def contrast(one: str, other: str) -> float:
    """Contrast ratio, WCAG 2.1 (published)."""
    low, high = sorted((luminance(one), luminance(other)))
    return (high + 0.05) / (low + 0.05)


def test_contrast_of_known_pairs() -> None:
    """Published: black on white is 21:1; #767676 on white is the usual example just above 4.5:1."""
    assert contrast("#000000", "#FFFFFF") == pytest.approx(21.0)
    assert contrast("#767676", "#FFFFFF") == pytest.approx(4.54, abs=0.005)


PAIRS = [(token.name, ground) for token in TOKENS.values() for ground in token.on]


@pytest.mark.parametrize("mode", MODES)
@pytest.mark.parametrize(("name", "ground"), PAIRS)
def test_text_and_marks_stand_out(name: str, ground: str, mode: str) -> None:
    needed = MINIMUM_CONTRAST[TOKENS[name].role]
    assert contrast(colour(name, mode), colour(ground, mode)) >= needed


@pytest.mark.parametrize(("name", "band", "mode"), list(product(MARKS_ON_BANDS, ("own_range",), MODES)))
def test_marks_stand_out_from_the_range_they_lie_on(name: str, band: str, mode: str) -> None:
    assert contrast(colour(name, mode), colour(band, mode)) >= MINIMUM_CONTRAST["mark"]


def test_every_text_and_mark_is_held_to_a_ground() -> None:
    assert all(t.on for t in TOKENS.values() if t.role in MINIMUM_CONTRAST)


def test_outcomes_differ_by_shape_alone() -> None:
    shapes = [(s.shape, s.filled) for s in OUTCOME_STYLES.values()]
    assert len(set(shapes)) == len(shapes)
    assert len({s.glyph for s in OUTCOME_STYLES.values()}) == len(shapes)


@pytest.mark.parametrize("mode", MODES)
def test_the_configuration_file_repeats_the_table(mode: str) -> None:
    config = tomllib.loads((ROOT / "planner" / ".streamlit" / "config.toml").read_text(encoding="utf-8"))
    assert config["theme"][mode] == streamlit_options(mode)


def test_the_style_variables_name_every_token_in_both_themes() -> None:
    variables = style_variables()
    for token in TOKENS.values():
        assert f"--{token.name.replace('_', '-')}:light-dark({token.light}, {token.dark});" in variables


def test_no_colour_is_written_anywhere_else() -> None:
    hex_colour = re.compile(r"#[0-9A-Fa-f]{6}\b|#[0-9A-Fa-f]{3}\b|\brgba?\(|\bhsla?\(")
    code = [*ROOT.glob("planner/**/*.py"), *ROOT.glob("pages/*.py")]
    found = [
        f"{path.relative_to(ROOT)}:{number}"
        for path in code
        if path != THEME_FILE
        for number, line in enumerate(path.read_text(encoding="utf-8").splitlines(), 1)
        if hex_colour.search(line)
    ]
    assert code
    assert found == []
