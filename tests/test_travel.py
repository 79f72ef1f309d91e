"""Distances and journey times."""

from __future__ import annotations

from datetime import UTC, datetime

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.errors import InputError, NotFoundError
from planner.season.model import Leg, Place
from planner.season.travel import (
    MEAN_EARTH_RADIUS_KM,
    LegTimes,
    estimated_travel,
    great_circle_km,
    nearest_airport,
    zones_east_h,
)

# Invented places.
LOW = Place("Lowmere", "Europe/Berlin", 100.0, 100.0, 50.0, 10.0, id=1)
NEAR = Place("Nearby Fell", "Europe/Berlin", 900.0, 900.0, 48.5, 10.5, id=2)
FAR = Place("Far Mesa", "America/Denver", 1600.0, 1600.0, 40.0, -105.0, id=3)
EAST = Place("Ostend Bay", "Pacific/Auckland", 10.0, 10.0, -37.0, 175.0, id=4)
WEST = Place("Wester Isle", "Pacific/Honolulu", 10.0, 10.0, 21.0, -157.0, id=5)
PLACES = {p.id: p for p in (LOW, NEAR, FAR, EAST, WEST)}


def test_distance_against_the_cosine_formula_and_known_arcs() -> None:
    # Computed: a quarter of the meridian is a quarter of the circumference.
    assert great_circle_km(0.0, 0.0, 90.0, 0.0) == pytest.approx(np.pi / 2.0 * MEAN_EARTH_RADIUS_KM)
    assert great_circle_km(10.0, 179.0, 10.0, -179.0) < 250.0
    # Computed by an independent method: the spherical law of cosines.
    a, b = np.radians([50.0, 10.0]), np.radians([40.0, -105.0])
    arc = np.arccos(np.sin(a[0]) * np.sin(b[0]) + np.cos(a[0]) * np.cos(b[0]) * np.cos(b[1] - a[1]))
    assert great_circle_km(50.0, 10.0, 40.0, -105.0) == pytest.approx(MEAN_EARTH_RADIUS_KM * arc, rel=1e-9)


@given(
    a=st.tuples(st.floats(-90, 90), st.floats(-180, 180)),
    b=st.tuples(st.floats(-90, 90), st.floats(-180, 180)),
)
@settings(max_examples=50, deadline=None)
def test_distance_is_symmetric_and_bounded(a: tuple[float, float], b: tuple[float, float]) -> None:
    there, back = float(great_circle_km(*a, *b)), float(great_circle_km(*b, *a))
    assert there == pytest.approx(back, abs=1e-6)
    assert 0.0 <= there <= np.pi * MEAN_EARTH_RADIUS_KM + 1e-6
    assert isinstance(great_circle_km(*a, *b), float)


def test_near_places_by_road_far_ones_by_air() -> None:
    road, flight = estimated_travel(LOW, NEAR), estimated_travel(LOW, FAR)
    assert (road.mode, road.flights) == ("road", 0)
    assert (flight.mode, flight.flights) == ("flight", 1)
    # Judgement: about 8 000 km take a working day and a half door to door.
    assert 10.0 < flight.hours < 18.0
    assert estimated_travel(LOW, EAST).flights == 2


def test_typed_times_win_the_same_way_before_the_way_back() -> None:
    def leg(a: Place, b: Place, hours: int, day: int) -> Leg:
        depart = datetime(2031, 5, day, 6, tzinfo=UTC)
        return Leg(7, a.id, b.id, depart, depart.replace(hour=6 + hours), "road")

    times = LegTimes(PLACES, [leg(LOW, NEAR, 3, 9), leg(LOW, NEAR, 5, 2), leg(NEAR, LOW, 8, 20)])
    assert times.between(LOW.id, NEAR.id).hours == 3.0  # the latest of that way
    assert times.between(NEAR.id, LOW.id).hours == 8.0
    assert LegTimes(PLACES, [leg(LOW, NEAR, 3, 9)]).between(NEAR.id, LOW.id).hours == 3.0
    assert times.between(LOW.id, NEAR.id).source == "typed"
    assert times.between(LOW.id, FAR.id).source == "estimated"
    arrive = datetime(2031, 5, 9, 12, tzinfo=UTC)
    made = times.leg(7, LOW.id, NEAR.id, arrive_at=arrive)
    assert (arrive - made.depart_at).total_seconds() == 3 * 3600
    with pytest.raises(NotFoundError, match="place number 99"):
        times.between(LOW.id, 99)


def test_zones_follow_summer_time_and_the_date_line() -> None:
    summer, winter = datetime(2031, 7, 1, 12, tzinfo=UTC), datetime(2031, 1, 1, 12, tzinfo=UTC)
    # Common knowledge of the zones: Berlin UTC+1/+2, Denver -7/-6, Auckland +13/+12, Honolulu -10.
    assert zones_east_h(LOW, FAR, winter) == -8.0
    assert zones_east_h(LOW, EAST, winter) == -12.0  # half the world either way
    assert zones_east_h(LOW, EAST, summer) == 10.0
    assert zones_east_h(EAST, WEST, summer) == 2.0  # 22 behind on the calendar, 2 ahead by the sun
    assert zones_east_h(LOW, NEAR, summer) == 0.0


def test_nearest_airport_suggests_elevation_and_zone() -> None:
    # Common practice: the field of the city at 39.86 N 104.67 W lies at 5 434 ft.
    found = nearest_airport(39.86, -104.67)
    assert found.distance_km < 5.0
    assert found.zone == "America/Denver"
    assert found.elevation_m == pytest.approx(1656.0, abs=10.0)
    with pytest.raises(InputError, match="latitude_deg"):
        nearest_airport(99.0, 0.0)
