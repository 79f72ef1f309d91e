"""One driver's season: the ground below, the range that follows it above, the readings on it."""

from __future__ import annotations

from collections.abc import Callable
from datetime import datetime
from typing import Any, Final

import altair as alt
import pandas as pd

from planner.charts.season import NARROW_PX, elevation_steps, names_apart
from planner.charts.theme import ASLEEP_SHAPE, LEFT_OUT_STYLE, OUTCOME_STYLES, Mode, colour, dressed

HEIGHT: Final = 460
# The lower part of the picture belongs to the ground, the upper part to the saturation.
GROUND_SHARE: Final = 0.30
SATURATION_SHARE: Final = 0.64
HIGHEST_PCT: Final = 100.0
HIGHEST_LOWEST_PCT: Final = 88.0  # the axis reaches down to here at least
LEAST_GROUND: Final = 500.0  # a flat season does not look like mountains
PICKED: Final = "picked"  # the name under which the chart tells which reading was pressed
EASY_TO_HIT: Final = 500  # area of the invisible mark around a reading, for a thumb


def driver_chart(
    band: pd.DataFrame,
    ground: pd.DataFrame,
    rounds: pd.DataFrame,
    readings: pd.DataFrame,
    today: datetime,
    unit: str,
    mode: Mode = "screen",
) -> Any:
    """Draw a driver's readings against the driver's own range, over the course of elevation.

    Parameters: all instants are UTC, elevations in `unit`, saturations in %. `band` has `at`, `low`, `high`,
    `population_low`, `population_high`; `ground` has `at`, `elevation`; `rounds` (the high ones) has `at`,
    `elevation`, `label`; `readings` has `at`, `spo2`, `outcome`, `kind` ("awake", "asleep", "left out"),
    `reading` (its id) and `words`.
    """
    x = alt.X(
        "at:T",
        title=None,
        scale=alt.Scale(type="utc"),
        axis=alt.Axis(format="%-d %b", tickCount=8, grid=False, labelOverlap=True),
    )
    y = _saturation(band, readings)
    saturation = alt.layer(*_band(band, x, y, mode), *_today(today, x, mode), *_marks(readings, x, y, mode))
    land = alt.layer(*_ground(ground, rounds, x, unit, mode))
    chart = alt.layer(land, saturation).resolve_scale(y="independent")
    return dressed(chart.properties(height=HEIGHT, width="container"), mode)


def _saturation(band: pd.DataFrame, readings: pd.DataFrame) -> Callable[[str], alt.Y]:
    """The axis in the upper part, for whichever column is drawn on it."""
    lowest = min(
        float(frame.min()) for frame in (band["population_low"], band["low"], readings["spo2"]) if len(frame)
    )
    lowest = min(lowest - 1.0, HIGHEST_LOWEST_PCT)
    bottom = HIGHEST_PCT - (HIGHEST_PCT - lowest) / SATURATION_SHARE
    step = 5 if HIGHEST_PCT - lowest > 12.0 else 2
    scale = alt.Scale(domain=[bottom, HIGHEST_PCT + 0.5], nice=False, zero=False)
    axis = alt.Axis(values=list(range(100, int(lowest), -step)), titleAnchor="end", title="SpO2 at rest, %")
    return lambda column: alt.Y(f"{column}:Q", scale=scale, axis=axis, title="SpO2 at rest, %")


def _band(band: pd.DataFrame, x: alt.X, y: Callable[[str], alt.Y], mode: Mode) -> list[Any]:
    """The own range filled with an edge, the population's as a thin dashed outline."""
    base = alt.Chart(band).encode(x=x)
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


def _marks(readings: pd.DataFrame, x: alt.X, y: Callable[[str], alt.Y], mode: Mode) -> list[Any]:
    """The readings by the shape of their outcome, and an invisible mark around each that can be pressed."""
    base = alt.Chart(readings).encode(x=x, y=y("spo2"))
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


def _ground(ground: pd.DataFrame, rounds: pd.DataFrame, x: alt.X, unit: str, mode: Mode) -> list[Any]:
    """Where the driver sleeps, as the ground in the lower part, with the names of the high rounds on it."""
    highest = max(float(ground["elevation"].max()) if len(ground) else 0.0, LEAST_GROUND)
    lowest = min(0.0, float(ground["elevation"].min())) if len(ground) else 0.0
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
        alt.Chart(ground)
        .mark_area(
            color=colour("course", mode), line={"color": colour("course_line", mode), "strokeWidth": 1.5}
        )
        .encode(x=x, y=y)
    )
    if not len(rounds):
        return [land]
    named = (
        alt.Chart(rounds.assign(apart=names_apart(rounds)))
        .transform_filter(f"width >= {NARROW_PX} || datum.apart")
        .encode(x=x, y=y, text="label:N")
    )
    stands: dict[str, Any] = {"baseline": "bottom", "dy": -4, "fontSize": 11}
    return [
        land,
        named.mark_text(**stands, stroke=colour("page", mode), strokeWidth=3, strokeJoin="round"),
        named.mark_text(**stands, color=colour("muted", mode)),
    ]


def _today(today: datetime, x: alt.X, mode: Mode) -> list[Any]:
    base = alt.Chart(pd.DataFrame({"at": [today], "label": ["today"]})).encode(x=x)
    return [
        base.mark_rule(color=colour("refer", mode), strokeWidth=1),
        base.mark_text(align="left", baseline="middle", dx=4, color=colour("muted", mode)).encode(
            y=alt.value(alt.expr(f"height * {(1.0 + SATURATION_SHARE - GROUND_SHARE) / 2.0}")), text="label:N"
        ),
    ]
