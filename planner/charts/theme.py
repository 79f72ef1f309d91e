"""The one table of colours, and what follows from it: shapes, style variables, the charts' manner.

On screen every colour is written as the CSS function light-dark(), so page and chart follow the reader's
theme by themselves, without the script having to know it. A printed page asks for one of the two by name.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Final, Literal, TypeAlias

Mode: TypeAlias = Literal["light", "dark", "screen"]
Role: TypeAlias = Literal["ground", "text", "mark", "fill"]

MINIMUM_CONTRAST: Final[dict[Role, float]] = {"text": 4.5, "mark": 3.0}  # WCAG 2.1, 1.4.3 and 1.4.11


@dataclass(frozen=True)
class Token:
    """A colour with a meaning. `on` names the grounds and fills it has to stand out from; a fill stands out
    by the mark that edges it, so it carries no minimum itself."""

    name: str
    light: str
    dark: str
    role: Role
    on: tuple[str, ...] = ()


_PAPER = ("page", "surface")
_BANDS = ("own_range", "course")

TOKENS: Final[dict[str, Token]] = {
    token.name: token
    for token in (
        Token("page", "#FAFAF7", "#12181D", "ground"),
        Token("surface", "#FFFFFF", "#1A2229", "ground"),
        Token("rule", "#DDE1E2", "#303B44", "ground"),
        Token("text", "#1F2A33", "#E8ECEE", "text", _PAPER + _BANDS),
        Token("muted", "#5C6B76", "#9AA8B2", "text", _PAPER),
        Token("accent", "#1F5F8B", "#7FB5DB", "text", _PAPER),
        Token("on_accent", "#FFFFFF", "#12181D", "text", ("accent",)),
        Token("course", "#D9CDB8", "#4A3F2B", "fill"),
        Token("course_line", "#8A6D3B", "#C7A76C", "mark", (*_PAPER, "course")),
        Token("own_range", "#BFD7E6", "#2C4A5E", "fill"),
        Token("own_range_line", "#417A9E", "#6FA0BE", "mark", (*_PAPER, "own_range")),
        Token("population_line", "#557389", "#8299AB", "mark", (*_PAPER, "own_range")),
        Token("in_range", "#3C6E71", "#7FB3B5", "text", _PAPER),
        Token("repeat", "#8A6D3B", "#D2B277", "text", _PAPER),
        Token("refer", "#9C3D54", "#E08CA0", "text", _PAPER),
        Token("urgent_ground", "#F3DDE2", "#5B1A2E", "fill"),
        Token("urgent", "#5B1A2E", "#FFD9E0", "text", (*_PAPER, "urgent_ground")),
    )
}
# Marks that are drawn over a band as well as beside it.
MARKS_ON_BANDS: Final = ("in_range", "repeat", "refer", "urgent", "muted")


@dataclass(frozen=True)
class MarkStyle:
    """How an outcome or a kind of reading is drawn; the shape alone tells them apart."""

    token: str
    shape: str  # in the grammar's own words
    filled: bool
    glyph: str  # the same shape in running text


OUTCOME_STYLES: Final[dict[str, MarkStyle]] = {
    "in range": MarkStyle("in_range", "circle", True, "●"),
    "repeat": MarkStyle("repeat", "circle", False, "○"),
    "refer": MarkStyle("refer", "triangle-up", True, "▲"),
    "urgent": MarkStyle("urgent", "square", True, "■"),
    "not measured": MarkStyle("muted", "stroke", False, "–"),
}
ASLEEP_SHAPE: Final = "diamond"  # in the colour of its outcome
LEFT_OUT_STYLE: Final = MarkStyle("muted", "cross", False, "×")


def colour(name: str, mode: Mode = "screen") -> str:
    """The colour of a token: for the screen one expression that covers both themes, else the plain value."""
    token = TOKENS[name]
    if mode == "screen":
        return f"light-dark({token.light}, {token.dark})"
    return token.light if mode == "light" else token.dark


def style_variables() -> str:
    """All tokens as CSS custom properties: --in-range: light-dark(...);"""
    return "".join(f"--{name.replace('_', '-')}:{colour(name)};" for name in TOKENS)


def streamlit_options(mode: Literal["light", "dark"]) -> dict[str, str]:
    """What `[theme.light]` or `[theme.dark]` of the configuration file has to say, from the same table."""
    return {
        "primaryColor": colour("accent", mode),
        "backgroundColor": colour("page", mode),
        "secondaryBackgroundColor": colour("surface", mode),
        "textColor": colour("text", mode),
        "linkColor": colour("accent", mode),
        "borderColor": colour("rule", mode),
        "redTextColor": colour("refer", mode),
        "redBackgroundColor": colour("surface", mode),
        "orangeTextColor": colour("repeat", mode),
        "orangeBackgroundColor": colour("surface", mode),
        "yellowTextColor": colour("repeat", mode),
        "yellowBackgroundColor": colour("surface", mode),
        "greenTextColor": colour("in_range", mode),
        "greenBackgroundColor": colour("surface", mode),
        "blueTextColor": colour("text", mode),
        "blueBackgroundColor": colour("surface", mode),
        "grayTextColor": colour("muted", mode),
    }


def dressed(chart: Any, mode: Mode = "screen") -> Any:
    """The finished top-level Altair chart in the house's manner: quiet axes, no frame, no background."""
    text, muted, rule = colour("text", mode), colour("muted", mode), colour("rule", mode)
    return chart.configure(
        background="transparent" if mode == "screen" else colour("page", mode),
        font="Source Sans, Source Sans Pro, sans-serif",
        view={"stroke": None},
        axis={
            "labelColor": text,
            "labelFontSize": 12,
            "titleColor": muted,
            "titleFontSize": 12,
            "titleFontWeight": "normal",
            "gridColor": rule,
            "gridWidth": 1,
            "domain": False,
            "ticks": False,
            "labelPadding": 6,
            "labelSeparation": 8,
        },
        legend={
            "labelColor": text,
            "labelFontSize": 12,
            "titleColor": muted,
            "titleFontSize": 12,
            "titleFontWeight": "normal",
            "orient": "bottom",
            "columns": 3,
        },
        title={"color": text, "fontSize": 13, "fontWeight": 600, "anchor": "start"},
        header={"labelColor": text, "titleColor": muted},
        text={"color": text, "fontSize": 12},
        rule={"color": muted},
        line={"color": text},
        point={"color": text},
        bar={"color": colour("accent", mode)},
    )
