"""The parts of the Arrival page: the trade-off, the way that is looked at, its choice, its days, all ways."""

from __future__ import annotations

from typing import Any

import streamlit as st

from planner.charts.arrival import KIND_STYLES, PICKED
from planner.errors import PlannerError
from planner.season.arrival import Option
from planner.services.arrival import Arrival
from planner.services.arrival_choice import (
    LONGEST_REASON,
    Choice,
    ascent_failures,
    choose,
    is_planned,
    refused,
    undo,
)
from planner.ui.arrival_cached import Asked, chosen_before, days_chart_of, days_of, trade_off_of
from planner.ui.arrival_words import (
    WAY_HEAD,
    against_the_plan,
    choice_words,
    day_rows,
    given_rows,
    spread_words,
    titled,
    way_row,
)
from planner.ui.errors import in_screen_words, plain_errors
from planner.ui.page import Context, line, note_for_next_run
from planner.ui.tables import note, table
from planner.ui.text import escaped, literal

_REFUSED = "why a way was not chosen"


def draw_ways(ctx: Context, asked: Asked, found: Arrival) -> Option:
    """The chart of all ways beside the one that is looked at; returns that one."""
    built = [option for option in found.options if option.itinerary is not None]
    titles = [option.title for option in built]
    name = f"{found.driver.id}_{found.round.id}"
    left, right = st.columns([3, 2], gap="medium")
    chart_key = f"arrival_chart_{name}"
    pressed = _pressed(chart_key)
    way_key = f"arrival_way_{name}_{pressed}"
    with right:
        title = st.selectbox(
            "Look at one way: press its mark, or choose here",
            titles,
            index=titles.index(pressed) if pressed in titles else 0,
            format_func=lambda each: choice_words(titles.index(each) + 1, built[titles.index(each)]),
            key=way_key,
        )
        option = built[titles.index(title)]
        _draw_option(ctx, found, option, way_key)
    with left:
        st.vega_lite_chart(
            spec=trade_off_of(ctx, asked, found, option),
            theme=None,
            width="stretch",
            on_select="rerun",
            selection_mode=PICKED,
            key=chart_key,
            alt="Nights away and SpO2 on race morning of each way: "
            + "; ".join(f"{row[0]}, {row[3]} nights, {row[6]}" for row in _rows(found, built)),
        )
        kinds = {option.kind for option in built}
        shapes = [f"{style.glyph} {kind}" for kind, style in KIND_STYLES.items() if kind in kinds]
        note(f"{' · '.join(shapes)}. Filled: keeps every limit. Large: the one looked at.")
        note(spread_words(found))
    return option


def _pressed(chart_key: str) -> str | None:
    """The way whose mark was pressed last, by what the chart told the run before."""
    event: Any = st.session_state.get(chart_key)
    picked = event.selection.get(PICKED, []) if event is not None else []
    return str(picked[0]["way"]) if picked else None


def _draw_option(ctx: Context, found: Arrival, option: Option, way_key: str) -> None:
    """What one way gives and costs, what stands against it, and its choice."""
    st.html(
        f'<div class="p-why"><span class="p-do">{escaped(_capital(titled(found, option)))}.</span> '
        f"{escaped(against_the_plan(found, option))}</div>"
    )
    table(["", "gives and costs"], given_rows(option, ctx.units), right=(1,))
    draw_choice(ctx, found, option, way_key)


def draw_choice(ctx: Context, found: Arrival, option: Option, way_key: str) -> None:
    """Choose the way, or say why not; undo what was chosen before."""
    said = st.session_state.pop(_REFUSED, None)
    if said:
        st.error(literal(said))
    made, set_aside = chosen_before(ctx, found)
    reason, climbs = "", ascent_failures(found, option)
    if is_planned(found, option):
        line("This is what is planned.")
    elif climbs and not [each for each in option.why if each not in climbs]:
        line(" ".join(climbs))
        reason = st.text_input(
            "Reason to set the ascent rule aside for this plan",
            max_chars=LONGEST_REASON,
            help="It is kept with the plan and shown wherever the plan is handed on.",
            key=f"arrival_reason_{found.driver.id}_{found.round.id}",
        )
    elif option.why:
        line(f"Not to be chosen: {' '.join(option.why)}")
    with st.container(horizontal=True, gap="small"):
        st.button(
            "Choose",
            type="primary",
            disabled=is_planned(found, option) or bool(refused(found, option, reason)),
            on_click=_choose,
            args=(ctx, found, option, reason, way_key),
            key="arrival_choose",
        )
        if made:
            st.button("Undo", on_click=_undo, args=(ctx, found, made[0], way_key), key="arrival_undo")
    if made:
        note(f"Chosen by {made[0].by}: {made[0].title}. Undo puts back what was planned before.")
    if set_aside:
        line(f"The present plan sets the ascent rule aside. The reason given: {set_aside}")
    if found.in_hindsight:
        note(
            "This round has begun, so its days before are past: choosing says that they went that way. It "
            "corrects the itinerary, and with it every range and outcome that rests on it."
        )


def _choose(ctx: Context, found: Arrival, option: Option, reason: str, way_key: str) -> None:
    """Before the next run: a choice from the state of the season that was on the screen."""
    with plain_errors():
        try:
            choose(ctx.store, found, option, by=ctx.who, ascent_reason=reason)
            note_for_next_run(f"Kept: {found.driver.name} to {found.round.name}, {option.title}.")
            _look_at_what_is_planned(found, way_key)
        except PlannerError as error:
            st.session_state[_REFUSED] = in_screen_words(error)


def _undo(ctx: Context, found: Arrival, choice: Choice, way_key: str) -> None:
    with plain_errors():
        try:
            undo(ctx.store, choice, by=ctx.who)
            note_for_next_run(f"Undone: {choice.title}. What was planned before is back.")
            _look_at_what_is_planned(found, way_key)
        except PlannerError as error:
            st.session_state[_REFUSED] = in_screen_words(error)


def _look_at_what_is_planned(found: Arrival, way_key: str) -> None:
    usual = next(option.title for option in found.options if option.kind == "usual plan")
    st.session_state[way_key] = usual


def draw_days(ctx: Context, asked: Asked, found: Arrival, option: Option) -> None:
    """The strip of a way's days, and the same in words."""
    st.subheader("Its days", anchor=False)
    days = days_of(ctx, asked, found, option)
    st.vega_lite_chart(
        spec=days_chart_of(ctx, asked, found, option),
        theme=None,
        width="stretch",
        key=f"arrival_days_{found.driver.id}_{found.round.id}",
        alt="Bed elevation and expected SpO2 on waking, day by day; the table below says the same in words",
    )
    note(
        "Above: the range of a reading on waking. Below: the bed's elevation; a bar across is the track on a "
        "day with a session, ▶ a day of travel."
    )
    table(
        ["day", "slept before it", "SpO2 on waking", "that day", "light"],
        day_rows(days, found.setting.places, ctx.units),
        right=(2,),
        stack=True,
    )
    note(
        "Times are local where they are lived. Light moves the body clock only until it is adapted; seek "
        "bright light in the first window, keep out of it in the second (set by the body's temperature "
        "minimum, taken from the usual time of waking; under 3 zones the published windows are carried on)."
    )


def draw_all(found: Arrival) -> None:
    """Every way that can be built, to compare; then what stands in the way of the others."""
    st.subheader("All ways", anchor=False)
    built = [option for option in found.options if option.itinerary is not None]
    fit = [option for option in built if option.feasible]
    table(
        WAY_HEAD,
        _rows(found, fit),
        right=(2, 3, 4, 5, 6, 7, 9),
        caption=f"Keep every limit, {found.order} first",
        stack=True,
    )
    missed = [option for option in found.options if not option.feasible]
    if missed:
        table(
            ["way", "why not"],
            [
                [f"{KIND_STYLES[option.kind].glyph} {_capital(titled(found, option))}", " ".join(option.why)]
                for option in missed
            ],
            caption="Miss a limit, or cannot be had",
            stack=True,
        )
    note(
        "SpO2 awake at rest by the driver's own range, which holds 95 % of single readings. Aerobic capacity "
        "is per cent of one's own at sea level, by published averages. Risk class of the planned ascent by "
        "the Wilderness Medical Society 2024: a caution, and the physician decides. Journeys without typed "
        "times are estimated from the distance."
    )


def _rows(found: Arrival, options: list[Option]) -> list[list[str]]:
    ranks = {option.title: i + 1 for i, option in enumerate(found.options)}
    return [way_row(found, ranks[option.title], option) for option in options]


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]
