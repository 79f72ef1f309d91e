"""One driver's season: the ground below, the range that follows it above, the readings on it."""

from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache
from math import floor
from typing import Any, Final

import altair as alt
import pandas as pd

from planner.charts.season import NARROW_PX, elevation_steps, names_apart
from planner.charts.spec import as_text, named, with_data
from planner.charts.theme import ASLEEP_SHAPE, LEFT_OUT_STYLE, OUTCOME_STYLES, Mode, colour, dressed

HEIGHT: Final = 460
# The lower part of the picture belongs to the ground, the upper part to the saturation.
GROUND_SHARE: Final = 0.30
SATURATION_SHARE: Final = 0.64
HIGHEST_PCT: Final = 100
HIGHEST_LOWEST_PCT: Final = 88  # the axis reaches down to here at least
SPAN_OF_FIVES: Final = 12  # more points than this are ticked by fives
LEAST_GROUND: Final = 500.0  # a flat season does not look like mountains
PICKED: Final = "picked"  # the name under which the chart tells which reading was pressed
EASY_TO_HIT: Final = 500  # area of the invisible mark around a reading, for a thumb


def driver_chart(
    band: pd.DataFrame,
    ground: pd.DataFrame,
    rounds: pd.DataFrame,
    readings: pd.DataFrame,
    today: pd.DataFrame,
    unit: str,
    mode: Mode = "screen",
) -> dict[str, Any]:
    """Draw a driver's readings against the driver's own range, over the course of elevation.

    Parameters: all instants are UTC, elevations in `unit`, saturations in %. `band` has `at`, `low`, `high`,
    `population_low`, `population_high`; `ground` has `at`, `elevation`; `rounds` (the high ones) has `at`,
    `elevation`, `label`; `readings` has `at`, `spo2`, `outcome`, `kind` ("awake", "asleep", "left out"),
    `reading` (its id) and `words`; `today` has `at`, `label`.
    """
    lows = [
        float(column.min())
        for column in (band["population_low"], band["low"], readings["spo2"])
        if len(column)
    ]
    lowest_pct = min(floor(min(lows, default=HIGHEST_LOWEST_PCT)) - 1, HIGHEST_LOWEST_PCT)
    heights = [0.0, LEAST_GROUND, *ground["elevation"]]
    structure = _structure(lowest_pct, min(heights), max(heights), unit, mode)
    return with_data(
        structure,
        band=band,
        ground=ground,
        rounds=rounds.assign(apart=names_apart(rounds)),
        readings=readings,
        today=today,
    )


@lru_cache(maxsize=64)
def _structure(lowest_pct: int, lowest: float, highest: float, unit: str, mode: Mode) -> str:
    x = alt.X(
        "at:T",
        title=None,
        scale=alt.Scale(type="utc"),
        axis=alt.Axis(format="%-d %b", tickCount=8, grid=False, labelOverlap=True),
    )
    y = _saturation(lowest_pct)
    saturation = alt.layer(*_band(x, y, mode), *_today(x, mode), *_marks(x, y, mode))
    land = alt.layer(*_ground(x, lowest, highest, unit, mode))
    chart = alt.layer(land, saturation).resolve_scale(y="independent")
    return as_text(dressed(chart.properties(height=HEIGHT, width="container"), mode))


def _saturation(lowest_pct: int) -> Callable[[str], alt.Y]:
    """The axis in the upper part, for whichever column is drawn on it."""
    span = HIGHEST_PCT - lowest_pct
    scale = alt.Scale(
        domain=[HIGHEST_PCT - span / SATURATION_SHARE, HIGHEST_PCT + 0.5], nice=False, zero=False
    )
    step = 5 if span > SPAN_OF_FIVES else 2
    title = "SpO2 at rest, %"
    axis = alt.Axis(values=list(range(HIGHEST_PCT, lowest_pct, -step)), titleAnchor="end", title=title)
    return lambda column: alt.Y(f"{column}:Q", scale=scale, axis=axis, title=title)


def _band(x: alt.X, y: Callable[[str], alt.Y], mode: Mode) -> list[Any]:
    """The own range filled with an edge, the population's as a thin dashed outline."""
    base = named("band").encode(x=x)
    edge: dict[str, Any] = {"color": colour("own_range_line", mode), "strokeWidth": 1}
    outline: dict[str, Any] = {
        "color": colour("population_line", mode),
        "strokeDash": [4, 3],
        "strokeWidth": 1,
    }
    return [
        base.mark_area(color=colour("own_range", mode), opacity=1).encode(y=y("low"), y2="high:Q"),
        base.mark_line(**edge).encode(y=y("low")),
        base.mark_line(**edge).encode(y=y("high")),
        base.mark_line(**outline).encode(y=y("population_low")),
        base.mark_line(**outline).encode(y=y("population_high")),
    ]


def _marks(x: alt.X, y: Callable[[str], alt.Y], mode: Mode) -> list[Any]:
    """The readings by the shape of their outcome, and an invisible mark around each that can be pressed."""
    base = named("readings").encode(x=x, y=y("spo2"))
    layers: list[Any] = []
    for outcome, style in OUTCOME_STYLES.items():
        for kind, shape in (("awake", style.shape), ("asleep", ASLEEP_SHAPE)):
            ours = base.transform_filter(f"datum.outcome == '{outcome}' && datum.kind == '{kind}'")
            layers.append(_points(ours, shape, style.filled, colour(style.token, mode)))
    left_out = base.transform_filter("datum.kind == 'left out'")
    layers.append(_points(left_out, LEFT_OUT_STYLE.shape, False, colour(LEFT_OUT_STYLE.token, mode)))
    pressed = alt.selection_point(name=PICKED, fields=["reading"], on="click", toggle=False)
    layers.append(
        base.mark_point(size=EASY_TO_HIT, opacity=0, filled=True)
        .encode(tooltip=[alt.Tooltip("words:N", title="reading")])
        .add_params(pressed)
    )
    return layers


def _points(base: Any, shape: str, filled: bool, paint: str) -> Any:
    return base.mark_point(
        shape=shape,
        size=46,
        opacity=1,
        strokeWidth=1.6,
        stroke=paint,
        fill=paint if filled else "transparent",
    )


def _ground(x: alt.X, lowest: float, highest: float, unit: str, mode: Mode) -> list[Any]:
    """Where the driver sleeps, as the ground in the lower part, with the names of the high rounds on it."""
    y = alt.Y(
        "elevation:Q",
        title=None,
        scale=alt.Scale(domain=[lowest, highest / GROUND_SHARE], nice=False),
        axis=alt.Axis(
            orient="right",
            values=elevation_steps(highest, 3),
            labelExpr=f"replace(format(datum.value, ','), ',', '\\u2009') + ' {unit}'",
            labelColor=colour("course_line", mode),
            grid=False,
        ),
    )
    land = (
        named("ground")
        .mark_area(
            color=colour("course", mode), line={"color": colour("course_line", mode), "strokeWidth": 1.5}
        )
        .encode(x=x, y=y)
    )
    names = (
        named("rounds")
        .transform_filter(f"width >= {NARROW_PX} || datum.apart")
        .encode(x=x, y=y, text="label:N")
    )
    stands: dict[str, Any] = {"baseline": "bottom", "dy": -4, "fontSize": 12}
    return [
        land,
        names.mark_text(**stands, stroke=colour("page", mode), strokeWidth=3, strokeJoin="round"),
        names.mark_text(**stands, color=colour("muted", mode)),
    ]


def _today(x: alt.X, mode: Mode) -> list[Any]:
    """A hairline, its word between the two parts."""
    base = named("today").encode(x=x)
    return [
        base.mark_rule(color=colour("refer", mode), strokeWidth=1),
        base.mark_text(align="left", baseline="middle", dx=4, color=colour("muted", mode)).encode(
            y=alt.value(alt.expr(f"height * {(1.0 + SATURATION_SHARE - GROUND_SHARE) / 2.0}")), text="label:N"
        ),
    ]
