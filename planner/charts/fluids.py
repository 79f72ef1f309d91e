"""Drinks as a picture: a timeline with bottles in plain HTML, and weighed beside predicted sweat as a chart.

The timeline is boxes, as the strip of mornings is: it costs the script next to nothing and follows the
reader's theme by the style's variables.
"""

from __future__ import annotations

import html
import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any, Final

import altair as alt
import pandas as pd

from planner.charts.spec import as_text, named, with_data
from planner.charts.theme import Mode, colour, dressed

MOST_BOTTLES: Final = 6
CHART_HEIGHT: Final = 300

FLUIDS_STYLE: Final = """
.p-course{display:grid;gap:0;border-top:2px solid var(--course-line);margin:.35rem 0 .5rem}
.p-step{position:relative;padding:.6rem .75rem .35rem 0;min-width:0}
.p-step::before{content:"";position:absolute;top:-6px;left:0;width:2px;height:10px;background:var(--course-line)}
.p-step.p-car{background:var(--surface);padding-left:.6rem;border-left:1px solid var(--rule);
 border-right:1px solid var(--rule)}
.p-step.p-car+.p-step{padding-left:.6rem}
.p-when{font-weight:600;font-size:.9375rem}
.p-amount{font-size:1.125rem;font-weight:600;line-height:1.3}
.p-bottles{display:flex;gap:.35rem;align-items:flex-end;height:4rem;padding-bottom:.35rem}
.p-bottle{position:relative;width:1.35rem;height:3rem;border:1.5px solid var(--own-range-line);
 border-radius:.35rem .35rem .25rem .25rem;box-sizing:border-box}
.p-bottle::before{content:"";position:absolute;top:-.5rem;left:calc(50% - .3rem);width:.6rem;height:.42rem;
 border:1.5px solid var(--own-range-line);border-bottom:0;border-radius:.15rem .15rem 0 0;
 box-sizing:border-box}
.p-bottle i{position:absolute;left:0;right:0;bottom:0;background:var(--own-range);
 border-top:1.5px solid var(--own-range-line);border-radius:0 0 .15rem .15rem}
@media (max-width:640px){
 .p-course{grid-template-columns:minmax(0,1fr)!important;border-top:0;
  border-left:2px solid var(--course-line)}
 .p-step,.p-step.p-car,.p-step.p-car+.p-step{display:grid;grid-template-columns:minmax(0,1fr) auto;
  column-gap:.75rem;padding:.4rem 0 .4rem .75rem;border-left:0;border-right:0}
 .p-step::before{top:.9rem;left:-6px;width:10px;height:2px}
 .p-step .p-bottles{grid-column:2;grid-row:1/span 4;height:auto;align-self:center;padding:.5rem 0 0}
}
"""


@dataclass(frozen=True)
class CourseStep:
    """One step of the timeline in words, with how many bottles it is; `weight` is its share of the time."""

    when: str
    label: str
    amount: str
    range_words: str
    bottles: float
    weight: float
    in_the_car: bool = False


def drinks_course(steps: Sequence[CourseStep]) -> str:
    """The timeline as HTML: time from left to right, on a phone from top to bottom."""
    columns = " ".join(f"minmax(8rem,{max(step.weight, 0.1):.2f}fr)" for step in steps)
    cells = "".join(_step(step) for step in steps)
    return f'<div class="p-course" style="grid-template-columns:{columns}">{cells}</div>'


def bottles(amount: float) -> str:
    """So many bottles side by side, the last one part full, with a text alternative."""
    if not math.isfinite(amount) or amount <= 0.0:
        return ""
    whole, rest = divmod(min(amount, float(MOST_BOTTLES)), 1.0)
    fills = [100.0] * int(whole) + ([100.0 * rest] if rest >= 0.03 else [])
    more = f' <span class="p-small">of {amount:.1f}</span>' if amount > MOST_BOTTLES else ""
    drawn = "".join(f'<span class="p-bottle"><i style="height:{fill:.0f}%"></i></span>' for fill in fills)
    return f'<span class="p-bottles" role="img" aria-label="{amount:.1f} bottles">{drawn}{more}</span>'


def _step(step: CourseStep) -> str:
    kind = "p-step p-car" if step.in_the_car else "p-step"
    return (
        f'<div class="{kind}"><div class="p-when">{html.escape(step.when)}</div>'
        f'<div class="p-small">{html.escape(step.label)}</div>'
        f"{bottles(step.bottles) or '<span class=p-bottles></span>'}"
        f'<div class="p-amount">{html.escape(step.amount)}</div>'
        f'<div class="p-small">{html.escape(step.range_words)}</div></div>'
    )


def sweat_chart(weighed: pd.DataFrame, unit: str, mode: Mode = "screen") -> dict[str, Any]:
    """Draw one driver's weighed sweat rates with their error beside what was predicted.

    Parameters: `weighed` has `at` (text, in order), `rate`, `low`, `high`, `predicted` [`unit`], `words`,
    `taught` (bool).
    """
    return with_data(_structure(unit, mode), weighed=weighed)


@lru_cache(maxsize=16)
def _structure(unit: str, mode: Mode) -> str:
    x = alt.X("at:N", sort=None, title=None, axis=alt.Axis(labelAngle=-40, labelLimit=160, grid=False))
    base = named("weighed").encode(x=x, tooltip=[alt.Tooltip("words:N", title="weighing")])
    error = base.mark_rule(color=colour("own_range_line", mode), strokeWidth=2).encode(
        y=alt.Y("low:Q", title=f"sweat, {unit}", scale=alt.Scale(zero=True, nice=True)), y2="high:Q"
    )
    taught, left_out = (alt.value(colour(name, mode)) for name in ("accent", "muted"))
    rate = base.mark_point(size=70, filled=True, opacity=1.0).encode(
        y=alt.Y("rate:Q"),
        color=alt.condition("datum.taught", taught, left_out),
        shape=alt.condition("datum.taught", alt.value("circle"), alt.value("cross")),
    )
    predicted = base.mark_tick(color=colour("population_line", mode), thickness=2, width=18).encode(
        y=alt.Y("predicted:Q")
    )
    chart = dressed((error + predicted + rate).properties(height=CHART_HEIGHT, width="container"), mode)
    return as_text(chart)
