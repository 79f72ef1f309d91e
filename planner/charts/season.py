"""The season as a landscape: the calendar is the ground, a driver's course runs over it."""

from __future__ import annotations

from datetime import datetime
from typing import Any, Final

import altair as alt
import pandas as pd

from planner.charts.theme import Mode, colour, dressed

HEIGHT: Final = 440
# Names stand upright on the ground; this much of the height is kept free above the highest round.
ROOM_FOR_NAMES: Final = 0.42
# Narrower than this, only the high rounds bear their names: the others would run into each other.
NARROW_PX: Final = 700


def season_chart(
    ground: pd.DataFrame,
    rounds: pd.DataFrame,
    course: pd.DataFrame,
    commitments: pd.DataFrame,
    today: datetime,
    unit: str,
    mode: Mode = "screen",
) -> Any:
    """Draw the season's elevation over time.

    Parameters: all instants are UTC, all elevations in `unit`. `ground` has `at`, `elevation`; `rounds` has
    `at`, `elevation`, `top` (from where its name stands), `label` (name and date), `high` (bool); `course`
    has `at`, `elevation`, `where`; `commitments` has `at`, `label`.
    """
    highest = float(max(ground["elevation"].max(), course["elevation"].max() if len(course) else 0.0))
    lowest = min(0.0, float(ground["elevation"].min()))
    top = lowest + (highest - lowest) / (1.0 - ROOM_FOR_NAMES)
    scale = alt.Scale(domain=[lowest, max(top, lowest + 100.0)], nice=False)
    x = alt.X(
        "at:T",
        title=None,
        scale=alt.Scale(type="utc"),
        axis=alt.Axis(format="%b", tickCount="month", grid=False, labelOverlap=True),
    )
    ticks = [value for value in _round_steps(highest) if value <= highest]
    y = alt.Y(
        "elevation:Q",
        title=f"elevation, {unit}",
        scale=scale,
        axis=alt.Axis(values=ticks, labelExpr="replace(format(datum.value, ','), ',', '\\u2009')"),
    )
    land = (
        alt.Chart(ground)
        .mark_area(
            color=colour("course", mode),
            line={"color": colour("course_line", mode), "strokeWidth": 1.5},
        )
        .encode(x=x, y=y)
    )
    layers = [land]
    if len(course):
        layers.append(
            alt.Chart(course)
            .mark_line(color=colour("text", mode), strokeWidth=1.5)
            .encode(x=x, y=y, order="at:T", tooltip=[alt.Tooltip("where:N", title="the driver")])
        )
    layers += _signposts(rounds, x, y, mode)
    if len(commitments):
        layers.append(
            alt.Chart(commitments)
            .mark_tick(color=colour("population_line", mode), thickness=2, size=10)
            .encode(
                x=x,
                y=alt.value(alt.expr("height - 5")),
                tooltip=[alt.Tooltip("label:N", title="commitment")],
            )
        )
    layers.append(
        alt.Chart(pd.DataFrame({"at": [today]}))
        .mark_rule(color=colour("refer", mode), strokeWidth=1)
        .encode(x=x)
    )
    layers.append(
        alt.Chart(pd.DataFrame({"at": [today], "label": ["today"]}))
        .mark_text(align="left", baseline="top", dx=4, color=colour("muted", mode))
        .encode(x=x, y=alt.value(0), text="label:N")
    )
    return dressed(alt.layer(*layers).properties(height=HEIGHT, width="container"), mode)


def _signposts(rounds: pd.DataFrame, x: alt.X, y: alt.Y, mode: Mode) -> list[Any]:
    """Each round as a point on the ground with its name standing on it."""
    base = alt.Chart(rounds).encode(x=x, y=y, tooltip=[alt.Tooltip("label:N", title="round")])
    top = alt.Y("top:Q")
    stands: dict[str, Any] = {"angle": 270, "align": "left", "baseline": "middle", "dx": 9, "fontSize": 11}
    return [
        base.mark_point(filled=True, size=28, shape="circle", color=colour("course_line", mode), opacity=1),
        base.transform_filter("datum.high")
        .mark_text(**stands, color=colour("text", mode), fontWeight=600)
        .encode(text="label:N"),
        base.transform_calculate(shown=f"width < {NARROW_PX} ? '' : datum.label")
        .transform_filter("!datum.high")
        .mark_text(**stands, color=colour("muted", mode))
        .encode(y=top, text="shown:N"),
    ]


def _round_steps(highest: float) -> list[float]:
    """Axis values in steps that a person reads easily."""
    step = next((s for s in (100, 250, 500, 1000, 2000, 5000) if highest / s <= 6), 10000)
    return [float(value) for value in range(0, int(highest) + 1, step)]
