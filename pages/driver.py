"""Driver: how does this driver respond?"""

from __future__ import annotations

from typing import Any

import streamlit as st

from planner.charts.driver import PICKED
from planner.services.driver import DriverView, Window
from planner.ui.cached import calendar_of
from planner.ui.driver_cached import chart_of, driver_view_of, explanation_of, reading_choices
from planner.ui.driver_parts import draw_explanation, draw_legend, draw_model, draw_next_round, draw_taught
from planner.ui.fluids_driver import draw_driver_fluids
from planner.ui.morning_rows import whereabout_words
from planner.ui.navigation import driver_handed_on
from planner.ui.page import Context, answer, end_page, line, start_page
from planner.wording import day_and_clock, per_cent, per_cent_range, zone_name

WINDOWS: tuple[Window, ...] = ("12 weeks", "season", "all")


def main() -> None:
    """Draw the page."""
    ctx = start_page("Driver")
    drivers = {driver.id: driver for driver in calendar_of(ctx).drivers}
    if not drivers:
        answer("No drivers yet. Add the first one on Team.")
    else:
        handed_on = driver_handed_on()
        if handed_on in drivers:
            st.session_state["driver_shown"] = handed_on
        driver_id = st.selectbox(
            "Driver",
            list(drivers),
            format_func=lambda id: drivers[id].name,
            key="driver_shown",
            persist_state="session",
        )
        show_driver(ctx, driver_view_of(ctx, drivers[driver_id]))
    end_page(ctx)


def show_driver(ctx: Context, view: DriverView) -> None:
    """Draw the sentence, the chart, and what explains it."""
    words = view.range_in_words
    answer(f"{view.driver.name}: {words[0].lower() if words.startswith('No ') else words[0]}{words[1:]}")
    line(where_and_last(ctx, view))
    window = st.segmented_control(
        "How much of it",
        WINDOWS,
        default="season",
        required=True,
        label_visibility="collapsed",
        key="driver_window",
        persist_state="session",
    )
    pressed = show_chart(ctx, view, window)
    left, right = st.columns(2, gap="large")
    with left:
        st.subheader("One reading", anchor=False)
        show_reading(ctx, view, window, pressed)
        draw_driver_fluids(ctx, view.driver)
    with right:
        st.subheader("The next high round", anchor=False)
        draw_next_round(ctx, view)
        st.subheader("What is the driver's own", anchor=False)
        draw_taught(view)
    with st.expander("How a range is made: formulas, constants, residuals"):
        draw_model()


def where_and_last(ctx: Context, view: DriverView) -> str:
    """Where the driver is, what is expected there now, and the last reading."""
    where = view.population.where(view.now)
    now = view.expected_now
    there = whereabout_words(where, ctx.units)
    expected = f"expect {per_cent_range(now.low_pct, now.high_pct)} {now.words}"
    text = f"{there[0].upper()}{there[1:]}: {expected}."
    last = view.last_mark
    if last is None:
        return f"{text} No reading yet."
    taken_at, place = last.reading.taken_at, view.calendar.places[last.reading.place_id]
    when = f"{day_and_clock(taken_at, place.zone)} {zone_name(place.zone, taken_at)}"
    return f"{text} Last reading {per_cent(last.reading.spo2_pct)}, {when}: {last.judgement.outcome}."


def show_chart(ctx: Context, view: DriverView, window: Window) -> int | None:
    """Draw the chart and return the id of the reading that was pressed on it."""
    event: Any = st.vega_lite_chart(
        spec=chart_of(ctx, view, window),
        theme=None,
        width="stretch",
        on_select="rerun",
        selection_mode=PICKED,
        key=f"driver_chart_{view.driver.id}_{window}",
        alt=f"The readings of {view.driver.name} against the own range, over the beds' elevation",
    )
    draw_legend()
    picked = event.selection.get(PICKED, [])
    return int(picked[0]["reading"]) if picked else None


def show_reading(ctx: Context, view: DriverView, window: Window, pressed: int | None) -> None:
    """Choose a reading, by hand or on the chart, and explain it."""
    choices = reading_choices(ctx, view, window)
    if not choices:
        line("No reading here yet. Type the first one on Readings.")
        return
    ids = list(choices)
    chosen = st.selectbox(
        "Press a mark on the chart, or choose here",
        ids,
        index=ids.index(pressed) if pressed in choices else 0,
        format_func=choices.__getitem__,
        key=f"driver_reading_{view.driver.id}_{pressed}",
    )
    draw_explanation(view, explanation_of(ctx, view, chosen))


main()
