"""What the plans of a season cost and give: the trade-off as a stair, the present plan beside it."""

from __future__ import annotations

from functools import lru_cache
from math import ceil, floor
from typing import Any, Final

import altair as alt
import pandas as pd

from planner.charts.spec import as_text, named, with_data
from planner.charts.theme import Mode, colour, dressed

HEIGHT: Final = 280
PICKED: Final = "picked"  # the name under which the chart tells which plan was pressed
EASY_TO_HIT: Final = 420
# Steps of the upward axis, the first that gives at most so many ticks.
STEPS: Final = (0.1, 0.2, 0.5, 1.0, 2.0, 5.0)
MOST_TICKS: Final = 7


def season_trade_off_chart(
    plans: pd.DataFrame, present: pd.DataFrame, what: str, mode: Mode = "screen"
) -> dict[str, Any]:
    """Draw the trade-off curve.

    Parameters: `plans` has `plan` (its number), `cost` (nights' worth), `benefit` (%), `chosen` (bool) and
    `words`; `present` has `cost`, `benefit` and `words`, one row or none; `what` names the benefit.
    """
    both = pd.concat([plans[["cost", "benefit"]], present[["cost", "benefit"]]])
    low, high = float(both["benefit"].min()), float(both["benefit"].max())
    step = next((s for s in STEPS if (high - low) / s <= MOST_TICKS), STEPS[-1])
    structure = _curve(
        floor(float(both["cost"].min())) - 1,
        ceil(float(both["cost"].max())) + 1,
        round((floor(low / step) - 0.5) * step, 3),
        round((ceil(high / step) + 0.5) * step, 3),
        step,
        what,
        mode,
    )
    return with_data(structure, plans=plans, present=present)


@lru_cache(maxsize=64)
def _curve(cheapest: int, dearest: int, low: float, high: float, step: float, what: str, mode: Mode) -> str:
    x = alt.X(
        "cost:Q",
        title="cost, in nights away from home",
        scale=alt.Scale(domain=[cheapest, dearest], nice=False, zero=False),
        axis=alt.Axis(format="d", grid=False, tickMinStep=1, labelOverlap=True),
    )
    ticks = [round(low + step / 2.0 + i * step, 3) for i in range(round((high - low) / step))]
    y = alt.Y(
        "benefit:Q",
        title=what,
        scale=alt.Scale(domain=[low, high], nice=False, zero=False),
        axis=alt.Axis(values=ticks, format=".1f"),
    )
    chosen = alt.datum["chosen"]
    plans = named("plans").encode(x=x, y=y)
    pressed = alt.selection_point(name=PICKED, fields=["plan"], on="click", toggle=False)
    chart = alt.layer(
        plans.mark_line(
            interpolate="step-after", color=colour("population_line", mode), strokeWidth=1.5
        ).encode(order="cost:Q"),
        plans.mark_point(filled=True, opacity=1).encode(
            size=alt.condition(chosen, alt.value(170), alt.value(40)),
            color=alt.condition(
                chosen, alt.value(colour("accent", mode)), alt.value(colour("own_range_line", mode))
            ),
        ),
        named("present")
        .mark_point(shape="diamond", size=150, filled=False, strokeWidth=2, color=colour("text", mode))
        .encode(x=x, y=y, tooltip=[alt.Tooltip("words:N", title="now")]),
        plans.mark_point(size=EASY_TO_HIT, opacity=0, filled=True)
        .encode(tooltip=[alt.Tooltip("words:N", title="plan")])
        .add_params(pressed),
    )
    return as_text(dressed(chart.properties(height=HEIGHT, width="container"), mode))
