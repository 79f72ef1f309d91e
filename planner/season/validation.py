"""What a record of the season must fulfil to be kept; asked by the store and by the preview of files."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, get_args

from planner.errors import InputError
from planner.record_checks import (
    Problem,
    after,
    day,
    found,
    instant,
    name,
    number,
    reference,
    text,
    wall_clock,
    whole,
    word,
    zone,
)
from planner.season.model import (
    AltitudeHistory,
    Commitment,
    Driver,
    Leg,
    Place,
    PressureMeasurement,
    Round,
    Session,
    SessionKind,
    Sex,
    Stay,
    TravelMode,
)

SEXES = get_args(Sex)
SESSION_KINDS = get_args(SessionKind)
TRAVEL_MODES = get_args(TravelMode)
ALTITUDE_HISTORIES = get_args(AltitudeHistory)


def _place(r: Place) -> tuple[Problem, ...]:
    return (
        name("name", r.name),
        zone("zone", r.zone),
        number("track_elevation_m", r.track_elevation_m, "elevation_m"),
        number("bed_elevation_m", r.bed_elevation_m, "elevation_m"),
        number("latitude_deg", r.latitude_deg, "latitude_deg"),
        number("longitude_deg", r.longitude_deg, "longitude_deg"),
    )


def _driver(r: Driver) -> tuple[Problem, ...]:
    return (
        name("name", r.name),
        word("sex", r.sex, SEXES),
        reference("home_place_id", r.home_place_id),
        number("mass_kg", r.mass_kg, "mass_kg"),
        number("height_cm", r.height_cm, "height_cm"),
        number("bottle_ml", r.bottle_ml, "bottle_ml"),
        number("sweat_sodium_mmol_l", r.sweat_sodium_mmol_l, "sweat_sodium_mmol_l", optional=True),
        word("altitude_history", r.altitude_history, ALTITUDE_HISTORIES),
        number("highest_bed_elevation_m", r.highest_bed_elevation_m, "elevation_m", optional=True),
        text("tent_note", r.tent_note),
        day("iron_checked_on", r.iron_checked_on, optional=True),
        wall_clock("wake_time", r.wake_time),
    )


def _round(r: Round) -> tuple[Problem, ...]:
    return (
        whole("number", r.number, 0, 999),
        name("name", r.name),
        reference("place_id", r.place_id),
    )


def _session(r: Session) -> tuple[Problem, ...]:
    return (
        reference("round_id", r.round_id),
        word("kind", r.kind, SESSION_KINDS),
        name("name", r.name),
        instant("starts_at", r.starts_at),
        instant("ends_at", r.ends_at),
        after("ends_at", r.ends_at, "starts_at", r.starts_at),
    )


def _commitment(r: Commitment) -> tuple[Problem, ...]:
    return (
        reference("driver_id", r.driver_id),
        name("name", r.name),
        reference("place_id", r.place_id),
        instant("starts_at", r.starts_at),
        instant("ends_at", r.ends_at),
        after("ends_at", r.ends_at, "starts_at", r.starts_at),
    )


def _stay(r: Stay) -> tuple[Problem, ...]:
    return (
        reference("driver_id", r.driver_id),
        reference("place_id", r.place_id),
        instant("arrive_at", r.arrive_at),
        instant("depart_at", r.depart_at),
        after("depart_at", r.depart_at, "arrive_at", r.arrive_at),
        number("bed_elevation_m", r.bed_elevation_m, "elevation_m", optional=True),
        number("tent_oxygen_fraction", r.tent_oxygen_fraction, "oxygen_fraction", optional=True),
        number("tent_hours_per_night", r.tent_hours_per_night, "tent_hours_per_night"),
    )


def _leg(r: Leg) -> tuple[Problem, ...]:
    return (
        reference("driver_id", r.driver_id),
        reference("from_place_id", r.from_place_id),
        reference("to_place_id", r.to_place_id),
        InputError("to_place_id", r.to_place_id, "another place than from_place_id")
        if r.from_place_id == r.to_place_id
        else None,
        instant("depart_at", r.depart_at),
        instant("arrive_at", r.arrive_at),
        after("arrive_at", r.arrive_at, "depart_at", r.depart_at),
        word("mode", r.mode, TRAVEL_MODES),
        number("cabin_altitude_m", r.cabin_altitude_m, "elevation_m", optional=True),
    )


def _pressure_measurement(r: PressureMeasurement) -> tuple[Problem, ...]:
    return (
        reference("place_id", r.place_id),
        instant("measured_at", r.measured_at),
        number("pressure_hpa", r.pressure_hpa, "pressure_hpa"),
        text("typed", r.typed),
    )


CHECKS: dict[type, Callable[[Any], tuple[Problem, ...]]] = {
    Place: _place,
    Driver: _driver,
    Round: _round,
    Session: _session,
    Commitment: _commitment,
    Stay: _stay,
    Leg: _leg,
    PressureMeasurement: _pressure_measurement,
}


def problems(
    record: Place | Driver | Round | Session | Commitment | Stay | Leg | PressureMeasurement,
) -> list[InputError]:
    """All that is wrong with a record in itself, field by field; empty when it may be kept."""
    return found(CHECKS[type(record)](record))
