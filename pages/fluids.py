"""Fluids: what to drink, and what did the last session teach?"""

from __future__ import annotations

import streamlit as st

from planner.charts.fluids import FLUIDS_STYLE
from planner.services.fluids import SessionAt, SessionDrinks, next_session, sessions_in_order, taught_of
from planner.ui.cached import calendar_of
from planner.ui.errors import plain_errors
from planner.ui.fluids_cached import drinks_for, weighed_by
from planner.ui.fluids_day import draw_day
from planner.ui.fluids_plan import draw_plan, session_words
from planner.ui.fluids_taught import draw_taught
from planner.ui.fluids_weigh import draw_weigh
from planner.ui.fluids_words import at_most, ends
from planner.ui.page import Context, answer, end_page, line, start_page
from planner.wording import counted

PARTS = ("Plan", "Weigh", "Learned", "Day")


def say_what_to_drink(ctx: Context, drinks: SessionDrinks) -> None:
    """The first line: the session to come and what goes into the cars; then who to talk to."""
    most = [ends(row.plan.in_car_ml)[2] for row in drinks.rows]
    answer(
        f"{session_words(drinks.at, drinks.at.session.starts_at)}: at most {at_most(min(most), ctx.units)} "
        f"to {at_most(max(most), ctx.units)} in the car, by driver."
    )
    habits = [each for each in taught_of(calendar_of(ctx), weighed_by(ctx)) if each.findings]
    if habits:
        told = "; ".join(f"{each.driver.name} {each.findings[0].kind}" for each in habits)
        line(f"{counted(len(habits), 'driver')} to talk to: {told}.")
    else:
        line("No drinking habit stands out in the last weighings.")


def draw_parts(ctx: Context, sessions: list[SessionAt], first: SessionAt, drinks: SessionDrinks) -> None:
    """The four parts, one at a time."""
    part = st.segmented_control(
        "What to do",
        PARTS,
        default="Plan",
        required=True,
        label_visibility="collapsed",
        key="fluids_part",
        persist_state="session",
    )
    with plain_errors(), st.container(key=f"p-fluids-{part.lower()}"):
        if part == "Weigh":
            draw_weigh(ctx)
        elif part == "Learned":
            draw_taught(ctx, drinks)
        elif part == "Day":
            draw_day(ctx)
        else:
            draw_plan(ctx, sessions, first)


def main() -> None:
    """Draw the page."""
    ctx = start_page("Fluids")
    st.html(f"<style>{FLUIDS_STYLE}</style>")
    calendar = calendar_of(ctx)
    sessions = sessions_in_order(calendar)
    first = next_session(sessions, ctx.now)
    if not calendar.drivers:
        answer("No drivers yet. Add the first one on Team, then plan a session here.")
    elif first is None:
        answer("No session to drink for yet. Add a round with its sessions on Team.")
        with plain_errors():
            draw_weigh(ctx)
    else:
        drinks = drinks_for(ctx, first, 1)
        say_what_to_drink(ctx, drinks)
        draw_parts(ctx, sessions, first, drinks)
    end_page(ctx)


main()
