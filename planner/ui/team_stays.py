"""The Team page's stays: where drivers sleep away from home, typed by hand and called off again."""

from __future__ import annotations

from datetime import datetime, time, timedelta
from typing import Final
from zoneinfo import ZoneInfo

import streamlit as st

from planner.season.model import Place, Stay
from planner.services.season import Calendar
from planner.services.trips import TypedTrip, call_off, plan_trip, stays_away
from planner.ui.cached import calendar_of
from planner.ui.errors import plain_errors
from planner.ui.fields import MOST_BUTTONS
from planner.ui.page import Context, line, note_for_next_run
from planner.ui.tables import note, table
from planner.ui.text import escaped, literal
from planner.wording import counted, day_and_clock, elevation, zone_name

LOOKS_AHEAD: Final = timedelta(days=30)
ARRIVES: Final = time(18)
LEAVES: Final = time(9)

_KEPT: Final = "stays kept"  # numbers the fields, so that the next ones begin empty
_LAST: Final = "stay kept last"


def draw_stays(ctx: Context) -> None:
    """What is planned in the next weeks, the fields of another stay, and the way to call one off."""
    calendar = calendar_of(ctx)
    places = {p.id: p for p in sorted(ctx.store.all(Place), key=lambda p: p.name)}
    if not calendar.drivers or not places:
        line("Add places and drivers first.")
        return
    planned = stays_away(calendar, ctx.now, ctx.now + LOOKS_AHEAD)
    if planned:
        _table(ctx, calendar, planned)
    else:
        line(f"No stay away from home is planned in the next {LOOKS_AHEAD.days} days.")
    note(
        "Where a driver sleeps, and since when, decides what range is expected. What no stay covers counts "
        "as spent at home, or where the last stay ended. For a round, Arrival works out the ways there."
    )
    with plain_errors():
        _last(ctx)
    with plain_errors(), st.container(border=True, key="p-card-stay"):
        _another(ctx, calendar, places)
    if planned:
        with plain_errors():
            _call_off(ctx, calendar, planned)


def _table(ctx: Context, calendar: Calendar, planned: list[Stay]) -> None:
    names = {driver.id: driver.name for driver in calendar.drivers}
    together: dict[tuple[int, datetime, datetime, float | None], list[str]] = {}
    for stay in planned:
        key = (stay.place_id, stay.arrive_at, stay.depart_at, stay.bed_elevation_m)
        together.setdefault(key, []).append(names[stay.driver_id])
    rows = []
    for (place_id, arrive_at, depart_at, typed_bed_m), who in together.items():
        place = calendar.places[place_id]
        bed_m = place.bed_elevation_m if typed_bed_m is None else typed_bed_m
        rows.append(
            [
                place.name,
                ", ".join(who),
                f"{day_and_clock(arrive_at, place.zone)} {zone_name(place.zone, arrive_at)}",
                day_and_clock(depart_at, place.zone),
                elevation(bed_m, ctx.units),
            ]
        )
    table(
        ["place", "drivers", "arrive", "leave", "sleep at"],
        rows,
        right=(4,),
        caption=f"Away from home, now and in the next {LOOKS_AHEAD.days} days",
        stack=True,
    )


def _another(ctx: Context, calendar: Calendar, places: dict[int, Place]) -> None:
    number = st.session_state.get(_KEPT, 0)
    names = {driver.id: driver.name for driver in calendar.drivers}
    key = f"stay_{{}}_{number}"
    driver_ids = _drivers(names, key.format("drivers"))
    place_id = st.selectbox(
        "Place",
        list(places),
        index=None,
        format_func=lambda each: places[each].name,
        placeholder="choose a place",
        key=key.format("place"),
        persist_state="session",
    )
    zone = places[place_id].zone if place_id in places else "UTC"
    today = ctx.now.astimezone(ZoneInfo(zone)).date()
    there = f", time in {literal(places[place_id].name)}" if place_id in places else ""
    left, right = st.columns(2)
    arrives = left.datetime_input(
        f"Arrives{there}",
        datetime.combine(today, ARRIVES),
        key=key.format("arrives"),
        persist_state="session",
    )
    leaves = right.datetime_input(
        f"Leaves{there}",
        datetime.combine(today + timedelta(days=4), LEAVES),
        key=key.format("leaves"),
        persist_state="session",
    )
    if st.button("Keep the stay", type="primary", key=key.format("keep")):
        change_set_id = plan_trip(ctx.store, TypedTrip(driver_ids, place_id, arrives, leaves), by=ctx.who)
        words = f"Kept: {counted(len(driver_ids), 'driver')} in {places[place_id or 0].name}."
        st.session_state[_KEPT] = number + 1
        st.session_state[_LAST] = (change_set_id, words)
        note_for_next_run(words)
        st.rerun()


def _drivers(names: dict[int, str], key: str) -> list[int]:
    if len(names) <= MOST_BUTTONS:
        return list(
            st.pills(
                "Drivers",
                list(names),
                selection_mode="multi",
                format_func=lambda each: literal(names[each]),
                key=key,
                persist_state="session",
            )
        )
    return list(
        st.multiselect(
            "Drivers", list(names), format_func=lambda each: names[each], key=key, persist_state="session"
        )
    )


def _last(ctx: Context) -> None:
    """The stay kept last in this window, with the way back."""
    if _LAST not in st.session_state:
        return
    change_set_id, words = st.session_state[_LAST]
    with st.container(horizontal=True, vertical_alignment="center", key="p-stay-last"):
        st.html(f'<div class="p-small">{escaped(words)}</div>', width="content")
        if st.button("Undo", type="tertiary", key=f"stay_undo_{change_set_id}"):
            ctx.store.undo(change_set_id, by=ctx.who)
            del st.session_state[_LAST]
            note_for_next_run("Undone.")
            st.rerun()


def _call_off(ctx: Context, calendar: Calendar, planned: list[Stay]) -> None:
    names = {driver.id: driver.name for driver in calendar.drivers}
    by_id = {stay.id: stay for stay in planned}

    def words(stay_id: int) -> str:
        stay = by_id[stay_id]
        place = calendar.places[stay.place_id]
        return f"{names[stay.driver_id]}, {place.name}, {day_and_clock(stay.arrive_at, place.zone)}"

    with st.container(horizontal=True, vertical_alignment="bottom"):
        chosen = st.selectbox(
            "Call off", list(by_id), index=None, format_func=words, placeholder="choose a stay"
        )
        if st.button("Call it off", disabled=chosen is None) and chosen is not None:
            change_set_id = call_off(ctx.store, by_id[chosen], by=ctx.who)
            text = f"Called off: {words(chosen)}."
            st.session_state[_LAST] = (change_set_id, text)
            note_for_next_run(text)
            st.rerun()
