"""The first two weeks at a venue as a picture."""

from __future__ import annotations

from functools import lru_cache
from math import floor
from typing import Any, Final

import altair as alt
import pandas as pd

from planner.charts.spec import as_text, named, with_data
from planner.charts.theme import Mode, colour, dressed

HEIGHT: Final = 260
HIGHEST_LOWEST_PCT: Final = 90  # the axis reaches down to here at least


def first_days_chart(expected: pd.DataFrame, mode: Mode = "screen") -> dict[str, Any]:
    """Draw the expected saturation by days there, a band for the 95 % range and a line for its middle.

    Parameters: `expected` has the columns `days`, `low`, `mean`, `high` [%] and `range` (in words).
    """
    lowest = min(floor(float(expected["low"].min())) - 1, HIGHEST_LOWEST_PCT)
    return with_data(_structure(lowest, mode), expected=expected)


@lru_cache(maxsize=64)
def _structure(lowest_pct: int, mode: Mode) -> str:
    base = named("expected").encode(
        x=alt.X("days:Q", title="days there", axis=alt.Axis(values=[0, 3, 7, 14], grid=False))
    )
    scale = alt.Scale(domain=[lowest_pct, 100], zero=False, nice=False)
    tooltip = [alt.Tooltip("days:Q", title="days there"), alt.Tooltip("range:N", title="95 % range")]
    band = base.mark_area(
        fill=colour("own_range", mode),
        fillOpacity=0.35,
        stroke=colour("population_line", mode),
        strokeDash=[4, 3],
        strokeWidth=1,
        line=False,
    ).encode(y=alt.Y("low:Q", title="SpO2 awake at rest, %", scale=scale), y2="high:Q", tooltip=tooltip)
    middle = base.mark_line(color=colour("population_line", mode), strokeWidth=1.5).encode(
        y=alt.Y("mean:Q", scale=scale), tooltip=tooltip
    )
    return as_text(dressed((band + middle).properties(height=HEIGHT, width="container"), mode))
