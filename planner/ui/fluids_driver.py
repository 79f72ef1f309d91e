"""A driver's mass and sweat in a few lines, for the Driver page."""

from __future__ import annotations

import streamlit as st

from planner.hydration.findings import drink_findings
from planner.hydration.reasons import order_of_trust
from planner.season.model import Driver
from planner.services.fluids import next_session, sessions_in_order
from planner.services.morning_water import usual_morning_mass
from planner.ui.cached import calendar_of
from planner.ui.fluids_cached import drinks_for, weighed_by
from planner.ui.fluids_words import rate, rate_range, weighed_words
from planner.ui.navigation import go_to
from planner.ui.page import Context, line
from planner.ui.tables import note
from planner.wording import day, mass


def draw_driver_fluids(ctx: Context, driver: Driver) -> None:
    """Usual morning mass, the own sweat rate for the session to come, habits, the last weighing."""
    calendar = calendar_of(ctx)
    st.subheader("Mass and sweat", anchor=False)
    usual = usual_morning_mass(ctx.store, driver, ctx.now, calendar)
    if usual.baseline_kg is None:
        line("No usual morning mass yet: three mornings make one.")
    else:
        last = "" if usual.last is None else f"; last {mass(usual.last.mass_kg, ctx.units)}"
        when = "" if usual.last is None else f" on {day(usual.last.at, usual.zone)}"
        line(f"Usual morning mass {mass(usual.baseline_kg, ctx.units)}{last}{when}.")
    session = next_session(sessions_in_order(calendar), ctx.now)
    if session is not None:
        row = next(each for each in drinks_for(ctx, session, 1).rows if each.driver.id == driver.id)
        sweat = row.plan.sweat_rate_l_per_h
        line(
            f"Sweat to expect in {session.session.name}, {session.round.name}: "
            f"{rate(float(sweat.best), ctx.units)} ({rate_range(sweat, ctx.units)}); "
            f"{order_of_trust(row.plan)}."
        )
    own = [w for w in weighed_by(ctx) if w.weighing.driver_id == driver.id]
    for finding in drink_findings(own, ctx.units):
        line(f"{finding.kind[0].upper()}{finding.kind[1:]}. {finding.sentence}")
    if own:
        newest = max(own, key=lambda w: w.weighing.starts_at)
        note(f"{weighed_words(newest, calendar.places[newest.weighing.place_id].zone, ctx.units)}.")
    if st.button("Drinks and weighings", type="tertiary", key="to_fluids"):
        go_to("fluids", driver.id)
