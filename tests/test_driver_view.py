"""What the Driver page rests on: marks judged as on their morning, the band, one reading taken apart."""

from __future__ import annotations

from dataclasses import replace
from datetime import timedelta

import pytest

from planner.monitoring.model import Reading
from planner.season.model import Driver
from planner.services.driver import MOST_MORNINGS, BandPoint, DriverView, driver_view
from planner.services.morning import this_morning
from planner.services.readings import judge_entry
from planner.services.season import read_calendar
from planner.services.workspace import now
from planner.store.store import Store


def view_of(store: Store, name: str) -> DriverView:
    calendar = read_calendar(store)
    driver = next(each for each in calendar.drivers if each.name == name)
    return driver_view(store, calendar, driver, now(store))


def is_the_populations(point: BandPoint) -> bool:
    """Equal but for the grids, which have different nodes: a fiftieth of a point."""
    own, population = point.own, point.population
    return (own.low_pct, own.mean_pct, own.high_pct) == pytest.approx(
        (population.low_pct, population.mean_pct, population.high_pct), abs=0.02
    )


@pytest.fixture
def view(demo_store: Store) -> DriverView:
    """The demo's driver who does not adapt."""
    return view_of(demo_store, "Bastien Corvelle")


def test_every_reading_is_judged_as_it_was_on_its_morning(demo_store: Store, view: DriverView) -> None:
    marks = view.marks(*view.window("all"))
    assert [mark.reading for mark in marks] == demo_store.readings(driver_id=view.driver.id)
    for mark in marks[-12:]:
        then = judge_entry(demo_store, mark.reading)
        assert mark.judgement == then.judgement
        assert mark.sample.expected.low_pct == pytest.approx(then.sample.expected.low_pct)
        assert mark.sample.expected.high_pct == pytest.approx(then.sample.expected.high_pct)


def test_the_last_mark_says_what_this_morning_says(demo_store: Store, view: DriverView) -> None:
    at = now(demo_store)
    [row] = [each for each in this_morning(demo_store, at).rows if each.driver_id == view.driver.id]
    marks = view.marks(*view.window("12 weeks"))
    [mark] = [each for each in marks if each.reading == row.reading]
    assert (mark.judgement.outcome, mark.judgement.reasons) == (row.outcome, row.reasons)


def test_the_band_follows_the_course_and_the_own_range_is_narrower(view: DriverView) -> None:
    points = view.band(*view.window("season"))
    assert [each.at for each in points] == sorted(each.at for each in points)
    high = [each for each in points if view.population.where(each.at).bed_elevation_m > 2000.0]
    low = [each for each in points if view.population.where(each.at).bed_elevation_m < 300.0]
    assert max(each.own.mean_pct for each in high) < min(each.own.mean_pct for each in low)
    after = [each for each in points if each.at > view.now]
    assert all(
        each.own.high_pct - each.own.low_pct < each.population.high_pct - each.population.low_pct
        for each in after
    )
    before_the_first_reading = [each for each in points if each.at < view.readings[0].taken_at]
    assert before_the_first_reading
    assert all(is_the_populations(each) for each in before_the_first_reading)


def test_nothing_is_drawn_while_the_driver_is_in_a_cabin(view: DriverView) -> None:
    legs = [(leg.depart_at, leg.arrive_at) for leg in view.population.legs]
    for point in view.band(*view.window("season")):
        assert not any(depart <= point.at < arrive for depart, arrive in legs)


def test_a_long_window_is_thinned_out(view: DriverView) -> None:
    points = view.band(view.now - timedelta(days=1000), view.now)
    assert 300 < len(points) <= MOST_MORNINGS + 1


def test_windows_hold_now_and_grow(view: DriverView) -> None:
    weeks, season, everything = (view.window(name) for name in ("12 weeks", "season", "all"))
    for since, until in (weeks, season, everything):
        assert since < view.now < until
    assert everything[0] <= season[0] < weeks[0]
    assert season[0] < view.readings[0].taken_at


def test_one_reading_taken_apart_adds_up(view: DriverView) -> None:
    mark = view.last_mark
    assert mark is not None
    found = view.explanation(mark.reading.id)
    assert found.mark == mark
    assert found.residual_pct == pytest.approx(mark.reading.spo2_pct - mark.sample.expected.mean_pct)
    assert found.own.mean_spo2_pct == pytest.approx(mark.sample.expected.mean_pct)
    assert found.own.low_spo2_pct == pytest.approx(mark.sample.expected.low_pct)
    assert found.own.between_people_sd_pct < found.population.between_people_sd_pct
    assert 0 < found.readings_known < len(view.readings)


def test_the_next_high_round_is_ahead_and_narrower_than_the_populations(view: DriverView) -> None:
    pair = view.next_high_round
    assert pair is not None
    own, population = pair
    assert own.round.name == "Sumaqara Round"
    assert own.first_session.starts_at > view.now
    assert own.outlook is not None
    assert population.outlook is not None
    own_race, any_race = own.outlook.race_spo2_pct, population.outlook.race_spo2_pct
    assert own_race.high - own_race.low < any_race.high - any_race.low


def test_a_driver_without_readings_has_the_populations_range(demo_store: Store) -> None:
    home = demo_store.all(Driver)[0].home_place_id
    demo_store.add(Driver("Nova Nobody", "woman", home, 60.0, 168.0), by="coach")
    view = view_of(demo_store, "Nova Nobody")
    assert view.marks(*view.window("all")) == ()
    assert view.last_mark is None
    assert view.person.readings == 0
    assert all(is_the_populations(each) for each in view.band(*view.window("12 weeks")))


def test_a_reading_left_out_is_marked_so(demo_store: Store, view: DriverView) -> None:
    reading = demo_store.get(Reading, view.readings[3].id)
    demo_store.change(replace(reading, left_out="sensor upside down"), by="coach", why="seen on the spot")
    [mark] = view_of(demo_store, view.driver.name).marks(reading.taken_at, reading.taken_at)
    assert mark.teaches_nothing == "left out: sensor upside down"
