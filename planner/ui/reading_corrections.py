"""Corrections: the old value stays visible, nothing goes for good; leaving out, sick periods."""

from __future__ import annotations

from dataclasses import replace
from datetime import datetime, time, timedelta
from typing import Final
from zoneinfo import ZoneInfo

import streamlit as st

from planner.monitoring.model import Reading
from planner.season.model import Driver, Place
from planner.services.readings import (
    correct,
    correction_words,
    mark_ill,
    mark_well,
    open_sick_period,
    reading_words,
)
from planner.services.typed import local_instant
from planner.store.store import Store
from planner.ui.page import Context, note_for_next_run
from planner.ui.text import escaped, literal
from planner.wording import day

DAYS_SHOWN: Final = 21


def draw_corrections(ctx: Context) -> None:
    """Choose a driver and a reading; correct it, leave it out, remove it or put it back; mark an illness."""
    drivers = {d.id: d for d in sorted(ctx.store.all(Driver), key=lambda d: d.name)}
    chosen = st.pills(
        "Driver",
        list(drivers),
        format_func=lambda each: literal(drivers[each].name),
        default=next(iter(drivers)),
        required=True,
        key="correct_driver",
        persist_state="session",
    )
    if chosen not in drivers:
        return
    driver = drivers[chosen]
    zones = {p.id: p.zone for p in ctx.store.all(Place, include_removed=True)}
    since = ctx.now - timedelta(days=DAYS_SHOWN)
    kept = [r for r in ctx.store.readings(driver_id=driver.id) if r.taken_at >= since][::-1]
    readings, illness = st.columns([3, 2], gap="large")
    with readings:
        if kept:
            _reading(ctx, kept, zones)
        else:
            st.html(f'<div class="p-line">No readings in the last {DAYS_SHOWN} days.</div>')
        _removed(ctx, driver, zones, since)
    with illness:
        _illness(ctx, driver)


def _reading(ctx: Context, kept: list[Reading], zones: dict[int, str]) -> None:
    by_id = {r.id: r for r in kept}
    chosen = st.selectbox(
        "Reading",
        list(by_id),
        format_func=lambda each: reading_words(by_id[each], zones[by_id[each].place_id]),
        key="correct_which",
    )
    if chosen not in by_id:
        return
    reading = by_id[chosen]
    _history(ctx.store, reading, zones[reading.place_id])
    key = f"{reading.id}_{ctx.store.version()}"
    with st.form(f"correct_{key}", border=True):
        left, right = st.columns(2, wrap=False)
        spo2_pct = left.number_input(
            "SpO2, %", value=reading.spo2_pct, step=1.0, format="%g", key=f"c_s_{key}"
        )
        pulse_bpm = right.number_input(
            "Pulse, 1/min", value=reading.pulse_bpm, step=1.0, format="%g", key=f"c_p_{key}"
        )
        with st.container(horizontal=True):
            asleep = st.toggle("Asleep", reading.wakefulness == "asleep", key=f"c_a_{key}")
            at_rest = st.toggle("At rest", reading.circumstance == "at rest", key=f"c_r_{key}")
            warm_hand = st.toggle("Warm hand", reading.warm_hand, key=f"c_w_{key}")
        quality = st.text_input("What was wrong with it", reading.quality_note, key=f"c_q_{key}")
        left_out = st.text_input(
            "Leave it out, because",
            reading.left_out,
            help="It stays visible as a cross, judges nobody and teaches the driver's range nothing.",
            key=f"c_l_{key}",
        )
        why = st.text_input("Why is it corrected?", placeholder="e.g. typing error", key=f"c_y_{key}")
        with st.container(horizontal=True):
            change = st.form_submit_button("Keep the correction", type="primary")
            remove = st.form_submit_button("Remove the reading")
    if change:
        corrected = replace(
            reading,
            spo2_pct=reading.spo2_pct if spo2_pct is None else spo2_pct,
            pulse_bpm=pulse_bpm,
            wakefulness="asleep" if asleep else "awake",
            circumstance="at rest" if at_rest else "after a session",
            warm_hand=warm_hand,
            quality_note=" ".join(quality.split()),
            left_out=" ".join(left_out.split()),
        )
        correct(ctx.store, corrected, by=ctx.who, why=why or left_out)
        note_for_next_run("Corrected; the old value stands beside it.")
        st.rerun()
    if remove:
        ctx.store.remove(reading, by=ctx.who, why=" ".join(why.split()))
        note_for_next_run("Removed; it can be put back below.")
        st.rerun()


def _history(store: Store, reading: Reading, zone: str) -> None:
    """Every correction of the reading, the old value first."""
    changes = [c for c in store.changes(Reading, reading.id) if c.before is not None]
    typed = f"Typed by {reading.entered_by}." if reading.entered_by else ""
    lines = [typed, *(correction_words(c, zone) for c in changes)]
    st.html("".join(f'<div class="p-small">{escaped(text)}</div>' for text in lines if text))


def _removed(ctx: Context, driver: Driver, zones: dict[int, str], since: datetime) -> None:
    """The readings that were removed, each with the way back."""
    live = {r.id for r in ctx.store.all(Reading, driver_id=driver.id)}
    everything = ctx.store.all(Reading, include_removed=True, driver_id=driver.id)
    gone = [r for r in everything if r.id not in live and r.taken_at >= since]
    for reading in gone:
        with st.container(horizontal=True, vertical_alignment="center"):
            words = reading_words(reading, zones[reading.place_id])
            st.html(f'<div class="p-small">Removed: <s>{escaped(words)}</s></div>')
            if st.button("Put back", type="tertiary", key=f"back_{reading.id}"):
                ctx.store.restore(Reading, reading.id, by=ctx.who)
                note_for_next_run("Put back.")
                st.rerun()


def _illness(ctx: Context, driver: Driver) -> None:
    """A sick period begins or ends here; while it lasts every reading is for the physician."""
    period = open_sick_period(ctx.store, driver.id, ctx.now)
    zone = ctx.store.get(Place, driver.home_place_id).zone
    if period is not None:
        note = f": {period.note}" if period.note else ""
        st.html(
            f'<div class="p-why"><b>Marked ill</b> since {escaped(day(period.starts_at, zone))} by '
            f"{escaped(period.marked_by)}{escaped(note)}. The physician decides; its readings teach the "
            "driver's range nothing.</div>"
        )
        if st.button("Well again from now on"):
            mark_well(ctx.store, period, at=ctx.now, by=ctx.who)
            note_for_next_run(f"{driver.name} is no longer marked ill.")
            st.rerun()
        return
    with st.form(f"ill_{driver.id}", border=True):
        st.html('<div class="p-name">Illness</div>')
        since = st.date_input(
            "Ill since", ctx.now.astimezone(ZoneInfo(zone)).date(), key=f"ill_on_{driver.id}"
        )
        marked_by = st.text_input("Stated by", "the driver", key=f"ill_by_{driver.id}")
        note = st.text_input("Note", key=f"ill_note_{driver.id}")
        if st.form_submit_button("Mark ill"):
            starts_at = local_instant("ill since", since, time(), zone)
            mark_ill(
                ctx.store, driver.id, since=starts_at, marked_by=marked_by, note=note, by=ctx.who, now=ctx.now
            )
            note_for_next_run(f"{driver.name} is marked ill: the physician decides.")
            st.rerun()
