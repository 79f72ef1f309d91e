"""What an itinerary gives and costs: nights, ascent, body clock, dose, expected saturation."""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, date, datetime, timedelta
from itertools import pairwise

import numpy as np
import pytest
from invented_season import BAY, DRIVER, HALF, HOME, MESA, PLACES, PUNA, fixed, itinerary, points, setting

from planner.physiology.expectation import expected_spo2
from planner.season.clock_course import as_clock, clock_course, clock_hours, light_days, offset_at
from planner.season.constraints import Limits, bed_refused, iron_check, is_high, worse
from planner.season.evaluate import ascent_warnings, costs, outlooks
from planner.season.exposure import exposure_history
from planner.season.itinerary import Itinerary, Visit, replace_between
from planner.season.model import Driver, Leg, Stay
from planner.season.nights import Ascent, Night, ascent_to, nights_of, sleeping_elevation_m

MESA_POINT = next(p for p in points() if p.place_id == MESA.id)
PUNA_POINT = next(p for p in points() if p.place_id == PUNA.id)


def plan(*visits: Visit) -> Itinerary:
    """At home, then the visits, then home again; the last visit lasts until 16 May."""
    base = itinerary()
    end = datetime(2031, 5, 16, 12, tzinfo=UTC)
    return replace_between(
        base, datetime(2031, 3, 1, tzinfo=UTC), end + timedelta(hours=1), [*visits, Visit(HOME.id, end)],
        setting().times,
    )  # fmt: skip


def test_nights_follow_the_local_clock() -> None:
    there = plan(Visit(MESA.id, datetime(2031, 4, 1, 23, tzinfo=UTC)))
    nights = nights_of(
        there, PLACES, datetime(2031, 3, 29, 12, tzinfo=UTC), datetime(2031, 4, 5, 12, tzinfo=UTC)
    )
    # The leg leaves Lowmere on 1 April at about 09:00 UTC; the night of 1 April is the first one in Far Mesa.
    assert [(n.evening.day, n.place_id) for n in nights] == [
        (29, HOME.id), (30, HOME.id), (31, HOME.id), (1, MESA.id), (2, MESA.id), (3, MESA.id), (4, MESA.id)
    ]  # fmt: skip
    assert nights[-1].bed_m == 2250.0


def test_a_night_on_the_way_has_no_place() -> None:
    # East by night, and west over the date line, where the calendar loses a day more.
    leave, land = datetime(2031, 3, 5, 15, tzinfo=UTC), datetime(2031, 3, 6, 20, tzinfo=UTC)
    home = Stay(7, HOME.id, leave - timedelta(days=2), leave)
    leg = Leg(7, HOME.id, BAY.id, leave, land, "flight")
    trip = Itinerary(7, (home, leg, Stay(7, BAY.id, land, land + timedelta(days=2))))
    nights = nights_of(trip, PLACES, home.arrive_at, land + timedelta(days=2))
    assert [(n.evening.day, n.place_id) for n in nights] == [
        (3, HOME.id), (4, HOME.id), (5, None), (6, None), (7, BAY.id), (8, BAY.id)
    ]  # fmt: skip
    assert all(before.at < after.at for before, after in pairwise(nights))


def test_a_tent_night_amounts_to_its_equivalent() -> None:
    # Computed (section on tents of the figures): 16 % of oxygen at sea level is like 2 176 m (West, wet);
    # here at 100 m and 50 N by the standard atmosphere, a little higher.
    assert sleeping_elevation_m(HOME, 100.0, 0.16) == pytest.approx(2230.0, abs=120.0)
    assert sleeping_elevation_m(HOME, 100.0, None) == 100.0
    assert sleeping_elevation_m(HOME, 100.0, 0.21) >= 100.0


def night(sleeping_m: float, day: int) -> Night:
    at = datetime(2031, 4, day, 3, tzinfo=UTC)
    return Night(at.date(), at, MESA.id, sleeping_m, sleeping_m)


def test_an_ascent_begins_after_the_last_low_night() -> None:
    nights = [night(h, i + 1) for i, h in enumerate((100.0, 2500.0, 100.0, 2500.0, 3100.0))]
    found = ascent_to(nights, HOME)
    assert found.start_m == 100.0
    assert found.sleeping_m == [2500.0, 3100.0]
    # Somebody who lives at 1 500 m starts from there.
    high_home = replace(HOME, bed_elevation_m=1500.0)
    assert ascent_to([night(1500.0, 1), night(2500.0, 2)], high_home).start_m == 1500.0


def test_the_ascent_rule_names_the_night() -> None:
    # Published: above 3 000 m at most 500 m more a night.
    good = Ascent(100.0, tuple(night(h, i + 1) for i, h in enumerate((3000.0, 3500.0))))
    bad = Ascent(100.0, tuple(night(h, i + 1) for i, h in enumerate((3000.0, 3600.0))))
    assert ascent_warnings(good) == ()
    assert len(ascent_warnings(bad)) == 1
    assert "Wed 2 Apr" in ascent_warnings(bad)[0]


@pytest.mark.parametrize(
    ("history", "bed_m", "risk"),
    [  # published examples of the planned-ascent table
        ("none or mild", 2240.0, "low"),
        ("none or mild", 3600.0, "high"),
        ("lung or brain oedema", 2000.0, "high"),
    ],
)
def test_planned_ascent_class_by_published_example(history: str, bed_m: float, risk: str) -> None:
    driver = replace(DRIVER, altitude_history=history)
    there = plan(Visit(MESA.id, MESA_POINT.first_session_at - timedelta(days=2), bed_elevation_m=bed_m))
    assert outlooks([there], [MESA_POINT], setting(driver))[0][0].risk == risk


def test_candidates_in_one_pass_equal_each_by_itself() -> None:
    puna = Visit(PUNA.id, PUNA_POINT.first_session_at - timedelta(days=2))
    plans = [plan(Visit(MESA.id, MESA_POINT.first_session_at - timedelta(days=d)), puna) for d in (1, 5, 20)]
    together = outlooks(plans, [MESA_POINT, PUNA_POINT], setting())
    for alone, row in zip(plans, together, strict=True):
        by_itself = outlooks([alone], [MESA_POINT, PUNA_POINT], setting())[0]
        for here, there in zip(by_itself, row, strict=True):
            assert here.race_spo2_pct.mean == pytest.approx(there.race_spo2_pct.mean, abs=1e-8)
            assert here.race_capacity_pct.mean == pytest.approx(there.race_capacity_pct.mean, abs=1e-8)
            assert (here.risk, here.nights_high, here.light) == (there.risk, there.nights_high, there.light)
        # Independent way: the expectation asked for this history alone.
        origin = MESA_POINT.race_morning
        history = exposure_history(
            HOME, alone.stays, alone.legs, PLACES, origin=origin, track_days=setting().track_days
        )
        single = expected_spo2(history, 0.0)
        assert row[0].race_spo2_pct.mean == pytest.approx(float(single.mean_spo2_pct), abs=1e-9)
        assert row[0].race_spo2_pct.low == pytest.approx(float(single.low_spo2_pct), abs=1e-6)


def test_earlier_is_more_saturation_more_capacity_more_nights() -> None:
    plans = [plan(Visit(MESA.id, MESA_POINT.first_session_at - timedelta(days=d))) for d in (1, 3, 7, 14)]
    given = [row[0] for row in outlooks(plans, [MESA_POINT], setting())]
    spent = [costs(p, datetime(2031, 3, 15, tzinfo=UTC), MESA_POINT.race_morning, setting()) for p in plans]
    for series in (
        [o.race_spo2_pct.mean for o in given],
        [o.race_capacity_pct.mean for o in given],
        [float(o.nights_high) for o in given],
        [o.dose_km_h for o in given],
        [float(c.nights_away) for c in spent],
    ):
        assert (np.diff(series) > 0.0).all()
    assert [o.hours_since_landing for o in given] == [24.0, 72.0, 168.0, 336.0]
    assert given[0].race_spo2_pct.low < given[0].race_spo2_pct.mean < given[0].race_spo2_pct.high


def test_dose_in_kilometre_hours() -> None:
    # Computed by hand: 2.25 km for the 72 h from arrival to the race, less nothing: bed and track alike.
    there = plan(Visit(MESA.id, MESA_POINT.race_at - timedelta(hours=72)))
    assert outlooks([there], [MESA_POINT], setting())[0][0].dose_km_h == pytest.approx(2.25 * 72.0)


def test_costs_count_nights_flights_and_hours() -> None:
    there = plan(
        Visit(HALF.id, datetime(2031, 3, 28, 22, tzinfo=UTC)),
        Visit(MESA.id, datetime(2031, 4, 2, 22, tzinfo=UTC)),
    )
    spent = costs(there, datetime(2031, 3, 20, tzinfo=UTC), datetime(2031, 4, 4, 12, tzinfo=UTC), setting())
    out, drive = there.legs[0], there.legs[1]
    assert (out.mode, drive.mode) == ("flight", "road")
    assert spent.flights == 1
    assert spent.nights_away == 7  # 28 March to 3 April
    hours = sum((leg.arrive_at - leg.depart_at) / timedelta(hours=1) for leg in (out, drive))
    assert spent.travel_h == pytest.approx(hours)
    assert spent.longest_travel_h_per_day == pytest.approx(
        (out.arrive_at - out.depart_at) / timedelta(hours=1)
    )


def test_the_body_clock_along_an_itinerary() -> None:
    there = plan(Visit(MESA.id, datetime(2031, 4, 2, 22, tzinfo=UTC)))
    course = clock_course(there, PLACES)
    # Lowmere to Far Mesa in April: 8 h west, on 2 April; 92 min a day (published).
    assert course[0].offset_h == -8.0
    assert course[0].offset_on(date(2031, 4, 5)) == pytest.approx(-8.0 + 3 * 92.0 / 60.0)
    assert offset_at(course, datetime(2031, 3, 30, tzinfo=UTC), PLACES) == 0.0
    days = light_days(DRIVER, course, datetime(2031, 4, 20, 12, tzinfo=UTC), PLACES)
    assert [d.day.day for d in days] == [2, 3, 4, 5, 6, 7]
    # Published closed form, 8 west with the minimum at 04:00: avoid 21-03, seek 13-19.
    assert (days[0].avoid_from_h, days[0].avoid_to_h) == (21.0, 3.0)
    assert (days[0].seek_from_h, days[0].seek_to_h) == (13.0, 19.0)
    back = course[1]
    assert back.offset_h == 8.0  # adapted in Far Mesa, then 8 h east


def test_wall_clock_words() -> None:
    assert clock_hours("06:30", "wake_time") == 6.5
    assert as_clock(23.999) == "00:00"
    assert as_clock(6.5) == "06:30"
    with pytest.raises(Exception, match="wake_time: '25:00' cannot be used, expected a time of day as HH:MM"):
        clock_hours("25:00", "wake_time")


def test_physicians_limits_and_iron() -> None:
    driver = replace(DRIVER, highest_bed_elevation_m=2000.0, tent_note="")
    assert "no higher than 2000 m" in bed_refused(driver, 2250.0, None, 2250.0)
    assert "no physician's note" in bed_refused(driver, 100.0, 0.16, 2200.0)
    assert bed_refused(driver, 1900.0, None, 1900.0) == ""
    noted = replace(driver, tent_note="physician, 1 March")
    assert "amounts to 2200 m" in bed_refused(noted, 100.0, 0.16, 2200.0)
    # From memory: 4 to 6 weeks ahead of the first round from 2 000 m (judgement) up, here 4 April.
    check = iron_check(DRIVER, fixed(), PLACES)
    assert check is not None
    assert (check.round_name, check.due_from, check.due_by) == (
        "Mesa round",
        date(2031, 2, 21),
        date(2031, 3, 7),
    )
    assert check.done_on is None
    done = iron_check(replace(DRIVER, iron_checked_on=date(2031, 2, 25)), fixed(), PLACES)
    assert done is not None
    assert done.done_on == date(2031, 2, 25)
    assert iron_check(DRIVER, [], PLACES) is None


def test_limits_refuse_nonsense() -> None:
    for wrong in (
        {"lowest_race_spo2_pct": 920.0},
        {"largest_clock_offset_h": -1.0},
        {"highest_risk": "some"},
    ):
        with pytest.raises(Exception, match=next(iter(wrong))):
            Limits(**wrong)  # type: ignore[arg-type]
    assert worse("high", "moderate")
    assert not worse("low", "low")
    assert is_high(MESA)
    assert not is_high(HOME)


def test_a_driver_is_needed_only_for_the_place_of_home() -> None:
    assert isinstance(setting().driver, Driver)
    assert setting().home == HOME


def test_a_flight_west_by_day_costs_no_night() -> None:
    # 19 h from 10:00 in Berlin: the small hours there pass in the air, but the evening ends in bed in Lima.
    leave = datetime(2031, 4, 20, 8, tzinfo=UTC)
    leg = Leg(7, HOME.id, PUNA.id, leave, leave + timedelta(hours=19), "flight")
    home = Stay(7, HOME.id, leave - timedelta(days=2), leave)
    trip = Itinerary(7, (home, leg, Stay(7, PUNA.id, leg.arrive_at, leg.arrive_at + timedelta(days=2))))
    nights = nights_of(trip, PLACES, home.arrive_at, leg.arrive_at + timedelta(days=2))
    assert [(n.evening.day, n.place_id) for n in nights] == [
        (18, HOME.id), (19, HOME.id), (20, PUNA.id), (21, PUNA.id)
    ]  # fmt: skip
