"""Files of what else is noted about a driver: illness, notices, weighings, morning marks; cockpit heat."""

from __future__ import annotations

from typing import Final

from planner.exchange.context import FileContext
from planner.exchange.kinds import FileKind
from planner.exchange.lines import NO_ZONE, Line
from planner.exchange.season_files import DRIVER, PLACE, ROUND, driver_id_in, local, place_in
from planner.exchange.tables import Cell, Column
from planner.exchange.times import WANTED as A_TIME
from planner.hydration.model import CockpitConditions, MorningMark, Weighing
from planner.hydration.validation import WEIGHING_CLOTHES
from planner.hydration.validation import problems as hydration_problems
from planner.monitoring.model import Notice, SickPeriod
from planner.monitoring.validation import NOTICE_KINDS
from planner.monitoring.validation import problems as monitoring_problems
from planner.season.model import Session

# These records know no place; a file may name one all the same, whose wall clock its times then are.
_WHERE: Final = Column("place", "the place whose clock the times are read from, unless they have an offset")


def _zone_in(line: Line, context: FileContext) -> str | None:
    return place_in(line, context)[1] if line.given("place") else NO_ZONE


def _session_in(line: Line, context: FileContext) -> Session | None:
    """Return the session named by the columns round and session; both may be empty unless required."""
    if line.given("round") != line.given("session"):
        missing = "session" if line.given("round") else "round"
        line.refuse(missing, "filled in together with the other of round and session")
        return None
    its_round = line.named("round", "a round", context.round_called)
    if its_round is None:
        return None
    return line.named("session", f"a session of {its_round.name}", context.sessions_of(its_round.id))


def _show_session(session_id: int | None, context: FileContext) -> dict[str, Cell]:
    if session_id is None:
        return {}
    session = context.session[session_id]
    return {"round": context.round[session.round_id].name, "session": session.name}


def _take_sick_period(line: Line, context: FileContext) -> SickPeriod:
    zone = _zone_in(line, context)
    return SickPeriod(
        driver_id=driver_id_in(line, context),
        starts_at=line.measured_at("starts_at", zone),
        ends_at=line.optional_instant("ends_at", zone),
        marked_by=line.text("marked_by"),
        note=line.text("note"),
    )


def _show_sick_period(period: SickPeriod, context: FileContext) -> dict[str, Cell]:
    return {
        "driver": context.driver[period.driver_id].name,
        "starts_at": period.starts_at,
        "ends_at": period.ends_at,
        "marked_by": period.marked_by,
        "note": period.note,
    }


SICK_PERIODS: Final = FileKind(
    name="sick periods",
    record=SickPeriod,
    columns=(
        DRIVER,
        _WHERE,
        Column("starts_at", A_TIME, required=True),
        Column("ends_at", f"{A_TIME}; empty while still ill", required=False),
        Column("marked_by", "who marked it: the physician or the driver", required=True),
        Column("note", "a note"),
    ),
    take=_take_sick_period,
    show=_show_sick_period,
    problems=monitoring_problems,
    key_fields=("driver_id", "starts_at"),
    compared=("ends_at",),
)


def _take_notice(line: Line, context: FileContext) -> Notice:
    return Notice(
        driver_id=driver_id_in(line, context),
        at=line.measured_at("at", _zone_in(line, context)),
        kind=line.word("kind", NOTICE_KINDS, default=NOTICE_KINDS[-1]),
        text=line.text("text"),
        entered_by=line.text("entered_by"),
    )


def _show_notice(notice: Notice, context: FileContext) -> dict[str, Cell]:
    return {
        "driver": context.driver[notice.driver_id].name,
        "at": notice.at,
        "kind": notice.kind,
        "text": notice.text,
        "entered_by": notice.entered_by,
    }


NOTICES: Final = FileKind(
    name="notices",
    record=Notice,
    columns=(
        DRIVER,
        _WHERE,
        Column("at", A_TIME, required=True),
        Column("kind", " or ".join(NOTICE_KINDS), required=True),
        Column("text", "a note", required=True),
        Column("entered_by", "who typed it"),
    ),
    take=_take_notice,
    show=_show_notice,
    problems=monitoring_problems,
    key_fields=("driver_id", "at", "kind", "text"),
)


def _take_conditions(line: Line, context: FileContext) -> CockpitConditions:
    session = _session_in(line, context)
    return CockpitConditions(
        session_id=session.id if session else 0,
        air_temperature_c=line.number("air_temperature_c"),
        radiant_temperature_c=line.number("radiant_temperature_c"),
        humidity_pct=line.percentage("humidity_pct"),
        air_speed_m_s=line.number("air_speed_m_s"),
        measured=line.yes("measured", default=CockpitConditions.measured),
    )


def _show_conditions(conditions: CockpitConditions, context: FileContext) -> dict[str, Cell]:
    return {
        **_show_session(conditions.session_id, context),
        "air_temperature_c": conditions.air_temperature_c,
        "radiant_temperature_c": conditions.radiant_temperature_c,
        "humidity_pct": conditions.humidity_pct,
        "air_speed_m_s": conditions.air_speed_m_s,
        "measured": conditions.measured,
    }


COCKPIT_CONDITIONS: Final = FileKind(
    name="cockpit conditions",
    record=CockpitConditions,
    columns=(
        ROUND,
        Column("session", "the name of a session of the round", required=True),
        Column("air_temperature_c", "degrees Celsius in the cockpit", required=True),
        Column("radiant_temperature_c", "degrees Celsius of the surfaces around the driver", required=True),
        Column("humidity_pct", "relative humidity, a percentage", required=True),
        Column("air_speed_m_s", "metres a second at the driver", required=True),
        Column("measured", "yes, or no for an estimate"),
    ),
    take=_take_conditions,
    show=_show_conditions,
    problems=hydration_problems,
    key_fields=("session_id",),
    compared=("air_temperature_c", "radiant_temperature_c", "humidity_pct", "air_speed_m_s"),
)


def _take_weighing(line: Line, context: FileContext) -> Weighing:
    place_id, zone = place_in(line, context)
    session = _session_in(line, context)
    return Weighing(
        driver_id=driver_id_in(line, context),
        place_id=place_id,
        starts_at=line.measured_at("starts_at", zone),
        ends_at=line.optional_instant("ends_at", zone),
        mass_before_kg=line.number("mass_before_kg"),
        mass_after_kg=line.optional_number("mass_after_kg"),
        drink_ml=line.number("drink_ml", default=0.0),
        food_g=line.number("food_g", default=0.0),
        urine_ml=line.number("urine_ml", default=0.0),
        clothes=line.word("clothes", WEIGHING_CLOTHES, default=Weighing.clothes),
        ensemble=line.text("ensemble"),
        air_temperature_c=line.optional_number("air_temperature_c"),
        radiant_temperature_c=line.optional_number("radiant_temperature_c"),
        humidity_pct=line.percentage("humidity_pct") if line.given("humidity_pct") else None,
        air_speed_m_s=line.optional_number("air_speed_m_s"),
        metabolic_w_m2=line.optional_number("metabolic_w_m2"),
        session_id=session.id if session else None,
        entered_by=line.text("entered_by"),
    )


def _show_weighing(weighing: Weighing, context: FileContext) -> dict[str, Cell]:
    return {
        "driver": context.driver[weighing.driver_id].name,
        "place": context.place[weighing.place_id].name,
        **_show_session(weighing.session_id, context),
        "starts_at": local(weighing.starts_at, weighing.place_id, context),
        "ends_at": local(weighing.ends_at, weighing.place_id, context),
        "mass_before_kg": weighing.mass_before_kg,
        "mass_after_kg": weighing.mass_after_kg,
        "drink_ml": weighing.drink_ml,
        "food_g": weighing.food_g,
        "urine_ml": weighing.urine_ml,
        "clothes": weighing.clothes,
        "ensemble": weighing.ensemble,
        "air_temperature_c": weighing.air_temperature_c,
        "radiant_temperature_c": weighing.radiant_temperature_c,
        "humidity_pct": weighing.humidity_pct,
        "air_speed_m_s": weighing.air_speed_m_s,
        "metabolic_w_m2": weighing.metabolic_w_m2,
        "entered_by": weighing.entered_by,
    }


WEIGHINGS: Final = FileKind(
    name="weighings",
    record=Weighing,
    columns=(
        DRIVER,
        PLACE,
        Column("round", "the name of a round"),
        Column("session", "the name of a session of the round"),
        Column("starts_at", A_TIME, required=True),
        Column("ends_at", f"{A_TIME}; empty before the weigh-out"),
        Column("mass_before_kg", "kilograms at the weigh-in", required=True),
        Column("mass_after_kg", "kilograms at the weigh-out"),
        Column("drink_ml", "millilitres drunk between the two"),
        Column("food_g", "grams eaten between the two"),
        Column("urine_ml", "millilitres of urine between the two"),
        Column("clothes", " or ".join(WEIGHING_CLOTHES)),
        Column("ensemble", "what was worn in the car"),
        Column("air_temperature_c", "degrees Celsius in the cockpit"),
        Column("radiant_temperature_c", "degrees Celsius of the surfaces around the driver"),
        Column("humidity_pct", "relative humidity, a percentage"),
        Column("air_speed_m_s", "metres a second at the driver"),
        Column("metabolic_w_m2", "heat produced by the body, watts a square metre"),
        Column("entered_by", "who typed it"),
    ),
    take=_take_weighing,
    show=_show_weighing,
    problems=hydration_problems,
    key_fields=("driver_id", "starts_at"),
    compared=("ends_at", "mass_before_kg", "mass_after_kg", "drink_ml"),
)


def _take_mark(line: Line, context: FileContext) -> MorningMark:
    return MorningMark(
        driver_id=driver_id_in(line, context),
        at=line.measured_at("at", _zone_in(line, context)),
        mass_kg=line.optional_number("mass_kg"),
        urine_colour=line.whole_number("urine_colour"),
        urine_specific_gravity=line.optional_number("urine_specific_gravity"),
        thirsty=line.optional_yes("thirsty"),
        entered_by=line.text("entered_by"),
    )


def _show_mark(mark: MorningMark, context: FileContext) -> dict[str, Cell]:
    return {
        "driver": context.driver[mark.driver_id].name,
        "at": mark.at,
        "mass_kg": mark.mass_kg,
        "urine_colour": mark.urine_colour,
        "urine_specific_gravity": mark.urine_specific_gravity,
        "thirsty": mark.thirsty,
        "entered_by": mark.entered_by,
    }


MORNING_MARKS: Final = FileKind(
    name="morning marks",
    record=MorningMark,
    columns=(
        DRIVER,
        _WHERE,
        Column("at", A_TIME, required=True),
        Column("mass_kg", "body mass in kilograms"),
        Column("urine_colour", "1 (pale) to 8 (dark)"),
        Column("urine_specific_gravity", "such as 1.018"),
        Column("thirsty", "yes or no"),
        Column("entered_by", "who typed it"),
    ),
    take=_take_mark,
    show=_show_mark,
    problems=hydration_problems,
    key_fields=("driver_id", "at"),
    compared=("mass_kg", "urine_colour", "urine_specific_gravity"),
)
