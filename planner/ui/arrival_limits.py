"""What the coach asks of a way to a round, in one row: kept for every plan, or changed for this look only."""

from __future__ import annotations

from dataclasses import replace

import streamlit as st

from planner.season.constraints import Limits
from planner.services.arrival import ORDERS, Order, keep_asked, kept_order
from planner.services.limits import NUMBER_LIMITS, RISK_SOURCE, RISKS, season_limits
from planner.ui.errors import plain_errors
from planner.ui.page import Context, note_for_next_run
from planner.ui.tables import note
from planner.units import to_house
from planner.wording import unit_name

WIDTH = 152  # so that two stand beside each other on a phone
WIDE = 230
LOWEST_BED = {"m": -400.0, "ft": -1300.0}
_LIMITS = {each.key: each for each in NUMBER_LIMITS}


def draw_limits(ctx: Context) -> tuple[Limits, Order, float | None]:
    """Draw the row; returns the limits, the order and the elevation of lower beds in metres, if typed."""
    kept, order_kept = season_limits(ctx.store), kept_order(ctx.store)
    # A key of what is kept: when that changes elsewhere, the row starts from it again.
    tail = str(abs(hash((kept, order_kept))))
    with st.container(horizontal=True, vertical_alignment="bottom", gap="small", key="p-limits"):
        spo2 = _number("lowest_race_spo2_pct", "SpO2 at least, %", kept.lowest_race_spo2_pct, tail)
        risk = st.selectbox(
            "Risk at most",
            RISKS,
            index=RISKS.index(kept.highest_risk),
            help=f"Class of the planned ascent. {RISK_SOURCE}.",
            width=WIDTH,
            key=f"arrival_risk_{tail}",
            persist_state="session",
        )
        offset = _number("largest_clock_offset_h", "Clock within, h", kept.largest_clock_offset_h, tail)
        nights = _number("most_nights_away", "Nights at most", kept.most_nights_away, tail)
        order = st.selectbox(
            "Then",
            ORDERS,
            index=ORDERS.index(order_kept),
            help="What ranks the ways that keep every limit.",
            width=WIDE,
            key=f"arrival_order_{tail}",
            persist_state="session",
        )
        unit = ctx.units.elevation
        lower = st.number_input(
            f"Lower beds, {unit_name(unit)}",
            value=None,
            min_value=LOWEST_BED[unit],
            step=None,
            format="%g",
            placeholder="none",
            help="Elevation of beds near the venue that lie lower than its own, for sleeping lower.",
            width=WIDTH,
            key=f"arrival_lower_{unit}",
            persist_state="session",
        )
    asked = replace(
        kept,
        lowest_race_spo2_pct=spo2,
        highest_risk=risk,
        largest_clock_offset_h=offset,
        most_nights_away=None if nights is None else int(nights),
    )
    _offer_to_keep(ctx, kept, order_kept, asked, order)
    return asked, order, None if lower is None else to_house("elevation", lower, unit)


def _number(key: str, label: str, kept: float | None, tail: str) -> float | None:
    limit = _LIMITS[key]
    value = st.number_input(
        label,
        value=None if kept is None else float(kept),
        min_value=limit.low,
        max_value=limit.high,
        step=None,
        format="%g",
        placeholder="no limit",
        help=f"{limit.meaning}, {limit.unit}. Source: {limit.source}.",
        width=WIDTH,
        key=f"arrival_{key}_{tail}",
        persist_state="session",
    )
    return None if value is None else float(value)


def _offer_to_keep(ctx: Context, kept: Limits, order_kept: Order, asked: Limits, order: Order) -> None:
    if (asked, order) != (kept, order_kept):
        with st.container(horizontal=True, vertical_alignment="center", gap="small"):
            if st.button("Keep for every plan", key="arrival_keep"):
                with plain_errors():
                    keep_asked(ctx.store, asked, order, by=ctx.who)
                    note_for_next_run("Kept: the limits and the order, for every plan.")
                    st.rerun()
            note("These differ from the limits on Team and hold for this look only.")
    capacity = kept.lowest_race_capacity_pct
    floor = "" if capacity is None else f", aerobic capacity at least {capacity:g} %"
    note(
        f"Also asked, on Team: {kept.shortest_landing_to_session_h:g} h or more from landing to the first "
        f"session, at most {kept.longest_travel_h_per_day:g} h of travel begun on a day{floor}. "
        "What the physician allows and the ascent rule above 3 000 m hold besides."
    )
