"""Import of a file of readings: a preview with every refused line and why, then all of the good ones."""

from __future__ import annotations

import streamlit as st

from planner.errors import RefusedLineError
from planner.monitoring.model import Reading
from planner.season.model import Driver, Place
from planner.services.importing import ImportReport, import_readings, preview_readings
from planner.services.readings import reading_words
from planner.ui.page import Context, note_for_next_run
from planner.ui.tables import table
from planner.ui.text import escaped
from planner.wording import NO_BREAK, counted

LINES_SHOWN = 12


def draw_import(ctx: Context) -> None:
    """Choose a file, see what would happen, take it."""
    file = st.file_uploader(
        "A file of readings (CSV)",
        type=["csv", "txt", "tsv"],
        help="One line a reading. Semicolons, tabs, decimal commas and a byte-order mark are understood.",
    )
    if file is None:
        st.html(
            '<div class="p-line">The first line names the columns: driver, place, taken at, SpO2; the rest '
            "may be missing. Nothing is kept before you have seen what would be.</div>"
        )
        return
    data = file.getvalue()
    report = preview_readings(ctx.store, data, file.name, ctx.who, ctx.now)
    st.html(f'<div class="p-name" role="status">{escaped(report_words(report))}</div>')
    for note in report.notes:
        st.html(f'<div class="p-small">{escaped(note)}</div>')
    if report.taken and st.button(f"Take {counted(report.taken, 'reading')}", type="primary"):
        done = import_readings(ctx.store, data, file.name, ctx.who, ctx.now)
        note_for_next_run(f"{file.name}: {report_words(done, done=True)}")
        st.rerun()
    _refused(report.refused)
    _new(ctx, report)


def report_words(report: ImportReport, *, done: bool = False) -> str:
    """As "23 readings to take, 2 already there, 3 lines refused"."""
    taken = counted(report.taken, "reading")
    return (
        f"{taken} {'taken' if done else 'to take'}, {report.already_there} already there, "
        f"{counted(report.refused_lines, 'line')} refused."
    )


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
        ("Driver", "Reading"),
        [(names[r.driver_id], reading_words(r, zones[r.place_id])) for r in readings[:LINES_SHOWN]],
        caption="To take" + (f" (the first {LINES_SHOWN}, {more} more follow)" if more > 0 else ""),
    )
