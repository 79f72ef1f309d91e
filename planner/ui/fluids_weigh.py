"""Weigh in and weigh out, side by side: a few taps, and what it says shown back at once."""

from __future__ import annotations

from typing import Final, NamedTuple, get_args

import streamlit as st

from planner.errors import PlannerError
from planner.hydration.model import Weighing, WeighingClothes
from planner.physiology.drinking import AFTER_L_PER_KG, NEXT_IS_NEAR_H
from planner.services.typed import typed_value
from planner.services.weighing_entry import (
    OpenWeighing,
    TypedWeighOut,
    likely_minutes,
    measured_conditions,
    not_weighed_in,
    open_weighings,
    session_near,
    weigh_in,
    weigh_out,
)
from planner.ui.cached import calendar_of
from planner.ui.errors import show_error
from planner.ui.fluids_cached import weighed_by
from planner.ui.fluids_words import weighed_words
from planner.ui.navigation import driver_handed_on
from planner.ui.page import Context, note_for_next_run
from planner.ui.tables import note
from planner.ui.text import escaped, literal
from planner.units import from_house
from planner.wording import clock, mass, unit_name, volume

_ROUND: Final = "weighing round"  # moves with every weighing kept, so that the next form begins empty
_LAST: Final = "weighing kept last"


class _OutFields(NamedTuple):
    """The weigh-out's fields as typed, in the reader's units."""

    after: float | None
    drink: float | None
    minutes: float | None
    urine: float | None
    food: float | None
    clothes: str
    air: float | None
    humidity: float | None


def draw_weigh(ctx: Context) -> None:
    """The weighing kept last, then the two forms."""
    _show_last(ctx)
    left, right = st.columns(2, gap="large")
    with left:
        _draw_in(ctx)
    with right:
        _draw_out(ctx)
    note(
        "Weigh on the same scale, bladder empty, skin towelled dry, in as little as possible. "
        "A suit holds sweat: weighed in it, the rate is a lower bound and teaches nothing."
    )


def _draw_in(ctx: Context) -> None:
    calendar = calendar_of(ctx)
    near = session_near(calendar, ctx.now)
    st.subheader("Weigh in", anchor=False)
    waiting = not_weighed_in(ctx.store, calendar, near, ctx.now)
    note(f"For {near.session.name}, {near.round.name}." if near else "No session within three hours.")
    if not waiting:
        note("Everybody is weighed in.")
        return
    names = {d.id: d.name for d in waiting}
    handed_on = driver_handed_on()
    entry = int(st.session_state.get(_ROUND, 0))
    driver_id = st.pills(
        "Driver",
        list(names),
        default=handed_on if handed_on in names else next(iter(names)),
        format_func=lambda each: literal(names[each]),
        key=f"in_driver_{entry}",
        persist_state="session",
    )
    before = _mass_input(ctx, "Mass before", f"in_mass_{entry}")
    if not st.button("Weigh in", type="primary", width="stretch", key=f"in_keep_{entry}"):
        return
    try:
        kept = weigh_in(
            ctx.store, calendar, driver_id, _mass(ctx, "mass before", before), by=ctx.who, now=ctx.now
        )
    except PlannerError as problem:
        show_error(problem)
        return
    _kept(kept)


def _draw_out(ctx: Context) -> None:
    st.subheader("Weigh out", anchor=False)
    waiting = open_weighings(ctx.store, calendar_of(ctx), ctx.now)
    if not waiting:
        note("Nobody is weighed in.")
        return
    by_id = {each.weighing.id: each for each in waiting}
    entry = int(st.session_state.get(_ROUND, 0))
    chosen = st.pills(
        "Driver",
        list(by_id),
        default=next(iter(by_id)),
        format_func=lambda each: literal(by_id[each].driver.name),
        required=True,
        key=f"out_driver_{entry}",
        persist_state="session",
    )
    opened = by_id[chosen]
    note(_weighed_in_words(ctx, opened.weighing))
    typed = _out_fields(ctx, opened, f"{entry}_{chosen}")
    pressed = st.button("Weigh out", type="primary", width="stretch", key=f"out_keep_{entry}_{chosen}")
    if st.button("Take back the weigh-in", type="tertiary", key=f"undo_in_{chosen}"):
        ctx.store.remove(opened.weighing, by=ctx.who, why="weigh-in taken back")
        note_for_next_run(f"The weigh-in of {opened.driver.name} was taken back.")
        st.rerun()
    if not pressed:
        return
    try:
        kept = weigh_out(ctx.store, opened, _in_house_units(ctx, typed), by=ctx.who, now=ctx.now)
    except PlannerError as problem:
        show_error(problem)
        return
    _kept(kept)


def _out_fields(ctx: Context, opened: OpenWeighing, key: str) -> _OutFields:
    left, right = st.columns(2, wrap=False)
    with left:
        after = _mass_input(ctx, "Mass after", f"out_mass_{key}")
    drink = right.number_input(
        f"Drunk, {unit_name(ctx.units.volume)}",
        value=None,
        step=50.0 if ctx.units.volume == "mL" else 1.0,
        format="%g",
        placeholder="0 if nothing",
        key=f"out_drink_{key}",
        persist_state="session",
    )
    minutes = st.number_input(
        "Minutes between the weighings",
        value=float(likely_minutes(opened, ctx.now)),
        step=5.0,
        format="%.0f",
        key=f"out_minutes_{key}",
        persist_state="session",
    )
    with st.expander("Urine, food, clothes, cockpit"):
        return _OutFields(after, drink, minutes, *_more_out_fields(ctx, opened, key))


def _more_out_fields(
    ctx: Context, opened: OpenWeighing, key: str
) -> tuple[float | None, float | None, str, float | None, float | None]:
    measured = measured_conditions(ctx.store, opened)
    degrees = ctx.units.temperature
    left, right = st.columns(2, wrap=False)
    urine = left.number_input(
        f"Urine, {unit_name(ctx.units.volume)}",
        value=0.0,
        step=50.0,
        format="%g",
        key=f"out_urine_{key}",
        persist_state="session",
    )
    food = right.number_input(
        "Eaten, g", value=0.0, step=10.0, format="%g", key=f"out_food_{key}", persist_state="session"
    )
    clothes = st.segmented_control(
        "Weighed in",
        list(get_args(WeighingClothes)),
        default="towelled skin",
        required=True,
        key=f"out_clothes_{key}",
        persist_state="session",
    )
    left, right = st.columns(2, wrap=False)
    air = left.number_input(
        f"Cockpit air, {unit_name(degrees)}",
        value=from_house("temperature", measured.air_temperature_c, degrees) if measured else None,
        step=1.0,
        format="%.1f",
        key=f"out_air_{key}",
        persist_state="session",
    )
    humidity = right.number_input(
        "Cockpit humidity, %",
        value=measured.humidity_pct if measured else None,
        step=1.0,
        format="%.0f",
        key=f"out_humidity_{key}",
        persist_state="session",
    )
    note("Without the cockpit's air and humidity the weighing says how much was lost, but teaches no ratio.")
    return urine, food, clothes, air, humidity


def _in_house_units(ctx: Context, typed: _OutFields) -> TypedWeighOut:
    worn: dict[str, WeighingClothes] = {each: each for each in get_args(WeighingClothes)}
    volumes, degrees = ctx.units.volume, ctx.units.temperature

    def millilitres(field: str, value: float | None, quantity: str) -> float | None:
        return None if value is None else typed_value(field, value, quantity, "volume", volumes)

    return TypedWeighOut(
        mass_after_kg=_mass(ctx, "mass after", typed.after),
        drink_ml=millilitres("drunk", typed.drink, "drink_ml"),
        urine_ml=millilitres("urine", typed.urine, "urine_ml"),
        food_g=typed.food,
        clothes=worn[typed.clothes],
        minutes=typed.minutes,
        air_temperature_c=None
        if typed.air is None
        else typed_value("cockpit air", typed.air, "air_temperature_c", "temperature", degrees),
        humidity_pct=typed.humidity,
    )


def _show_last(ctx: Context) -> None:
    """The weighing kept last with what it says, and the way back."""
    last = st.session_state.get(_LAST)
    if last is None:
        return
    weighing_id, change_set_id = last
    there = ctx.store.all(Weighing, id=weighing_id)
    if not there:
        return
    weighing = there[0]
    calendar = calendar_of(ctx)
    driver = next(d for d in calendar.drivers if d.id == weighing.driver_id)
    zone = calendar.places[weighing.place_id].zone
    weighed = next((w for w in weighed_by(ctx) if w.weighing.id == weighing_id), None)
    if weighed is None:
        words = [_weighed_in_words(ctx, weighing)]
    else:
        words = [f"{weighed_words(weighed, zone, ctx.units)}.", _what_now(ctx, weighing)]
        if weighed.left_out:
            words.append(f"It teaches nothing: {weighed.left_out}.")
    with st.container(border=True, gap="small", key="p-card-weighed"):
        lines = "".join(f'<div class="p-why">{escaped(each)}</div>' for each in words)
        st.html(f'<div class="p-name">{escaped(driver.name)}</div>{lines}')
        if st.button("Take it back", type="tertiary", key="undo_weighing"):
            ctx.store.undo(change_set_id, by=ctx.who)
            st.session_state.pop(_LAST)
            note_for_next_run(f"The weighing of {driver.name} was taken back.")
            st.rerun()


def _what_now(ctx: Context, weighing: Weighing) -> str:
    after_kg = weighing.mass_before_kg if weighing.mass_after_kg is None else weighing.mass_after_kg
    lost_kg = weighing.mass_before_kg - after_kg
    if lost_kg <= 0.0:
        return "Nothing was lost: no drink is needed to make up for it, only what thirst asks."
    low, high = (share * lost_kg * 1000.0 for share in AFTER_L_PER_KG)
    return (
        f"Lost {mass(lost_kg, ctx.units)}: {volume(low, ctx.units)} to {volume(high, ctx.units)} with salt "
        f"when the next session is within {NEXT_IS_NEAR_H:.0f} hours, otherwise "
        f"{volume(1000.0 * lost_kg, ctx.units)} with meals."
    )


def _weighed_in_words(ctx: Context, weighing: Weighing) -> str:
    zone = calendar_of(ctx).places[weighing.place_id].zone
    return f"Weighed in at {clock(weighing.starts_at, zone)} with {mass(weighing.mass_before_kg, ctx.units)}."


def _mass_input(ctx: Context, label: str, key: str) -> float | None:
    return st.number_input(
        f"{label}, {unit_name(ctx.units.mass)}",
        value=None,
        step=0.1,
        format="%.2f",
        placeholder="on the scale",
        key=key,
        persist_state="session",
    )


def _mass(ctx: Context, field: str, value: float | None) -> float | None:
    """Kilograms; what is typed as such is left to the check against the driver, which knows pounds."""
    if value is None or ctx.units.mass == "kg":
        return value
    return typed_value(field, value, "mass_kg", "mass", ctx.units.mass)


def _kept(kept: tuple[Weighing, int]) -> None:
    weighing, change_set_id = kept
    st.session_state[_ROUND] = int(st.session_state.get(_ROUND, 0)) + 1
    st.session_state[_LAST] = (weighing.id, change_set_id)
    st.rerun()
