"""The Team page beside its records: the coach's limits, and the store as a whole."""

from __future__ import annotations

import streamlit as st

from planner.services.importing import load_demo
from planner.services.limits import (
    HIGHEST_RISK,
    NUMBER_LIMITS,
    RISK_SOURCE,
    RISKS,
    LimitValue,
    NumberLimit,
    fixed_rules,
    keep_limits,
    kept_limits,
)
from planner.services.team import backup_bytes, begin_own_team
from planner.services.workspace import is_empty
from planner.ui.errors import plain_errors
from planner.ui.file_import import draw_season_import
from planner.ui.page import Context, line, note_for_next_run
from planner.ui.tables import note, table


def draw_limits(ctx: Context) -> None:
    """What the coach asks of every plan, and the rules that stand."""
    kept = kept_limits(ctx.store)
    note(
        "Plans are compared against these limits; none of them is a medical clearance. Empty means no such "
        "limit. What the physician allows one driver, such as a highest bed, stands with the driver."
    )
    with st.form("limits", border=True):
        left, right = st.columns(2)
        values: dict[str, LimitValue] = {}
        for i, limit in enumerate(NUMBER_LIMITS):
            with right if i % 2 else left:
                values[limit.key] = _number(limit, kept[limit.key])
        with right if len(NUMBER_LIMITS) % 2 else left:
            values[HIGHEST_RISK] = st.segmented_control(
                "Highest risk class of a planned ascent", RISKS, default=kept[HIGHEST_RISK], required=True
            )
            note(RISK_SOURCE)
        if st.form_submit_button("Keep", type="primary"):
            with plain_errors():
                keep_limits(ctx.store, values)
                note_for_next_run("Kept: the limits.")
                st.rerun()
    table(
        ["Rules that stand", "source"],
        [[rule.meaning, rule.source] for rule in fixed_rules(ctx.units)],
        stack=True,
    )


def _number(limit: NumberLimit, kept: LimitValue) -> float | None:
    value = st.number_input(
        f"{limit.meaning}, {limit.unit}",
        value=float(kept) if isinstance(kept, float | int) else None,
        step=None,
        format="%g",
        placeholder="no limit" if limit.optional else None,
        key=f"limit_{limit.key}",
    )
    note(limit.source)
    return value


def draw_store(ctx: Context) -> None:
    """Where the data lie, a copy of them, and the way into and out of the demo season."""
    line(f"Everything is kept in {ctx.store.path}.")
    note("Another file: start the program with --store PATH, or set PLANNER_STORE.")
    draw_season_import(ctx)
    st.download_button(
        "Download a backup",
        data=lambda: backup_bytes(ctx.store),
        file_name=f"planner-backup-{ctx.now:%Y-%m-%d}.db",
        mime="application/vnd.sqlite3",
        on_click="ignore",
    )
    if ctx.is_demo:
        _leave_the_demo(ctx)
    elif is_empty(ctx.store):
        note("There are no drivers yet: the invented demo season can be opened here.")
        if st.button("Open the demo season"):
            with plain_errors():
                load_demo(ctx.store)
                note_for_next_run("This is the demo season: everything in it is invented.")
                st.rerun()
    else:
        note("The demo season needs a file of its own: start the program with --store and a new file name.")


def _leave_the_demo(ctx: Context) -> None:
    note(
        "This is the invented demo season. Beginning with your own team puts all of it aside, also what you "
        "typed into it: removed, not erased, and each record can be put back."
    )
    sure = st.checkbox("Put the demo season aside", key="leave_demo_sure")
    if st.button("Begin with my own team", disabled=not sure):
        with plain_errors():
            begin_own_team(ctx.store, by=ctx.who)
            note_for_next_run("The demo is put aside. Begin here: places first, then drivers.")
            st.rerun()
