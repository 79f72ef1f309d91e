"""Corrections: the old value stays visible, nothing goes for good; leaving out, putting back."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields, replace
from datetime import datetime, timedelta
from typing import Final

import streamlit as st

from planner.errors import InputError
from planner.monitoring.model import Reading
from planner.season.model import Place
from planner.services.readings import correct, correction_words, reading_words
from planner.services.typed import typed_number
from planner.store.store import Store
from planner.ui.cached import morning_of
from planner.ui.errors import plain_errors
from planner.ui.fields import PULSE_ICON, SPO2_ICON, choose_driver, number_field, text_field, wanted
from planner.ui.page import Context, note_for_next_run
from planner.ui.reading_illness import draw_illness
from planner.ui.text import escaped
from planner.wording import zone_name

DAYS_SHOWN: Final = 21

# With a reading's id: the draft's number with the reading as it stood then; the reading as it was last shown.
_DRAFT: Final = "correction begun on"
_DRAWN: Final = "correction drawn over"


def draw_corrections(ctx: Context) -> None:
    """Choose a driver and a reading; correct it, leave it out, remove it or put it back; mark an illness."""
    rows = {row.driver_id: row for row in sorted(morning_of(ctx).rows, key=lambda row: row.driver)}
    chosen = choose_driver(
        {each: row.driver for each, row in rows.items()}, next(iter(rows)), "correct_driver", required=True
    )
    if chosen is None:
        return
    zones = {p.id: p.zone for p in ctx.store.all(Place, include_removed=True)}
    since = ctx.now - timedelta(days=DAYS_SHOWN)
    kept = ctx.store.readings(driver_id=chosen, since=since)[::-1]
    readings, illness = st.columns([3, 2], gap="large")
    with readings, plain_errors():
        if kept:
            _reading(ctx, kept, zones)
        else:
            st.html(f'<div class="p-line">No readings in the last {DAYS_SHOWN} days.</div>')
        _removed(ctx, chosen, zones, since)
    with illness, plain_errors():
        draw_illness(ctx, rows[chosen])


def _reading(ctx: Context, kept: list[Reading], zones: dict[int, str]) -> None:
    by_id = {r.id: r for r in kept}
    chosen = st.selectbox(
        "Reading",
        list(by_id),
        format_func=lambda each: reading_words(by_id[each], zones[by_id[each].place_id]),
        key=f"correct_which_{kept[0].driver_id}",
        persist_state="session",
    )
    if chosen not in by_id:
        return
    reading = by_id[chosen]
    _history(ctx.store, reading, zones[reading.place_id])
    draft, seen = st.session_state.setdefault(f"{_DRAFT} {reading.id}", (1, reading))
    key = f"correct_{{}}_{reading.id}_{draft}"
    with st.container(border=True, key="p-card-correct"):
        build = _fields(seen, key)
        why = text_field("Why is it corrected?", key.format("why"), placeholder="e.g. typing error")
        if reading != seen:
            if not why and _is_untouched(build, seen):
                _begin(reading, draft)
                st.rerun()
            st.html(
                '<div class="p-small" role="status">Somebody corrected this reading meanwhile; what you '
                "changed here goes over it.</div>"
            )
        with st.container(horizontal=True):
            change = st.button("Keep the correction", type="primary", key=key.format("keep"))
            remove = st.button("Remove the reading", key=key.format("remove"))
    drawn = st.session_state.get(f"{_DRAWN} {reading.id}", reading)
    st.session_state[f"{_DRAWN} {reading.id}"] = reading
    if change:
        typed = build()
        corrected = _over(reading, seen, typed)
        kept_so = correct(ctx.store, corrected, seen=drawn, by=ctx.who, why=why or typed.left_out)
        _begin(kept_so, draft)
        note_for_next_run("Corrected; the old value stands beside it.")
        st.rerun()
    if remove:
        ctx.store.remove(reading, by=ctx.who, why=" ".join(why.split()))
        _begin(reading, draft)
        note_for_next_run("Removed; it can be put back below.")
        st.rerun()


def _begin(reading: Reading, draft: int) -> None:
    """The next draft of a reading begins with the reading as it is."""
    st.session_state[f"{_DRAFT} {reading.id}"] = (draft + 1, reading)
    st.session_state[f"{_DRAWN} {reading.id}"] = reading


def _fields(seen: Reading, key: str) -> Callable[[], Reading]:
    """Draw the fields; what is returned builds the reading as they say it, an empty SpO2 as it was."""
    left, right = st.columns(2, wrap=False)
    with left:
        spo2 = number_field("SpO2, %", key.format("spo2"), _shown(seen.spo2_pct), icon=SPO2_ICON)
    with right:
        pulse = number_field("Pulse, 1/min", key.format("pulse"), _shown(seen.pulse_bpm), icon=PULSE_ICON)
    with st.container(horizontal=True):
        asleep = _switch("Asleep", seen.wakefulness == "asleep", key.format("asleep"))
        at_rest = _switch("At rest", seen.circumstance == "at rest", key.format("rest"))
        warm_hand = _switch("Warm hand", seen.warm_hand, key.format("hand"))
    quality = text_field("What was wrong with it", key.format("quality"), seen.quality_note)
    left_out = text_field(
        "Leave it out, because",
        key.format("left_out"),
        seen.left_out,
        help="It stays visible as a cross, judges nobody and teaches the driver's range nothing.",
    )

    def build() -> Reading:
        spo2_pct = typed_number("SpO2", spo2, wanted("spo2_pct"))
        return replace(
            seen,
            spo2_pct=seen.spo2_pct if spo2_pct is None else spo2_pct,
            pulse_bpm=typed_number("pulse", pulse, wanted("pulse_bpm")),
            wakefulness="asleep" if asleep else "awake",
            circumstance="at rest" if at_rest else "after a session",
            warm_hand=warm_hand,
            quality_note=" ".join(quality.split()),
            left_out=" ".join(left_out.split()),
        )

    return build


def _is_untouched(build: Callable[[], Reading], seen: Reading) -> bool:
    try:
        return build() == seen
    except InputError:
        return False


def _switch(label: str, value: bool, key: str) -> bool:
    return st.toggle(label, value, key=key, persist_state="session")


def _shown(value: float | None) -> str:
    return "" if value is None else f"{value:g}"


def _over(reading: Reading, seen: Reading, typed: Reading) -> Reading:
    """The reading as it is now, changed where the typed one differs from the one seen."""
    changed = {
        field.name: getattr(typed, field.name)
        for field in fields(Reading)
        if getattr(typed, field.name) != getattr(seen, field.name)
    }
    return replace(reading, **changed)


def _history(store: Store, reading: Reading, zone: str) -> None:
    """Where it was taken, and every correction of it, the old value first."""
    place = store.get(Place, reading.place_id)
    typed = f", typed by {reading.entered_by}" if reading.entered_by else ""
    changes = [c for c in store.changes(Reading, reading.id) if c.before is not None]
    lines = [
        f"At {place.name}, times in {zone_name(zone, reading.taken_at)}{typed}.",
        *(correction_words(c, zone) for c in changes),
    ]
    st.html("".join(f'<div class="p-small">{escaped(text)}</div>' for text in lines))


def _removed(ctx: Context, driver_id: int, zones: dict[int, str], since: datetime) -> None:
    """The readings that were removed, each with the way back."""
    live = {r.id for r in ctx.store.all(Reading, driver_id=driver_id)}
    everything = ctx.store.all(Reading, include_removed=True, driver_id=driver_id)
    gone = [r for r in everything if r.id not in live and r.taken_at >= since]
    for reading in gone:
        with st.container(horizontal=True, vertical_alignment="center"):
            words = reading_words(reading, zones[reading.place_id])
            st.html(f'<div class="p-small">Removed: <s>{escaped(words)}</s></div>', width="content")
            if st.button("Put back", type="tertiary", key=f"back_{reading.id}"):
                ctx.store.restore(Reading, reading.id, by=ctx.who)
                note_for_next_run("Put back.")
                st.rerun()
