"""Records go into the store and come out equal, on real SQLite files."""

from __future__ import annotations

from dataclasses import fields, replace
from datetime import UTC, date, datetime, timedelta, timezone
from typing import Any, cast
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from store_records import BY, EVERY_KIND, HIGH, HOME, at, content, keep_every_kind, some_readings, with_team

from planner.errors import InputError, NotFoundError
from planner.hydration import model as hydration_model
from planner.monitoring import model as monitoring_model
from planner.monitoring.model import Reading
from planner.season import model as season_model
from planner.season.model import Driver, Place, Round, Stay
from planner.store.records import KINDS
from planner.store.schema import TABLES, metadata
from planner.store.store import Store


def test_every_record_of_the_domain_has_a_table() -> None:
    models = (season_model, monitoring_model, hydration_model)
    records = {
        thing
        for model in models
        for thing in vars(model).values()
        if isinstance(thing, type) and thing.__module__ == model.__name__
    }
    assert set(TABLES) == records
    assert {type(record) for record in EVERY_KIND} == records, "the tests' example team misses a kind"


@pytest.mark.parametrize("record", TABLES, ids=lambda record: record.__name__)
def test_columns_equal_the_fields(record: type) -> None:
    table = TABLES[record]
    assert set(table.c.keys()) == {field.name for field in fields(record)} | {"removed_in"}
    for field in fields(record):
        if field.name != "id":
            optional = "None" in str(field.type)
            assert table.c[field.name].nullable == optional, f"{record.__name__}.{field.name}"


@pytest.mark.parametrize("record", TABLES, ids=lambda record: record.__name__)
def test_rows_and_records_have_one_order(record: type) -> None:
    """Records are made from rows by position, and rows written by it."""
    names = [field.name for field in fields(record)]
    assert names[-1] == "id"
    assert list(KINDS[record].fields) == names[:-1]
    assert list(TABLES[record].c.keys()) == ["id", *names[:-1], "removed_in"]


def test_references_are_foreign_keys() -> None:
    for table in metadata.sorted_tables:
        for column in table.c:
            if column.name.endswith("_id") and column.name != "record_id":
                assert column.foreign_keys, f"{table.name}.{column.name} refers to nothing"


def test_every_kind_comes_back_equal(store: Store) -> None:
    kept = keep_every_kind(store)
    seen: dict[type, int] = {}
    for record, returned in zip(EVERY_KIND, kept, strict=True):
        kind = type(record)
        seen[kind] = seen.get(kind, 0) + 1
        assert returned == replace(record, id=seen[kind])
        read = store.get(kind, returned.id)
        assert read == returned
        assert store.all(kind)[seen[kind] - 1] == returned
        types = [[type(value) for value in vars(each).values()] for each in (read, record)]
        assert types[0] == types[1]


def test_no_default_hides_a_lost_field() -> None:
    """The example team uses no default value, or a round trip would prove little."""
    for record in EVERY_KIND:
        if record in (HOME, HIGH):
            continue
        same = [
            field.name
            for field in fields(record)
            if field.name != "id" and getattr(record, field.name) == field.default
        ]
        allowed = {"Driver": {"tent_note", "iron_checked_on"}}.get(type(record).__name__, set())
        assert set(same) <= allowed, type(record).__name__


def test_what_is_kept_survives_closing_and_opening(store: Store) -> None:
    keep_every_kind(store)
    store.set_setting("clock_frozen_at", "2026-05-14T12:00:00+00:00")
    kept, uid, version = content(store), store.uid, store.version()
    store.close()
    again = Store.open(store.path)
    assert content(again) == kept
    assert (again.uid, again.version()) == (uid, version)
    assert again.setting("clock_frozen_at") == "2026-05-14T12:00:00+00:00"
    again.close()


def test_all_filters_by_fields(store: Store) -> None:
    home, driver = with_team(store)
    other = store.add(replace(driver, name="Bo Invented", id=0, iron_checked_on=None), by=BY)
    store.add_all([*some_readings(driver, home, 3), *some_readings(other, home, 2)], by=BY)
    assert len(store.all(Reading, driver_id=driver.id)) == 3
    assert [r.spo2_pct for r in store.all(Reading, driver_id=other.id, spo2_pct=91.0)] == [91.0]
    assert store.all(Driver, iron_checked_on=None) == [other]
    assert store.all(Driver, iron_checked_on=date(2026, 3, 1)) == [driver]
    assert len(store.all(Reading, taken_at=at(1))) == 2
    with pytest.raises(InputError, match=r"^spo2: 91 cannot be used, expected a field of Reading$"):
        store.all(Reading, spo2=91)


def test_unknown_kinds_and_ids_are_named(store: Store) -> None:
    with pytest.raises(NotFoundError, match=r"^there is no Driver 7$"):
        store.get(Driver, 7)
    with pytest.raises(NotFoundError, match=r"^there is no stay 9$"):
        store.changes(Stay, 9)
    with pytest.raises(InputError, match=r"^kind: 'int' cannot be used"):
        store.all(int)  # type: ignore[type-var]


def test_readings_are_ascending_and_half_open(store: Store) -> None:
    home, driver = with_team(store)
    given = some_readings(driver, home, 10)
    store.add_all(given[::-1], by=BY)
    taken = [reading.taken_at for reading in store.readings()]
    assert taken == [reading.taken_at for reading in given]
    span = store.readings(driver_id=driver.id, since=given[2].taken_at, until=given[5].taken_at)
    assert [reading.taken_at for reading in span] == taken[2:5]
    assert store.readings(driver_id=99) == []


def test_columns_of_readings_equal_the_readings(store: Store) -> None:
    keep_every_kind(store)
    home, driver = store.get(Place, 1), store.get(Driver, 1)
    some = some_readings(driver, home, 20)
    some[3] = replace(some[3], pulse_bpm=None, warm_hand=False, headache=2)
    store.add_all(some, by=BY)
    removed = store.readings()[7]
    store.remove(removed, by=BY)
    readings, columns = store.readings(), store.reading_columns()
    assert list(columns) == ["id", *(f.name for f in fields(Reading) if f.name != "id")]
    assert len(readings) == 20
    for field, column in columns.items():
        values = [getattr(reading, field) for reading in readings]
        if field == "taken_at":
            assert column.dtype == np.dtype("datetime64[us]")
            values = [np.datetime64(value.replace(tzinfo=None), "us") for value in values]
            np.testing.assert_array_equal(column, np.array(values))
        elif column.dtype == np.float64:
            wanted = [np.nan if value is None else value for value in values]
            np.testing.assert_array_equal(column, np.array(wanted, dtype=float))
        else:
            assert column.tolist() == values
    assert columns["driver_id"].dtype == np.int64
    assert columns["warm_hand"].dtype == np.bool_
    part = store.reading_columns(since=readings[2].taken_at, until=readings[5].taken_at)
    assert part["id"].tolist() == [reading.id for reading in readings[2:5]]


def test_columns_of_no_readings_are_empty_arrays_of_the_same_types(store: Store) -> None:
    empty = store.reading_columns()
    home, driver = with_team(store)
    store.add_all(some_readings(driver, home, 1), by=BY)
    for field, column in store.reading_columns().items():
        assert empty[field].shape == (0,)
        assert empty[field].dtype == column.dtype


def test_add_all_keeps_the_order_given_across_kinds(store: Store) -> None:
    home = store.add(HOME, by=BY)
    mixed = [Round(1, "First round", home.id), HIGH, Round(2, "Second round", home.id)]
    kept = store.add_all(mixed, by=BY)
    assert [type(record).__name__ for record in kept] == ["Round", "Place", "Round"]
    assert kept == [replace(mixed[0], id=1), replace(HIGH, id=2), replace(mixed[2], id=2)]
    assert store.add_all([], by=BY) == []


def test_values_out_of_arrays_and_frames_are_kept_as_numbers(store: Store) -> None:
    home, driver = with_team(store)
    values: tuple[Any, ...] = (
        np.int64(driver.id),
        np.int32(home.id),
        at(1),
        np.float32(96.5),
        np.float64(61.0),
    )
    kept = store.add(Reading(*values, warm_hand=cast(Any, np.bool_(False))), by=BY)
    assert store.get(Reading, kept.id) == Reading(
        driver.id, home.id, at(1), 96.5, 61.0, warm_hand=False, id=1
    )


def test_instants_keep_their_moment_across_clock_changes(store: Store) -> None:
    """The night of 25 October 2026 in Lisbon has 01:30 twice; both readings are kept, an hour apart."""
    home, driver = with_team(store)
    zone = ZoneInfo("Europe/Lisbon")
    summer = datetime(2026, 10, 25, 1, 30, tzinfo=zone, fold=0)
    winter = datetime(2026, 10, 25, 1, 30, tzinfo=zone, fold=1)
    store.add_all([Reading(driver.id, home.id, moment, 96.0) for moment in (summer, winter)], by=BY)
    first, second = (reading.taken_at for reading in store.readings())
    assert first == datetime(2026, 10, 25, 0, 30, tzinfo=UTC)
    assert second == datetime(2026, 10, 25, 1, 30, tzinfo=UTC)
    assert (first.astimezone(zone).fold, second.astimezone(zone).fold) == (0, 1)
    assert first.utcoffset() == timedelta(0)


def test_the_same_instant_in_a_repeated_hour_is_no_change(store: Store) -> None:
    """Python holds such an instant unequal to itself in another zone (PEP 495)."""
    home, driver = with_team(store)
    repeated = datetime(2026, 10, 25, 1, 30, tzinfo=ZoneInfo("Europe/Lisbon"), fold=1)
    kept = store.add(Reading(driver.id, home.id, repeated, 96.0), by=BY)
    assert kept.taken_at.tzinfo is UTC
    assert kept == store.get(Reading, kept.id)
    assert store.change(replace(kept, taken_at=repeated), by=BY) == kept
    assert len(store.changes(Reading, kept.id)) == 1


def test_times_across_the_date_line_stay_in_order(store: Store) -> None:
    home, driver = with_team(store)
    east = datetime(2026, 6, 2, 6, 0, tzinfo=ZoneInfo("Pacific/Kiritimati"))  # UTC+14
    west = datetime(2026, 6, 1, 6, 0, tzinfo=ZoneInfo("Pacific/Pago_Pago"))  # UTC-11, an hour later
    store.add_all([Reading(driver.id, home.id, moment, 96.0) for moment in (west, east)], by=BY)
    assert [reading.taken_at for reading in store.readings()] == [east, west]


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    since_1970_us=st.integers(-600_000_000_000_000, 4_000_000_000_000_000),  # 1950 to 2096
    offset_minutes=st.integers(-14 * 60, 14 * 60),
    spo2=st.floats(40.0, 100.0),
    note=st.text(max_size=30),
)
def test_any_reading_comes_back_equal(
    store: Store, since_1970_us: int, offset_minutes: int, spo2: float, note: str
) -> None:
    if not store.all(Driver):
        with_team(store)
    moment = datetime(1970, 1, 1, tzinfo=UTC) + timedelta(microseconds=since_1970_us)
    taken_at = moment.astimezone(timezone(timedelta(minutes=offset_minutes)))
    given = Reading(
        1, 1, taken_at, spo2, quality_note=note.replace("\0", ""), device=str(len(store.readings()))
    )
    kept = store.add(given, by=BY)
    assert store.get(Reading, kept.id) == replace(given, id=kept.id)
    assert store.get(Reading, kept.id).taken_at.tzinfo is UTC


def test_settings_are_kept_replaced_and_taken_away(store: Store) -> None:
    assert store.setting("units") is None
    assert store.setting("units", "metric") == "metric"
    store.set_setting("units", "feet")
    store.set_setting("units", "metric")
    assert store.setting("units", "feet") == "metric"
    store.set_setting("units", None)
    assert store.setting("units") is None


def test_every_write_moves_the_version_and_no_read_does(store: Store) -> None:
    versions = [store.version()]

    def moved() -> bool:
        versions.append(store.version())
        return versions[-1] > versions[-2]

    home, driver = with_team(store)
    assert moved()
    store.readings()
    store.changes(Driver, driver.id)
    store.check()
    assert not moved()
    store.change(replace(home, bed_elevation_m=20.0), by=BY)
    assert moved()
    store.remove(driver, by=BY)
    assert moved()
    store.restore(Driver, driver.id, by=BY)
    assert moved()
    last = store.last_change_set()
    assert last is not None
    store.undo(last.id, by=BY)
    assert moved()
    store.set_setting("units", "feet")
    assert moved()
    with pytest.raises(InputError):
        store.add(HOME, by=BY)
    assert not moved()
