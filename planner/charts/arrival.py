"""The ways to a round as marks, what they cost against what they give; and one way laid out day by day."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from math import ceil, floor
from typing import Any, Final, Literal

import altair as alt
import pandas as pd

from planner.charts.season import elevation_steps
from planner.charts.spec import as_text, named, with_data
from planner.charts.theme import Mode, colour, dressed

HEIGHT: Final = 380
STRIP_HEIGHT: Final = 260
PICKED: Final = "picked"  # the name under which the chart tells which way was pressed
EASY_TO_HIT: Final = 420  # area of the invisible mark around a way, for a thumb
# Ways that cost the same nights stand side by side, so far apart, within this much of a night.
APART: Final = 0.14
MOST_OF_A_NIGHT: Final = 0.84
# The lower part of the strip belongs to the ground, the upper part to the saturation.
GROUND_SHARE: Final = 0.36
SATURATION_SHARE: Final = 0.56
HIGHEST_PCT: Final = 100
LEAST_SPAN_PCT: Final = 8
LEAST_GROUND: Final = 500.0
TICKED_BY_FIVES: Final = 14  # more points than this on the axis are ticked by fives


@dataclass(frozen=True)
class KindStyle:
    """The shape of a kind of way: in the grammar's own words, and in running text."""

    shape: str
    glyph: str


KIND_STYLES: Final[dict[str, KindStyle]] = {
    "usual plan": KindStyle("diamond", "◆"),
    "straight there": KindStyle("triangle-right", "▶"),
    "home first": KindStyle("circle", "●"),
    "half-way stop": KindStyle("triangle-up", "▲"),
    "tent at home": KindStyle("square", "■"),
    "sleep lower": KindStyle("triangle-down", "▼"),
    "the morning itself": KindStyle("cross", "✚"),
}


def side_by_side(nights: pd.Series[int]) -> list[float]:
    """Where each way stands across: its nights, moved a little where several cost the same."""
    found: list[float] = []
    for i, count in enumerate(nights):
        same = int((nights == count).sum())
        before = int((nights.iloc[:i] == count).sum())
        step = min(APART, MOST_OF_A_NIGHT / same)
        found.append(float(count) + (before - (same - 1) / 2.0) * step)
    return found


def trade_off_chart(
    ways: pd.DataFrame,
    lowest_wanted_pct: float | None,
    most_nights: int | None,
    mode: Mode = "screen",
) -> dict[str, Any]:
    """Draw what each way costs and gives: nights away across, saturation on race morning up.

    Parameters: `ways` has `way` (its number), `nights`, `mean`, `low`, `high` (%), `kind`, `fits` (bool:
    keeps every limit), `chosen` (bool: the one that is looked at) and `words`; the limits are the coach's,
    None = no such limit.
    """
    bounds = [float(ways["low"].min()), float(ways["high"].max())]
    bounds += [] if lowest_wanted_pct is None else [lowest_wanted_pct]
    nights = [int(ways["nights"].min()), int(ways["nights"].max())]
    structure = _trade_off(
        floor(min(bounds)) - 1, min(ceil(max(bounds)) + 1, HIGHEST_PCT), nights[0], nights[1], mode
    )
    lowest = pd.DataFrame({"wanted": [] if lowest_wanted_pct is None else [lowest_wanted_pct]})
    drawn = most_nights is not None and most_nights <= nights[1]
    most = pd.DataFrame({"wanted": [most_nights + 0.5] if drawn and most_nights is not None else []})
    return with_data(
        structure, ways=ways.assign(across=side_by_side(ways["nights"])), lowest=lowest, most=most
    )


@lru_cache(maxsize=64)
def _trade_off(low: int, high: int, fewest: int, most: int, mode: Mode) -> str:
    x = alt.X(
        "across:Q",
        title="nights away from home before the race",
        scale=alt.Scale(domain=[fewest - 0.6, most + 0.6], nice=False, zero=False),
        axis=alt.Axis(values=list(range(fewest, most + 1)), format="d", grid=False, labelOverlap=True),
    )
    step = 5 if high - low > TICKED_BY_FIVES else 2
    ticks = [value for value in range(low, high + 1) if value % step == 0]
    y = _saturation("SpO2 on race morning, %", [low, high], ticks, "middle")
    chosen = alt.datum["chosen"]
    paint = alt.condition(chosen, alt.value(colour("accent", mode)), alt.value(colour("text", mode)))
    dashed: dict[str, Any] = {"color": colour("muted", mode), "strokeDash": [4, 3], "strokeWidth": 1}
    shapes = alt.Scale(domain=list(KIND_STYLES), range=[style.shape for style in KIND_STYLES.values()])
    ways = named("ways").encode(x=x)
    pressed = alt.selection_point(name=PICKED, fields=["way"], on="click", toggle=False)
    chart = alt.layer(
        named("lowest").mark_rule(**dashed).encode(y=y("wanted")),
        named("most").mark_rule(**dashed).encode(x=alt.X("wanted:Q")),
        ways.mark_rule(opacity=1).encode(
            y=y("low"),
            y2="high:Q",
            stroke=alt.condition(
                chosen, alt.value(colour("accent", mode)), alt.value(colour("population_line", mode))
            ),
            strokeWidth=alt.condition(chosen, alt.value(4), alt.value(1.5)),
        ),
        ways.mark_point(opacity=1, strokeWidth=1.6).encode(
            y=y("mean"),
            shape=alt.Shape("kind:N", scale=shapes, legend=None),
            size=alt.condition(chosen, alt.value(190), alt.value(75)),
            stroke=paint,
            fill=alt.condition(
                alt.datum["fits"], alt.value(colour("text", mode)), alt.value(colour("page", mode))
            ),
        ),
        ways.mark_point(size=EASY_TO_HIT, opacity=0, filled=True)
        .encode(y=y("mean"), tooltip=[alt.Tooltip("words:N", title="way")])
        .add_params(pressed),
    )
    return as_text(dressed(chart.properties(height=HEIGHT, width="container"), mode))


def _saturation(
    title: str, domain: list[float], ticks: list[int], anchor: Literal["middle", "end"]
) -> Callable[[str], alt.Y]:
    """The axis of saturation, for whichever column is drawn on it."""
    scale = alt.Scale(domain=domain, nice=False, zero=False)
    axis = alt.Axis(values=ticks, titleAnchor=anchor, title=title)
    return lambda column: alt.Y(f"{column}:Q", scale=scale, axis=axis, title=title)


def days_chart(
    days: pd.DataFrame, track: pd.DataFrame, travel: pd.DataFrame, unit: str, mode: Mode = "screen"
) -> dict[str, Any]:
    """Draw one way day by day: where the bed stands below, what a reading on waking would be above.

    Parameters: `at` is the local day as midnight UTC. `days` has `at`, `mean`, `low`, `high` (%), `bed`
    (in `unit`) and `words`; `track` has `at`, `elevation` on days with a session; `travel` has `at`, `words`.
    """
    lowest_pct = min(floor(float(days["low"].min())) - 1, HIGHEST_PCT - LEAST_SPAN_PCT)
    highest = max([LEAST_GROUND, *days["bed"], *track["elevation"]])
    structure = _days(lowest_pct, min([0.0, *days["bed"]]), float(highest), unit, mode)
    return with_data(structure, days=days, track=track, travel=travel)


@lru_cache(maxsize=64)
def _days(lowest_pct: int, lowest: float, highest: float, unit: str, mode: Mode) -> str:
    x = alt.X(
        "at:O",
        timeUnit="utcyearmonthdate",
        title=None,
        axis=alt.Axis(format="%-d %b", grid=False, labelOverlap=True, labelAngle=0),
    )
    span = HIGHEST_PCT - lowest_pct
    y = _saturation(
        "SpO2 on waking, %",
        [HIGHEST_PCT - span / SATURATION_SHARE, HIGHEST_PCT + 0.5],
        list(range(HIGHEST_PCT, lowest_pct, -5)),
        "end",
    )
    scale = alt.Scale(domain=[lowest, highest / GROUND_SHARE], nice=False)
    axis = alt.Axis(
        orient="right",
        values=elevation_steps(highest, 3),
        labelExpr=f"replace(format(datum.value, ','), ',', '\\u2009') + ' {unit}'",
        labelColor=colour("course_line", mode),
        grid=False,
    )
    wide, narrow = alt.RelativeBandSize(0.98), alt.RelativeBandSize(0.7)
    days = named("days").encode(x=x, tooltip=[alt.Tooltip("words:N", title="on waking")])
    own: dict[str, Any] = {"color": colour("own_range", mode), "stroke": colour("own_range_line", mode)}
    saturation = alt.layer(
        days.mark_bar(**own, strokeWidth=1, width=narrow).encode(y=y("low"), y2="high:Q"),
        days.mark_tick(color=colour("text", mode), thickness=2, width=narrow).encode(y=y("mean")),
    )
    earth: dict[str, Any] = {"color": colour("course", mode), "stroke": colour("course_line", mode)}
    land = alt.layer(
        days.mark_bar(**earth, strokeWidth=1, width=wide).encode(
            y=alt.Y("bed:Q", title=None, scale=scale, axis=axis)
        ),
        named("track")
        .mark_tick(color=colour("text", mode), thickness=3, width=wide)
        .encode(x=x, y=alt.Y("elevation:Q", title=None, scale=scale, axis=axis)),
        named("travel")
        .mark_point(shape="triangle-right", size=80, filled=True, opacity=1, color=colour("text", mode))
        .encode(x=x, y=alt.value(alt.expr("height - 9")), tooltip=[alt.Tooltip("words:N", title="travel")]),
    )
    chart = alt.layer(land, saturation).resolve_scale(y="independent")
    return as_text(dressed(chart.properties(height=STRIP_HEIGHT, width="container"), mode))
