"""The plan of a session: a driver's timeline with bottles, everybody's numbers, the reasons."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import datetime, timedelta

import streamlit as st

from planner.charts.fluids import CourseStep, drinks_course
from planner.hydration.plan import TimelineStep
from planner.physiology.drinking import HEAT_STOP_WORDS, TOO_MUCH_WATER_WORDS
from planner.season.model import Driver
from planner.services.fluids import MOST_STINTS, PlannedDriver, SessionAt, SessionDrinks
from planner.ui.fluids_cached import drinks_for
from planner.ui.fluids_cockpit import draw_clothing, draw_conditions
from planner.ui.fluids_words import at_most, bottles, change_range, ends, rate, rate_range, volume_range
from planner.ui.navigation import driver_handed_on
from planner.ui.page import Context
from planner.ui.tables import note, table
from planner.ui.text import escaped, literal
from planner.wording import (
    DASH,
    clock,
    day_and_clock,
    number,
    volume,
    zone_name,
)

DRIVER_KEY = "fluids_driver"


def draw_plan(ctx: Context, sessions: list[SessionAt], first: SessionAt) -> None:
    """Everything about one session's drinks."""
    shown = [s for s in sessions if s.session.ends_at > ctx.now - timedelta(hours=24)] or [first]
    left, right = st.columns([3, 1], gap="small", vertical_alignment="bottom")
    at = left.selectbox(
        "Session",
        shown,
        index=shown.index(first),
        format_func=lambda each: session_words(each, each.session.starts_at),
        key="fluids_session",
    )
    stints = right.number_input(
        "Stints", 1, MOST_STINTS, 1, help="The bottle is filled again between them.", key="fluids_stints"
    )
    drinks = drinks_for(ctx, at, int(stints))
    chosen = choose_driver([row.driver for row in drinks.rows])
    row = next(each for each in drinks.rows if each.driver.id == chosen)
    draw_driver(ctx, drinks, row)
    draw_everybody(ctx, drinks)
    draw_conditions(ctx, drinks)
    draw_clothing(ctx, drinks)


def session_words(at: SessionAt, when: datetime) -> str:
    """As "Race, Talquime Round, Sun 7 Jun, 15:00 UTC−06:00"."""
    zone = at.place.zone
    return f"{at.session.name}, {at.round.name}, {day_and_clock(when, zone)} {zone_name(zone, when)}"


def choose_driver(drivers: Sequence[Driver], key: str = DRIVER_KEY) -> int:
    """Which driver is looked at; the one handed on by another page first."""
    names = {d.id: d.name for d in drivers}
    handed_on = driver_handed_on()
    if handed_on in names:
        st.session_state[key] = handed_on
    elif st.session_state.get(key) not in names:
        st.session_state.pop(key, None)
    chosen = st.pills(
        "Driver",
        list(names),
        default=None if key in st.session_state else next(iter(names)),
        format_func=lambda each: literal(names[each]),
        required=True,
        label_visibility="collapsed",
        key=key,
        persist_state="session",
    )
    return next(iter(names)) if chosen is None else chosen


def draw_driver(ctx: Context, drinks: SessionDrinks, row: PlannedDriver) -> None:
    """One driver's timeline, and why."""
    _, best, _ = ends(row.plan.sweat_rate_l_per_h)
    zone = drinks.at.place.zone
    st.html(
        f'<div class="p-name">{escaped(row.driver.name)}, {escaped(drinks.at.session.name)} '
        f"{escaped(clock(drinks.at.session.starts_at, zone))}"
        f"–{escaped(clock(drinks.at.session.ends_at, zone))}</div>"
        f'<div class="p-line">Expected sweat {escaped(rate(best, ctx.units))} '
        f"({escaped(rate_range(row.plan.sweat_rate_l_per_h, ctx.units))}); mass "
        f"{escaped(change_range(row.plan.expected_mass_change_pct))} with this plan; sodium lost "
        f"{escaped(_sodium(row))}.</div>"
        + drinks_course([_course_step(step, drinks, row, ctx) for step in row.steps])
    )
    with st.expander("Why these numbers"):
        items = "".join(f"<li>{escaped(reason)}</li>" for reason in row.reasons)
        st.html(f'<ul class="p-signs p-why">{items}</ul>')
    note(TOO_MUCH_WATER_WORDS)
    note(HEAT_STOP_WORDS)


def draw_everybody(ctx: Context, drinks: SessionDrinks) -> None:
    """Everybody's numbers, a row a driver."""
    units = ctx.units
    rows = [
        [
            each.driver.name,
            rate_range(each.plan.sweat_rate_l_per_h, units),
            volume_range(each.plan.before_ml, units),
            _in_car(each, ctx),
            volume_range(each.plan.after_ml, units),
            _sodium(each),
            change_range(each.plan.expected_mass_change_pct),
        ]
        for each in drinks.rows
    ]
    table(
        ["", "sweat", "before", "in the car, at most", "after", "sodium lost", "mass"],
        rows,
        right=range(1, 7),
        caption="Everybody",
        stack=True,
    )


def _course_step(step: TimelineStep, drinks: SessionDrinks, row: PlannedDriver, ctx: Context) -> CourseStep:
    zone = drinks.at.place.zone
    start = drinks.at.session.starts_at
    begins, done = (clock(start + timedelta(hours=each), zone) for each in (step.from_h, step.to_h))
    _, best, high = ends(step.amount_ml)
    in_the_car = step.label.startswith("in the car")
    if in_the_car:
        amount, words = f"up to {at_most(best, ctx.units)}", _needed(step, ctx)
    elif best > 0.0:
        amount, words = volume(best, ctx.units), volume_range(step.amount_ml, ctx.units)
    elif high > 0.0:
        amount, words = DASH, f"up to {volume(high, ctx.units)} if urine is dark or absent"
    else:
        amount, words = DASH, "no more: urine is pale" if step.label.startswith("two") else "nothing lost"
    return CourseStep(
        when=f"{begins}–{done}",
        label=step.label,
        amount=amount,
        range_words=words,
        bottles=best / row.driver.bottle_ml,
        weight=step.to_h - step.from_h,
        in_the_car=in_the_car,
    )


def _needed(step: TimelineStep, ctx: Context) -> str:
    low, _, _ = ends(step.amount_ml)
    if low <= 0.0:
        return "as thirst asks; within 2 % even without"
    return f"at least {volume(low, ctx.units)} to stay within 2 %"


def _in_car(row: PlannedDriver, ctx: Context) -> str:
    _, best, _ = ends(row.plan.in_car_ml)
    return f"{at_most(best, ctx.units)}, {bottles(best / row.driver.bottle_ml)}"


def _sodium(row: PlannedDriver) -> str:
    low, _, high = ends(row.plan.sodium_mg)
    return f"{number(10.0 * round(low / 10.0))}–{number(10.0 * round(high / 10.0))} mg"
