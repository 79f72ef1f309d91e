"""The day's water, and the morning's mass, urine and thirst."""

from __future__ import annotations

from typing import Final

import streamlit as st

from planner.errors import PlannerError
from planner.physiology.body_water import ALTITUDE_ADD_ON_ML
from planner.services.fluids import day_water_of
from planner.services.morning_water import TypedMark, morning_fluid_findings, take_mark
from planner.services.typed import typed_value
from planner.ui.cached import calendar_of
from planner.ui.errors import show_error
from planner.ui.fluids_words import volume_range
from planner.ui.morning_rows import outcome_html
from planner.ui.page import Context, note_for_next_run
from planner.ui.tables import note, table
from planner.ui.text import escaped, literal
from planner.wording import elevation, unit_name, volume

_ROUND: Final = "mark round"  # moves with every mark kept, so that the next form begins empty
URINE_COLOURS: Final = tuple(range(1, 9))


def draw_day(ctx: Context) -> None:
    """The morning's marks with their outcomes, the form for the next one, and everybody's water."""
    _draw_findings(ctx)
    left, right = st.columns([1, 1], gap="large")
    with left:
        _draw_form(ctx)
    with right:
        _draw_water(ctx)


def _draw_findings(ctx: Context) -> None:
    calendar = calendar_of(ctx)
    findings = morning_fluid_findings(ctx.store, ctx.now, calendar, ctx.units)
    if not findings:
        note("No morning marks yet today.")
        return
    names = {d.id: d.name for d in calendar.drivers}
    odd = {key: each for key, each in findings.items() if each.outcome != "in range"}
    for driver_id, each in odd.items():
        st.html(
            f'<div class="p-name">{escaped(names[driver_id])} {outcome_html(each.outcome)}</div>'
            f'<div class="p-why">{escaped(each.sentence)} '
            f'<span class="p-do">{escaped(each.advice)}</span></div>'
        )
    rest = len(findings) - len(odd)
    note(
        f"{rest} more marked this morning, in range." if odd else f"{rest} marked this morning, all in range."
    )
    note(
        "Mass, urine and thirst together (Cheuvront & Sawka 2005, from memory): one sign unclear, two "
        "likely, three very likely. Up high urine reads wetter than the body is: trust mass and thirst."
    )


def _draw_form(ctx: Context) -> None:
    st.subheader("Mark a morning", anchor=False)
    drivers = calendar_of(ctx).drivers
    entry = int(st.session_state.get(_ROUND, 0))
    names = {d.id: d.name for d in drivers}
    marked = morning_fluid_findings(ctx.store, ctx.now, calendar_of(ctx), ctx.units)
    driver_id = st.pills(
        "Driver",
        list(names),
        default=next((each for each in names if each not in marked), None),
        format_func=lambda each: literal(names[each]),
        key=f"mark_driver_{entry}",
        persist_state="session",
    )
    left, right = st.columns(2, wrap=False)
    body = left.number_input(
        f"Mass, {unit_name(ctx.units.mass)}",
        value=None,
        step=0.1,
        format="%.1f",
        key=f"mark_mass_{entry}",
        persist_state="session",
    )
    gravity = right.number_input(
        "Specific gravity",
        value=None,
        step=0.001,
        format="%.3f",
        placeholder="1.0…",
        key=f"mark_sg_{entry}",
        persist_state="session",
    )
    colour = st.segmented_control(
        "Urine colour, 8 is darkest", URINE_COLOURS, key=f"mark_colour_{entry}", persist_state="session"
    )
    thirsty = st.segmented_control(
        "Thirsty", ["no", "yes"], key=f"mark_thirst_{entry}", persist_state="session"
    )
    if not st.button("Keep the marks", type="primary", width="stretch", key=f"mark_keep_{entry}"):
        return
    try:
        mass_kg = None if body is None else typed_value("mass", body, "mass_kg", "mass", ctx.units.mass)
        mark = TypedMark(driver_id, mass_kg, colour, gravity, None if thirsty is None else thirsty == "yes")
        take_mark(ctx.store, mark, by=ctx.who, now=ctx.now)
    except PlannerError as problem:
        show_error(problem)
        return
    st.session_state[_ROUND] = entry + 1
    note_for_next_run(f"Kept the morning of {names[mark.driver_id or 0]}.")
    st.rerun()


def _draw_water(ctx: Context) -> None:
    rows = [
        [
            each.driver.name,
            f"{each.place.name}, {elevation(each.bed_elevation_m, ctx.units)}",
            volume_range(each.total_ml, ctx.units),
        ]
        for each in day_water_of(calendar_of(ctx), ctx.now)
    ]
    table(["", "sleeps at", "water today"], rows, right=(2,), caption="The day's water, without the sessions")
    add_on = ", ".join(
        f"{volume(millilitres, ctx.units)} more from {elevation(from_m, ctx.units)}"
        for from_m, millilitres in ALTITUDE_ADD_ON_ML
    )
    note(
        "All water, food included, which brings about a fifth. Low: EFSA 2010; high: IOM 2005. In the first "
        f"four days {add_on}: judgement. More drink does not undo what altitude takes from the blood."
    )
