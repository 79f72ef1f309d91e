"""What the last sessions taught: habits first, then each driver's own rate and the weighings behind it."""

from __future__ import annotations

from collections.abc import Mapping
from zoneinfo import ZoneInfo

import pandas as pd
import streamlit as st

from planner.charts.fluids import sweat_chart
from planner.hydration.reasons import order_of_trust
from planner.hydration.weighings import Weighed
from planner.physiology.sweat import RANGE_SD
from planner.services.fluids import SessionDrinks, Taught, taught_of
from planner.ui.cached import calendar_of
from planner.ui.fluids_cached import weighed_by
from planner.ui.fluids_plan import choose_driver
from planner.ui.fluids_words import rate, rate_range, rate_unit, signed_pct, weighed_words
from planner.ui.page import Context, note_for_next_run
from planner.ui.tables import note, table
from planner.ui.text import escaped
from planner.units import from_house
from planner.wording import DASH, day_and_clock, number, per_cent, volume

SHOWN = 12


def draw_taught(ctx: Context, drinks: SessionDrinks) -> None:
    """Habits, everybody's own rate, and one driver's weighings."""
    taught = taught_of(calendar_of(ctx), weighed_by(ctx), ctx.units)
    for each in taught:
        for finding in each.findings:
            st.html(
                f'<div class="p-name">{escaped(each.driver.name)}: {escaped(finding.kind)}</div>'
                f'<div class="p-why">{escaped(finding.sentence)}</div>'
            )
    _draw_everybody(ctx, taught, drinks)
    chosen = choose_driver([each.driver for each in taught])
    _draw_driver(ctx, next(each for each in taught if each.driver.id == chosen), drinks)


def _draw_everybody(ctx: Context, taught: tuple[Taught, ...], drinks: SessionDrinks) -> None:
    plans = {row.driver.id: row.plan for row in drinks.rows}
    rows = []
    for each in sorted(taught, key=lambda t: t.driver.name):
        plan = plans[each.driver.id]
        last = each.weighed[0] if each.weighed else None
        rows.append(
            [
                each.driver.name,
                str(len(each.weighed)),
                rate(last.sweat_l_per_h, ctx.units) if last else DASH,
                volume(last.weighing.drink_ml, ctx.units) if last else DASH,
                signed_pct(last.mass_change_pct) if last else DASH,
                number(float(plan.ratio), 2),
                per_cent(100.0 * float(plan.own_share)),
                rate_range(plan.sweat_rate_l_per_h, ctx.units),
            ]
        )
    table(
        ["", "weighings", "last sweat", "drunk", "mass", "own over predicted", "own share", "expected next"],
        rows,
        right=range(1, 8),
        caption=f"Measured so far, and what it says for {drinks.at.session.name}, {drinks.at.round.name}",
        stack=True,
    )
    note(
        "Own over predicted: 1 is what the heat balance says of anybody of this size. Own share: how much of "
        "the range the weighings have made the driver's own."
    )


def _draw_driver(ctx: Context, taught: Taught, drinks: SessionDrinks) -> None:
    if not taught.weighed:
        note(f"{taught.driver.name} has no finished weighing: weigh in before a session and out after it.")
        return
    plan = next(row.plan for row in drinks.rows if row.driver.id == taught.driver.id)
    st.html(f'<div class="p-line">{escaped(taught.driver.name)}: {escaped(order_of_trust(plan))}.</div>')
    shown = taught.weighed[:SHOWN]
    places = calendar_of(ctx).places
    zones = {w.weighing.id: places[w.weighing.place_id].zone for w in shown}
    st.vega_lite_chart(
        spec=sweat_chart(_frame(ctx, shown, zones), rate_unit(ctx.units)),
        theme=None,
        width="stretch",
        alt="Weighed sweat rates, oldest first: "
        + ", ".join(rate(w.sweat_l_per_h, ctx.units) for w in reversed(shown)),
    )
    note("Points: weighed, with the error of the scale; ticks: predicted; crosses: left out.")
    with st.expander(f"The last {len(shown)} weighings"):
        for each in shown:
            left_out = f" Left out: {each.left_out}." if each.left_out else ""
            note(f"{weighed_words(each, zones[each.weighing.id], ctx.units)}.{left_out}")
        _draw_removal(ctx, shown, zones)


def _draw_removal(ctx: Context, shown: tuple[Weighed, ...], zones: dict[int, str]) -> None:
    by_id = {w.weighing.id: w for w in shown}
    chosen = st.selectbox(
        "Take out a weighing that went wrong",
        list(by_id),
        index=None,
        format_func=lambda each: day_and_clock(by_id[each].weighing.starts_at, zones[each]),
        placeholder="which one",
    )
    if chosen is not None and st.button("Take it out"):
        ctx.store.remove(by_id[chosen].weighing, by=ctx.who, why="taken out on Fluids")
        note_for_next_run("Taken out; its figures stay in the record of changes.")
        st.rerun()


def _label(weighed: Weighed, zone: str, names: Mapping[int, str]) -> str:
    """As "5 Jun, Practice 1"; the time where no session is known."""
    local = weighed.weighing.starts_at.astimezone(ZoneInfo(zone))
    what = names.get(weighed.weighing.session_id or 0, f"{local:%H:%M}")
    return f"{local.day} {local:%b}, {what}"


def _frame(ctx: Context, shown: tuple[Weighed, ...], zones: dict[int, str]) -> pd.DataFrame:
    names = {s.id: s.name for each in calendar_of(ctx).sessions.values() for s in each}

    def in_unit(litres: float) -> float:
        return litres if ctx.units.volume == "mL" else from_house("volume", litres * 1000.0, ctx.units.volume)

    return pd.DataFrame(
        [
            {
                "at": _label(w, zones[w.weighing.id], names),
                "rate": in_unit(w.sweat_l_per_h),
                "low": in_unit(w.sweat_l_per_h - RANGE_SD * w.error_l_per_h),
                "high": in_unit(w.sweat_l_per_h + RANGE_SD * w.error_l_per_h),
                "predicted": in_unit(w.predicted_l_per_h),
                "words": weighed_words(w, zones[w.weighing.id], ctx.units),
                "taught": not w.left_out,
            }
            for w in reversed(shown)
        ]
    )
