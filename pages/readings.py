"""Readings: get it in, right."""

from __future__ import annotations

import streamlit as st

from planner.ui.cached import morning_of
from planner.ui.errors import plain_errors
from planner.ui.file_import import draw_reading_import
from planner.ui.navigation import lead_to
from planner.ui.page import Context, answer, end_page, line, start_page
from planner.ui.reading_corrections import draw_corrections
from planner.ui.reading_entry import draw_entry
from planner.wording import counted

MOST_NAMED = 8  # of those who wait; more would push the fields off a phone's screen
PARTS = {"Type": draw_entry, "Import": draw_reading_import, "Correct": draw_corrections}


def say_where_we_are(ctx: Context) -> bool:
    """The first line: how many are measured; returns whether there is anybody to measure."""
    rows = morning_of(ctx).rows
    if not rows:
        answer("No drivers yet. Add the first one on Team, then type a reading here.")
        lead_to("team")
        return False
    waiting = [row.driver for row in rows if row.outcome == "not measured"]
    answer(f"{len(rows) - len(waiting)} of {counted(len(rows), 'driver')} measured today.")
    more = f" and {len(waiting) - MOST_NAMED} more" if len(waiting) > MOST_NAMED else ""
    line(f"Not yet: {', '.join(waiting[:MOST_NAMED])}{more}." if waiting else "Everybody is measured.")
    return True


def main() -> None:
    """Draw the page."""
    ctx = start_page("Readings")
    if say_where_we_are(ctx):
        part = st.segmented_control(
            "What to do",
            list(PARTS),
            default="Type",
            required=True,
            label_visibility="collapsed",
            key="readings_part",
            persist_state="session",
        )
        with plain_errors(), st.container(key=f"p-{(part or 'Type').lower()}"):
            PARTS[part or "Type"](ctx)
    end_page(ctx)


main()
