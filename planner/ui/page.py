"""The frame of every page: opens the store, draws the head, offers a start, ends quietly.

A page is a script: `ctx = start_page("Places")`, its first line by `answer(...)`, its evidence, and at last
`end_page(ctx)`.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from datetime import datetime
from pathlib import Path
from typing import Final

import streamlit as st

from planner.services import workspace
from planner.services.importing import load_demo, start_empty
from planner.store.store import Store
from planner.ui.cautions import emergency_signs_button, footer
from planner.ui.errors import plain_errors
from planner.ui.navigation import draw_menu, go_to
from planner.ui.style import style_sheet
from planner.ui.text import escaped, literal
from planner.units import TO_HOUSE
from planner.wording import UnitChoice, day, unit_name

_WHO: Final = "who"
_NOTE: Final = "note for the next run"
_ENDED: Final = "page has drawn its end"


@dataclass(frozen=True)
class Context:
    """What every page works with; `now` is UTC, in the demo season the instant at which its clock stands."""

    store: Store
    now: datetime
    units: UnitChoice
    who: str
    is_demo: bool


def start_page(title: str) -> Context:
    """Begin a page. Without drivers it offers the demo season or an own team, until one is chosen."""
    st.html(style_sheet())
    st.session_state[_ENDED] = False
    store = open_store()
    who = str(st.session_state.get(_WHO) or workspace.last_name(store))
    context = Context(
        store=store,
        now=workspace.now(store),
        units=workspace.units_of(store, who),
        who=who,
        is_demo=workspace.is_demo(store),
    )
    _head(title, context)
    _show_note()
    if workspace.is_empty(store) and not workspace.has_begun_empty(store):
        _offer_a_start(context)
        end_page(context)
        st.stop()
    return context


def end_page(context: Context) -> None:
    """End a page with the cautions."""
    if context.is_demo:
        st.html(
            '<div class="p-small">Demo season: its people, teams, places and readings are invented. '
            f"Its clock stands still on {escaped(day(context.now))}.</div>"
        )
    st.session_state[_ENDED] = True
    footer()


def end_whatever_happened() -> None:
    """Draw the cautions under a page that a fault kept from its end."""
    if not st.session_state.get(_ENDED):
        footer()


def answer(sentence: str) -> None:
    """The page's first line: the answer to its question, in words."""
    st.html(f'<h1 class="p-answer">{escaped(sentence)}</h1>')


def line(text: str) -> None:
    """A quiet line under the answer."""
    st.html(f'<div class="p-line">{escaped(text)}</div>')


def note_for_next_run(text: str) -> None:
    """Say something at the head of the next run, after something was kept and the page is drawn anew."""
    st.session_state[_NOTE] = text


def open_store() -> Store:
    """The store of this program; opened once, and again when another file was put in its place."""
    path = workspace.default_store_path()
    if not path.exists():
        workspace.open_workspace(path).close()
    return _opened(str(path), path.stat().st_ino)


@st.cache_resource(show_spinner=False, max_entries=8)
def _opened(path: str, file_number: int) -> Store:
    return workspace.open_workspace(Path(path))


def _head(title: str, context: Context) -> None:
    with st.container(
        horizontal=True,
        wrap=False,
        vertical_alignment="center",
        horizontal_alignment="distribute",
        gap="small",
        key="p-head",
    ):
        st.html(f'<div class="p-over">{escaped(title)}</div>')
        # On a narrow screen the page's name is the menu: the frontend's own lies over the page that was
        # chosen, and closes by itself on telephones only.
        menu = st.popover(
            title, type="tertiary", icon=":material/menu:", key=f"p-menu-{title}", on_change="rerun"
        )
        emergency_signs_button()
        you = st.popover(literal(context.who), type="tertiary", key="you", on_change="rerun")
    if menu.open:
        with menu:
            draw_menu()
    if you.open:
        with you, plain_errors():
            you_form(context, "you_form")


def you_form(context: Context, key: str) -> None:
    """Who types here, and in which units."""
    with st.form(key, border=False):
        name = st.text_input("Your name", context.who, help="It is kept beside what you type.")
        chosen = {
            field.name: st.segmented_control(
                field.name.capitalize(),
                list(TO_HOUSE[field.name]),
                default=getattr(context.units, field.name),
                format_func=unit_name,
                required=True,
            )
            for field in fields(UnitChoice)
        }
        if st.form_submit_button("Keep", type="primary"):
            kept = workspace.remember_name(context.store, name)
            workspace.choose_units(context.store, kept, UnitChoice(**chosen))
            st.session_state[_WHO] = kept
            st.rerun()


def _show_note() -> None:
    text = st.session_state.pop(_NOTE, None)
    if text:
        st.html(f'<div class="p-kept" role="status">{escaped(text)}</div>')


def _offer_a_start(context: Context) -> None:
    answer("No drivers yet. Look around in the demo season, or begin with your own team.")
    line(
        "The demo is an invented series with eight drivers, a year of rounds and ten weeks of readings. "
        "Its clock stands still on a morning at a high round."
    )
    with st.container(horizontal=True, gap="small"):
        demo = st.button("Open the demo season", type="primary")
        own = st.button("Begin with my own team")
    if demo:
        load_demo(context.store)
        st.rerun()
    if own:
        start_empty(context.store)
        go_to("team")
