"""Files of oximeter readings."""

from __future__ import annotations

from collections.abc import Iterable
from datetime import datetime
from typing import Final

from planner.errors import InputError
from planner.exchange.context import FileContext
from planner.exchange.kinds import FileKind, Parsed, read_records
from planner.exchange.lines import Line
from planner.exchange.season_files import DRIVER, driver_id_in, local, place_in
from planner.exchange.tables import Cell, Column
from planner.exchange.times import WANTED as A_TIME
from planner.exchange.times import read_instant
from planner.monitoring.model import Reading
from planner.monitoring.validation import CIRCUMSTANCES, WAKEFULNESSES, problems
from planner.season.model import Driver, Place, Stay

_SIGN_SEPARATOR: Final = "|"
_SCORE: Final = "0 (none) to 3 (severe), Lake Louise 2018"


def _place_in(line: Line, context: FileContext, driver_id: int) -> tuple[int, str | None]:
    """Return the id and zone of the place named, or else of the one where the itinerary has the driver."""
    if line.given("place") or not driver_id or not line.given("taken_at"):
        return place_in(line, context)
    fitting: dict[int, str] = {}
    for stay in context.stays_by_driver.get(driver_id, ()):
        zone = context.place[stay.place_id].zone
        try:
            taken_at = read_instant(line.text("taken_at"), zone)
        except InputError:  # said when the time itself is taken
            continue
        if stay.arrive_at <= taken_at < stay.depart_at:
            fitting[stay.place_id] = zone
    if len(fitting) == 1:
        return fitting.popitem()
    line.refuse("place", f"the name of a place: the itinerary has {len(fitting) or 'none'} for that time")
    return 0, None


def _take(line: Line, context: FileContext) -> Reading:
    driver_id = driver_id_in(line, context)
    place_id, zone = _place_in(line, context, driver_id)
    signs = (sign.strip() for sign in line.text("emergency_signs").split(_SIGN_SEPARATOR))
    return Reading(
        driver_id=driver_id,
        place_id=place_id,
        taken_at=line.measured_at("taken_at", zone),
        spo2_pct=line.percentage("spo2_pct"),
        pulse_bpm=line.optional_number("pulse_bpm"),
        wakefulness=line.word("wakefulness", WAKEFULNESSES, default=Reading.wakefulness),
        circumstance=line.word("circumstance", CIRCUMSTANCES, default=Reading.circumstance),
        device=line.text("device"),
        warm_hand=line.yes("warm_hand", default=Reading.warm_hand),
        quality_note=line.text("quality_note"),
        emergency_signs=tuple(sign for sign in signs if sign),
        headache=line.whole_number("headache"),
        gut=line.whole_number("gut"),
        fatigue=line.whole_number("fatigue"),
        dizziness=line.whole_number("dizziness"),
        left_out=line.text("left_out"),
        entered_by=line.text("entered_by"),
    )


def _show(reading: Reading, context: FileContext) -> dict[str, Cell]:
    return {
        "driver": context.driver[reading.driver_id].name,
        "place": context.place[reading.place_id].name,
        "taken_at": local(reading.taken_at, reading.place_id, context),
        "spo2_pct": reading.spo2_pct,
        "pulse_bpm": reading.pulse_bpm,
        "wakefulness": reading.wakefulness,
        "circumstance": reading.circumstance,
        "device": reading.device,
        "warm_hand": reading.warm_hand,
        "quality_note": reading.quality_note,
        "emergency_signs": _SIGN_SEPARATOR.join(reading.emergency_signs),
        "headache": reading.headache,
        "gut": reading.gut,
        "fatigue": reading.fatigue,
        "dizziness": reading.dizziness,
        "left_out": reading.left_out,
        "entered_by": reading.entered_by,
    }


READINGS: Final = FileKind(
    name="readings",
    record=Reading,
    columns=(
        DRIVER,
        Column("place", "the name of a place; empty = where the itinerary has the driver"),
        Column("taken_at", A_TIME, required=True, aliases=("time",)),
        Column("spo2_pct", "a percentage from 40 to 100", required=True, aliases=("spo2",)),
        Column("pulse_bpm", "beats a minute", aliases=("pulse",)),
        Column("wakefulness", " or ".join(WAKEFULNESSES)),
        Column("circumstance", " or ".join(CIRCUMSTANCES)),
        Column("device", "which oximeter"),
        Column("warm_hand", "yes or no"),
        Column("quality_note", "what was wrong with the measurement, if anything"),
        Column("emergency_signs", f"codes of the signs, {_SIGN_SEPARATOR} between them"),
        Column("headache", _SCORE),
        Column("gut", _SCORE),
        Column("fatigue", _SCORE),
        Column("dizziness", _SCORE),
        Column("left_out", "why the reading must not teach the driver's range"),
        Column("entered_by", "who typed it"),
    ),
    take=_take,
    show=_show,
    problems=problems,
    # The value is part of the key: a doubtful reading is repeated within the minute that the clock shows.
    key_fields=("driver_id", "taken_at", "wakefulness", "device", "spo2_pct"),
)


def read_readings(
    data: bytes,
    file: str,
    *,
    drivers: Iterable[Driver],
    places: Iterable[Place],
    now: datetime,
    stays: Iterable[Stay] = (),
) -> Parsed[Reading]:
    """Read a file of readings; names are those of `drivers` and `places`, times at most a day after `now`.

    Where the file names no place, `stays` tell it.

    Raises: RefusedLineError when the file as a whole cannot be used (see tables.read_table).
    """
    context = FileContext(now=now, drivers=tuple(drivers), places=tuple(places), stays=tuple(stays))
    return read_records(READINGS, data, file, context)
