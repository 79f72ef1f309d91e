"""The forms of the Team page: each draws a record's widgets and returns what builds the record from them."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from datetime import time, timedelta
from typing import Any, get_args
from zoneinfo import ZoneInfo, available_timezones

import streamlit as st

from planner.errors import InputError
from planner.season.model import (
    AltitudeHistory,
    Commitment,
    Driver,
    Place,
    Round,
    Session,
    SessionKind,
    Sex,
)
from planner.services.typed import local_instant, typed_value
from planner.ui.fields import Kept
from planner.ui.page import Context
from planner.ui.text import literal
from planner.units import from_house
from planner.wording import unit_name

MIDDAY = time(12)


def place_form(ctx: Context, place: Place | None, kept: Kept) -> Callable[[], Place]:
    """A venue, a home or a staging place."""
    zones = sorted(available_timezones())
    name = kept.text("Name", place.name if place else "")
    zone = st.selectbox(
        "Time zone",
        zones,
        index=zones.index(place.zone) if place and place.zone in zones else None,
        placeholder="choose: it is the zone that times there are shown in",
        **kept.by("Time zone"),
    )
    left, right = st.columns(2)
    with left:
        track = _elevation(ctx, kept, "Elevation of the track", place.track_elevation_m if place else None)
        latitude = _plain_number(
            kept, "Latitude, degrees, north positive", place.latitude_deg if place else None
        )
    with right:
        bed = _elevation(ctx, kept, "Elevation of the beds", place.bed_elevation_m if place else None)
        longitude = _plain_number(
            kept, "Longitude, degrees, east positive", place.longitude_deg if place else None
        )

    def build() -> Place:
        return Place(
            name=name,
            zone=zone or "",
            track_elevation_m=track(),
            bed_elevation_m=bed(),
            latitude_deg=_given("latitude", latitude),
            longitude_deg=_given("longitude", longitude),
            id=place.id if place else 0,
        )

    return build


def driver_form(
    ctx: Context, driver: Driver | None, places: Sequence[Place], kept: Kept
) -> Callable[[], Driver]:
    """A driver, with what the physician or the driver has stated."""
    names = {place.id: place.name for place in places}
    left, right = st.columns(2)
    with left:
        name = kept.text("Name", driver.name if driver else "")
        home = st.selectbox(
            "Home",
            list(names),
            index=list(names).index(driver.home_place_id) if driver else None,
            format_func=names.__getitem__,
            placeholder="choose a place",
            **kept.by("Home"),
        )
        mass = _in_units(ctx, kept, "Body mass", driver.mass_kg if driver else None, "mass_kg", "mass", 1)
        bottle = _in_units(
            ctx,
            kept,
            "Drinks bottle in car",
            driver.bottle_ml if driver else 1000.0,
            "bottle_ml",
            "volume",
            0,
        )
    with right:
        sexes = get_args(Sex)
        sex = st.selectbox(
            "Sex",
            sexes,
            index=sexes.index(driver.sex) if driver else None,
            placeholder="choose",
            **kept.by("Sex"),
        )
        wake = st.time_input(
            "Usual waking time, local",
            time.fromisoformat(driver.wake_time if driver else "07:00"),
            step=timedelta(minutes=15),
            **kept.by("Usual waking time"),
        )
        height = _plain_number(kept, "Height, cm", driver.height_cm if driver else None, "%.0f")
        sodium = _plain_number(
            kept, "Sweat sodium if measured, mmol/L", driver.sweat_sodium_mmol_l if driver else None, "%.0f"
        )
    st.markdown("**As stated by the physician or the driver**")
    left, right = st.columns(2)
    with left:
        history = st.selectbox(
            "Altitude illness before",
            get_args(AltitudeHistory),
            index=get_args(AltitudeHistory).index(driver.altitude_history) if driver else 0,
            **kept.by("Altitude illness before"),
        )
        iron = st.date_input(
            "Iron checked on",
            driver.iron_checked_on if driver else None,
            format="YYYY-MM-DD",
            **kept.by("Iron checked on"),
        )
    with right:
        limit = _elevation(
            ctx,
            kept,
            "Highest bed the physician allows",
            driver.highest_bed_elevation_m if driver else None,
            optional=True,
        )
        tent = kept.text(
            "Physician's note that allows a tent", driver.tent_note if driver else "", "none: no tent"
        )

    def build() -> Driver:
        return Driver(
            name=name,
            sex=sex,  # the store refuses what is no word of Sex
            home_place_id=home or 0,
            mass_kg=mass(),
            height_cm=_given("height", height),
            bottle_ml=bottle(),
            sweat_sodium_mmol_l=sodium,
            altitude_history=history,
            highest_bed_elevation_m=limit(),
            tent_note=tent.strip(),
            iron_checked_on=iron,
            wake_time=f"{wake:%H:%M}" if wake else "",
            id=driver.id if driver else 0,
        )

    return build


def round_form(
    given: Round | None, places: Sequence[Place], next_number: int, kept: Kept
) -> Callable[[], Round]:
    """A round of the calendar."""
    names = {place.id: place.name for place in places}
    left, middle, right = st.columns([1, 3, 3])
    number = left.number_input(
        "Number", value=given.number if given else next_number, step=1, **kept.by("Number")
    )
    with middle:
        name = kept.text("Name", given.name if given else "")
    place = right.selectbox(
        "Place",
        list(names),
        index=list(names).index(given.place_id) if given else None,
        format_func=names.__getitem__,
        placeholder="choose a place",
        **kept.by("Place"),
    )
    return lambda: Round(int(number), name, place or 0, id=given.id if given else 0)


def session_form(
    ctx: Context, session: Session | None, given: Round, place: Place, kept: Kept
) -> Callable[[], Session]:
    """A session of one round; an end earlier in the day than the start is on the next day."""
    zone = ZoneInfo(place.zone)
    start = session.starts_at.astimezone(zone) if session else None
    end = session.ends_at.astimezone(zone) if session else None
    left, right = st.columns(2)
    with left:
        name = kept.text("Name", session.name if session else "")
    kind = right.segmented_control(
        "Kind",
        get_args(SessionKind),
        default=session.kind if session else "practice",
        required=True,
        **kept.by("Kind"),
    )
    first, second, third = st.columns(3)
    day = first.date_input(
        f"Day at {literal(place.name)}",
        start.date() if start else ctx.now.astimezone(zone).date(),
        format="YYYY-MM-DD",
        **kept.by("Day"),
    )
    begins = second.time_input(
        "Starts, local", start.time() if start else MIDDAY, step=300, **kept.by("Starts")
    )
    ends = third.time_input("Ends, local", end.time() if end else time(13), step=300, **kept.by("Ends"))

    def build() -> Session:
        last_day = day + timedelta(days=1) if ends < begins else day
        return Session(
            round_id=given.id,
            kind=kind,
            name=name,
            starts_at=local_instant("start", day, begins, place.zone),
            ends_at=local_instant("end", last_day, ends, place.zone),
            id=session.id if session else 0,
        )

    return build


def commitment_form(
    ctx: Context,
    commitment: Commitment | None,
    drivers: Sequence[Driver],
    places: Sequence[Place],
    kept: Kept,
) -> Callable[[], Commitment]:
    """Somewhere a driver has to be besides the rounds."""
    who = {driver.id: driver.name for driver in drivers}
    where = {place.id: place for place in places}
    zone = ZoneInfo(where[commitment.place_id].zone) if commitment else ZoneInfo("UTC")
    start = commitment.starts_at.astimezone(zone) if commitment else None
    end = commitment.ends_at.astimezone(zone) if commitment else None
    today = ctx.now.astimezone(zone).date()
    left, middle, right = st.columns(3)
    with left:
        name = kept.text("Name", commitment.name if commitment else "")
    driver = middle.selectbox(
        "Driver",
        list(who),
        index=list(who).index(commitment.driver_id) if commitment else None,
        format_func=who.__getitem__,
        placeholder="choose a driver",
        **kept.by("Driver"),
    )
    place = right.selectbox(
        "Place",
        list(where),
        index=list(where).index(commitment.place_id) if commitment else None,
        format_func=lambda id: where[id].name,
        placeholder="choose a place",
        **kept.by("Place"),
    )
    columns = st.columns(4)
    first_day = columns[0].date_input(
        "First day there", start.date() if start else today, format="YYYY-MM-DD", **kept.by("First day")
    )
    begins = columns[1].time_input(
        "Starts, local", start.time() if start else time(9), step=900, **kept.by("Starts")
    )
    last_day = columns[2].date_input(
        "Last day there", end.date() if end else today, format="YYYY-MM-DD", **kept.by("Last day")
    )
    ends = columns[3].time_input("Ends, local", end.time() if end else time(17), step=900, **kept.by("Ends"))

    def build() -> Commitment:
        if driver is None or place is None:
            raise InputError("driver and place", "", "one of each, to be chosen from the lists")
        zone_there = where[place].zone
        return Commitment(
            driver_id=driver,
            name=name,
            place_id=place,
            starts_at=local_instant("start", first_day, begins, zone_there),
            ends_at=local_instant("end", last_day, ends, zone_there),
            id=commitment.id if commitment else 0,
        )

    return build


def _plain_number(kept: Kept, label: str, value: float | None, form: str = "%.4f") -> float | None:
    number: float | None = st.number_input(label, value=value, step=None, format=form, **kept.by(label))
    return number


def _given(field: str, value: float | None) -> float:
    if value is None:
        raise InputError(field, "", "a number")
    return value


def _elevation(
    ctx: Context, kept: Kept, label: str, house: float | None, *, optional: bool = False
) -> Callable[[], Any]:
    return _in_units(ctx, kept, label, house, "elevation_m", "elevation", 0, optional=optional)


def _in_units(
    ctx: Context,
    kept: Kept,
    label: str,
    house: float | None,
    quantity: str,
    kind: str,
    decimals: int,
    *,
    optional: bool = False,
) -> Callable[[], Any]:
    """A number in the reader's unit; what was not touched keeps its stored value to the last digit."""
    unit = str(getattr(ctx.units, kind))
    shown = None if house is None else round(from_house(kind, house, unit), decimals)
    labelled = f"{label}, {unit_name(unit)}"
    typed: float | None = st.number_input(
        labelled,
        value=None if shown is None else float(shown),
        step=None,
        format=f"%.{decimals}f",
        placeholder="none" if optional else None,
        **kept.by(labelled),
    )

    def value() -> float | None:
        if typed is None and optional:
            return None
        if house is not None and typed == shown:
            return house
        return typed_value(label, typed, quantity, kind, unit)

    return value
