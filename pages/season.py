"""Season: where is everybody, and which rounds cost something?"""

from __future__ import annotations

from datetime import datetime, timedelta

import streamlit as st

from planner.charts.season import season_chart
from planner.season.model import Driver, Leg, Stay
from planner.services.season import (
    Calendar,
    Whereabouts,
    whereabouts,
)
from planner.ui.cached import calendar_of
from planner.ui.calendar_files import draw_calendar_files
from planner.ui.frames import frame
from planner.ui.page import Context, answer, end_page, line, start_page
from planner.ui.season_rounds import draw_high_rounds
from planner.ui.season_search import draw_season_search
from planner.ui.tables import note, table
from planner.units import from_house
from planner.wording import (
    DASH,
    counted,
    day,
    day_and_clock,
    elevation,
)

MARGIN = timedelta(days=30)  # drawn before the first round and after the last


def main() -> None:
    """Draw the page."""
    ctx = start_page("Season")
    calendar = calendar_of(ctx)
    if not calendar.season_at(ctx.now):
        answer("No rounds yet. Add places and rounds on Team, or bring them in from files there, under Data.")
    else:
        show_season(ctx, calendar)
    end_page(ctx)


def show_season(ctx: Context, calendar: Calendar) -> None:
    """Draw the landscape, the high rounds and where everybody is."""
    answer(headline(ctx, calendar))
    driver = None
    if calendar.drivers:
        drivers = {each.id: each for each in calendar.drivers}
        chosen = st.selectbox(
            "Driver",
            list(drivers),
            format_func=lambda id: drivers[id].name,
            key="driver_shown",
            persist_state="session",
        )
        driver = drivers[chosen]
    show_landscape(ctx, calendar, driver)
    if driver is not None:
        draw_high_rounds(ctx, driver)
        draw_season_search(ctx, calendar, driver)
    show_whereabouts(ctx, calendar)
    draw_calendar_files(ctx, driver)


def headline(ctx: Context, calendar: Calendar) -> str:
    """Say how many rounds are high, and which one comes next."""
    rounds = calendar.season_at(ctx.now)
    high = [each for each in rounds if calendar.is_high(each)]
    text = f"{counted(len(rounds), 'round')}, {len(high)} of them high."
    coming = [each for each in high if calendar.ends_at(each) > ctx.now]
    if not high:
        return f"{counted(len(rounds), 'round')}, none of them high."
    if not coming:
        return f"{text} The high ones are over."
    place = calendar.place_of(coming[0])
    begun = calendar.starts_at(coming[0]) <= ctx.now
    when = f"from {day(calendar.starts_at(coming[0]), place.zone)}"
    high_up = elevation(place.track_elevation_m, ctx.units)
    if begun:
        return f"{text} On now: {coming[0].name} at {high_up}."
    return f"{text} Next: {coming[0].name} at {high_up}, {when}."


def show_landscape(ctx: Context, calendar: Calendar, driver: Driver | None) -> None:
    """Draw the elevation over the year: the calendar as the ground, the driver's course over it."""
    unit = ctx.units.elevation
    ground, rounds = [], []
    shown = calendar.season_at(ctx.now)
    for each in shown:
        place = calendar.place_of(each)
        height = from_house("elevation", place.track_elevation_m, unit)
        start, end = calendar.starts_at(each), calendar.ends_at(each)
        ground += [(start, height), (end, height)]
        label = f"{each.name}, {day(calendar.race_of(each).starts_at, place.zone).split(' ', 1)[1]}"
        top = from_house("elevation", max(place.track_elevation_m, place.bed_elevation_m), unit)
        rounds.append((start + (end - start) / 2, height, top, label, calendar.is_high(each)))
    first = calendar.starts_at(shown[0]) - MARGIN
    last = max(calendar.ends_at(shown[-1]), ctx.now) + MARGIN
    course = [
        (instant, from_house("elevation", bed_m, unit), f"{where}, {elevation(bed_m, ctx.units)}")
        for instant, bed_m, where in course_of(calendar, driver)
        if first <= instant <= last
    ]
    ticks = [
        (each.starts_at, f"{each.name}, {day(each.starts_at, calendar.places[each.place_id].zone)}")
        for each in calendar.commitments
        if driver is not None and each.driver_id == driver.id and first <= each.starts_at <= last
    ]
    st.vega_lite_chart(
        spec=season_chart(
            frame(ground, "at", "elevation"),
            frame(rounds, "at", "elevation", "top", "label", "high"),
            frame(course, "at", "elevation", "where"),
            frame(ticks, "at", "label"),
            frame([(ctx.now, "today")], "at", "label"),
            unit,
        ),
        theme=None,
        width="stretch",
        alt=f"Elevation over the season: {', '.join(label for *_, label, _ in rounds)}",
    )
    note(
        "The ground is the calendar: each round at the elevation of its track, joined by straight lines. "
        + (f"The thin line is where {driver.name} sleeps; ticks are commitments." if driver else "")
    )


def course_of(calendar: Calendar, driver: Driver | None) -> list[tuple[datetime, float, str]]:
    """Where a driver sleeps over the season: an instant, the elevation of the bed, and where it stands."""
    points = []
    for stay in calendar.stays:
        if driver is None or stay.driver_id != driver.id:
            continue
        place = calendar.places[stay.place_id]
        bed_m = place.bed_elevation_m if stay.bed_elevation_m is None else stay.bed_elevation_m
        points += [(stay.arrive_at, bed_m, place.name), (stay.depart_at, bed_m, place.name)]
    return points


def show_whereabouts(ctx: Context, calendar: Calendar) -> None:
    """Draw where everybody is now and where they go next."""
    if not calendar.drivers:
        line("No drivers yet. Add them on Team.")
        return
    table(
        ["driver", "where", "sleeps at", "nights there", "goes next, local time"],
        [whereabouts_row(ctx, calendar, each) for each in whereabouts(calendar, ctx.now)],
        right=(2, 3),
        caption=f"Where everybody is on {day(ctx.now)}",
        stack=True,
    )


def whereabouts_row(ctx: Context, calendar: Calendar, found: Whereabouts) -> list[str]:
    """One driver's whereabouts in words."""
    places, coming = calendar.places, found.next_leg
    onward = DASH
    if coming is not None:
        leaves = day_and_clock(coming.depart_at, places[coming.from_place_id].zone)
        onward = f"{leaves}: {places[coming.to_place_id].name}"
    holding = found.holding
    if isinstance(holding, Stay):
        place = places[holding.place_id]
        bed_m = place.bed_elevation_m if holding.bed_elevation_m is None else holding.bed_elevation_m
        return [found.driver.name, place.name, elevation(bed_m, ctx.units), str(found.nights_there), onward]
    if isinstance(holding, Leg):
        way = f"on the way from {places[holding.from_place_id].name} to {places[holding.to_place_id].name}"
        return [found.driver.name, way, DASH, DASH, onward]
    return [found.driver.name, "no stay planned", DASH, DASH, onward]


main()
