"""The strip in a driver's row: the last mornings as marks against the range, drawn in plain HTML.

A page shows one strip a driver. As boxes placed in per cent they cost the script some hundredth of a
millisecond each and the browser nothing, and they follow the reader's theme by the style's variables.
"""

from __future__ import annotations

import html
import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from planner.charts.theme import LEFT_OUT_STYLE, OUTCOME_STYLES
from planner.monitoring.mornings import JudgedReading, Morning
from planner.wording import counted, day, per_cent, per_cent_range

TOP_PCT: Final = 100.5
LEAST_SPAN_PCT: Final = 8.0  # so that a point of saturation never fills the strip

STRIP_STYLE: Final = """
.p-strip{position:relative;height:3.5rem;border-bottom:1px solid var(--rule)}
.p-strip i{position:absolute;display:block}
.p-strip .band{background:var(--own-range);border-top:1px solid var(--own-range-line);
 border-bottom:1px solid var(--own-range-line);box-sizing:border-box}
.p-strip .m{width:9px;height:9px;transform:translate(-50%,50%);background:currentColor}
.p-strip .in-range{color:var(--in-range)}
.p-strip .repeat{color:var(--repeat)}
.p-strip .refer{color:var(--refer)}
.p-strip .urgent{color:var(--urgent)}
.p-strip .left-out{color:var(--muted)}
.p-strip .circle{border-radius:50%}
.p-strip .open{background:var(--surface);border:2px solid currentColor;box-sizing:border-box}
.p-strip .triangle{width:11px;height:10px;clip-path:polygon(50% 0,100% 100%,0 100%)}
.p-strip .diamond{transform:translate(-50%,50%) rotate(45deg);width:8px;height:8px}
.p-strip .cross{width:10px;height:10px;clip-path:polygon(0 18%,18% 0,50% 32%,82% 0,100% 18%,68% 50%,100% 82%,
 82% 100%,50% 68%,18% 100%,0 82%,32% 50%)}
.p-axis{display:flex;justify-content:space-between;font-size:.75rem;color:var(--muted);line-height:1.5}
"""


@dataclass(frozen=True)
class _Scale:
    low_pct: float

    def bottom(self, value_pct: float) -> float:
        """How far up the strip a saturation lies, in per cent of its height."""
        share = (value_pct - self.low_pct) / (TOP_PCT - self.low_pct)
        return 100.0 * min(max(share, 0.0), 1.0)


def strip(mornings: Sequence[Morning], low_pct: float | None = None) -> str:
    """The mornings, oldest first, as HTML with a text alternative and a line of words on every mark.

    `low_pct` is the saturation at the bottom, the same for all strips that are to be compared.
    """
    if not mornings:
        return ""
    scale = _Scale(floor_pct(mornings) if low_pct is None else low_pct)
    width = 100.0 / len(mornings)
    parts: list[str] = []
    for i, morning in enumerate(mornings):
        parts.append(_band(morning, i * width, width, scale))
        parts += [_mark(judged, (i + 0.5) * width, scale) for judged in morning.readings]
    first, last = mornings[0].on, mornings[-1].on
    return (
        f'<div class="p-strip" role="img" aria-label="{html.escape(in_words(mornings))}">'
        f"{''.join(parts)}</div>"
        f'<div class="p-axis"><span>{day(first)}</span>'
        f"<span>{per_cent_range(scale.low_pct, 100.0)}</span><span>{day(last)}</span></div>"
    )


def in_words(mornings: Sequence[Morning]) -> str:
    """The strip as a sentence, for those who do not see it."""
    read = [j for m in mornings for j in m.readings]
    if not read:
        return f"No readings in the last {counted(len(mornings), 'morning')}."
    values = ", ".join(per_cent(j.reading.spo2_pct) for j in read)
    return f"SpO2 of the last {counted(len(mornings), 'morning')}, oldest first: {values}."


def floor_pct(mornings: Sequence[Morning]) -> float:
    """A whole saturation just below everything that these mornings hold."""
    lows = [j.reading.spo2_pct for m in mornings for j in m.readings]
    lows += [m.expected.low_pct for m in mornings]
    return float(math.floor(min(min(lows, default=100.0) - 1.0, TOP_PCT - LEAST_SPAN_PCT)))


def _band(morning: Morning, left: float, width: float, scale: _Scale) -> str:
    expected = morning.expected
    low, high = scale.bottom(expected.low_pct), scale.bottom(expected.high_pct)
    title = f"{day(morning.on)}: expected {per_cent_range(expected.low_pct, expected.high_pct)}"
    return (
        f'<i class="band" title="{html.escape(title)}" '
        f'style="left:{left:.2f}%;width:{width:.2f}%;bottom:{low:.1f}%;height:{high - low:.1f}%"></i>'
    )


def _mark(judged: JudgedReading, left: float, scale: _Scale) -> str:
    reading = judged.reading
    title = f"{judged.when}, {reading.wakefulness}: {judged.words}"
    return (
        f'<i class="m {_classes(judged)}" title="{html.escape(title)}" '
        f'style="left:{left:.2f}%;bottom:{scale.bottom(reading.spo2_pct):.1f}%"></i>'
    )


def _classes(judged: JudgedReading) -> str:
    if judged.reading.left_out:
        return f"left-out {LEFT_OUT_STYLE.shape}"
    style = OUTCOME_STYLES[judged.outcome]
    name = judged.outcome.replace(" ", "-")
    if judged.reading.wakefulness == "asleep":
        return f"{name} diamond"
    shape = {"circle": "circle", "triangle-up": "triangle", "square": "square"}[style.shape]
    return f"{name} {shape}" if style.filled else f"{name} {shape} open"
