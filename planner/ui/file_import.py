"""Import of a CSV file: a preview with every refused line and why, then all of the good ones; undo."""

from __future__ import annotations

from typing import Final

import streamlit as st

from planner.errors import RefusedLineError
from planner.monitoring.model import Reading
from planner.season.model import Driver, Place
from planner.services.importing import READINGS_KIND, ImportReport, import_file, preview_file
from planner.services.readings import reading_words
from planner.ui.errors import plain_errors
from planner.ui.page import Context, note_for_next_run
from planner.ui.tables import table
from planner.ui.text import escaped
from planner.wording import NO_BREAK, counted

LINES_SHOWN: Final = 12
_LAST: Final = "import taken last"


def draw_reading_import(ctx: Context) -> None:
    """A file of readings."""
    _draw(
        ctx,
        READINGS_KIND,
        "A file of readings (CSV)",
        "The first line names the columns: driver, place, taken at, SpO2; the rest may be missing.",
    )


def draw_season_import(ctx: Context) -> None:
    """A file of any kind, told by its header."""
    _draw(
        ctx,
        None,
        "A file of the season (CSV)",
        "One kind a file, best in this order: places, drivers, rounds, sessions, commitments, stays, legs. "
        "The first line names the columns and tells which kind it is.",
    )


def _draw(ctx: Context, kind: str | None, label: str, explained: str) -> None:
    """Choose a file, see what would happen, take it."""
    file = st.file_uploader(
        label,
        type=["csv", "txt", "tsv"],
        help="One line a record. Semicolons, tabs, decimal commas and a byte-order mark are understood.",
    )
    with plain_errors():
        _draw_last(ctx)
    if file is None:
        text = f"{explained} Nothing is kept before you have seen what would be."
        st.html(f'<div class="p-line">{escaped(text)}</div>')
        return
    with plain_errors():
        _preview(ctx, file.getvalue(), file.name, kind)


def _preview(ctx: Context, data: bytes, name: str, kind: str | None) -> None:
    report = preview_file(ctx.store, data, name, by=ctx.who, now=ctx.now, kind=kind)
    st.html(f'<div class="p-name" role="status">{escaped(report_words(report))}</div>')
    for note in report.notes:
        st.html(f'<div class="p-small">{escaped(note)}</div>')
    if report.taken and st.button(f"Take {_records(report)}", type="primary"):
        done = import_file(ctx.store, data, name, by=ctx.who, now=ctx.now, kind=kind)
        words = f"{name}: {report_words(done, done=True)}"
        st.session_state[_LAST] = (done.change_set_id, words)
        note_for_next_run(words)
        st.rerun()
    _refused(report.refused)
    _new(ctx, report)


def report_words(report: ImportReport, *, done: bool = False) -> str:
    """As "23 readings to take, 2 already there, 3 lines refused"."""
    return (
        f"{_records(report)} {'taken' if done else 'to take'}, {report.already_there} already there, "
        f"{counted(report.refused_lines, 'line')} refused."
    )


def _records(report: ImportReport) -> str:
    return counted(report.taken, report.kind.removesuffix("s"), report.kind)


def _draw_last(ctx: Context) -> None:
    """The file taken last in this window, with the way back."""
    if _LAST not in st.session_state:
        return
    change_set_id, words = st.session_state[_LAST]
    with st.container(horizontal=True, vertical_alignment="center", key="p-import-last"):
        st.html(f'<div class="p-small">{escaped(words)}</div>', width="content")
        if st.button("Undo the import", type="tertiary"):
            ctx.store.undo(change_set_id, by=ctx.who)
            del st.session_state[_LAST]
            note_for_next_run("The import was taken back; the file can be imported again.")
            st.rerun()


def _refused(refused: tuple[RefusedLineError, ...]) -> None:
    if not refused:
        return
    rows = [
        (f"Line{NO_BREAK}{r.line}", r.field, "empty" if r.value in ("", None) else str(r.value), r.expected)
        for r in refused
    ]
    table(
        ("Where", "Column", "Value", "What was wanted"),
        rows,
        caption="Refused lines; put them right in the file and import it again",
        stack=True,
    )


def _new(ctx: Context, report: ImportReport) -> None:
    readings = [r for r in report.records if isinstance(r, Reading)]
    if not readings:
        return
    names = {d.id: d.name for d in ctx.store.all(Driver)}
    zones = {p.id: p.zone for p in ctx.store.all(Place)}
    more = len(readings) - LINES_SHOWN
    table(
        ("Driver", "Reading, local time"),
        [(names[r.driver_id], reading_words(r, zones[r.place_id])) for r in readings[:LINES_SHOWN]],
        caption="To take" + (f" (the first {LINES_SHOWN}, {more} more follow)" if more > 0 else ""),
    )
