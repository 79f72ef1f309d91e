"""The season as a landscape: the calendar is the ground, a driver's course runs over it."""

from __future__ import annotations

from functools import lru_cache
from typing import Any, Final

import altair as alt
import pandas as pd

from planner.charts.spec import as_text, named, with_data
from planner.charts.theme import Mode, colour, dressed

HEIGHT: Final = 440
# Names stand upright on the ground; this much of the height is kept free above the highest round.
ROOM_FOR_NAMES: Final = 0.42
LONGEST_NAME_PX: Final = 160
# Narrower than this, only high rounds bear their names, and only where they do not run into each other.
NARROW_PX: Final = 700
NARROW_GAP: Final = 0.05  # share of the season: about a line's height on a phone


def season_chart(
    ground: pd.DataFrame,
    rounds: pd.DataFrame,
    course: pd.DataFrame,
    commitments: pd.DataFrame,
    today: pd.DataFrame,
    unit: str,
    mode: Mode = "screen",
) -> dict[str, Any]:
    """Draw the season's elevation over time.

    Parameters: all instants are UTC, all elevations in `unit`. `ground` has `at`, `elevation`; `rounds` has
    `at`, `elevation`, `top` (from where its name stands), `label` (name and date), `high` (bool); `course`
    has `at`, `elevation`, `where`; `commitments` has `at`, `label`; `today` has `at`, `label`.
    """
    heights = pd.concat([ground["elevation"], course["elevation"].astype(float), rounds["top"]])
    structure = _structure(float(heights.min()), float(heights.max()), unit, mode)
    return with_data(
        structure,
        ground=ground,
        rounds=rounds.assign(apart=names_apart(rounds)),
        course=course,
        commitments=commitments,
        today=today,
    )


@lru_cache(maxsize=64)
def _structure(lowest: float, highest: float, unit: str, mode: Mode) -> str:
    lowest = min(0.0, lowest)
    top = lowest + (highest - lowest) / (1.0 - ROOM_FOR_NAMES)
    x = alt.X(
        "at:T",
        title=None,
        scale=alt.Scale(type="utc"),
        axis=alt.Axis(format="%b", tickCount="month", grid=False, labelOverlap=True),
    )
    y = alt.Y(
        "elevation:Q",
        title=f"elevation, {unit}",
        scale=alt.Scale(domain=[lowest, max(top, lowest + 100.0)], nice=False),
        axis=alt.Axis(
            values=elevation_steps(highest, 6),
            labelExpr="replace(format(datum.value, ','), ',', '\\u2009')",
        ),
    )
    land = (
        named("ground")
        .mark_area(
            color=colour("course", mode), line={"color": colour("course_line", mode), "strokeWidth": 1.5}
        )
        .encode(x=x, y=y)
    )
    course = (
        named("course")
        .mark_line(color=colour("text", mode), strokeWidth=1.5)
        .encode(x=x, y=y, order="at:T", tooltip=[alt.Tooltip("where:N", title="the driver")])
    )
    ticks = (
        named("commitments")
        .mark_tick(color=colour("population_line", mode), thickness=2, size=10)
        .encode(
            x=x,
            y=alt.value(alt.expr("height - 5")),
            tooltip=[alt.Tooltip("label:N", title="commitment")],
        )
    )
    chart = alt.layer(land, course, ticks, *_today(x, mode), *_signposts(x, y, mode))
    return as_text(dressed(chart.properties(height=HEIGHT, width="container"), mode))


def _today(x: alt.X, mode: Mode) -> list[Any]:
    """A hairline with its word at the top."""
    base = named("today").encode(x=x)
    return [
        base.mark_rule(color=colour("refer", mode), strokeWidth=1),
        base.mark_text(align="left", baseline="top", dx=4, color=colour("muted", mode)).encode(
            y=alt.value(0), text="label:N"
        ),
    ]


def _signposts(x: alt.X, y: alt.Y, mode: Mode) -> list[Any]:
    """Each round as a point on the ground with its name standing on it."""
    base = named("rounds").encode(x=x, y=y, tooltip=[alt.Tooltip("label:N", title="round")])
    high = base.transform_filter(f"datum.high && (width >= {NARROW_PX} || datum.apart)")
    low = base.transform_filter(f"!datum.high && width >= {NARROW_PX}")
    name: dict[str, Any] = {"y": alt.Y("top:Q"), "text": alt.Text("label:N")}
    stands: dict[str, Any] = {
        "angle": 270,
        "align": "left",
        "baseline": "middle",
        "dx": 9,
        "fontSize": 12,
        "limit": LONGEST_NAME_PX,
    }
    behind: dict[str, Any] = {"stroke": colour("page", mode), "strokeWidth": 3, "strokeJoin": "round"}
    return [
        base.mark_point(filled=True, size=28, shape="circle", color=colour("course_line", mode), opacity=1),
        # The first of the two is the page's colour around the letters, so that lines do not cross them.
        high.mark_text(**stands, **behind, fontWeight=600).encode(**name),
        high.mark_text(**stands, color=colour("text", mode), fontWeight=600).encode(**name),
        low.mark_text(**stands, color=colour("muted", mode)).encode(**name),
    ]


def names_apart(rounds: pd.DataFrame) -> list[bool]:
    """Tell which names have room on a narrow screen: the highest first, each far enough from the others.

    Parameters: `rounds` has the columns `at` and `elevation`.
    """
    span = rounds["at"].max() - rounds["at"].min()
    kept: list[int] = []
    for i in rounds["elevation"].sort_values(ascending=False).index:
        if all(abs(rounds["at"][i] - rounds["at"][j]) > span * NARROW_GAP for j in kept):
            kept.append(i)
    return [i in kept for i in rounds.index]


def elevation_steps(highest: float, most: int) -> list[float]:
    """Axis values up to the highest elevation, at most so many beside zero, in steps that read easily."""
    step = next((s for s in (100, 250, 500, 1000, 2000, 5000) if highest / s <= most), 10000)
    return [float(value) for value in range(0, int(highest) + 1, step)]
