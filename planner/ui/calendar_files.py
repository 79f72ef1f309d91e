"""Calendar files on the Season page: a driver's itinerary to send, rounds to take over."""

from __future__ import annotations

from typing import Final

import streamlit as st

from planner.exchange.calendar_rounds import ProposedRound, ReadRounds
from planner.season.model import Driver, Place
from planner.services.calendars import driver_calendar, import_rounds, is_there, preview_rounds
from planner.ui.errors import plain_errors
from planner.ui.page import Context, line, note_for_next_run
from planner.ui.tables import note, table
from planner.ui.text import literal
from planner.wording import DASH, counted, day_and_clock

_TAKEN: Final = "rounds taken last"


def draw_calendar_files(ctx: Context, driver: Driver | None) -> None:
    """A driver's calendar to send, and a calendar file of rounds to read."""
    with st.expander("Calendar files (.ics)"):
        with plain_errors():
            _draw_taken(ctx)
        if driver is not None:
            with plain_errors():
                _draw_download(ctx, driver)
        with plain_errors():
            _draw_upload(ctx)


def _draw_download(ctx: Context, driver: Driver) -> None:
    with st.container(horizontal=True, vertical_alignment="bottom", gap="small"):
        reminders = st.checkbox("with reminders to measure at high rounds", value=True, key="ics_reminders")
        light = st.checkbox("with the light to seek and avoid", key="ics_light")
    st.download_button(
        f"Calendar of {literal(driver.name)}",
        data=lambda: driver_calendar(ctx.store, driver, reminders=reminders, light=light),
        file_name=f"{'_'.join(driver.name.lower().split())}.ics",
        mime="text/calendar",
        on_click="ignore",
        key="ics_download",
    )
    note(
        "Sent again after a change, it updates the entries that a calendar holds already, and cancels those "
        "that are no longer planned. Times carry the zone of their place."
    )


def _draw_upload(ctx: Context) -> None:
    file = st.file_uploader(
        "Rounds from a calendar file",
        type=["ics"],
        help="An entry is a session; its title is “round: session”, its location the venue.",
        key="ics_upload",
    )
    if file is None:
        return
    read = preview_rounds(ctx.store, file.getvalue(), file.name)
    new = tuple(each for each in read.rounds if not is_there(ctx.store, each))
    line(
        f"{counted(len(new), 'round')} to take, {len(read.rounds) - len(new)} already there,"
        f" {counted(len(read.refused), 'entry', 'entries')} refused."
    )
    for sentence in read.refused:
        note(sentence)
    place_of = _confirm(ctx, new)
    missing = [each.location for each in new if each.location not in place_of]
    if missing:
        note(f"Still to be told: {', '.join(dict.fromkeys(missing))}. A venue not known is added on Team.")
    if new and st.button(f"Take {counted(len(new), 'round')}", type="primary", disabled=bool(missing)):
        _take(ctx, new, place_of, file.name)
    _table(ctx, read)


def _confirm(ctx: Context, new: tuple[ProposedRound, ...]) -> dict[str, Place]:
    """The place of each location: those named to the letter, and what the coach chooses for the others."""
    places = {p.id: p for p in sorted(ctx.store.all(Place), key=lambda p: p.name)}
    found: dict[str, Place] = {}
    for each in new:
        if each.location in found:
            continue
        if each.certain and each.place is not None:
            found[each.location] = each.place
            continue
        ids = list(places)
        guess = ids.index(each.place.id) if each.place is not None else None
        chosen = st.selectbox(
            f"“{literal(each.location)}” is",
            ids,
            index=guess,
            format_func=lambda id: places[id].name,
            placeholder="which place?",
            key=f"ics_place_{each.location}",
        )
        if chosen is not None:
            found[each.location] = places[chosen]
    return found


def _take(ctx: Context, new: tuple[ProposedRound, ...], place_of: dict[str, Place], file: str) -> None:
    report = import_rounds(ctx.store, new, place_of, by=ctx.who, file=file)
    last = ctx.store.last_change_set()
    words = f"{file}: {counted(len(report.kept), 'round')} taken."
    if last is not None:
        st.session_state[_TAKEN] = (last.id, words)
    note_for_next_run(words)
    st.rerun()


def _draw_taken(ctx: Context) -> None:
    """The file taken last in this window, with the way back."""
    if _TAKEN not in st.session_state:
        return
    change_set_id, words = st.session_state[_TAKEN]
    with st.container(horizontal=True, vertical_alignment="center"):
        line(words)
        if st.button("Undo the rounds", type="tertiary", key="ics_undo"):
            ctx.store.undo(change_set_id, by=ctx.who)
            del st.session_state[_TAKEN]
            note_for_next_run("The rounds were taken back; the file can be read again.")
            st.rerun()


def _table(ctx: Context, read: ReadRounds) -> None:
    rows = []
    for each in read.rounds:
        zone = each.place.zone if each.place is not None else "UTC"
        first = each.sessions[0].starts_at
        when = (
            day_and_clock(first, zone) if first.tzinfo else f"{first:%a} {first.day} {first:%b, %H:%M} local"
        )
        place = each.place.name if each.place is not None else DASH
        state = "already there" if is_there(ctx.store, each) else "to take"
        rows.append([each.name, each.location, place, when, str(len(each.sessions)), state])
    if rows:
        head = ["round", "location in the file", "place", "first session", "sessions", ""]
        table(head, rows, right=(4,), caption="What the file holds", stack=True)
    for sentence in dict.fromkeys(n for each in read.rounds for n in each.notes):
        note(sentence)
