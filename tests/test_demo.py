"""The invented season: made again it is the same, it is whole, and it holds what it is meant to show."""

from __future__ import annotations

import subprocess
import sys
from collections import Counter
from collections.abc import Iterator
from datetime import UTC, date, datetime, timedelta
from itertools import pairwise
from pathlib import Path
from zoneinfo import ZoneInfo

import pytest

from planner.errors import StoreError
from planner.hydration.model import CockpitConditions, MorningMark, Weighing
from planner.monitoring.model import Reading, SickPeriod
from planner.season.itinerary import Itinerary, broken, ends_at, fixed_points, problems, starts_at
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
from planner.season.travel import nearest_airport
from planner.services import importing
from planner.services.importing import demo_folder, load_demo, preview_file, start_empty
from planner.services.morning import morning
from planner.services.team import begin_own_team
from planner.services.workspace import now
from planner.store.store import Store

ROOT = Path(__file__).parents[1]
NOW = datetime(2026, 6, 6, 13, 40, tzinfo=UTC)


@pytest.fixture(scope="module")
def demo(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Store]:
    """A store with the demo season; the tests only read it."""
    store = Store.open(tmp_path_factory.mktemp("demo") / "demo.db")
    load_demo(store)
    yield store
    store.close()


def race_days(store: Store) -> dict[int, datetime]:
    """The start of each round's race by the round's number."""
    races = {session.round_id: session.starts_at for session in store.all(Session) if session.kind == "race"}
    return {each.number: races[each.id] for each in store.all(Round)}


def place_of_round(store: Store) -> dict[int, Place]:
    """The place of each round by the round's number."""
    return {each.number: store.get(Place, each.place_id) for each in store.all(Round)}


def driver_called(store: Store, name: str) -> Driver:
    (driver,) = store.all(Driver, name=name)
    return driver


# The files ------------------------------------------------------------------------------------------------


def test_made_again_the_files_are_the_same(tmp_path: Path) -> None:
    subprocess.run([sys.executable, "-m", "demo_data.make", str(tmp_path)], cwd=ROOT, check=True)
    made = sorted(path.name for path in tmp_path.iterdir())
    kept = [path.name for path in demo_folder().iterdir() if path.suffix in (".csv", ".ics")]
    assert made == sorted(kept)
    for name in made:
        assert (tmp_path / name).read_text("utf-8") == (demo_folder() / name).read_text("utf-8"), name


def test_every_file_is_headed_as_invented() -> None:
    for path in demo_folder().glob("*.csv"):
        assert path.read_text("utf-8-sig").startswith("# Invented data "), path.name


def test_no_place_bears_the_name_of_a_town_with_an_airport(demo: Store) -> None:
    import airportsdata

    towns = {row["city"].casefold() for row in airportsdata.load("ICAO").values()}
    assert [place.name for place in demo.all(Place) if place.name.casefold() in towns] == []


def test_the_folder_is_found_in_an_installed_package(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "planner" / "services").mkdir(parents=True)
    monkeypatch.setattr(importing, "__file__", str(tmp_path / "planner" / "services" / "importing.py"))
    with pytest.raises(StoreError, match="the demo season is missing"):
        demo_folder()
    for folder in (tmp_path / "demo_data", tmp_path / "planner" / "_demo_data"):
        folder.mkdir()
        (folder / "clock.csv").touch()
        assert demo_folder() == folder


# Loading --------------------------------------------------------------------------------------------------


def test_the_store_is_sound_and_its_clock_stands_still(demo: Store) -> None:
    assert demo.check() == []
    assert now(demo) == NOW


def test_it_is_one_change_set(store: Store) -> None:
    load_demo(store)
    assert [(each.by, each.why) for each in store.change_sets()] == [("demo", "the invented demo season")]


def test_every_file_is_there_already_after_loading(demo: Store) -> None:
    for path in demo_folder().glob("*.csv"):
        if path.name != "clock.csv":
            report = preview_file(demo, path.read_bytes(), path.name, by="coach", now=NOW)
            assert (report.taken, report.refused, report.notes) == (0, (), ()), path.name
            assert report.already_there > 0


def test_it_is_not_loaded_over_a_season(store: Store) -> None:
    store.add(Place("Harbour", "Europe/Rome", 5.0, 5.0, 44.0, 12.0), by="coach")
    with pytest.raises(StoreError, match="holds a season already"):
        load_demo(store)
    assert len(store.all(Place)) == 1
    assert store.setting("clock_frozen_at") is None


def test_a_damaged_file_leaves_the_store_empty(
    store: Store, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    for path in demo_folder().glob("*.csv"):
        (tmp_path / path.name).write_bytes(path.read_bytes())
    with (tmp_path / "morning_marks.csv").open("a", encoding="utf-8") as file:
        file.write("Nobody,,2026-06-01T07:00+00:00,60,,,,\n")
    monkeypatch.setattr(importing, "demo_folder", lambda: tmp_path)
    with pytest.raises(StoreError, match=r"damaged: morning_marks\.csv, line .*'Nobody' refused"):
        load_demo(store)
    assert store.all(Driver) == []
    assert store.change_sets() == []


def test_it_can_be_opened_again_after_it_was_put_aside(store: Store, demo: Store) -> None:
    load_demo(store)
    begin_own_team(store, by="coach")
    load_demo(store)
    assert len(store.readings()) == len(demo.readings())
    assert store.check() == []
    assert [row.outcome for row in morning(store)] == [row.outcome for row in morning(demo)]


def test_an_empty_start_has_the_real_clock(store: Store) -> None:
    start_empty(store)
    assert abs(now(store) - datetime.now(UTC)) < timedelta(minutes=1)


# The season -----------------------------------------------------------------------------------------------


def test_sixteen_rounds_or_more_within_a_year(demo: Store) -> None:
    days = race_days(demo)
    assert len(days) >= 16
    assert sorted(days.values()) == [days[number] for number in sorted(days)]
    assert max(days.values()) - min(days.values()) < timedelta(days=365)


@pytest.mark.parametrize("elevation_m", [800.0, 1600.0, 2250.0, 2300.0, 3200.0])
def test_a_round_at_each_of_the_elevations(demo: Store, elevation_m: float) -> None:
    tracks = [place.track_elevation_m for place in place_of_round(demo).values()]
    assert min(abs(track - elevation_m) for track in tracks) <= 20.0


def test_some_beds_lie_higher_than_the_track_and_some_lower(demo: Store) -> None:
    differences = {p.bed_elevation_m - p.track_elevation_m for p in place_of_round(demo).values()}
    assert min(differences) < 0.0 < max(differences)


def test_rounds_a_week_apart_and_the_high_one_a_week_after_sea_level(demo: Store) -> None:
    days, places = race_days(demo), place_of_round(demo)
    local = {number: days[number].astimezone(ZoneInfo(places[number].zone)).date() for number in days}
    week = timedelta(days=7)
    assert sum(local[b] - local[a] == week for a, b in pairwise(sorted(local))) >= 3
    high = next(number for number, place in places.items() if place.track_elevation_m == 2250.0)
    assert local[high] - local[high - 1] == week
    assert places[high - 1].track_elevation_m < 50.0


def test_two_rounds_straddle_a_clock_change(demo: Store) -> None:
    straddling = 0
    for each in demo.all(Round):
        zone = ZoneInfo(demo.get(Place, each.place_id).zone)
        straddling += (
            len({s.starts_at.astimezone(zone).utcoffset() for s in demo.all(Session, round_id=each.id)}) > 1
        )
    assert straddling == 2


def test_zones_fit_the_coordinates(demo: Store) -> None:
    for place in demo.all(Place):
        near = nearest_airport(place.latitude_deg, place.longitude_deg)
        offsets = {NOW.astimezone(ZoneInfo(zone)).utcoffset() for zone in (near.zone, place.zone)}
        assert len(offsets) == 1, (place, near)


def test_eight_drivers_from_all_over(demo: Store) -> None:
    drivers = demo.all(Driver)
    assert len(drivers) == 8
    assert {driver.sex for driver in drivers} == {"woman", "man"}
    homes = [demo.get(Place, driver.home_place_id) for driver in drivers]
    assert len({home.zone for home in homes}) == 8
    assert [home.bed_elevation_m for home in homes if home.bed_elevation_m > 1000.0] == [1540.0]
    assert len({driver.bottle_ml for driver in drivers}) >= 3


def test_every_itinerary_is_whole_and_keeps_every_appointment(demo: Store) -> None:
    places = {place.id: place for place in demo.all(Place)}
    stays, legs, commitments = demo.all(Stay), demo.all(Leg), demo.all(Commitment)
    for driver in demo.all(Driver):
        itinerary = Itinerary.of(driver.id, stays, legs)
        fixed = fixed_points(demo.all(Round), demo.all(Session), commitments, driver_id=driver.id)
        assert problems(itinerary, places) == []
        assert broken(itinerary, fixed, places) == []
        assert starts_at(itinerary.entries[0]) < fixed[0].starts_at
        assert ends_at(itinerary.entries[-1]) > fixed[-1].ends_at
        assert len(fixed) >= len(demo.all(Round)) + 5


def test_everybody_arrives_two_to_four_days_before_a_race_unless_there_already(demo: Store) -> None:
    days, places = race_days(demo), place_of_round(demo)
    for number, race in days.items():
        for stay in demo.all(Stay, place_id=places[number].id):
            if stay.arrive_at < race < stay.depart_at:
                assert timedelta(days=2.5) < race - stay.arrive_at < timedelta(days=6)


def test_somebody_crosses_the_date_line(demo: Store) -> None:
    zone = {place.id: ZoneInfo(place.zone) for place in demo.all(Place)}
    arrivals_before_departure = [
        leg
        for leg in demo.all(Leg)
        if leg.arrive_at.astimezone(zone[leg.to_place_id]).replace(tzinfo=None)
        < leg.depart_at.astimezone(zone[leg.from_place_id]).replace(tzinfo=None)
    ]
    assert arrivals_before_departure


def test_flights_have_a_cabin_altitude_that_rules_allow(demo: Store) -> None:
    # 14 CFR 25.841 (published): at most 8 000 ft, 2 438 m, in normal operation.
    for leg in demo.all(Leg):
        assert (leg.cabin_altitude_m is None) == (leg.mode == "road")
        assert leg.cabin_altitude_m is None or 1500.0 <= leg.cabin_altitude_m <= 2438.0


# Readings -------------------------------------------------------------------------------------------------


def test_ten_weeks_of_mornings(demo: Store) -> None:
    readings = demo.readings()
    assert readings[-1].taken_at <= NOW
    for driver in demo.all(Driver):
        own = [r for r in readings if r.driver_id == driver.id and r.wakefulness == "awake"]
        # A journey or a missed morning now and then.
        assert len({r.taken_at.date() for r in own}) >= 50
        assert NOW - own[0].taken_at > timedelta(weeks=9.5)
    assert all(reading.spo2_pct == round(reading.spo2_pct) for reading in readings)
    assert sum(reading.wakefulness == "asleep" for reading in readings) >= 30
    assert sum(reading.circumstance == "after a session" for reading in readings) >= 3
    assert len(demo.all(PressureMeasurement)) >= 3


def test_readings_are_taken_where_the_driver_is(demo: Store) -> None:
    stays = demo.all(Stay)
    for reading in demo.readings():
        assert any(
            stay.driver_id == reading.driver_id
            and stay.place_id == reading.place_id
            and stay.arrive_at <= reading.taken_at < stay.depart_at
            for stay in stays
        ), reading


def test_the_faults_are_in(demo: Store) -> None:
    readings = demo.readings()
    assert any(not reading.warm_hand for reading in readings)
    assert any(reading.quality_note for reading in readings)
    (mistyped,) = [reading for reading in readings if reading.spo2_pct < 80.0]
    assert mistyped.spo2_pct == 69.0
    assert mistyped.quality_note == mistyped.left_out == ""
    assert sorted(period.ends_at is None for period in demo.all(SickPeriod)) == [False, True]


def test_the_morning_shows_one_of_each(demo: Store) -> None:
    rows = {row.driver: row for row in morning(demo)}
    outcomes = Counter(str(row.outcome) for row in rows.values())
    assert outcomes == {"refer": 2, "repeat": 2, "in range": 3, "not measured": 1}
    assert "too little water likely" in rows["Ren Asakiri"].reasons[0]
    assert "below it again" in rows["Bastien Corvelle"].reasons[0]
    assert "Marked ill" in rows["Tomé Ariquara"].reasons[0]
    assert "cold hand" in rows["Jory Tallowmere"].reasons[0]
    assert rows["Priya Kandovar"].outcome == "not measured"


def test_the_morning_is_at_the_round_at_2250_m_two_or_three_days_after_arrival(demo: Store) -> None:
    for driver in demo.all(Driver):
        (stay,) = [
            stay for stay in demo.all(Stay, driver_id=driver.id) if stay.arrive_at <= NOW < stay.depart_at
        ]
        place = demo.get(Place, stay.place_id)
        assert place.track_elevation_m == 2250.0
        assert NOW.astimezone(ZoneInfo(place.zone)).strftime("%A %H:%M") == "Saturday 07:40"
        assert timedelta(days=1.5) < NOW - stay.arrive_at < timedelta(days=3)


# Fluids ---------------------------------------------------------------------------------------------------


def weighings_by_round(store: Store) -> dict[int, list[Weighing]]:
    number = {each.id: each.number for each in store.all(Round)}
    round_of = {session.id: number[session.round_id] for session in store.all(Session)}
    by_round: dict[int, list[Weighing]] = {}
    for weighing in store.all(Weighing):
        assert weighing.session_id is not None
        by_round.setdefault(round_of[weighing.session_id], []).append(weighing)
    return by_round


def test_all_sessions_of_the_last_three_rounds_are_weighed_and_their_heat_is_known(demo: Store) -> None:
    over = [number for number, race in race_days(demo).items() if race < NOW]
    by_round = weighings_by_round(demo)
    for number in sorted(over)[-3:]:
        assert len(by_round[number]) == 8 * 4
    conditions = {each.session_id: each.measured for each in demo.all(CockpitConditions)}
    assert all(conditions[weighing.session_id or 0] for weighing in demo.all(Weighing))
    # This weekend's qualifying and race are still to come: an estimate.
    assert sum(not measured for measured in conditions.values()) == 2


def mass_change_pct(weighing: Weighing) -> float:
    assert weighing.mass_after_kg is not None
    return (weighing.mass_after_kg / weighing.mass_before_kg - 1.0) * 100.0


def test_one_gains_mass_in_every_session_and_one_loses_too_much_in_every_race(demo: Store) -> None:
    races = {session.id for session in demo.all(Session) if session.kind == "race"}
    by_driver: dict[int, list[Weighing]] = {}
    for weighing in demo.all(Weighing):
        by_driver.setdefault(weighing.driver_id, []).append(weighing)
    gains = [d for d, own in by_driver.items() if min(map(mass_change_pct, own)) > 0.0]
    # 2 % of body mass: ACSM 2007 (from memory).
    loses = [
        d
        for d, own in by_driver.items()
        if max(mass_change_pct(weighing) for weighing in own if weighing.session_id in races) < -2.0
    ]
    assert gains == [driver_called(demo, "Jory Tallowmere").id]
    assert loses == [driver_called(demo, "Ren Asakiri").id]


def test_five_weeks_of_morning_marks(demo: Store) -> None:
    marks = demo.all(MorningMark)
    assert {mark.driver_id for mark in marks} == {driver.id for driver in demo.all(Driver)}
    assert min(mark.at for mark in marks).date() <= date(2026, 5, 3)
    assert all(mark.mass_kg and mark.urine_colour and mark.thirsty is not None for mark in marks)
    assert len(marks) >= 200


def test_it_is_said_who_typed_what(demo: Store) -> None:
    typed = [*demo.all(Reading), *demo.all(Weighing), *demo.all(MorningMark)]
    assert {record.entered_by for record in typed} == {"coach", *(d.name for d in demo.all(Driver))}
