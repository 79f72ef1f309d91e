"""This morning: who needs what, now?"""

from __future__ import annotations

from datetime import timedelta
from typing import Literal, TypeAlias

import streamlit as st

from planner.charts.strip import floor_pct
from planner.services import workspace
from planner.services.morning import DriverRow, ThisMorning
from planner.services.notices import keep_notice
from planner.ui.cached import morning_of
from planner.ui.errors import plain_errors
from planner.ui.fields import text_field
from planner.ui.morning_rows import row_html
from planner.ui.navigation import go_to, lead_to
from planner.ui.page import Context, answer, end_page, line, note_for_next_run, start_page
from planner.ui.text import literal
from planner.wording import clock, counted, day, elevation, pressure, zone_name

Kind: TypeAlias = Literal["told the physician", "note"]

ASKING = "this morning asks about"
LOOKS_EVERY = timedelta(seconds=20)
CLOCK_STANDS = timedelta(minutes=5)  # how old the words about time may become
KEPT = "notices kept on this morning"  # numbers the fields, so that the next ones begin empty


def place_line(screen: ThisMorning, ctx: Context) -> str:
    """Place, elevation, local time and pressure with its source."""
    place, air = screen.place, screen.air
    if place is None or air is None:
        return "Begin with places and drivers."
    when = f"{day(screen.at, place.zone)}, {clock(screen.at, place.zone)} {zone_name(place.zone, screen.at)}"
    if screen.is_spread:
        utc = f"{day(screen.at)}, {clock(screen.at, 'UTC')} UTC"
        return f"The team is spread, and each row names its own place and time: {utc}."
    beds = (
        ""
        if place.bed_elevation_m == place.track_elevation_m
        else (f", beds {elevation(place.bed_elevation_m, ctx.units)}")
    )
    away = f" · {screen.elsewhere} elsewhere" if screen.elsewhere else ""
    return (
        f"{place.name}, {elevation(place.track_elevation_m, ctx.units)}{beds} · {when} · "
        f"{pressure(air.pressure_hpa, ctx.units)}, {air.pressure_from}{away}"
    )


def draw_row(row: DriverRow, screen: ThisMorning, low_pct: float, ctx: Context) -> None:
    """One driver: the evidence, and what can be done."""
    elsewhere = screen.is_spread or (screen.place is not None and row.where.place.id != screen.place.id)
    with st.container(border=True, gap="small", key=f"p-card-{row.driver_id}"):
        evidence, actions = st.columns([7, 1], gap="small", vertical_alignment="center")
        evidence.html(row_html(row, ctx.now, ctx.units, low_pct=low_pct, elsewhere=elsewhere))
        with actions.container(gap=None, key=f"p-acts-{row.driver_id}"):
            again = "Measure again" if row.reading else "Measure"
            if st.button(again, type="tertiary", key=f"again_{row.driver_id}"):
                go_to("readings", row.driver_id)
            if st.button("Note", type="tertiary", key=f"note_{row.driver_id}"):
                ask_about(row, "note")
            if st.button("Physician told", type="tertiary", key=f"told_{row.driver_id}"):
                ask_about(row, "told the physician")
        driver_id, kind = st.session_state.get(ASKING, (None, "note"))
        if driver_id == row.driver_id:
            ask(ctx, row, kind)


def ask_about(row: DriverRow, kind: Kind) -> None:
    """Open the question under this row, and close it under any other."""
    st.session_state[ASKING] = (row.driver_id, kind)
    st.rerun()


def ask(ctx: Context, row: DriverRow, kind: Kind) -> None:
    """Ask for the words of a note, or for confirmation that the physician was told."""
    name = literal(row.driver)
    label = f"Note on {name}" if kind == "note" else f"The physician was told of {name}"
    number = st.session_state.get(KEPT, 0)
    placeholder = "" if kind == "note" else "in words, if any"
    text = text_field(label, f"notice_{kind}_{row.driver_id}_{number}", placeholder=placeholder)
    with plain_errors(), st.container(horizontal=True):
        if st.button("Keep", type="primary", key=f"keep_notice_{number}"):
            keep_notice(ctx.store, row.driver_id, kind, text, by=ctx.who, at=ctx.now)
            st.session_state[KEPT] = number + 1
            st.session_state.pop(ASKING)
            note_for_next_run(f"Kept for {row.driver}.")
            st.rerun()
        if st.button("Leave it", key=f"leave_notice_{number}"):
            st.session_state.pop(ASKING)
            st.rerun()


@st.fragment(run_every=LOOKS_EVERY)
def keep_up(ctx: Context, drawn_version: int) -> None:
    """A page that is left open follows what others type, and its clock."""
    is_old = workspace.now(ctx.store) - ctx.now > CLOCK_STANDS
    if is_old or ctx.store.version() != drawn_version:
        st.rerun()


def main() -> None:
    """Draw the page."""
    ctx = start_page("This morning")
    drawn_version = ctx.store.version()
    screen = morning_of(ctx)
    answer(screen.sentence)
    line(place_line(screen, ctx))
    if not screen.rows:
        lead_to("team")
    guessed = sum(not row.where.is_planned for row in screen.rows)
    if guessed:
        line(
            f"No stay is planned now for {counted(guessed, 'driver')}: the range is that of home, or of "
            "where the last stay ended. Type the stay on Team, or choose a way to the round on Arrival."
        )
    low_pct = floor_pct([morning for row in screen.rows for morning in row.mornings])
    for row in screen.rows:
        draw_row(row, screen, low_pct, ctx)
    keep_up(ctx, drawn_version)
    end_page(ctx)


main()
