"""Team: drivers, places, rounds, commitments, units and limits."""

from __future__ import annotations

from operator import attrgetter

import streamlit as st

from planner.season.model import Commitment, Driver, Place, Round, Session
from planner.ui.errors import plain_errors
from planner.ui.page import Context, answer, end_page, line, start_page, you_form
from planner.ui.team_forms import commitment_form, driver_form, place_form, round_form, session_form
from planner.ui.team_records import RecordList, draw_records
from planner.ui.team_settings import draw_limits, draw_store
from planner.ui.team_stays import draw_stays
from planner.ui.text import literal
from planner.wording import (
    DASH,
    clock,
    counted,
    day,
    day_and_clock,
    elevation,
    mass,
    number,
    volume,
    zone_name,
)

by_name = attrgetter("name")


def draw_drivers(ctx: Context) -> None:
    """The drivers, each with a home among the places."""
    places = sorted(ctx.store.all(Place), key=by_name)
    if not places:
        line("Add the drivers' homes under Places first.")
        return
    names = {place.id: place.name for place in places}
    draw_records(
        ctx,
        sorted(ctx.store.all(Driver), key=by_name),
        RecordList(
            Driver,
            "driver",
            ["driver", "home", "mass", "bottle", "highest bed", "tent", "iron checked"],
            lambda driver: [
                driver.name,
                names.get(driver.home_place_id, DASH),
                mass(driver.mass_kg, ctx.units),
                volume(driver.bottle_ml, ctx.units),
                elevation(driver.highest_bed_elevation_m, ctx.units),
                "allowed" if driver.tent_note else "no",
                day(driver.iron_checked_on) if driver.iron_checked_on else DASH,
            ],
            lambda driver, kept: driver_form(ctx, driver, places, kept),
            right=(2, 3, 4),
        ),
    )


def draw_places(ctx: Context) -> None:
    """Venues, homes and staging places, the highest first."""
    places = sorted(ctx.store.all(Place), key=lambda place: -place.track_elevation_m)
    draw_records(
        ctx,
        places,
        RecordList(
            Place,
            "place",
            ["place", "track", "beds", "latitude", "longitude", "time zone"],
            lambda place: [
                place.name,
                elevation(place.track_elevation_m, ctx.units),
                elevation(place.bed_elevation_m, ctx.units),
                f"{number(place.latitude_deg, 2)}°",
                f"{number(place.longitude_deg, 2)}°",
                place.zone,
            ],
            lambda place, kept: place_form(ctx, place, kept),
            right=(1, 2, 3, 4),
        ),
    )


def draw_rounds(ctx: Context) -> None:
    """The calendar, and the sessions of the round that is chosen."""
    places = sorted(ctx.store.all(Place), key=by_name)
    if not places:
        line("Add the venues under Places first.")
        return
    known = {place.id: place for place in places}
    rounds = sorted(ctx.store.all(Round), key=lambda each: each.number)
    sessions = sorted(ctx.store.all(Session), key=lambda each: each.starts_at)
    first = {each.round_id: each for each in reversed(sessions)}
    next_number = max((each.number for each in rounds), default=0) + 1

    def row(given: Round) -> list[str]:
        place = known[given.place_id]
        held = sum(each.round_id == given.id for each in sessions)
        starts = day(first[given.id].starts_at, place.zone) if held else DASH
        track = elevation(place.track_elevation_m, ctx.units)
        return [given.name, str(given.number), place.name, track, starts, str(held)]

    chosen = draw_records(
        ctx,
        rounds,
        RecordList(
            Round,
            "round",
            ["round", "number", "place", "track", "begins", "sessions"],
            row,
            lambda given, kept: round_form(given, places, next_number, kept),
            right=(1, 3, 5),
        ),
    )
    if chosen is not None:
        draw_sessions(ctx, chosen, known[chosen.place_id], [s for s in sessions if s.round_id == chosen.id])


def draw_sessions(ctx: Context, given: Round, place: Place, sessions: list[Session]) -> None:
    """The sessions of one round, in the zone of its place."""
    zone = zone_name(place.zone, sessions[0].starts_at if sessions else ctx.now)
    st.subheader(f"Sessions of {literal(given.name)}", anchor=False)
    draw_records(
        ctx,
        sessions,
        RecordList(
            Session,
            "session",
            ["session", "kind", f"starts ({zone})", "ends"],
            lambda session: [
                session.name,
                session.kind,
                day_and_clock(session.starts_at, place.zone),
                clock(session.ends_at, place.zone),
            ],
            lambda session, kept: session_form(ctx, session, given, place, kept),
            key=str(given.id),
        ),
    )


def draw_commitments(ctx: Context) -> None:
    """Where drivers have to be besides the rounds."""
    drivers = sorted(ctx.store.all(Driver), key=by_name)
    places = sorted(ctx.store.all(Place), key=by_name)
    if not drivers:
        line("Add drivers first.")
        return
    who = {driver.id: driver.name for driver in drivers}
    where = {place.id: place for place in places}
    draw_records(
        ctx,
        sorted(ctx.store.all(Commitment), key=lambda each: each.starts_at),
        RecordList(
            Commitment,
            "commitment",
            ["commitment", "driver", "place", "from", "until"],
            lambda each: [
                each.name,
                who[each.driver_id],
                where[each.place_id].name,
                day_and_clock(each.starts_at, where[each.place_id].zone),
                day_and_clock(each.ends_at, where[each.place_id].zone),
            ],
            lambda each, kept: commitment_form(ctx, each, drivers, places, kept),
        ),
    )


def draw_units(ctx: Context) -> None:
    """Who types here, and in which units; each person has their own."""
    line("Units belong to the name: everybody who types here chooses their own.")
    you_form(ctx, "team_you_form")


PARTS = {
    "Drivers": draw_drivers,
    "Places": draw_places,
    "Rounds": draw_rounds,
    "Commitments": draw_commitments,
    "Stays": draw_stays,
    "Limits": draw_limits,
    "Units": draw_units,
    "Data": draw_store,
}


def main() -> None:
    """Draw the page."""
    ctx = start_page("Team")
    drivers, rounds = len(ctx.store.all(Driver)), len(ctx.store.all(Round))
    places = len(ctx.store.all(Place))
    if drivers and rounds:
        answer(f"{counted(drivers, 'driver')}, {counted(rounds, 'round')}.")
    elif drivers:
        answer(f"{counted(drivers, 'driver')}, no rounds yet: add them with their sessions, or stays.")
    elif places:
        answer(f"{counted(places, 'place')}, nobody in the team yet: now the drivers, each with a home.")
    else:
        answer("Nobody in the team yet: add places first, then drivers, then rounds.")
    part = st.segmented_control(
        "Part of the team's data",
        list(PARTS),
        default="Drivers" if drivers else "Places",
        required=True,
        label_visibility="collapsed",
        key="team_part",
        persist_state="session",
    )
    with plain_errors():
        PARTS[part](ctx)
    end_page(ctx)


main()
