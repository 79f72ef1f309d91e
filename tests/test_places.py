"""The air at a venue: model or measurement, what was typed, and what follows for somebody who goes there."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from itertools import pairwise
from math import nan

import pytest

from planner.errors import InputError
from planner.season.exposure import MEASUREMENT_REACH
from planner.season.model import Place, PressureMeasurement
from planner.season.pressure import model_pressure_hpa
from planner.services.places import (
    days_there,
    pressure_in_force,
    typed_pressure,
    unusual_difference_hpa,
    venue_air,
)

NOW = datetime(2026, 5, 14, 6, tzinfo=UTC)
HIGH = Place("Alto Cerro", "America/Bogota", 2240.0, 2240.0, 19.0, -75.0, id=1)
SPLIT = Place("Col Blanc", "Europe/Paris", 2240.0, 1500.0, 47.0, 7.0, id=2)


def test_model_atmosphere_goes_by_latitude() -> None:
    # computed: West 1996 (published constants) 587.6 mmHg; ISO 2533 by two libraries 771.62 hPa
    assert venue_air(HIGH).track.pressure_hpa == pytest.approx(783.4, abs=1.0)
    assert venue_air(SPLIT).track.pressure_hpa == pytest.approx(771.6, abs=0.5)


def test_beds_at_another_elevation_have_their_own_air() -> None:
    air = venue_air(SPLIT)
    assert air.beds_differ
    # computed: ISO 2533 at 1500 m by two libraries
    assert air.beds.pressure_hpa == pytest.approx(845.60, abs=0.01)
    assert not venue_air(HIGH).beds_differ


def test_a_measured_pressure_moves_track_and_beds_by_the_same_share() -> None:
    model, measured = venue_air(SPLIT), venue_air(SPLIT, 780.0)
    assert measured.track.pressure_hpa == 780.0
    assert measured.beds.pressure_hpa / model.beds.pressure_hpa == pytest.approx(
        780.0 / model.track.pressure_hpa
    )
    assert measured.track.measured
    assert measured.beds.measured
    assert not model.track.measured


def test_density_and_oxygen_against_sea_level() -> None:
    sea = venue_air(Place("Quay", "UTC", 0.0, 0.0, 47.0, 0.0)).track
    assert sea.density_share_pct == pytest.approx(100.0)
    assert sea.oxygen_share_pct == pytest.approx(100.0)
    # computed: ISO 2533, 0.9825 / 1.2250 kg/m3, and 0.2094 (578.76 - 47) / (0.2094 (760 - 47))
    high = venue_air(SPLIT).track
    assert high.density_share_pct == pytest.approx(80.2, abs=0.1)
    assert high.oxygen_share_pct == pytest.approx(74.6, abs=0.1)


def test_saturation_and_capacity_rise_with_days_there() -> None:
    days = days_there(venue_air(HIGH).track)
    assert [each.days for each in days] == [0.0, 3.0, 7.0, 14.0]
    assert all(a.mean_pct < b.mean_pct for a, b in pairwise(days))
    assert all(a.capacity_pct < b.capacity_pct for a, b in pairwise(days))
    assert all(each.low_pct < each.mean_pct < each.high_pct <= 100.0 for each in days)
    assert not any(each.beyond_validity for each in days)


def test_an_altimeter_setting_becomes_the_station_pressure() -> None:
    # computed by the ICAO formula in the project's physiology notes: 1025 hPa at 2240 m
    measured = typed_pressure(HIGH, 1025.0, "hPa", "altimeter setting", NOW)
    assert measured.pressure_hpa == pytest.approx(780.97, abs=0.1)
    assert measured.typed == "altimeter setting 1025 hPa"
    assert measured.place_id == HIGH.id


def test_a_station_pressure_may_be_typed_in_other_units() -> None:
    # computed: 1 mmHg = 1.333224 hPa
    assert typed_pressure(HIGH, 587.0, "mmHg", "station pressure", NOW).pressure_hpa == pytest.approx(
        782.6, abs=0.05
    )
    assert typed_pressure(HIGH, 78.0, "kPa", "station pressure", NOW).pressure_hpa == pytest.approx(780.0)


@pytest.mark.parametrize(
    ("value", "unit", "kind", "said"),
    [
        (
            1013.0,
            "hPa",
            "station pressure",
            r"^station pressure: '1013 hPa' cannot be used.*736 to 830 hPa.*reduced",
        ),
        (
            780.0,
            "hPa",
            "altimeter setting",
            r"^altimeter setting: 780\.0 cannot be used, expected 870 to 1090 hPa",
        ),
        (7.8, "hPa", "station pressure", r"^station pressure: 7\.8 cannot be used, expected 300 to 1100 hPa"),
        (nan, "hPa", "station pressure", r"^station pressure: nan"),
    ],
)
def test_a_pressure_that_cannot_be_the_one_there_is_refused(
    value: float, unit: str, kind: str, said: str
) -> None:
    with pytest.raises(InputError, match=said):
        typed_pressure(HIGH, value, unit, kind, NOW)  # type: ignore[arg-type]


def test_an_unusual_pressure_is_taken_but_noticed() -> None:
    assert unusual_difference_hpa(HIGH, 780.0) is None
    assert unusual_difference_hpa(HIGH, 810.0) == pytest.approx(810.0 - model_pressure_hpa(HIGH))
    assert typed_pressure(HIGH, 810.0, "hPa", "station pressure", NOW).pressure_hpa == 810.0


def test_the_nearest_measurement_counts_while_it_is_near_enough() -> None:
    old, new = (PressureMeasurement(1, NOW - age, 780.0) for age in (MEASUREMENT_REACH, timedelta(hours=1)))
    assert pressure_in_force([old, new], NOW) == new
    assert pressure_in_force([old], NOW) is None
    assert pressure_in_force([], NOW) is None
