"""Quick entry of a reading: a few taps on a phone, and what was typed shown back with its outcome.

The fields stand in no form: a form keeps what was typed in the browser until its button is pressed, and a
page that is left loses it.
"""

from __future__ import annotations

from collections.abc import Sequence
from datetime import datetime
from typing import Final

import streamlit as st

from planner.errors import PlannerError
from planner.monitoring.model import Reading
from planner.monitoring.outcome import ADVICE
from planner.physiology.illness import EMERGENCY_SIGNS, HIGHEST_ITEM
from planner.season.model import Place
from planner.services.morning import DriverRow, ThisMorning
from planner.services.readings import TypedReading, judge_entry, reading_words, take
from planner.services.typed import typed_number, typed_value
from planner.ui import reading_draft
from planner.ui.cached import morning_of
from planner.ui.errors import show_error
from planner.ui.fields import PULSE_ICON, SPO2_ICON, choose_driver, number_field, wanted
from planner.ui.morning_rows import outcome_html, whereabout_words
from planner.ui.navigation import driver_handed_on
from planner.ui.page import Context, note_for_next_run
from planner.ui.reading_draft import Draft
from planner.ui.text import escaped
from planner.wording import clock, unit_name, zone_name

AT_REST: Final = "At rest"
WARM_HAND: Final = "Warm hand"
HAND_STILL: Final = "Hand kept still"
HOW_TAKEN: Final = (AT_REST, WARM_HAND, HAND_STILL)
SCORED: Final = {
    "headache": "Headache",
    "gut": "Stomach, nausea",
    "fatigue": "Tired or weak",
    "dizziness": "Dizzy",
}
SCORE_WORDS: Final = ("none", "mild", "moderate", "severe")

_LAST: Final = "entry kept last"


def draw_entry(ctx: Context) -> None:
    """The last reading kept, then the fields of the next one."""
    screen = morning_of(ctx)
    _show_last(ctx)
    draft = _draft(screen)
    _draw_set_aside(screen)
    driver_id, spo2, pulse, wakefulness, how = _quick(ctx, screen, draft)
    with st.expander("Symptoms and emergency signs"):
        scores, signs = _symptoms(draft)
    with st.expander("Body mass, time, place, oximeter"):
        mass, local_time, place, device = _more(ctx, draft)
    # The shortcut stands for the Enter key of a form; the button is a new one with every draft, so that a
    # second press on the old one keeps nothing twice.
    pressed = st.button(
        "Keep the reading", type="primary", width="stretch", shortcut="Mod+Enter", key=draft.key("keep")
    )
    if not pressed:
        return
    try:
        mass_kg = None if mass is None else typed_value("body mass", mass, "mass_kg", "mass", ctx.units.mass)
        reading, change_set_id = take(
            ctx.store,
            TypedReading(
                driver_id=driver_id,
                spo2_pct=typed_number("SpO2", spo2, wanted("spo2_pct")),
                pulse_bpm=typed_number("pulse", pulse, wanted("pulse_bpm")),
                wakefulness="asleep" if wakefulness == "asleep" else "awake",
                at_rest=AT_REST in how,
                warm_hand=WARM_HAND in how,
                hand_still=HAND_STILL in how,
                scores=scores,
                emergency_signs=tuple(signs),
                mass_kg=mass_kg,
                device=device,
                place_id=None if place is None else place.id,
                local_time=local_time,
            ),
            by=ctx.who,
            now=ctx.now,
        )
    except PlannerError as error:
        show_error(error)
        return
    reading_draft.end()
    st.session_state[_LAST] = (reading.id, change_set_id)
    st.rerun()


def _draft(screen: ThisMorning) -> Draft:
    """The draft to show: for the driver handed on by another page, else for the first not measured yet."""
    handed_on = driver_handed_on()
    if handed_on is not None:
        return reading_draft.begin(handed_on)
    draft = reading_draft.shown()
    if draft is not None:
        return draft
    waiting = [row.driver_id for row in screen.rows if row.outcome == "not measured"]
    return reading_draft.begin(waiting[0] if waiting else None)


def _draw_set_aside(screen: ThisMorning) -> None:
    """Half-typed readings that gave way to another driver's."""
    names = {row.driver_id: row.driver for row in screen.rows}
    for draft in reading_draft.set_aside():
        with st.container(horizontal=True, vertical_alignment="center", key=f"p-aside-{draft.number}"):
            spo2 = draft.value("spo2")
            typed = f", SpO2 {spo2}" if spo2 else ""
            name = names.get(draft.driver_id or 0, "no driver chosen")
            st.html(f'<div class="p-small">Half typed: {escaped(name + typed)}</div>', width="content")
            if st.button("Go on with it", type="tertiary", key=draft.key("go_on")):
                reading_draft.take_up(draft)
                st.rerun()
            if st.button("Drop it", type="tertiary", key=draft.key("drop")):
                reading_draft.drop(draft)
                st.rerun()


def _quick(
    ctx: Context, screen: ThisMorning, draft: Draft
) -> tuple[int | None, str, str, str | None, Sequence[str]]:
    rows = {row.driver_id: row for row in sorted(screen.rows, key=lambda row: row.driver)}
    driver_id = choose_driver(
        {each: row.driver for each, row in rows.items()}, draft.preset_driver_id, draft.key("driver")
    )
    if driver_id is not None:
        _say_where(ctx, rows[driver_id])
    left, right = st.columns(2, wrap=False)
    with left:
        spo2 = number_field("SpO2, %", draft.key("spo2"), placeholder="e.g. 93", icon=SPO2_ICON)
    with right:
        pulse = number_field("Pulse, 1/min", draft.key("pulse"), placeholder="may be empty", icon=PULSE_ICON)
    wakefulness = st.segmented_control(
        "Taken",
        ["awake", "asleep"],
        default="awake",
        required=True,
        key=draft.key("wake"),
        persist_state="session",
    )
    how = st.pills(
        "How (take away what was not so)",
        HOW_TAKEN,
        selection_mode="multi",
        default=list(HOW_TAKEN),
        key=draft.key("how"),
        persist_state="session",
    )
    return driver_id, spo2, pulse, wakefulness, how


def _say_where(ctx: Context, row: DriverRow) -> None:
    """Where a reading will count as taken, unless another place is chosen."""
    now = f"{clock(ctx.now, row.zone)} {zone_name(row.zone, ctx.now)}"
    words = f"Counts as taken {whereabout_words(row.where, ctx.units)}. There it is {now}."
    st.html(f'<div class="p-small">{escaped(words)}</div>')


def _symptoms(draft: Draft) -> tuple[dict[str, int | None], list[str]]:
    signs = st.pills(
        "Emergency signs",
        list(EMERGENCY_SIGNS),
        selection_mode="multi",
        format_func=lambda code: EMERGENCY_SIGNS[code],
        key=draft.key("signs"),
        persist_state="session",
    )
    if signs:
        st.html(
            f'<div class="p-why" role="alert">{outcome_html("urgent")} '
            f'<span class="p-do">{escaped(ADVICE["urgent"])}</span></div>'
        )
    st.html('<div class="p-small">Lake Louise score: ask all four, or leave all four empty.</div>')
    scores: dict[str, int | None] = {}
    for name, label in SCORED.items():
        scores[name] = st.segmented_control(
            label,
            list(range(HIGHEST_ITEM + 1)),
            format_func=lambda i: f"{i} {SCORE_WORDS[i]}",
            key=draft.key(name),
            persist_state="session",
        )
    return scores, list(signs)


def _more(ctx: Context, draft: Draft) -> tuple[float | None, datetime | None, Place | None, str]:
    mass = st.number_input(
        f"Body mass, {unit_name(ctx.units.mass)}",
        value=None,
        step=0.1,
        format="%.1f",
        key=draft.key("mass"),
        persist_state="session",
    )
    local_time = st.datetime_input(
        "Taken at, local time there (empty: now)", value=None, key=draft.key("time"), persist_state="session"
    )
    places = {place.id: place for place in sorted(ctx.store.all(Place), key=lambda place: place.name)}
    place_id = st.selectbox(
        "Place",
        list(places),
        index=None,
        format_func=lambda each: places[each].name,
        placeholder="where the itinerary has the driver",
        key=draft.key("place"),
        persist_state="session",
    )
    device = st.text_input("Oximeter", key="entry_device", persist_state="session")
    return mass, local_time, places.get(place_id) if place_id else None, device


def _show_last(ctx: Context) -> None:
    """The reading kept last, with its outcome, and the way back."""
    last = st.session_state.get(_LAST)
    if last is None:
        return
    reading_id, change_set_id = last
    there = ctx.store.all(Reading, id=reading_id)
    if not there:
        return
    entry = judge_entry(ctx.store, there[0])
    with st.container(border=True, gap="small", key="p-card-last"):
        st.html(
            f'<div class="p-name">{escaped(entry.driver)} {outcome_html(entry.judgement.outcome)}</div>'
            f'<div class="p-small">{escaped(reading_words(entry.reading, entry.zone))}</div>'
            f'<div class="p-why">{escaped(" ".join(entry.judgement.reasons))} '
            f'<span class="p-do">{escaped(entry.judgement.advice)}</span></div>'
        )
        with st.container(horizontal=True, key="p-acts-last"):
            again = st.button("Measure again", type="tertiary")
            back = st.button("Take it back", type="tertiary")
        if again:
            reading_draft.begin(entry.reading.driver_id)
            st.rerun()
        if back:
            ctx.store.undo(change_set_id, by=ctx.who)
            st.session_state.pop(_LAST)
            note_for_next_run(f"The reading of {entry.driver} was taken back.")
            st.rerun()
