"""Driver: how does this driver respond?"""

from __future__ import annotations

from typing import Any

import streamlit as st

from planner.charts.driver import PICKED, driver_chart
from planner.monitoring.own_range import own_range_in_words
from planner.services.course import POSSESSIVES
from planner.services.driver import DriverView, JudgedMark, Window
from planner.services.readings import reading_words
from planner.ui.cached import band_of, calendar_of, driver_view_of
from planner.ui.driver_parts import draw_explanation, draw_legend, draw_model, draw_next_round, draw_taught
from planner.ui.frames import frame
from planner.ui.navigation import driver_handed_on
from planner.ui.page import Context, answer, end_page, line, start_page
from planner.units import from_house
from planner.wording import day_and_clock, elevation, per_cent, per_cent_range

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
    words = own_range_in_words(view.person, POSSESSIVES[view.driver.sex])
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
        show_reading(view, pressed)
    with right:
        st.subheader("The next high round", anchor=False)
        draw_next_round(ctx, view)
        st.subheader("What is the driver's own", anchor=False)
        draw_taught(view)
    with st.expander("How a range is made: formulas, constants, residuals"):
        draw_model()


def where_and_last(ctx: Context, view: DriverView) -> str:
    """Where the driver is, what is expected there now, and the last reading."""
    where = view.population.where(ctx.now)
    now = view.course_at(ctx.now).expected([ctx.now])[0]
    there = f"{where.place.name}, {elevation(where.bed_elevation_m, ctx.units)}"
    text = f"{'On the way to' if where.on_the_way else 'At'} {there}: "
    text += f"expect {per_cent_range(now.low_pct, now.high_pct)} {now.words}."
    if not view.marks:
        return f"{text} No reading yet."
    last = view.marks[-1]
    when = day_and_clock(last.reading.taken_at, where.place.zone)
    return f"{text} Last reading {per_cent(last.reading.spo2_pct)}, {when}: {last.judgement.outcome}."


def show_chart(ctx: Context, view: DriverView, window: Window) -> int | None:
    """Draw the chart and return the id of the reading that was pressed on it."""
    since, until = view.window(window)
    unit = ctx.units.elevation
    shown = [mark for mark in view.marks if since <= mark.reading.taken_at <= until]
    band = [
        (each.at, each.own.low_pct, each.own.high_pct, each.population.low_pct, each.population.high_pct)
        for each in band_of(ctx, view, window)
    ]
    ground = [
        (at, from_house("elevation", bed_m, unit)) for at, bed_m in beds(view) if since <= at <= until
    ]
    rounds = [
        (start, from_house("elevation", place.bed_elevation_m, unit), place.name)
        for each in view.calendar.rounds
        if view.calendar.is_high(each)
        and since <= (start := view.calendar.starts_at(each)) <= until
        and (place := view.calendar.place_of(each))
    ]
    readings = [mark_row(view, mark) for mark in shown]
    chart = driver_chart(
        frame(band, "at", "low", "high", "population_low", "population_high"),
        frame(ground, "at", "elevation"),
        frame(rounds, "at", "elevation", "label"),
        frame(readings, "at", "spo2", "outcome", "kind", "reading", "words"),
        frame([(ctx.now, "today")], "at", "label"),
        unit,
    )
    event: Any = st.vega_lite_chart(
        spec=chart,
        theme=None,
        width="stretch",
        on_select="rerun",
        selection_mode=PICKED,
        key=f"driver_chart_{view.driver.id}_{window}",
        alt=f"{len(shown)} readings of {view.driver.name} against the own range, over the beds' elevation",
    )
    draw_legend()
    picked = event.selection.get(PICKED, [])
    return int(picked[0]["reading"]) if picked else None


def mark_row(view: DriverView, mark: JudgedMark) -> tuple[object, ...]:
    """One reading for the chart."""
    reading = mark.reading
    kind = "left out" if reading.left_out else reading.wakefulness
    zone = view.calendar.places[reading.place_id].zone
    # Short: on a telephone a long hint would leave the screen.
    words = f"{day_and_clock(reading.taken_at, zone)}: {per_cent(reading.spo2_pct)}, {mark.judgement.outcome}"
    return (reading.taken_at, reading.spo2_pct, mark.judgement.outcome, kind, reading.id, words)


def show_reading(view: DriverView, pressed: int | None) -> None:
    """Choose a reading, by hand or on the chart, and explain it."""
    marks = {mark.reading.id: mark for mark in reversed(view.marks)}
    if not marks:
        line("No reading yet. Type the first one on Readings.")
        return
    ids = list(marks)

    def words(id: int) -> str:
        reading = marks[id].reading
        zone = view.calendar.places[reading.place_id].zone
        return f"{reading_words(reading, zone)}: {marks[id].judgement.outcome}"

    chosen = st.selectbox(
        "Press a mark on the chart, or choose here",
        ids,
        index=ids.index(pressed) if pressed in marks else 0,
        format_func=words,
        key=f"driver_reading_{view.driver.id}_{pressed}",
    )
    draw_explanation(view, view.explanation(chosen))


def beds(view: DriverView) -> list[tuple[Any, float]]:
    """Where the driver sleeps: the elevation at every arrival and departure."""
    points = []
    for stay in view.population.stays:
        bed_m = stay.bed_elevation_m
        if bed_m is None:
            bed_m = view.calendar.places[stay.place_id].bed_elevation_m
        points += [(stay.arrive_at, bed_m), (stay.depart_at, bed_m)]
    return points


main()
