"""From stays and legs to the air breathed, hour by hour."""

from __future__ import annotations

from datetime import UTC, date, datetime, timedelta

import numpy as np
import pytest

from planner.physiology.air import site_pressure, standard_pressure_hpa
from planner.physiology.oxygen import inspired_po2_mmhg
from planner.season.exposure import (
    PLANNING_CABIN_ALTITUDE_M,
    exposure_history,
    segments,
    track_days,
    where_is,
)
from planner.season.model import Driver, Leg, Place, PressureMeasurement, Round, Session, Stay

# Invented places.
HOME = Place("Lowmere", "Europe/Berlin", 100.0, 100.0, 50.0, 10.0, id=1)
MESA = Place("Far Mesa", "America/Denver", 2250.0, 1900.0, 40.0, -105.0, id=2)
FELL = Place("Nearby Fell", "Europe/Berlin", 900.0, 900.0, 48.5, 10.5, id=3)
PLACES = {p.id: p for p in (HOME, MESA, FELL)}
ORIGIN = datetime(2031, 5, 1, tzinfo=UTC)


def at(hours: float) -> datetime:
    return ORIGIN + timedelta(hours=hours)


def po2(elevation_m: float, latitude_deg: float, oxygen: float = 0.2094) -> float:
    """Computed: the chain of the air module, tested against published rows elsewhere."""
    return float(inspired_po2_mmhg(site_pressure(elevation_m, latitude_deg).pressure_hpa, oxygen))


def test_home_before_the_first_entry_and_the_last_one_for_ever() -> None:
    stays = [Stay(7, 2, at(0), at(48))]
    history = exposure_history(HOME, stays, [], PLACES, origin=ORIGIN)
    assert history.start_h[0] == -1.0
    assert history.inspired_po2_mmhg[0] == pytest.approx(po2(100.0, 50.0))
    assert history.inspired_at(np.array([1e4]))[0] == pytest.approx(po2(1900.0, 40.0))
    empty = exposure_history(HOME, [], [], PLACES, origin=ORIGIN)
    assert empty.inspired_po2_mmhg.tolist() == [pytest.approx(po2(100.0, 50.0))]


def test_beds_by_night_track_by_day_only_on_session_days() -> None:
    stays = [Stay(7, 2, at(0), at(96))]
    days = {(2, date(2031, 5, 2))}
    history = exposure_history(HOME, stays, [], PLACES, origin=ORIGIN, track_days=days)
    bed, track = po2(1900.0, 40.0), po2(2250.0, 40.0)
    # 2 May 09:00-19:00 in Denver's summer time is 15:00-01:00 UTC: hours 39 to 49 from 1 May 00:00 UTC.
    hours = np.array([15.0, 38.9, 39.1, 48.9, 49.1, 63.0])
    assert history.inspired_at(hours) == pytest.approx([bed, bed, track, track, bed, bed])


def test_the_bed_of_the_stay_wins() -> None:
    stays = [Stay(7, 2, at(0), at(96), bed_elevation_m=1500.0)]
    history = exposure_history(HOME, stays, [], PLACES, origin=ORIGIN)
    assert history.inspired_at(np.array([10.0]))[0] == pytest.approx(po2(1500.0, 40.0))


def test_tent_nights_end_at_seven_local() -> None:
    stays = [Stay(7, 1, at(0), at(72), tent_oxygen_fraction=0.155, tent_hours_per_night=9.0)]
    history = exposure_history(HOME, stays, [], PLACES, origin=ORIGIN)
    tent, bed = po2(100.0, 50.0, 0.155), po2(100.0, 50.0)
    # 07:00 in Berlin's summer time is 05:00 UTC; nine hours before it is 20:00 UTC.
    hours = np.array([4.9, 5.1, 19.9, 20.1, 28.9, 29.1])
    assert history.inspired_at(hours) == pytest.approx([tent, bed, bed, tent, tent, bed])


def test_flights_by_the_cabin_and_roads_in_steps() -> None:
    fly = Leg(7, 1, 2, at(10), at(20), "flight")
    typed = Leg(7, 1, 2, at(10), at(20), "flight", cabin_altitude_m=2400.0)
    drive = Leg(7, 1, 3, at(10), at(14), "road")
    for leg, cabin_m in ((fly, PLANNING_CABIN_ALTITUDE_M), (typed, 2400.0)):
        history = exposure_history(HOME, [], [leg], PLACES, origin=ORIGIN)
        # A cabin's altitude is a pressure altitude, so the standard atmosphere holds wherever it flies.
        expected = float(inspired_po2_mmhg(standard_pressure_hpa(cabin_m)))
        assert history.inspired_at(np.array([15.0]))[0] == pytest.approx(expected)
    climb = [s.elevation_m for s in segments(HOME, [], [drive], PLACES)[1:]]
    assert climb == pytest.approx([200.0, 400.0, 600.0, 800.0])


def test_a_measured_pressure_counts_near_its_time_and_reaches_the_beds() -> None:
    stays = [Stay(7, 2, at(0), at(240))]
    measured = [PressureMeasurement(2, at(100), 760.0)]
    history = exposure_history(HOME, stays, [], PLACES, origin=ORIGIN, pressures=measured)
    track_hpa = float(site_pressure(2250.0, 40.0).pressure_hpa)
    bed_hpa = float(site_pressure(1900.0, 40.0).pressure_hpa) * 760.0 / track_hpa
    near, far = float(inspired_po2_mmhg(bed_hpa)), po2(1900.0, 40.0)
    hours = np.array([87.0, 89.0, 100.0, 111.0, 113.0])
    assert history.inspired_at(hours) == pytest.approx([far, near, near, near, far])
    # Between two measurements the nearer one speaks.
    two = [*measured, PressureMeasurement(2, at(110), 770.0)]
    history = exposure_history(HOME, stays, [], PLACES, origin=ORIGIN, pressures=two)
    second = float(inspired_po2_mmhg(bed_hpa * 770.0 / 760.0))
    assert history.inspired_at(np.array([104.0, 106.0, 121.0])) == pytest.approx([near, second, second])


def test_track_days_are_local_dates() -> None:
    rounds = [Round(1, "Mesa round", 2, id=11)]
    # 02:00 UTC is still the evening before in Denver.
    sessions = [
        Session(11, "race", "Race", datetime(2031, 5, 4, 2, tzinfo=UTC), datetime(2031, 5, 4, 4, tzinfo=UTC))
    ]
    assert track_days(rounds, sessions, PLACES) == {(2, date(2031, 5, 3))}


def test_where_is() -> None:
    driver = Driver("Invented Driver", "woman", 1, 60.0, 170.0, id=7)
    stay, leg = Stay(7, 1, at(0), at(10)), Leg(7, 1, 2, at(10), at(20), "flight")
    others = Stay(8, 2, at(0), at(100))
    assert where_is(driver, at(5), [stay, others], [leg]) == stay
    assert where_is(driver, at(10), [stay, others], [leg]) == leg
    assert where_is(driver, at(20), [stay, others], [leg]) is None
