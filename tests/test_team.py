"""The team's records: errors in the screen's words and units, removal that can be taken back."""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, date, datetime, time

import pytest

from planner.errors import InputError, StoreError
from planner.season.model import Driver, Place
from planner.services.team import removed, save
from planner.services.typed import local_instant, typed_value
from planner.store.store import Store

HOME = Place("Vallmora", "Europe/Madrid", 120.0, 120.0, 41.0, 1.5)


@pytest.mark.parametrize(
    ("value", "unit", "expected_m"),
    # computed: 1 ft = 0.3048 m by definition
    [(2250.0, "m", 2250.0), (7382.0, "ft", 2250.0336)],
)
def test_a_typed_elevation_is_kept_in_metres(value: float, unit: str, expected_m: float) -> None:
    assert typed_value("elevation", value, "elevation_m", "elevation", unit) == pytest.approx(expected_m)


def test_a_typed_value_is_refused_in_the_unit_in_which_it_was_typed() -> None:
    with pytest.raises(InputError, match=r"^elevation: 99999 cannot be used, expected -1411 to 29528 ft$"):
        typed_value("elevation", 99999, "elevation_m", "elevation", "ft")
    with pytest.raises(InputError, match=r"^body mass: '' cannot be used, expected 77 to 331 lb$"):
        typed_value("body mass", None, "mass_kg", "mass", "lb")


def test_a_record_is_added_then_changed_and_its_name_tidied(store: Store) -> None:
    added = save(store, replace(HOME, name="  Vallmora  de  Mar "), by="coach")
    assert added.id > 0
    assert added.name == "Vallmora de Mar"
    save(store, replace(added, bed_elevation_m=300.0), by="coach")
    assert [place.bed_elevation_m for place in store.all(Place)] == [300.0]


def test_a_refused_record_is_named_as_on_the_screen_and_nothing_is_stored(store: Store) -> None:
    with pytest.raises(InputError, match=r"^elevation of the beds: 99999"):
        save(store, replace(HOME, bed_elevation_m=99999.0), by="coach")
    with pytest.raises(InputError, match=r"^time zone: 'Europe/Nowhere'"):
        save(store, replace(HOME, zone="Europe/Nowhere"), by="coach")
    with pytest.raises(InputError, match=r"^name: ''"):
        save(store, replace(HOME, name="  "), by="coach")
    assert store.all(Place) == []


def test_a_place_in_use_stays_and_a_removed_driver_can_be_put_back(store: Store) -> None:
    home = save(store, HOME, by="coach")
    driver = save(store, Driver("Ines Corvo", "woman", home.id, 60.0, 168.0), by="coach")
    with pytest.raises(StoreError, match="cannot be removed: 1 driver"):
        store.remove(home, by="coach")
    store.remove(driver, by="coach")
    assert store.all(Driver) == []
    assert removed(store, Driver) == [driver]
    store.restore(Driver, driver.id, by="coach")
    assert store.all(Driver) == [driver]
    assert removed(store, Driver) == []


def test_a_wall_clock_time_becomes_the_instant_of_its_zone() -> None:
    # computed by hand: CEST is two hours ahead of UTC
    assert local_instant("start", date(2026, 7, 1), time(14), "Europe/Madrid") == datetime(
        2026, 7, 1, 12, tzinfo=UTC
    )


def test_a_time_that_the_clocks_skip_is_refused() -> None:
    # published: EU clocks go from 02:00 to 03:00 on the last Sunday of March (Directive 2000/84/EC)
    with pytest.raises(InputError, match=r"^start: '2026-03-29 02:30' cannot be used"):
        local_instant("start", date(2026, 3, 29), time(2, 30), "Europe/Madrid")
