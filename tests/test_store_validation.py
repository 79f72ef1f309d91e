"""The door of the store: what cannot be used is refused by name, and nothing stored is lost by it."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from dataclasses import replace
from datetime import date
from math import inf, nan
from pathlib import Path
from typing import Any

import pytest
from store_records import (
    BY,
    DRIVER,
    EVERY_KIND,
    HIGH,
    HOME,
    at,
    content,
    keep_every_kind,
    some_readings,
    with_team,
)

from planner.checks import QUANTITIES
from planner.errors import InputError
from planner.hydration.model import CockpitConditions, MorningMark, Weighing
from planner.monitoring.model import Notice, Reading, SickPeriod
from planner.monitoring.validation import problems as monitoring_problems
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
from planner.season.validation import problems as season_problems
from planner.store.store import Store

EXAMPLES: dict[type, Any] = {type(record): record for record in EVERY_KIND[::-1]}

# A time without a zone, made from one with a zone so that nobody takes it for a real instant.
NAIVE = at(14).replace(tzinfo=None)

# Kind, field, a value that must be refused, words of the message. The ranges are those of
# `checks.QUANTITIES`; a value just outside is judged by the test below.
REFUSED: list[tuple[type, str, object, str]] = [
    (Place, "name", "", "a name on one line"),
    (Place, "name", " Plateau", "without blanks"),
    (Place, "name", "Two\nlines", "on one line"),
    (Place, "name", 7, "text"),
    (Place, "name", "x" * 201, "at most 200 characters"),
    (Place, "zone", "Mars/Olympus", "an IANA time zone"),
    (Place, "zone", "", "an IANA time zone"),
    (Place, "zone", "../etc/localtime", "an IANA time zone"),
    (Place, "zone", "Europe", "an IANA time zone"),
    (Place, "zone", "UTC+3", "an IANA time zone"),
    (Place, "track_elevation_m", nan, "a finite number in m"),
    (Place, "track_elevation_m", inf, "-430 to 9000 m"),
    (Place, "track_elevation_m", "1600", "a number in m"),
    (Place, "track_elevation_m", None, "a number in m"),
    (Place, "track_elevation_m", True, "a number in m"),
    (Place, "bed_elevation_m", 22500.0, "-430 to 9000 m"),
    (Place, "latitude_deg", 91.0, "-90 to 90 deg"),
    (Place, "longitude_deg", -180.5, "-180 to 180 deg"),
    (Driver, "sex", "female", "one of: woman, man"),
    (Driver, "home_place_id", 99, "the id of a stored place"),
    (Driver, "home_place_id", 0, "the id of a stored record"),
    (Driver, "home_place_id", 1.0, "the id of a stored record"),
    (Driver, "mass_kg", 7.9, "35 to 150 kg"),
    (Driver, "mass_kg", 790.0, "35 to 150 kg"),
    (Driver, "height_cm", 1.71, "120 to 230 cm"),
    (Driver, "bottle_ml", 0.75, "mL"),
    (Driver, "sweat_sodium_mmol_l", 1000.0, "mmol/L"),
    (Driver, "altitude_history", "mild", "one of: none or mild"),
    (Driver, "highest_bed_elevation_m", -inf, "-430 to 9000 m"),
    (Driver, "iron_checked_on", at(3), "a date"),
    (Driver, "iron_checked_on", "2026-03-01", "a date"),
    (Driver, "iron_checked_on", date(26, 3, 1), "a date from 1950"),
    (Driver, "wake_time", "24:00", "a time of day"),
    (Driver, "wake_time", "7:00", "a time of day"),
    (Driver, "wake_time", "07:00 ", "a time of day"),
    (Round, "number", -1, "a whole number from 0 to 999"),
    (Round, "number", 1.5, "a whole number"),
    (Round, "place_id", 99, "the id of a stored place"),
    (Session, "kind", "warm-up", "one of: practice, qualifying, race"),
    (Session, "starts_at", NAIVE, "a date and time with its zone"),
    (Session, "starts_at", date(2026, 5, 17), "a date and time"),
    (Session, "starts_at", at(17).replace(year=2206), "a date from 1950 to 2099"),
    (Session, "ends_at", at(17, 18), "a time after starts_at"),
    (Session, "ends_at", at(16), "a time after starts_at"),
    (Session, "round_id", 99, "the id of a stored round"),
    (Commitment, "ends_at", at(4, 7), "a time after starts_at"),
    (Commitment, "driver_id", 99, "the id of a stored driver"),
    (Stay, "depart_at", at(12, 19), "a time after arrive_at"),
    (Stay, "arrive_at", NAIVE, "a date and time with its zone"),
    (Stay, "tent_oxygen_fraction", 15.0, "0.05 to 1 ("),
    (Stay, "tent_hours_per_night", 24.5, "0 to 24 h"),
    (Leg, "to_place_id", 1, "another place than from_place_id"),
    (Leg, "arrive_at", at(12, 6), "a time after depart_at"),
    (Leg, "mode", "rail", "one of: road, flight"),
    (Leg, "cabin_altitude_m", 24000.0, "-430 to 9000 m"),
    (PressureMeasurement, "pressure_hpa", 25.9, "300 to 1100 hPa"),
    (PressureMeasurement, "measured_at", None, "a date and time"),
    (Reading, "driver_id", 99, "the id of a stored driver"),
    (Reading, "place_id", None, "the id of a stored record"),
    (Reading, "taken_at", NAIVE, "a date and time with its zone"),
    (Reading, "spo2_pct", 0.95, "40 to 100 %"),
    (Reading, "spo2_pct", 950.0, "40 to 100 %"),
    (Reading, "spo2_pct", nan, "a finite number in %"),
    (Reading, "pulse_bpm", 640.0, "25 to 230 1/min"),
    (Reading, "wakefulness", "half asleep", "one of: awake, asleep"),
    (Reading, "circumstance", "", "one of: at rest, after a session"),
    (Reading, "warm_hand", 1, "yes or no"),
    (Reading, "emergency_signs", ["cough"], "a tuple of words"),
    (Reading, "emergency_signs", ("cough", "sneeze"), "words out of: breathless_at_rest"),
    (Reading, "emergency_signs", ("cough", "cough"), "each word once"),
    (Reading, "headache", 4, "a whole number from 0 to 3"),
    (Reading, "gut", -1, "a whole number from 0 to 3"),
    (Reading, "fatigue", True, "a whole number from 0 to 3"),
    (Reading, "dizziness", 1.0, "a whole number from 0 to 3"),
    (Reading, "quality_note", "broken \ud83d", "text without broken characters"),
    (Reading, "device", "null\0", "text without null characters"),
    (Reading, "left_out", "x" * 10_001, "at most 10000 characters"),
    (SickPeriod, "ends_at", at(1), "a time after starts_at"),
    (SickPeriod, "ends_at", NAIVE, "a date and time with its zone"),
    (Notice, "kind", "told everybody", "one of: told the physician, note"),
    (CockpitConditions, "session_id", 99, "the id of a stored session"),
    (CockpitConditions, "humidity_pct", 101.0, "0 to 100 %"),
    (CockpitConditions, "air_temperature_c", 480.0, "75 C"),
    (CockpitConditions, "measured", "yes", "yes or no"),
    (Weighing, "mass_before_kg", 7.9, "35 to 150 kg"),
    (Weighing, "mass_after_kg", 790.0, "35 to 150 kg"),
    (Weighing, "urine_ml", 5000.0, "mL"),
    (Weighing, "drink_ml", -1.0, "mL"),
    (Weighing, "ends_at", at(17, 16), "a time after starts_at"),
    (Weighing, "clothes", "nude", "one of: towelled skin, underwear, suit"),
    (Weighing, "session_id", 99, "the id of a stored session"),
    (MorningMark, "urine_colour", 9, "a whole number from 1 to 8"),
    (MorningMark, "urine_colour", 0, "a whole number from 1 to 8"),
    (MorningMark, "urine_specific_gravity", 1018.0, "urine"),
    (MorningMark, "thirsty", "no", "yes or no"),
]  # fmt: skip


def refused_id(case: object) -> str:
    return case.__name__ if isinstance(case, type) else ascii(case)[:24]


@pytest.fixture(scope="module")
def team_file(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A store file with a record of every kind, made once; not to be written to."""
    path = tmp_path_factory.mktemp("team") / "team.db"
    built = Store.open(path)
    keep_every_kind(built)
    built.close()
    return path


@pytest.fixture
def team(team_file: Path, tmp_path: Path) -> Iterator[Store]:
    """The same in a file of its own."""
    path = tmp_path / "planner.db"
    shutil.copyfile(team_file, path)
    opened = Store.open(path)
    yield opened
    opened.close()


@pytest.mark.parametrize(("kind", "field", "value", "words"), REFUSED, ids=refused_id)
def test_refused_by_name_and_nothing_is_lost(
    team: Store, kind: type, field: str, value: object, words: str
) -> None:
    before, version = content(team), team.version()
    wrong = replace(EXAMPLES[kind], **{field: value})
    for write in (
        lambda: team.add(wrong, by=BY),
        lambda: team.add_all([replace(HOME, name="Another place"), wrong], by=BY),
        lambda: team.change(replace(wrong, id=1), by=BY),
    ):
        with pytest.raises(InputError) as refusal:
            write()
        assert refusal.value.field == field
        assert words in refusal.value.expected
        assert "\n" not in str(refusal.value)
        assert str(refusal.value).startswith(f"{field}: ")
    assert content(team) == before
    assert team.version() == version
    assert team.check() == []


# Which quantity judges which field of which kind: both ends of the range are kept, just outside is refused.
RANGED = [
    (Place, "track_elevation_m", "elevation_m"),
    (Place, "bed_elevation_m", "elevation_m"),
    (Place, "latitude_deg", "latitude_deg"),
    (Place, "longitude_deg", "longitude_deg"),
    (Driver, "mass_kg", "mass_kg"),
    (Driver, "height_cm", "height_cm"),
    (Driver, "bottle_ml", "bottle_ml"),
    (Driver, "sweat_sodium_mmol_l", "sweat_sodium_mmol_l"),
    (Driver, "highest_bed_elevation_m", "elevation_m"),
    (Stay, "bed_elevation_m", "elevation_m"),
    (Stay, "tent_oxygen_fraction", "oxygen_fraction"),
    (Stay, "tent_hours_per_night", "tent_hours_per_night"),
    (Leg, "cabin_altitude_m", "elevation_m"),
    (PressureMeasurement, "pressure_hpa", "pressure_hpa"),
    (Reading, "spo2_pct", "spo2_pct"),
    (Reading, "pulse_bpm", "pulse_bpm"),
    (CockpitConditions, "air_temperature_c", "air_temperature_c"),
    (CockpitConditions, "radiant_temperature_c", "radiant_temperature_c"),
    (CockpitConditions, "humidity_pct", "humidity_pct"),
    (CockpitConditions, "air_speed_m_s", "air_speed_m_s"),
    (Weighing, "mass_before_kg", "mass_kg"),
    (Weighing, "mass_after_kg", "mass_kg"),
    (Weighing, "drink_ml", "drink_ml"),
    (Weighing, "food_g", "food_g"),
    (Weighing, "urine_ml", "urine_ml"),
    (Weighing, "air_temperature_c", "air_temperature_c"),
    (Weighing, "radiant_temperature_c", "radiant_temperature_c"),
    (Weighing, "humidity_pct", "humidity_pct"),
    (Weighing, "air_speed_m_s", "air_speed_m_s"),
    (Weighing, "metabolic_w_m2", "metabolic_w_m2"),
    (MorningMark, "mass_kg", "mass_kg"),
    (MorningMark, "urine_specific_gravity", "urine_specific_gravity"),
]


@pytest.mark.parametrize(("kind", "field", "quantity"), RANGED, ids=refused_id)
def test_the_ends_of_a_range_are_kept_and_beyond_is_refused(
    team: Store, kind: type, field: str, quantity: str
) -> None:
    known = QUANTITIES[quantity]
    span = known.high - known.low
    for end in (known.low, known.high):
        kept = team.change(replace(EXAMPLES[kind], id=1, **{field: end}), by=BY)
        assert getattr(team.get(kind, kept.id), field) == end
    for outside in (known.low - 1e-9 * span, known.high + 1e-9 * span):
        with pytest.raises(InputError, match=rf"^{field}: .*expected {known.low:g} to {known.high:g} "):
            team.change(replace(EXAMPLES[kind], id=1, **{field: outside}), by=BY)
    assert team.check() == []


def test_every_number_of_every_kind_is_guarded() -> None:
    """A number field that nobody checks would let anything in."""
    numbers = {
        (kind, name)
        for kind, record in EXAMPLES.items()
        for name, value in vars(record).items()
        if isinstance(value, float) and not isinstance(value, bool)
    }
    assert numbers == {(kind, field) for kind, field, _ in RANGED}


def test_optional_fields_may_be_missing(team: Store) -> None:
    for kind, record in EXAMPLES.items():
        stored = team.get(kind, 1)
        optional = {
            field: None for field, type_ in record.__dataclass_fields__.items() if "None" in str(type_.type)
        }
        kept = team.change(replace(stored, **optional), by=BY)
        assert team.get(kind, 1) == kept


def test_problems_name_every_field_at_once() -> None:
    wrong = replace(HOME, name="", zone="Nowhere/Here", latitude_deg=123.0)
    assert [problem.field for problem in season_problems(wrong)] == ["name", "zone", "latitude_deg"]
    assert season_problems(HOME) == []
    reading = Reading(1, 1, NAIVE, 0.95, pulse_bpm=9.0, headache=7)
    assert [p.field for p in monitoring_problems(reading)] == [
        "taken_at",
        "spo2_pct",
        "pulse_bpm",
        "headache",
    ]


def test_a_naive_time_is_refused_in_questions_too(store: Store) -> None:
    for ask in (
        lambda: store.readings(since=NAIVE),
        lambda: store.readings(until=NAIVE),
        lambda: store.reading_columns(since=NAIVE),
        lambda: store.all(Reading, taken_at=NAIVE),
    ):
        with pytest.raises(InputError, match="expected a date and time with its zone"):
            ask()


def test_one_wrong_record_refuses_all_of_them(store: Store) -> None:
    home, driver = with_team(store)
    many = some_readings(driver, home, 1000)
    many[999] = replace(many[999], spo2_pct=101.0)
    with pytest.raises(InputError, match=r"^spo2_pct: 101\.0 cannot be used, expected 40 to 100 %"):
        store.add_all(many, by=BY)
    assert store.readings() == []
    assert store.version() == 2


def test_names_are_there_once(store: Store) -> None:
    home, driver = with_team(store)
    high = store.add(HIGH, by=BY)
    with pytest.raises(
        InputError,
        match=r"^name: 'Invented Harbour' cannot be used, expected a place that is not there already$",
    ):
        store.add(replace(HIGH, name=home.name), by=BY)
    with pytest.raises(InputError, match=r"^name: 'Invented Harbour'"):
        store.change(replace(high, name=home.name), by=BY)
    with pytest.raises(InputError, match=r"^name: 'Ada Invented' .* a driver that"):
        store.add(replace(DRIVER, home_place_id=home.id), by=BY)
    twice = [Round(3, "Other", home.id), Round(1, "Same", home.id), Round(2, "Same", home.id)]
    with pytest.raises(InputError, match=r"^name: 'Same' .* a round that is not there already"):
        store.add_all(twice, by=BY)
    assert store.all(Round) == []
    first, second = store.add_all([replace(twice[0], name="First"), replace(twice[1], name="Second")], by=BY)
    store.add_all(
        [
            Session(first.id, "race", "Race", at(3), at(3, 8)),
            Session(second.id, "race", "Race", at(10), at(10, 8)),
        ],
        by=BY,
    )
    with pytest.raises(InputError, match=r"^round_id, name: '1, Race'"):
        store.add(Session(first.id, "race", "Race", at(4), at(4, 8)), by=BY)
    assert driver == store.get(Driver, driver.id)


def test_the_same_reading_twice_is_refused_but_a_repeat_is_kept(store: Store) -> None:
    home, driver = with_team(store)
    reading = Reading(driver.id, home.id, at(1), 88.0, 60.0)
    store.add(reading, by=BY)
    with pytest.raises(InputError, match="a reading that is not there already"):
        store.add(reading, by=BY)
    store.add(replace(reading, spo2_pct=94.0), by=BY)
    assert [each.spo2_pct for each in store.readings()] == [88.0, 94.0]


def test_a_name_is_free_again_after_removal(store: Store) -> None:
    high = store.add(HIGH, by=BY)
    store.remove(high, by=BY)
    again = store.add(HIGH, by=BY)
    assert again.id != high.id
    with pytest.raises(InputError, match=r"^name: 'Invented Plateau'"):
        store.restore(Place, high.id, by=BY)
    assert store.all(Place) == [again]


def test_references_to_removed_records_are_refused(store: Store) -> None:
    high = store.add(HIGH, by=BY)
    store.remove(high, by=BY)
    with pytest.raises(InputError, match=r"^place_id: 1 cannot be used, expected the id of a stored place$"):
        store.add(Round(1, "Round", high.id), by=BY)


def test_a_stored_id_cannot_be_added_again(store: Store) -> None:
    home = store.add(HOME, by=BY)
    with pytest.raises(
        InputError, match=r"^id: 1 cannot be used, expected 0 for a record that is not stored yet"
    ):
        store.add(replace(home, name="Copy"), by=BY)


@pytest.mark.parametrize("by", ["", "  ", "two\nlines"])
def test_whoever_writes_has_a_name(store: Store, by: str) -> None:
    with pytest.raises(InputError, match=r"^by: .* expected a name"):
        store.add(HOME, by=by)
    assert store.all(Place) == []


def test_a_setting_that_no_file_can_hold_is_refused(store: Store) -> None:
    for name, value in (("", "x"), ("units", "broken \udc00")):
        with pytest.raises(InputError):
            store.set_setting(name, value)


def test_no_error_shows_a_health_record(store: Store) -> None:
    """The database driver would print the values of the refused row."""
    _, driver = with_team(store)
    with store._engine.connect() as connection, pytest.raises(Exception, match="NOT NULL") as refusal:
        connection.exec_driver_sql(
            "INSERT INTO reading (driver_id, spo2_pct) VALUES (?, ?)", (driver.id, 61.0625)
        )
    assert "61.0625" not in str(refusal.value)
