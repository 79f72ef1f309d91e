"""Files of the season: places, drivers, rounds, sessions, commitments, stays, legs and pressures."""

from __future__ import annotations

from datetime import datetime
from typing import Final
from zoneinfo import ZoneInfo

from planner.exchange.context import FileContext
from planner.exchange.kinds import FileKind
from planner.exchange.lines import Line
from planner.exchange.tables import Cell, Column
from planner.exchange.times import WANTED as A_TIME
from planner.record_checks import found
from planner.season.model import (
    Commitment,
    Driver,
    Leg,
    Place,
    PressureMeasurement,
    Round,
    Session,
    Stay,
)
from planner.season.pressure import pressure_problem
from planner.season.validation import ALTITUDE_HISTORIES, SESSION_KINDS, SEXES, TRAVEL_MODES, problems

DRIVER: Final = Column("driver", "the name of a driver", required=True)
PLACE: Final = Column("place", "the name of a place", required=True)
ROUND: Final = Column("round", "the name of a round", required=True)


def driver_id_in(line: Line, context: FileContext) -> int:
    """Return the id of the driver that the line names, 0 if there is none."""
    driver = line.named("driver", "a driver", context.driver_called)
    return driver.id if driver else 0


def place_in(line: Line, context: FileContext, column: str = "place") -> tuple[int, str | None]:
    """Return the id and zone of the place that the line names; 0 and None if there is none."""
    place = line.named(column, "a place", context.place_called)
    return (place.id, place.zone) if place else (0, None)


def local(instant: datetime | None, place_id: int, context: FileContext) -> datetime | None:
    """Return the instant with the offset that holds at the place, as it is written to files."""
    return None if instant is None else instant.astimezone(ZoneInfo(context.place[place_id].zone))


def _take_place(line: Line, context: FileContext) -> Place:
    track_elevation_m = line.number("track_elevation_m")
    return Place(
        name=line.text("name"),
        zone=line.text("zone"),
        track_elevation_m=track_elevation_m,
        bed_elevation_m=line.number("bed_elevation_m", default=track_elevation_m),
        latitude_deg=line.number("latitude_deg"),
        longitude_deg=line.number("longitude_deg"),
    )


def _show_place(place: Place, context: FileContext) -> dict[str, Cell]:
    return {
        "name": place.name,
        "zone": place.zone,
        "track_elevation_m": place.track_elevation_m,
        "bed_elevation_m": place.bed_elevation_m,
        "latitude_deg": place.latitude_deg,
        "longitude_deg": place.longitude_deg,
    }


PLACES: Final = FileKind(
    name="places",
    record=Place,
    columns=(
        Column("name", "a name", required=True, aliases=("place",)),
        Column("zone", "an IANA time zone such as Europe/Vienna", required=True),
        Column("track_elevation_m", "metres above sea level", required=True, aliases=("elevation_m",)),
        Column("bed_elevation_m", "metres above sea level, if not as the track"),
        Column("latitude_deg", "degrees, north positive", required=True, aliases=("latitude",)),
        Column("longitude_deg", "degrees, east positive", required=True, aliases=("longitude",)),
    ),
    take=_take_place,
    show=_show_place,
    problems=problems,
    key_fields=("name",),
    compared=("zone", "track_elevation_m", "bed_elevation_m", "latitude_deg", "longitude_deg"),
    remembered=False,
)


def _take_driver(line: Line, context: FileContext) -> Driver:
    return Driver(
        name=line.text("name"),
        sex=line.word("sex", SEXES, default=SEXES[0]),
        home_place_id=place_in(line, context, "home_place")[0],
        mass_kg=line.number("mass_kg"),
        height_cm=line.number("height_cm"),
        bottle_ml=line.number("bottle_ml", default=Driver.bottle_ml),
        sweat_sodium_mmol_l=line.optional_number("sweat_sodium_mmol_l"),
        altitude_history=line.word("altitude_history", ALTITUDE_HISTORIES, default=Driver.altitude_history),
        highest_bed_elevation_m=line.optional_number("highest_bed_elevation_m"),
        tent_note=line.text("tent_note"),
        iron_checked_on=line.day("iron_checked_on"),
        wake_time=line.text("wake_time", default=Driver.wake_time),
    )


def _show_driver(driver: Driver, context: FileContext) -> dict[str, Cell]:
    return {
        "name": driver.name,
        "sex": driver.sex,
        "home_place": context.place[driver.home_place_id].name,
        "mass_kg": driver.mass_kg,
        "height_cm": driver.height_cm,
        "bottle_ml": driver.bottle_ml,
        "sweat_sodium_mmol_l": driver.sweat_sodium_mmol_l,
        "altitude_history": driver.altitude_history,
        "highest_bed_elevation_m": driver.highest_bed_elevation_m,
        "tent_note": driver.tent_note,
        "iron_checked_on": driver.iron_checked_on,
        "wake_time": driver.wake_time,
    }


DRIVERS: Final = FileKind(
    name="drivers",
    record=Driver,
    columns=(
        Column("name", "a name", required=True, aliases=("driver",)),
        Column("sex", "woman or man", required=True),
        Column("home_place", "the name of a place", required=True, aliases=("home",)),
        Column("mass_kg", "body mass in kilograms", required=True),
        Column("height_cm", "body height in centimetres", required=True),
        Column("bottle_ml", "capacity of the drinks bottle in the car, in millilitres"),
        Column("sweat_sodium_mmol_l", "measured sodium of the whole body's sweat, in mmol/L"),
        Column("altitude_history", "altitude illness so far, as the physician states it"),
        Column("highest_bed_elevation_m", "highest bed that the physician allows, in metres"),
        Column("tent_note", "the physician's note that allows an altitude tent"),
        Column("iron_checked_on", "a day"),
        Column("wake_time", "habitual waking, HH:MM"),
    ),
    take=_take_driver,
    show=_show_driver,
    problems=problems,
    key_fields=("name",),
    compared=("sex", "home_place", "mass_kg", "height_cm"),
    remembered=False,
)


def _take_round(line: Line, context: FileContext) -> Round:
    return Round(
        number=line.whole_number("number") or 0,
        name=line.text("name"),
        place_id=place_in(line, context)[0],
    )


def _show_round(each: Round, context: FileContext) -> dict[str, Cell]:
    return {"number": each.number, "name": each.name, "place": context.place[each.place_id].name}


ROUNDS: Final = FileKind(
    name="rounds",
    record=Round,
    columns=(
        Column("number", "the round's number in the calendar", required=True),
        Column("name", "a name", required=True, aliases=("round",)),
        PLACE,
    ),
    take=_take_round,
    show=_show_round,
    problems=problems,
    key_fields=("name",),
    compared=("number", "place"),
    remembered=False,
)


def _take_session(line: Line, context: FileContext) -> Session:
    its_round = line.named("round", "a round", context.round_called)
    zone = context.place[its_round.place_id].zone if its_round else None
    return Session(
        round_id=its_round.id if its_round else 0,
        kind=line.word("kind", SESSION_KINDS, default=SESSION_KINDS[0]),
        name=line.text("name"),
        starts_at=line.instant("starts_at", zone),
        ends_at=line.instant("ends_at", zone),
    )


def _show_session(session: Session, context: FileContext) -> dict[str, Cell]:
    its_round = context.round[session.round_id]
    return {
        "round": its_round.name,
        "kind": session.kind,
        "name": session.name,
        "starts_at": local(session.starts_at, its_round.place_id, context),
        "ends_at": local(session.ends_at, its_round.place_id, context),
    }


SESSIONS: Final = FileKind(
    name="sessions",
    record=Session,
    columns=(
        ROUND,
        Column("kind", " or ".join(SESSION_KINDS), required=True),
        Column("name", "a name, once in a round", required=True, aliases=("session",)),
        Column("starts_at", A_TIME, required=True),
        Column("ends_at", A_TIME, required=True),
    ),
    take=_take_session,
    show=_show_session,
    problems=problems,
    key_fields=("round_id", "name"),
    compared=("kind", "starts_at", "ends_at"),
    remembered=False,
)


def _take_commitment(line: Line, context: FileContext) -> Commitment:
    place_id, zone = place_in(line, context)
    return Commitment(
        driver_id=driver_id_in(line, context),
        name=line.text("name"),
        place_id=place_id,
        starts_at=line.instant("starts_at", zone),
        ends_at=line.instant("ends_at", zone),
    )


def _show_commitment(commitment: Commitment, context: FileContext) -> dict[str, Cell]:
    return {
        "driver": context.driver[commitment.driver_id].name,
        "name": commitment.name,
        "place": context.place[commitment.place_id].name,
        "starts_at": local(commitment.starts_at, commitment.place_id, context),
        "ends_at": local(commitment.ends_at, commitment.place_id, context),
    }


COMMITMENTS: Final = FileKind(
    name="commitments",
    record=Commitment,
    columns=(
        DRIVER,
        Column("name", "a name", required=True, aliases=("commitment",)),
        PLACE,
        Column("starts_at", A_TIME, required=True),
        Column("ends_at", A_TIME, required=True),
    ),
    take=_take_commitment,
    show=_show_commitment,
    problems=problems,
    key_fields=("driver_id", "starts_at", "name"),
    compared=("place", "ends_at"),
)


def _take_stay(line: Line, context: FileContext) -> Stay:
    place_id, zone = place_in(line, context)
    return Stay(
        driver_id=driver_id_in(line, context),
        place_id=place_id,
        arrive_at=line.instant("arrive_at", zone),
        depart_at=line.instant("depart_at", zone),
        bed_elevation_m=line.optional_number("bed_elevation_m"),
        tent_oxygen_fraction=line.optional_number("tent_oxygen_fraction"),
        tent_hours_per_night=line.number("tent_hours_per_night", default=0.0),
    )


def _show_stay(stay: Stay, context: FileContext) -> dict[str, Cell]:
    return {
        "driver": context.driver[stay.driver_id].name,
        "place": context.place[stay.place_id].name,
        "arrive_at": local(stay.arrive_at, stay.place_id, context),
        "depart_at": local(stay.depart_at, stay.place_id, context),
        "bed_elevation_m": stay.bed_elevation_m,
        "tent_oxygen_fraction": stay.tent_oxygen_fraction,
        "tent_hours_per_night": stay.tent_hours_per_night or None,
    }


STAYS: Final = FileKind(
    name="stays",
    record=Stay,
    columns=(
        DRIVER,
        PLACE,
        Column("arrive_at", A_TIME, required=True),
        Column("depart_at", A_TIME, required=True),
        Column("bed_elevation_m", "metres above sea level, if not as the place's beds"),
        Column("tent_oxygen_fraction", "oxygen fraction in the altitude tent, such as 0.16"),
        Column("tent_hours_per_night", "hours a night in the tent"),
    ),
    take=_take_stay,
    show=_show_stay,
    problems=problems,
    key_fields=("driver_id", "arrive_at"),
    compared=("place", "depart_at"),
)


def _take_leg(line: Line, context: FileContext) -> Leg:
    from_place_id, from_zone = place_in(line, context, "from_place")
    to_place_id, to_zone = place_in(line, context, "to_place")
    return Leg(
        driver_id=driver_id_in(line, context),
        from_place_id=from_place_id,
        to_place_id=to_place_id,
        depart_at=line.instant("depart_at", from_zone),
        arrive_at=line.instant("arrive_at", to_zone),
        mode=line.word("mode", TRAVEL_MODES, default=TRAVEL_MODES[0]),
        cabin_altitude_m=line.optional_number("cabin_altitude_m"),
    )


def _show_leg(leg: Leg, context: FileContext) -> dict[str, Cell]:
    return {
        "driver": context.driver[leg.driver_id].name,
        "from_place": context.place[leg.from_place_id].name,
        "to_place": context.place[leg.to_place_id].name,
        "depart_at": local(leg.depart_at, leg.from_place_id, context),
        "arrive_at": local(leg.arrive_at, leg.to_place_id, context),
        "mode": leg.mode,
        "cabin_altitude_m": leg.cabin_altitude_m,
    }


LEGS: Final = FileKind(
    name="legs",
    record=Leg,
    columns=(
        DRIVER,
        Column("from_place", "the name of a place", required=True),
        Column("to_place", "the name of a place", required=True),
        Column("depart_at", A_TIME, required=True),
        Column("arrive_at", A_TIME, required=True),
        Column("mode", " or ".join(TRAVEL_MODES), required=True),
        Column("cabin_altitude_m", "pressure altitude of the cabin in metres"),
    ),
    take=_take_leg,
    show=_show_leg,
    problems=problems,
    key_fields=("driver_id", "depart_at"),
    compared=("from_place", "to_place", "arrive_at"),
)


def _take_pressure(line: Line, context: FileContext) -> PressureMeasurement:
    place_id, zone = place_in(line, context)
    pressure_hpa = line.number("pressure_hpa")
    if place_id:
        line.note(found([pressure_problem(context.place[place_id], pressure_hpa)]))
    return PressureMeasurement(
        place_id=place_id,
        measured_at=line.measured_at("measured_at", zone),
        pressure_hpa=pressure_hpa,
        typed=line.text("typed"),
    )


def _show_pressure(measurement: PressureMeasurement, context: FileContext) -> dict[str, Cell]:
    return {
        "place": context.place[measurement.place_id].name,
        "measured_at": local(measurement.measured_at, measurement.place_id, context),
        "pressure_hpa": measurement.pressure_hpa,
        "typed": measurement.typed,
    }


PRESSURES: Final = FileKind(
    name="pressures",
    record=PressureMeasurement,
    columns=(
        PLACE,
        Column("measured_at", A_TIME, required=True),
        Column("pressure_hpa", "station pressure in hPa, not reduced to sea level", required=True),
        Column("typed", "what was read or typed, in words"),
    ),
    take=_take_pressure,
    show=_show_pressure,
    problems=problems,
    key_fields=("place_id", "measured_at"),
    compared=("pressure_hpa",),
)
