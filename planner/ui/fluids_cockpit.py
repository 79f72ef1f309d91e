"""What a plan rests on: the cockpit as measured or estimated, what is worn, what is driven."""

from __future__ import annotations

import streamlit as st

from planner.checks import QUANTITIES
from planner.hydration.cockpit import CARS, ClothingEnsemble
from planner.hydration.model import CockpitConditions
from planner.services.cockpit import (
    ambient_of,
    choose_car,
    choose_ensemble,
    ensembles_of,
    keep_ambient,
    keep_conditions,
    keep_ensemble,
)
from planner.services.fluids import SessionDrinks
from planner.services.typed import typed_value
from planner.ui.errors import plain_errors
from planner.ui.page import Context, note_for_next_run
from planner.ui.tables import note
from planner.ui.text import literal
from planner.units import from_house
from planner.wording import per_cent, temperature, unit_name


def draw_conditions(ctx: Context, drinks: SessionDrinks) -> None:
    """What the plan takes the cockpit to be, and the form to say better."""
    now = drinks.conditions
    how = "measured" if now.measured else "estimated"
    units = ctx.units
    air, humidity = temperature(now.air_temperature_c, units), per_cent(now.humidity_pct)
    with st.expander(f"Cockpit: {air}, {humidity}, {how}"):
        if not now.measured:
            note("Until a thermometer in the cockpit says otherwise this is an estimate: judgement.")
        kind = st.segmented_control(
            "What is known",
            ["cockpit measured", "air outside"],
            default="cockpit measured",
            required=True,
            key="fluids_known",
        )
        with plain_errors(), st.form(f"conditions_{drinks.at.session.id}", border=False):
            if kind == "air outside":
                _ambient_form(ctx)
            else:
                _cockpit_form(ctx, now)


def _cockpit_form(ctx: Context, now: CockpitConditions) -> None:
    degrees = ctx.units.temperature
    unit = unit_name(degrees)
    shown = [
        from_house("temperature", each, degrees)
        for each in (now.air_temperature_c, now.radiant_temperature_c)
    ]
    with st.container(horizontal=True, gap="small"):
        air = st.number_input(f"Air, {unit}", value=shown[0], step=1.0, format="%.1f", width=150)
        radiant = st.number_input(
            f"Globe or walls, {unit}", value=shown[1], step=1.0, format="%.1f", width=150
        )
        humidity = st.number_input("Humidity, %", value=now.humidity_pct, step=1.0, format="%.0f", width=150)
        speed = st.number_input("Air speed, m/s", value=now.air_speed_m_s, step=0.1, format="%.1f", width=150)
    if st.form_submit_button("Keep as measured", type="primary"):
        kept = CockpitConditions(
            now.session_id,
            typed_value("air", air, "air_temperature_c", "temperature", degrees),
            typed_value("globe or walls", radiant, "radiant_temperature_c", "temperature", degrees),
            -1.0 if humidity is None else humidity,
            -1.0 if speed is None else speed,
            measured=True,
        )
        keep_conditions(ctx.store, kept, by=ctx.who)
        note_for_next_run("Kept: the cockpit as measured.")
        st.rerun()


def _ambient_form(ctx: Context) -> None:
    unit = unit_name(ctx.units.temperature)
    air_c, humidity_pct = ambient_of(ctx.store)
    with st.container(horizontal=True, gap="small"):
        air = st.number_input(
            f"Air outside, {unit}",
            value=from_house("temperature", air_c, ctx.units.temperature),
            step=1.0,
            format="%.1f",
            width=150,
        )
        humidity = st.number_input(
            "Humidity outside, %", value=humidity_pct, step=1.0, format="%.0f", width=150
        )
    note("It counts for sessions whose cockpit nobody has noted.")
    if st.form_submit_button("Keep the air outside", type="primary"):
        outside_c = typed_value("air outside", air, "air_temperature_c", "temperature", ctx.units.temperature)
        keep_ambient(ctx.store, outside_c, -1.0 if humidity is None else humidity)
        note_for_next_run("Kept: the air outside.")
        st.rerun()


def draw_clothing(ctx: Context, drinks: SessionDrinks) -> None:
    """What is worn and driven; the figures can be changed."""
    known = ensembles_of(ctx.store)
    with st.expander(f"Clothing and car: {literal(drinks.ensemble.name)}, {drinks.car}"), plain_errors():
        names = [each.name for each in known]
        with st.form("worn", border=False):
            worn = st.selectbox("Clothing in the car", names, index=names.index(drinks.ensemble.name))
            car = st.segmented_control("Car", list(CARS), default=drinks.car, required=True)
            if st.form_submit_button("Plan with these"):
                choose_ensemble(ctx.store, worn)
                choose_car(ctx.store, car)
                note_for_next_run(f"Planned for {worn}, {car}.")
                st.rerun()
        note(f"Source of the figures: {drinks.ensemble.source}.")
        with st.form("ensemble", border=False):
            kept = _ensemble_fields(drinks.ensemble)
            if st.form_submit_button("Keep these figures"):
                keep_ensemble(ctx.store, kept)
                choose_ensemble(ctx.store, kept.name)
                note_for_next_run(f"Kept: {kept.name}.")
                st.rerun()


def _ensemble_fields(now: ClothingEnsemble) -> ClothingEnsemble:
    limits = QUANTITIES["permeability"]
    name = st.text_input("Name", now.name, help="Another name makes another ensemble.")
    with st.container(horizontal=True, gap="small"):
        clo = st.number_input("Insulation, clo", value=now.insulation_clo, step=0.1, format="%.2f", width=150)
        im = [
            st.number_input(f"Permeability im, {word}", value=value, step=0.01, format="%.2f", width=150)
            for word, value in (
                ("low", now.permeability_low),
                ("best", now.permeability),
                ("high", now.permeability_high),
            )
        ]
    note(f"im lies between {limits.low:g} and {limits.high:g}; nobody has published one for a racing suit.")
    before = (now.insulation_clo, now.permeability_low, now.permeability, now.permeability_high)
    clo, low, best, high = (float("nan") if each is None else each for each in (clo, *im))
    source = now.source if (clo, low, best, high) == before else "typed by the team"
    return ClothingEnsemble(name, clo, best, low, high, source)
