"""Arrival: how should this driver reach this round?"""

from __future__ import annotations

import streamlit as st

from planner.season.model import Round
from planner.services.arrival import next_high_round
from planner.services.season import Calendar
from planner.ui.arrival_cached import Asked, arrival_of
from planner.ui.arrival_limits import draw_limits
from planner.ui.arrival_parts import draw_all, draw_days, draw_ways
from planner.ui.arrival_words import headline, planned_words, round_words
from planner.ui.cached import calendar_of
from planner.ui.errors import plain_errors
from planner.ui.page import Context, answer, end_page, line, start_page
from planner.wording import counted, day, elevation


def main() -> None:
    """Draw the page."""
    ctx = start_page("Arrival")
    calendar = calendar_of(ctx)
    if not calendar.drivers:
        answer("No drivers yet. Add the first one on Team.")
    elif not calendar.season_at(ctx.now):
        answer("No rounds yet. Add places and rounds on Team, or read them from a file on Readings.")
    else:
        show_arrival(ctx, calendar)
    end_page(ctx)


def show_arrival(ctx: Context, calendar: Calendar) -> None:
    """Draw who and where to, what is asked, and the ways."""
    head = st.container()
    left, right = st.columns(2, gap="small")
    drivers = {each.id: each for each in calendar.drivers}
    with left:
        driver_id = st.selectbox(
            "Driver",
            list(drivers),
            format_func=lambda id: drivers[id].name,
            key="driver_shown",
            persist_state="session",
        )
    rounds = {each.id: each for each in calendar.season_at(ctx.now)}
    first = next_high_round(calendar, ctx.now) or next(iter(rounds.values()))
    with right:
        round_id = st.selectbox(
            "Round",
            list(rounds),
            index=list(rounds).index(first.id),
            format_func=lambda id: round_choice(ctx, calendar, rounds[id]),
            key="arrival_round",
            persist_state="session",
        )
    limits, order, lower_bed_m = draw_limits(ctx)
    asked = Asked(drivers[driver_id], rounds[round_id], limits, order, lower_bed_m)
    with head:
        answered = False
        with plain_errors():
            found = arrival_of(ctx, asked)
            answer(headline(found))
            line(round_words(found))
            answered = True
        if not answered:
            answer(f"{asked.driver.name} to {asked.round.name}: no way can be worked out.")
            return
    fit = sum(option.feasible for option in found.options)
    keep = "keeps" if fit == 1 else "keep"
    line(f"{counted(len(found.options), 'way')}: {fit} {keep} every limit. {planned_words(found)}")
    option = draw_ways(ctx, asked, found)
    draw_days(ctx, asked, found, option)
    draw_all(found)


def round_choice(ctx: Context, calendar: Calendar, given: Round) -> str:
    """A round in the list: number, name, when, how high, whether it has begun."""
    place = calendar.place_of(given)
    text = f"{given.number}  {given.name}, {day(calendar.starts_at(given), place.zone)}"
    if calendar.is_high(given):
        text += f", {elevation(max(place.track_elevation_m, place.bed_elevation_m), ctx.units)}"
    if calendar.ends_at(given) <= ctx.now:
        return f"{text} (over)"
    return f"{text} (has begun)" if calendar.starts_at(given) <= ctx.now else text


main()
