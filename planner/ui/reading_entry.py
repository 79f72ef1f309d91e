"""Quick entry of a reading: a few taps on a phone, and what was typed shown back with its outcome."""

from __future__ import annotations

from datetime import datetime
from typing import Final

import streamlit as st

from planner.errors import PlannerError
from planner.monitoring.model import Reading
from planner.physiology.illness import EMERGENCY_SIGNS, HIGHEST_ITEM
from planner.season.model import Place
from planner.services.morning import ThisMorning
from planner.services.readings import TypedReading, judge_entry, reading_words, take
from planner.services.typed import typed_value
from planner.ui.cached import morning_of
from planner.ui.errors import show_error
from planner.ui.morning_rows import outcome_html
from planner.ui.navigation import driver_handed_on
from planner.ui.page import Context, note_for_next_run
from planner.ui.text import escaped, literal
from planner.wording import unit_name

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

_ROUND: Final = "entry round"  # moves with every reading kept, so that the next form begins empty
_DRIVER: Final = "entry driver"
_LAST: Final = "entry kept last"


def draw_entry(ctx: Context) -> None:
    """The last reading kept, then the form for the next one."""
    screen = morning_of(ctx)
    _show_last(ctx)
    _preset_driver(screen)
    entry = int(st.session_state.get(_ROUND, 0))
    with st.form(f"entry_{entry}", border=False):
        typed = _quick(screen, entry)
        with st.expander("Symptoms and emergency signs"):
            scores, signs = _symptoms(entry)
        with st.expander("Body mass, time, place, oximeter"):
            mass, local_time, place, device = _more(ctx, entry)
        kept = st.form_submit_button("Keep the reading", type="primary", width="stretch")
    if not kept:
        return
    try:
        driver_id, spo2_pct, pulse_bpm, wakefulness, how = typed
        mass_kg = None if mass is None else typed_value("body mass", mass, "mass_kg", "mass", ctx.units.mass)
        reading, change_set_id = take(
            ctx.store,
            TypedReading(
                driver_id=driver_id,
                spo2_pct=spo2_pct,
                pulse_bpm=pulse_bpm,
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
    st.session_state[_ROUND] = entry + 1
    st.session_state[_LAST] = (reading.id, change_set_id)
    st.session_state.pop(_DRIVER, None)
    st.rerun()


def _preset_driver(screen: ThisMorning) -> None:
    """Who is measured next: the one handed on by another page, else the first not measured yet."""
    handed_on = driver_handed_on()
    if handed_on is not None:
        _begin_with(handed_on)
    elif _DRIVER not in st.session_state:
        waiting = [row.driver_id for row in screen.rows if row.outcome == "not measured"]
        st.session_state[_DRIVER] = waiting[0] if waiting else None


def _begin_with(driver_id: int) -> None:
    """Begin an empty form with this driver chosen."""
    st.session_state[_DRIVER] = driver_id
    st.session_state[_ROUND] = int(st.session_state.get(_ROUND, 0)) + 1


def _quick(
    screen: ThisMorning, entry: int
) -> tuple[int | None, float | None, float | None, str | None, list[str]]:
    names = {row.driver_id: row.driver for row in sorted(screen.rows, key=lambda row: row.driver)}
    preset = st.session_state.get(_DRIVER)
    driver_id = st.pills(
        "Driver",
        list(names),
        default=preset if preset in names else None,
        format_func=lambda each: literal(names[each]),
        key=f"entry_driver_{entry}",
    )
    left, right = st.columns(2, wrap=False)
    spo2_pct = left.number_input(
        "SpO2, %", value=None, step=1.0, format="%g", placeholder="e.g. 93", key=f"entry_spo2_{entry}"
    )
    pulse_bpm = right.number_input(
        "Pulse, 1/min",
        value=None,
        step=1.0,
        format="%g",
        placeholder="may be empty",
        key=f"entry_pulse_{entry}",
    )
    wakefulness = st.segmented_control(
        "Taken", ["awake", "asleep"], default="awake", required=True, key=f"entry_wake_{entry}"
    )
    how = st.pills(
        "Take away what was not so",
        HOW_TAKEN,
        selection_mode="multi",
        default=list(HOW_TAKEN),
        key=f"entry_how_{entry}",
    )
    return driver_id, spo2_pct, pulse_bpm, wakefulness, list(how)


def _symptoms(entry: int) -> tuple[dict[str, int | None], list[str]]:
    signs = st.pills(
        "Emergency signs",
        list(EMERGENCY_SIGNS),
        selection_mode="multi",
        format_func=lambda code: EMERGENCY_SIGNS[code],
        key=f"entry_signs_{entry}",
    )
    st.html('<div class="p-small">Lake Louise score: ask all four, or leave all four empty.</div>')
    scores: dict[str, int | None] = {}
    for name, label in SCORED.items():
        scores[name] = st.segmented_control(
            label,
            list(range(HIGHEST_ITEM + 1)),
            format_func=lambda i: f"{i} {SCORE_WORDS[i]}",
            key=f"entry_{name}_{entry}",
        )
    return scores, list(signs)


def _more(ctx: Context, entry: int) -> tuple[float | None, datetime | None, Place | None, str]:
    mass = st.number_input(
        f"Body mass, {unit_name(ctx.units.mass)}",
        value=None,
        step=0.1,
        format="%.1f",
        key=f"entry_mass_{entry}",
    )
    local_time = st.datetime_input("Taken at, local time (empty: now)", value=None, key=f"entry_time_{entry}")
    places = sorted(ctx.store.all(Place), key=lambda place: place.name)
    place = st.selectbox(
        "Place",
        places,
        index=None,
        format_func=lambda each: each.name,
        placeholder="where the itinerary has the driver",
        key=f"entry_place_{entry}",
    )
    device = st.text_input("Oximeter", key="entry_device", persist_state="session")
    return mass, local_time, place, device


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
            _begin_with(entry.reading.driver_id)
            st.rerun()
        if back:
            ctx.store.undo(change_set_id, by=ctx.who)
            st.session_state.pop(_LAST)
            note_for_next_run(f"The reading of {entry.driver} was taken back.")
            st.rerun()
