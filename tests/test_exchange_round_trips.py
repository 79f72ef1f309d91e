"""Every kind of record survives its file: written, read, equal; and every kind of file is recognised."""

from __future__ import annotations

from datetime import UTC, date, datetime, timedelta
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.errors import InputError
from planner.exchange.context import FileContext
from planner.exchange.kinds import FileKind, read_records, write_records
from planner.exchange.registry import KINDS, kind_called, recognised
from planner.hydration.model import CockpitConditions, MorningMark, Weighing
from planner.hydration.validation import WEIGHING_CLOTHES
from planner.monitoring.model import Notice, Reading, SickPeriod
from planner.physiology.illness import EMERGENCY_SIGNS
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
from planner.season.validation import ALTITUDE_HISTORIES, SESSION_KINDS, SEXES, TRAVEL_MODES
from planner.store.schema import TABLES

NOW = datetime(2026, 12, 31, tzinfo=UTC)
PLACES = tuple(
    Place(f"P{number}", zone, 10.0, 20.0, 1.0, 2.0, id=number)
    for number, zone in enumerate(
        ("Europe/Rome", "America/Mexico_City", "Australia/Lord_Howe", "Asia/Kathmandu", "Pacific/Kiritimati"),
        start=1,
    )
)
DRIVERS = tuple(Driver(name, "woman", 1, 60.0, 170.0, id=n) for n, name in ((5, "=Ada"), (6, "Bö, Lind")))
ROUNDS = (Round(1, "Round one", 1, id=3), Round(2, '"Two"', 3, id=4))
SESSIONS = (
    Session(3, "race", "Race", NOW, NOW + timedelta(hours=1), id=7),
    Session(4, "race", "Race", NOW, NOW + timedelta(hours=1), id=8),
)
CONTEXT = FileContext(NOW, DRIVERS, PLACES, ROUNDS, SESSIONS)

text = st.text(st.characters(exclude_categories=("Cs", "Cc")), max_size=15).map(str.strip)
names = st.text(st.characters(categories=("L", "N", "P", "Sm")), min_size=1, max_size=15)
driver_ids = st.sampled_from([driver.id for driver in DRIVERS])
place_ids = st.sampled_from([place.id for place in PLACES])
instants = st.datetimes(datetime(2000, 1, 2), datetime(2026, 12, 30), timezones=st.just(UTC))  # noqa: DTZ001
spans = st.timedeltas(timedelta(minutes=1), timedelta(days=20))
scores = st.none() | st.integers(0, 3)


def numbers(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, allow_nan=False)


def maybe(strategy: st.SearchStrategy[Any]) -> st.SearchStrategy[Any]:
    return st.none() | strategy


@st.composite
def starts_and_ends(draw: st.DrawFn) -> tuple[datetime, datetime]:
    start = draw(instants)
    return start, start + draw(spans)


RECORDS: dict[type, st.SearchStrategy[Any]] = {
    Place: st.builds(
        Place,
        names,
        st.sampled_from([p.zone for p in PLACES]),
        numbers(-430, 9000),
        numbers(-430, 9000),
        numbers(-90, 90),
        numbers(-180, 180),
        id=st.just(0),
    ),
    Driver: st.builds(
        Driver,
        names,
        st.sampled_from(SEXES),
        place_ids,
        numbers(35, 150),
        numbers(120, 230),
        numbers(250, 3000),
        maybe(numbers(10, 120)),
        st.sampled_from(ALTITUDE_HISTORIES),
        maybe(numbers(0, 5000)),
        text,
        maybe(st.dates(date(2000, 1, 1), date(2090, 1, 1))),
        st.times().map(lambda clock: f"{clock:%H:%M}"),
        id=st.just(0),
    ),
    Round: st.builds(Round, st.integers(0, 999), names, place_ids, id=st.just(0)),
    Session: st.builds(
        lambda times, **more: Session(starts_at=times[0], ends_at=times[1], **more),
        starts_and_ends(),
        round_id=st.sampled_from([3, 4]),
        kind=st.sampled_from(SESSION_KINDS),
        name=names,
    ),
    Commitment: st.builds(
        lambda times, **more: Commitment(starts_at=times[0], ends_at=times[1], **more),
        starts_and_ends(),
        driver_id=driver_ids,
        name=names,
        place_id=place_ids,
    ),
    Stay: st.builds(
        lambda times, **more: Stay(arrive_at=times[0], depart_at=times[1], **more),
        starts_and_ends(),
        driver_id=driver_ids,
        place_id=place_ids,
        bed_elevation_m=maybe(numbers(0, 5000)),
        tent_oxygen_fraction=maybe(numbers(0.1, 0.21)),
        tent_hours_per_night=numbers(0, 12),
    ),
    Leg: st.builds(
        lambda times, **more: Leg(depart_at=times[0], arrive_at=times[1], **more),
        starts_and_ends(),
        driver_id=driver_ids,
        from_place_id=st.just(2),
        to_place_id=st.sampled_from([1, 3, 5]),
        mode=st.sampled_from(TRAVEL_MODES),
        cabin_altitude_m=maybe(numbers(0, 3000)),
    ),
    PressureMeasurement: st.builds(
        PressureMeasurement, place_ids, instants, numbers(960, 1060), text, id=st.just(0)
    ),
    SickPeriod: st.builds(
        lambda times, open_, **more: SickPeriod(
            starts_at=times[0], ends_at=None if open_ else times[1], **more
        ),
        starts_and_ends(),
        st.booleans(),
        driver_id=driver_ids,
        marked_by=names,
        note=text,
    ),
    Reading: st.builds(
        Reading,
        driver_ids,
        place_ids,
        instants,
        numbers(40, 100),
        maybe(numbers(25, 230)),
        st.sampled_from(["awake", "asleep"]),
        st.sampled_from(["at rest", "after a session"]),
        text,
        st.booleans(),
        text,
        st.lists(st.sampled_from(sorted(EMERGENCY_SIGNS)), unique=True).map(tuple),
        scores,
        scores,
        scores,
        scores,
        text,
        text,
        id=st.just(0),
    ),
    Notice: st.builds(
        Notice,
        driver_ids,
        instants,
        st.sampled_from(["told the physician", "note"]),
        names,
        text,
        id=st.just(0),
    ),
    CockpitConditions: st.builds(
        CockpitConditions,
        st.sampled_from([7, 8]),
        numbers(-60, 75),
        numbers(0, 75),
        numbers(1.01, 100),
        numbers(0, 10),
        st.booleans(),
        id=st.just(0),
    ),
    Weighing: st.builds(
        lambda times, open_, **more: Weighing(
            starts_at=times[0], ends_at=None if open_ else times[1], **more
        ),
        starts_and_ends(),
        st.booleans(),
        driver_id=driver_ids,
        place_id=place_ids,
        mass_before_kg=numbers(35, 150),
        mass_after_kg=maybe(numbers(35, 150)),
        drink_ml=numbers(0, 4000),
        food_g=numbers(0, 500),
        urine_ml=numbers(0, 1500),
        clothes=st.sampled_from(WEIGHING_CLOTHES),
        ensemble=text,
        air_temperature_c=maybe(numbers(-60, 75)),
        radiant_temperature_c=maybe(numbers(0, 75)),
        humidity_pct=maybe(numbers(1.01, 100)),
        air_speed_m_s=maybe(numbers(0, 10)),
        metabolic_w_m2=maybe(numbers(50, 500)),
        session_id=maybe(st.sampled_from([7, 8])),
        entered_by=text,
    ),
    MorningMark: st.builds(
        MorningMark,
        driver_ids,
        instants,
        maybe(numbers(35, 150)),
        maybe(st.integers(1, 8)),
        maybe(numbers(1.0, 1.05)),
        maybe(st.booleans()),
        text,
        id=st.just(0),
    ),
}


def test_there_is_a_kind_of_file_for_every_kind_of_record() -> None:
    assert {kind.record for kind in KINDS} == set(TABLES) == set(RECORDS)


@pytest.mark.parametrize("kind", KINDS, ids=lambda kind: kind.name)
@given(data=st.data())
@settings(max_examples=25, deadline=None)
def test_records_survive_their_file(kind: FileKind[Any], data: st.DataObject) -> None:
    records = data.draw(st.lists(RECORDS[kind.record].filter(lambda r: not kind.problems(r)), max_size=4))
    written = write_records(kind, records, CONTEXT, "Invented")
    parsed = read_records(kind, written, "file.csv", CONTEXT)
    assert [str(fault) for fault in parsed.refused] == []
    assert list(parsed.records) == records
    assert parsed.notes == ()
    assert write_records(kind, parsed.records, CONTEXT, "Invented") == written


@pytest.mark.parametrize("kind", KINDS, ids=lambda kind: kind.name)
def test_a_file_is_recognised_by_its_header(kind: FileKind[Any]) -> None:
    assert recognised(write_records(kind, (), CONTEXT), "file.csv") is kind


@pytest.mark.parametrize("kind", KINDS, ids=lambda kind: kind.name)
def test_the_required_columns_alone_tell_the_kind(kind: FileKind[Any]) -> None:
    header = ";".join(column.name for column in kind.columns if column.required)
    assert recognised(header.encode(), "file.csv") is kind


def test_a_header_of_no_kind_is_refused_with_the_kinds() -> None:
    with pytest.raises(InputError, match="expected the columns of one kind: places, drivers"):
        recognised(b"driver,shoe size\nAda,38\n", "shoes.csv")


def test_an_unknown_kind_is_refused_with_the_kinds() -> None:
    with pytest.raises(InputError, match="kind: 'shoes' cannot be used, expected places, drivers"):
        kind_called("shoes")


PLACE_HEADER = "name,zone,track_elevation_m,latitude,longitude"
DRIVER_HEADER = "name,sex,home_place,mass_kg,height_cm,wake_time"
SESSION_HEADER = "round,kind,name,starts_at,ends_at"
LEG_HEADER = "driver,from_place,to_place,depart_at,arrive_at,mode"
WEIGHING_HEADER = "driver,place,starts_at,mass_before_kg,round,session,humidity_pct"
MARK_HEADER = "driver,place,at,urine_colour"


@pytest.mark.parametrize(
    ("name", "header", "cells", "column", "expected"),
    [
        ("places", PLACE_HEADER, "A,Mars/Base,1,2,3", "zone", "IANA time zone"),
        ("places", PLACE_HEADER, "A,Asia/Tokyo,9999,2,3", "track_elevation_m", "to 9000"),
        ("places", PLACE_HEADER, "A,Asia/Tokyo,1,95,3", "latitude_deg", "-90 to 90"),
        ("drivers", DRIVER_HEADER, "A,woman,Nowhere,60,170,", "home_place", "a place known here"),
        ("drivers", DRIVER_HEADER, "A,woman,P1,7.9,170,", "mass_kg", "35 to 150"),
        ("drivers", DRIVER_HEADER, "A,,P1,79,170,", "sex", "woman or man"),
        ("drivers", DRIVER_HEADER, "A,man,P1,79,170,7", "wake_time", "a time of day"),
        ("rounds", "number,name,place", "1.5,A,P1", "number", "a whole number"),
        (
            "sessions",
            SESSION_HEADER,
            "round ONE,race,A,2026-05-01 15:00,2026-05-01 14:00",
            "ends_at",
            "after",
        ),
        ("sessions", SESSION_HEADER, "X,race,A,2026-05-01 15:00,2026-05-01 16:00", "round", "a round known"),
        (
            "legs",
            LEG_HEADER,
            "=Ada,P1,P1,2026-05-01 10:00,2026-05-01 12:00,road",
            "to_place",
            "another place",
        ),
        ("legs", LEG_HEADER, "=Ada,P1,P2,2026-05-01 10:00,2026-05-01 12:00,boat", "mode", "road or flight"),
        ("sick periods", "driver,starts_at,marked_by", "=Ada,2026-05-01 10:00,X", "starts_at", "its offset"),
        ("weighings", WEIGHING_HEADER, "=Ada,P1,2026-05-01 10:00,60,Round one", "session", "with the other"),
        ("weighings", WEIGHING_HEADER, "=Ada,P1,2026-05-01 10:00,60,Round one,Q", "session", r"\(Race\)"),
        ("weighings", WEIGHING_HEADER, "=Ada,P1,2026-05-01 10:00,60,,,0.4", "humidity_pct", "write 40"),
        ("weighings", WEIGHING_HEADER, "=Ada,P1,2027-05-01 10:00,60,,,", "starts_at", "at most a day ahead"),
        ("morning marks", MARK_HEADER, "=Ada,P1,2026-05-01 07:00,9", "urine_colour", "1 to 8"),
    ],
)
def test_every_kind_refuses_with_line_and_column(
    name: str, header: str, cells: str, column: str, expected: str
) -> None:
    parsed = read_records(kind_called(name), f"{header}\n{cells}\n".encode(), "file.csv", CONTEXT)
    assert parsed.records == ()
    (fault,) = parsed.refused
    assert (fault.line, fault.field) == (2, column)
    with pytest.raises(InputError, match=expected):
        raise fault


def test_a_mark_may_name_a_place_whose_clock_it_means() -> None:
    file = b"driver,place,at,mass_kg\n=Ada,P2,14.05.2026 07:00,60\n"
    (mark,) = read_records(kind_called("morning marks"), file, "file.csv", CONTEXT).records
    assert mark == MorningMark(5, datetime(2026, 5, 14, 13, 0, tzinfo=UTC), 60.0)
