"""This morning as a service: who is measured, in which order, by which range, where.

Expected outcomes are the house's rules (judgement, tested in test_outcome); ranges are compared with each
other here, their values are tested with the model.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from datetime import UTC, date, datetime, timedelta

import pytest

from planner.errors import InputError
from planner.monitoring.model import Reading, SickPeriod
from planner.season.model import Driver, Place, PressureMeasurement, Stay
from planner.services.course import DriverCourse
from planner.services.morning import DriverRow, ThisMorning, morning, this_morning
from planner.services.own import Past
from planner.services.season import read_calendar
from planner.services.workspace import FROZEN_CLOCK
from planner.store.store import Store
from planner.wording import NO_BREAK

HOUR = timedelta(hours=1)
ZONE = "America/Bogota"  # UTC-5 all year
AT = datetime(2031, 5, 14, 12, 40, tzinfo=UTC)  # 07:40 there
MIDNIGHT = datetime(2031, 5, 14, 5, tzinfo=UTC)
ARRIVED = AT - timedelta(days=2)


@dataclass(frozen=True)
class Team:
    """Three drivers at a high place since two days, from a home by the sea."""

    store: Store
    home: Place
    high: Place
    ada: Driver
    bo: Driver
    cy: Driver

    def read(self, driver: Driver, spo2_pct: float, at: datetime, **changes: object) -> Reading:
        reading = Reading(driver.id, self.high.id, at, spo2_pct)
        return self.store.add(replace(reading, **changes), by="coach")

    def look(self, at: datetime = AT) -> ThisMorning:
        return this_morning(self.store, at)

    def row(self, driver: Driver, at: datetime = AT) -> DriverRow:
        return next(row for row in self.look(at).rows if row.driver_id == driver.id)


@pytest.fixture
def team(store: Store) -> Team:
    home = store.add(Place("Marenna", "Europe/Lisbon", 10.0, 10.0, 39.0, -9.0), by="coach")
    high = store.add(Place("Cerro Quieto", ZONE, 2250.0, 2250.0, 19.0, -99.0), by="coach")
    people = [
        store.add(Driver(name, sex, home.id, 65.0, 175.0), by="coach")
        for name, sex in (("Ada", "woman"), ("Bo", "man"), ("Cy", "man"))
    ]
    store.add_all([Stay(d.id, high.id, ARRIVED, AT + timedelta(days=5)) for d in people], by="coach")
    return Team(store, home, high, *people)


def test_nobody_yet(store: Store) -> None:
    screen = this_morning(store, AT)
    assert screen.sentence == "No drivers yet."
    assert (screen.rows, screen.place, screen.air) == ((), None, None)


def test_worst_first_and_counted_in_words(team: Team) -> None:
    team.read(team.ada, 93.0, AT - HOUR)
    team.read(team.bo, 80.0, AT - 2 * HOUR)
    team.read(team.bo, 80.0, AT - HOUR)
    screen = team.look()
    assert [(row.driver, row.outcome) for row in screen.rows] == [
        ("Bo", "urgent"),
        ("Ada", "in range"),
        ("Cy", "not measured"),
    ]
    assert screen.sentence == "3 drivers: 1 urgent, 1 in range, 1 not measured"


def test_the_range_is_told_with_the_driver_and_the_day(team: Team) -> None:
    team.read(team.ada, 93.0, AT - HOUR)
    (reason,) = team.row(team.ada).reasons
    assert reason.endswith("for her on day 3.")
    assert "for him on day 3." in team.row(team.bo).reasons[0]


def test_yesterdays_reading_does_not_make_a_driver_measured(team: Team) -> None:
    team.read(team.ada, 93.0, MIDNIGHT - HOUR)
    row = team.row(team.ada)
    assert (row.outcome, row.reading) == ("not measured", None)
    assert row.last is not None
    assert "Last 93" in row.reasons[0]
    assert "Tue 13 May, 23:00" in row.reasons[0]


def test_what_was_for_the_physician_stands_over_midnight(team: Team) -> None:
    team.read(team.ada, 93.0, MIDNIGHT - HOUR, emergency_signs=("confusion",))
    assert team.row(team.ada).outcome == "urgent"
    assert team.row(team.ada, AT + 12 * HOUR).outcome == "not measured"


def test_a_reading_asleep_alone_does_not_make_a_driver_measured(team: Team) -> None:
    team.read(team.ada, 91.0, MIDNIGHT + HOUR, wakefulness="asleep")
    assert team.row(team.ada).outcome == "not measured"


def test_a_sign_stated_with_a_reading_asleep_is_not_hidden_by_a_good_one(team: Team) -> None:
    team.read(team.ada, 91.0, MIDNIGHT + HOUR, wakefulness="asleep", emergency_signs=("cough",))
    team.read(team.ada, 94.0, AT - HOUR)
    assert team.row(team.ada).outcome == "urgent"


def test_asleep_has_a_lower_range_of_its_own(team: Team) -> None:
    course = DriverCourse(read_calendar(team.store), team.ada)
    (awake,) = course.expected([AT], "awake")
    (asleep,) = course.expected([AT], "asleep")
    assert asleep.low_pct < awake.low_pct


def test_a_reading_left_out_asks_for_another(team: Team) -> None:
    team.read(team.ada, 93.0, AT - HOUR, left_out="borrowed oximeter")
    assert team.row(team.ada).outcome == "repeat"


def test_in_a_sick_period_the_physician_decides(team: Team) -> None:
    team.read(team.ada, 93.0, AT - HOUR)
    team.store.add(SickPeriod(team.ada.id, AT - 20 * HOUR, None, "the physician"), by="coach")
    assert team.row(team.ada).outcome == "refer"


def test_a_reading_typed_for_another_place_is_judged_by_its_air(team: Team) -> None:
    there = team.read(team.ada, 96.0, AT - HOUR, place_id=team.home.id)
    course = DriverCourse(read_calendar(team.store), team.ada)
    (sample,) = course.samples([there])
    (high,) = course.expected([there.taken_at])
    assert sample.expected.low_pct > high.low_pct + 2.0
    assert sample.expected.words == "for her at Marenna"
    assert sample.elevation_m == 10.0


def test_a_measured_pressure_moves_the_place_line_and_the_range(team: Team) -> None:
    before = team.look()
    team.store.add(PressureMeasurement(team.high.id, AT - HOUR, 760.0), by="coach")
    after = team.look()
    assert before.air is not None
    assert after.air is not None
    assert (after.air.pressure_hpa, after.air.pressure_from) == (760.0, "measured at the station")
    assert after.rows[0].expected.mean_pct < before.rows[0].expected.mean_pct


def test_the_place_is_where_most_are(team: Team) -> None:
    stay = team.store.all(Stay, driver_id=team.cy.id)[0]
    team.store.remove(stay, by="coach")
    screen = team.look()
    assert screen.place is not None
    assert (screen.place.name, screen.elsewhere) == ("Cerro Quieto", 1)
    assert team.row(team.cy).where.place.name == "Marenna"
    assert "for him at home" in team.row(team.cy).reasons[0]


def test_after_the_last_stay_a_driver_is_where_it_ended(team: Team) -> None:
    assert team.row(team.ada, AT + timedelta(days=9)).where.place.name == "Cerro Quieto"


def test_a_team_that_is_spread_is_called_so_and_a_place_that_is_guessed_too(team: Team) -> None:
    assert not team.look().is_spread
    later = AT + timedelta(days=30)
    for driver, name in ((team.ada, "Norre"), (team.bo, "Sund")):
        place = team.store.add(Place(name, "Europe/Oslo", 20.0, 20.0, 59.0, 10.0), by="coach")
        stay = Stay(driver.id, place.id, later - HOUR, later + timedelta(days=2))
        team.store.add(stay, by="coach")
    assert team.look(later).is_spread
    assert team.row(team.ada, later).where.is_planned
    assert not team.row(team.cy, later).where.is_planned


def test_the_last_reading_is_told_in_the_time_and_with_the_name_of_its_place(team: Team) -> None:
    team.read(team.ada, 93.0, AT)
    place = team.store.add(Place("Norre", "Europe/Oslo", 20.0, 20.0, 59.0, 10.0), by="coach")
    later = AT + timedelta(days=5)
    team.store.add(Stay(team.ada.id, place.id, later - HOUR, later + timedelta(days=9)), by="coach")
    (reason,) = team.row(team.ada, later + HOUR).reasons
    assert reason.endswith("Last 93 % on Wed 14 May, 07:40 in Cerro Quieto.".replace(" %", f"{NO_BREAK}%"))


def test_a_day_before_is_judged_to_its_end_and_a_day_ahead_refused(team: Team) -> None:
    team.store.set_setting(FROZEN_CLOCK, AT.isoformat())
    team.read(team.ada, 93.0, MIDNIGHT - HOUR)
    rows = {row.driver: row for row in morning(team.store, date(2031, 5, 13))}
    assert (rows["Ada"].outcome, rows["Bo"].outcome) == ("in range", "not measured")
    assert {row.outcome for row in morning(team.store)} == {"not measured"}
    with pytest.raises(InputError, match=r"date: '2031-05-15' cannot be used, expected a day up to today"):
        morning(team.store, date(2031, 5, 15))


def test_ten_mornings_by_local_day_with_their_readings(team: Team) -> None:
    team.read(team.ada, 93.0, AT - HOUR)
    team.read(team.ada, 92.0, MIDNIGHT - HOUR)
    mornings = team.row(team.ada).mornings
    assert [m.on for m in mornings] == [date(2031, 5, day) for day in range(5, 15)]
    assert [len(m.readings) for m in mornings][-2:] == [1, 1]
    assert mornings[0].expected.mean_pct > mornings[-1].expected.mean_pct + 1.0  # by the sea, then high


def own_range_at(team: Team, at: datetime = AT) -> tuple[float, float]:
    course = DriverCourse(read_calendar(team.store), team.ada, Past.of(team.store, at), at)
    (expected,) = course.expected([at])
    return expected.low_pct, expected.high_pct


def test_readings_before_the_stay_sharpen_the_range_and_those_of_the_stay_do_not(team: Team) -> None:
    """A course that goes wrong must not become its own yardstick (judgement)."""
    population = own_range_at(team)
    for day in range(1, 15):
        team.read(team.ada, 96.0, ARRIVED - timedelta(days=day), place_id=team.home.id)
    taught = own_range_at(team)
    assert taught[1] - taught[0] < population[1] - population[0]
    for hours in (4, 20, 30, 44):
        team.read(team.ada, 84.0, ARRIVED + hours * HOUR)
    assert own_range_at(team) == taught
    assert team.row(team.ada).range_words.startswith("14 readings, none of them above")


def test_a_correction_of_an_old_reading_is_counted_anew(team: Team) -> None:
    old = [
        team.read(team.ada, 96.0, ARRIVED - timedelta(days=day), place_id=team.home.id) for day in range(1, 9)
    ]
    before = own_range_at(team)
    for reading in old:
        team.store.change(replace(reading, spo2_pct=98.0), by="coach", why="read wrongly")
    assert own_range_at(team)[0] > before[0]
