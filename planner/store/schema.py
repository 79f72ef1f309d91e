"""The tables as they stand after the last migration: one for each kind of record, and the housekeeping.

A record's columns bear the names of its dataclass fields (a test compares the two). Rows are never deleted:
`removed_in` names the change set that removed one. A foreign key with CASCADE says that the row belongs to
the other and is removed with it; with RESTRICT, that the other cannot be removed while this row stands.
"""

from __future__ import annotations

from sqlalchemy import (
    Boolean,
    Column,
    Date,
    Float,
    ForeignKey,
    Index,
    Integer,
    MetaData,
    Table,
    Text,
    text,
)

from planner.hydration.model import CockpitConditions, MorningMark, Weighing
from planner.monitoring.model import Notice, Reading, SickPeriod
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
from planner.store.columns import UtcInstant, Words

metadata = MetaData()

IS_LIVE = text("removed_in IS NULL")


def _id() -> Column[int]:
    return Column("id", Integer, primary_key=True)


def _removed_in() -> Column[int | None]:
    return Column("removed_in", Integer, ForeignKey("change_set.id"), nullable=True)


def _text(name: str) -> Column[str]:
    return Column(name, Text, nullable=False)


def _number(name: str, *, optional: bool = False) -> Column[float]:
    return Column(name, Float, nullable=optional)


def _whole(name: str, *, optional: bool = False) -> Column[int]:
    return Column(name, Integer, nullable=optional)


def _flag(name: str, *, optional: bool = False) -> Column[bool]:
    return Column(name, Boolean, nullable=optional)


def _instant(name: str, *, optional: bool = False) -> Column[object]:
    return Column(name, UtcInstant, nullable=optional)


def _belongs_to(name: str, table: str) -> Column[int]:
    return Column(name, Integer, ForeignKey(f"{table}.id", ondelete="CASCADE"), nullable=False)


def _uses(name: str, table: str, *, optional: bool = False) -> Column[int]:
    return Column(name, Integer, ForeignKey(f"{table}.id", ondelete="RESTRICT"), nullable=optional)


# Housekeeping ---------------------------------------------------------------------------------------------

migration = Table(
    "migration",
    metadata,
    Column("number", Integer, primary_key=True),
    _text("name"),
    _instant("applied_at"),
)

# The store's random id ("uid") and the counter that every write moves ("version").
meta = Table("meta", metadata, Column("name", Text, primary_key=True), _text("value"))

setting = Table("setting", metadata, Column("name", Text, primary_key=True), _text("value"))

change_set = Table(
    "change_set",
    metadata,
    _id(),
    _instant("at"),
    _text("by"),
    _text("why"),
    Column("undoes", Integer, ForeignKey("change_set.id"), nullable=True),
)

# `before` is a JSON object of the record's fields as they stood before an action "change", and null for the
# others, which change no field. What stood after any action is thus the next `before`, or the record itself.
change = Table(
    "change",
    metadata,
    _id(),
    Column("change_set_id", Integer, ForeignKey("change_set.id"), nullable=False, index=True),
    _text("kind"),
    _whole("record_id"),
    _text("action"),
    Column("before", Text, nullable=True),
    _text("why"),
    Index("ix_change_record", "record_id", "kind"),
)

# The season -----------------------------------------------------------------------------------------------

place = Table(
    "place",
    metadata,
    _id(),
    _text("name"),
    _text("zone"),
    _number("track_elevation_m"),
    _number("bed_elevation_m"),
    _number("latitude_deg"),
    _number("longitude_deg"),
    _removed_in(),
)

driver = Table(
    "driver",
    metadata,
    _id(),
    _text("name"),
    _text("sex"),
    _uses("home_place_id", "place"),
    _number("mass_kg"),
    _number("height_cm"),
    _number("bottle_ml"),
    _number("sweat_sodium_mmol_l", optional=True),
    _text("altitude_history"),
    _number("highest_bed_elevation_m", optional=True),
    _text("tent_note"),
    Column("iron_checked_on", Date, nullable=True),
    _text("wake_time"),
    _removed_in(),
)

season_round = Table(
    "round",
    metadata,
    _id(),
    _whole("number"),
    _text("name"),
    _uses("place_id", "place"),
    _removed_in(),
)

session = Table(
    "session",
    metadata,
    _id(),
    _belongs_to("round_id", "round"),
    _text("kind"),
    _text("name"),
    _instant("starts_at"),
    _instant("ends_at"),
    _removed_in(),
)

commitment = Table(
    "commitment",
    metadata,
    _id(),
    _belongs_to("driver_id", "driver"),
    _text("name"),
    _uses("place_id", "place"),
    _instant("starts_at"),
    _instant("ends_at"),
    _removed_in(),
)

stay = Table(
    "stay",
    metadata,
    _id(),
    _belongs_to("driver_id", "driver"),
    _uses("place_id", "place"),
    _instant("arrive_at"),
    _instant("depart_at"),
    _number("bed_elevation_m", optional=True),
    _number("tent_oxygen_fraction", optional=True),
    _number("tent_hours_per_night"),
    _removed_in(),
)

leg = Table(
    "leg",
    metadata,
    _id(),
    _belongs_to("driver_id", "driver"),
    _uses("from_place_id", "place"),
    _uses("to_place_id", "place"),
    _instant("depart_at"),
    _instant("arrive_at"),
    _text("mode"),
    _number("cabin_altitude_m", optional=True),
    _removed_in(),
)

pressure_measurement = Table(
    "pressure_measurement",
    metadata,
    _id(),
    _belongs_to("place_id", "place"),
    _instant("measured_at"),
    _number("pressure_hpa"),
    _text("typed"),
    _removed_in(),
)

# Monitoring -----------------------------------------------------------------------------------------------

reading = Table(
    "reading",
    metadata,
    _id(),
    _belongs_to("driver_id", "driver"),
    _uses("place_id", "place"),
    _instant("taken_at"),
    _number("spo2_pct"),
    _number("pulse_bpm", optional=True),
    _text("wakefulness"),
    _text("circumstance"),
    _text("device"),
    _flag("warm_hand"),
    _text("quality_note"),
    Column("emergency_signs", Words, nullable=False),
    _whole("headache", optional=True),
    _whole("gut", optional=True),
    _whole("fatigue", optional=True),
    _whole("dizziness", optional=True),
    _text("left_out"),
    _text("entered_by"),
    _removed_in(),
    Index("ix_reading_taken_at", "taken_at"),
)

sick_period = Table(
    "sick_period",
    metadata,
    _id(),
    _belongs_to("driver_id", "driver"),
    _instant("starts_at"),
    _instant("ends_at", optional=True),
    _text("marked_by"),
    _text("note"),
    _removed_in(),
)

notice = Table(
    "notice",
    metadata,
    _id(),
    _belongs_to("driver_id", "driver"),
    _instant("at"),
    _text("kind"),
    _text("text"),
    _text("entered_by"),
    _removed_in(),
)

# Hydration ------------------------------------------------------------------------------------------------

cockpit_conditions = Table(
    "cockpit_conditions",
    metadata,
    _id(),
    _belongs_to("session_id", "session"),
    _number("air_temperature_c"),
    _number("radiant_temperature_c"),
    _number("humidity_pct"),
    _number("air_speed_m_s"),
    _flag("measured"),
    _removed_in(),
)

weighing = Table(
    "weighing",
    metadata,
    _id(),
    _belongs_to("driver_id", "driver"),
    _uses("place_id", "place"),
    _instant("starts_at"),
    _instant("ends_at", optional=True),
    _number("mass_before_kg"),
    _number("mass_after_kg", optional=True),
    _number("drink_ml"),
    _number("food_g"),
    _number("urine_ml"),
    _text("clothes"),
    _text("ensemble"),
    _number("air_temperature_c", optional=True),
    _number("radiant_temperature_c", optional=True),
    _number("humidity_pct", optional=True),
    _number("air_speed_m_s", optional=True),
    _number("metabolic_w_m2", optional=True),
    _uses("session_id", "session", optional=True),
    _text("entered_by"),
    _removed_in(),
)

morning_mark = Table(
    "morning_mark",
    metadata,
    _id(),
    _belongs_to("driver_id", "driver"),
    _instant("at"),
    _number("mass_kg", optional=True),
    _whole("urine_colour", optional=True),
    _number("urine_specific_gravity", optional=True),
    _flag("thirsty", optional=True),
    _text("entered_by"),
    _removed_in(),
)

# Kinds of record ------------------------------------------------------------------------------------------

TABLES: dict[type, Table] = {
    Place: place,
    Driver: driver,
    Round: season_round,
    Session: session,
    Commitment: commitment,
    Stay: stay,
    Leg: leg,
    PressureMeasurement: pressure_measurement,
    Reading: reading,
    SickPeriod: sick_period,
    Notice: notice,
    CockpitConditions: cockpit_conditions,
    Weighing: weighing,
    MorningMark: morning_mark,
}

# What tells one live record from another: a second one with the same values is refused. The SpO2 is part of
# a reading's key, since a doubtful reading is repeated within the minute that the clock shows. Its index also
# serves the question for one driver's readings in a span of time.
UNIQUE: dict[type, tuple[str, ...]] = {
    Place: ("name",),
    Driver: ("name",),
    Round: ("name",),
    Session: ("round_id", "name"),
    Reading: ("driver_id", "taken_at", "wakefulness", "device", "spo2_pct"),
}

for _kind, _fields in UNIQUE.items():
    _table = TABLES[_kind]
    Index(f"uq_{_table.name}", *(_table.c[field] for field in _fields), unique=True, sqlite_where=IS_LIVE)
