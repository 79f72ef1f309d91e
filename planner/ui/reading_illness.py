"""Sick periods: an illness stated by the physician or the driver begins and ends here."""

from __future__ import annotations

from datetime import time
from zoneinfo import ZoneInfo

import streamlit as st

from planner.monitoring.model import SickPeriod
from planner.services.morning import DriverRow
from planner.services.readings import mark_ill, mark_well, open_sick_period
from planner.services.typed import local_instant
from planner.ui.fields import text_field
from planner.ui.page import Context, note_for_next_run
from planner.ui.text import escaped
from planner.wording import day


def draw_illness(ctx: Context, row: DriverRow) -> None:
    """While a sick period lasts every reading is for the physician."""
    period = open_sick_period(ctx.store, row.driver_id, ctx.now)
    if period is None:
        _begin(ctx, row)
    else:
        _end(ctx, row, period)


def _begin(ctx: Context, row: DriverRow) -> None:
    # Numbered by the periods so far, so that the fields after the next one begin empty.
    number = len(ctx.store.all(SickPeriod, include_removed=True, driver_id=row.driver_id))
    key = f"ill_{{}}_{row.driver_id}_{number}"
    with st.container(border=True, key="p-card-ill"):
        st.html('<div class="p-name">Illness</div>')
        since = st.date_input(
            "Ill since",
            ctx.now.astimezone(ZoneInfo(row.zone)).date(),
            format="YYYY-MM-DD",
            key=key.format("on"),
            persist_state="session",
        )
        marked_by = text_field("Stated by", key.format("by"), "the driver")
        note = text_field("Note", key.format("note"))
        if st.button("Mark ill", key=key.format("keep")):
            starts_at = local_instant("ill since", since, time(), row.zone)
            mark_ill(
                ctx.store,
                row.driver_id,
                since=starts_at,
                marked_by=marked_by,
                note=note,
                by=ctx.who,
                now=ctx.now,
            )
            note_for_next_run(f"{row.driver} is marked ill: the physician decides.")
            st.rerun()


def _end(ctx: Context, row: DriverRow, period: SickPeriod) -> None:
    note = f": {period.note}" if period.note else ""
    st.html(
        f'<div class="p-why"><b>Marked ill</b> since {escaped(day(period.starts_at, row.zone))}, stated by '
        f"{escaped(period.marked_by)}{escaped(note)}. The physician decides; readings of this time teach the "
        "driver's range nothing.</div>"
    )
    with st.container(horizontal=True):
        if st.button("Well again from now on"):
            mark_well(ctx.store, period, at=ctx.now, by=ctx.who)
            note_for_next_run(f"{row.driver} is no longer marked ill.")
            st.rerun()
        if st.button("Marked by mistake"):
            ctx.store.remove(period, by=ctx.who, why="marked by mistake")
            note_for_next_run(f"The mark that {row.driver} is ill was taken back.")
            st.rerun()
