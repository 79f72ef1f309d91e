"""A list of records that can be added to, changed, removed and put back: what all kinds have in common."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Generic

import streamlit as st

from planner.services.team import R, removed, save
from planner.ui.errors import plain_errors
from planner.ui.fields import Kept
from planner.ui.page import Context, note_for_next_run
from planner.ui.tables import table
from planner.ui.text import literal

ADD = 0  # stands for "a new one" among the ids


@dataclass(frozen=True)
class RecordList(Generic[R]):
    """One kind of record on the screen.

    `form` draws the widgets for a record (None = a new one) and returns what builds the record from what was
    typed; that is called only when the record is kept, so an error leaves everything as it was typed.
    """

    kind: type[R]
    noun: str  # "driver"
    head: Sequence[str]
    row: Callable[[R], Sequence[str]]
    form: Callable[[R | None, Kept], Callable[[], R]]
    right: Sequence[int] = ()
    key: str = ""  # tells two lists of one kind apart, such as the sessions of two rounds


def draw_records(ctx: Context, records: Sequence[R], shown: RecordList[R]) -> R | None:
    """Draw the list with the form for the chosen one, and return that; None stands for a new one."""
    if records:
        table(shown.head, [shown.row(each) for each in records], right=shown.right, stack=True)
    by_id = {each.id: each for each in records}
    key = f"{shown.noun}{shown.key}"
    chosen = st.selectbox(
        f"Add or change a {shown.noun}",
        [ADD, *by_id],
        format_func=lambda id: by_id[id].name if id else f"Add a {shown.noun}",
        key=f"{key}_chosen",
        persist_state="session",
    )
    record = by_id.get(chosen)
    # Fields that were kept are drawn afresh under a new number, so that the next ones start empty, and those
    # of a record that somebody else changed under its new content.
    times_kept = st.session_state.setdefault(f"{key}_times_kept", 0)
    kept_under = f"{key}_{chosen}_{times_kept}_{hash(record)}"
    with st.container(border=True):
        build = shown.form(record, Kept(kept_under))
        with st.container(horizontal=True, gap="small"):
            keep = st.button("Keep", type="primary", key=f"{kept_under} keep")
            remove = st.button("Remove", key=f"{kept_under} remove") if record else False
    with plain_errors():
        if keep:
            kept = save(ctx.store, build(), by=ctx.who)
            _done(key, f"Kept: {kept.name}.")
        if remove and record is not None:
            ctx.store.remove(record, by=ctx.who, why="removed on Team")
            _done(key, f"Removed: {record.name}. It can be put back below.")
    _draw_removed(ctx, shown, key)
    return record


def _done(key: str, text: str) -> None:
    st.session_state[f"{key}_times_kept"] += 1
    note_for_next_run(text)
    st.rerun()


def _draw_removed(ctx: Context, shown: RecordList[R], key: str) -> None:
    gone = removed(ctx.store, shown.kind)
    if not gone:
        return
    with st.expander(f"Removed ({len(gone)}): can be put back"):
        for record in gone:
            if st.button(f"Put back {literal(record.name)}", key=f"{key}_put_back_{record.id}"):
                with plain_errors():
                    ctx.store.restore(shown.kind, record.id, by=ctx.who)
                    _done(key, f"Put back: {record.name}.")
