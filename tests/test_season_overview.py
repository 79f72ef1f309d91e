"""The season at a glance: nights, free days, what a plan gives, where everybody is."""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, datetime, timedelta

import pytest

from planner.season.model import Commitment, Driver, Leg, Place, Round, Session, Stay
from planner.services.season import Calendar, nights, round_costs, whereabouts

HOME = Place("Vallmora", "Europe/Madrid", 100.0, 100.0, 41.0, 1.5, id=1)
HIGH = Place("Alto Cerro", "America/Bogota", 2250.0, 2300.0, 4.0, -74.0, id=2)
LOW = Place("Cold Bay", "Europe/Oslo", 10.0, 10.0, 60.0, 10.0, id=3)
DRIVER = Driver("Ines Corvo", "woman", HOME.id, 60.0, 168.0, id=1)
FRIDAY = datetime(2026, 6, 5, 15, tzinfo=UTC)  # 10:00 in Bogota
LOW_RACE = datetime(2026, 5, 31, 13, tzinfo=UTC)


def calendar(
    stays: tuple[Stay, ...], commitments: tuple[Commitment, ...] = (), legs: tuple[Leg, ...] = ()
) -> Calendar:
    low, high = Round(1, "Cold Bay Round", LOW.id, id=1), Round(2, "Cerro Round", HIGH.id, id=2)
    return Calendar(
        places={place.id: place for place in (HOME, HIGH, LOW)},
        drivers=(DRIVER,),
        rounds=(low, high),
        sessions={
            low.id: (Session(low.id, "race", "Race", LOW_RACE, LOW_RACE + timedelta(hours=2), id=1),),
            high.id: (
                Session(high.id, "practice", "Practice", FRIDAY, FRIDAY + timedelta(hours=1), id=2),
                Session(
                    high.id,
                    "race",
                    "Race",
                    FRIDAY + timedelta(days=2),
                    FRIDAY + timedelta(days=2, hours=2),
                    id=3,
                ),
            ),
        },
        commitments=commitments,
        stays=stays,
        legs=legs,
        pressures=(),
    )


FLIGHT = Leg(
    DRIVER.id, HOME.id, HIGH.id, FRIDAY - timedelta(days=3), FRIDAY - timedelta(days=2), "flight", id=1
)


def stay_there(days_before: float) -> Stay:
    return Stay(
        DRIVER.id,
        HIGH.id,
        FRIDAY - timedelta(days=days_before),
        FRIDAY + timedelta(days=3),
        id=int(days_before),
    )


@pytest.mark.parametrize(
    ("days_before", "expected"),
    # computed by hand: arrival at 10:00 local, so each day before brings one night at 03:00
    [(2.0, 2), (1.0, 1), (0.2, 0)],
)
def test_nights_before_the_first_session(days_before: float, expected: int) -> None:
    assert nights(stay_there(days_before), {HIGH.id: HIGH}, FRIDAY) == expected


def test_an_arrival_after_three_in_the_night_is_no_night() -> None:
    four_in_the_morning = datetime(2026, 6, 5, 9, tzinfo=UTC)
    stay = Stay(DRIVER.id, HIGH.id, four_in_the_morning, FRIDAY)
    assert nights(stay, {HIGH.id: HIGH}, FRIDAY) == 0


def test_only_high_rounds_cost_something_and_a_longer_stay_gives_more() -> None:
    [short], [long] = (round_costs(calendar((stay_there(days),)), DRIVER, FRIDAY) for days in (1.0, 10.0))
    assert short.round.name == "Cerro Round"
    assert (short.nights_there, long.nights_there) == (1, 10)
    assert short.outlook is not None
    assert long.outlook is not None
    assert short.outlook.first_session_spo2_pct.mean < long.outlook.first_session_spo2_pct.mean
    assert short.outlook.race_spo2_pct.mean < long.outlook.race_spo2_pct.mean
    assert short.outlook.race_capacity_pct.mean < long.outlook.race_capacity_pct.mean


def test_without_a_stay_there_is_no_outlook() -> None:
    [cost] = round_costs(calendar(()), DRIVER, FRIDAY)
    assert cost.outlook is None
    assert cost.nights_there == 0


def test_free_days_lie_between_the_last_fixed_thing_and_the_first_session() -> None:
    [cost] = round_costs(calendar((stay_there(1.0),)), DRIVER, FRIDAY)
    # computed by hand: 31 May 15:00 to 5 June 15:00 UTC
    assert (cost.free_days_before, cost.free_since) == (5, "Cold Bay Round")
    factory = Commitment(
        DRIVER.id, "Factory day", LOW.id, LOW_RACE + timedelta(days=1), LOW_RACE + timedelta(days=2)
    )
    somebody_else = Commitment(99, "Fair", LOW.id, LOW_RACE + timedelta(days=3), LOW_RACE + timedelta(days=4))
    [cost] = round_costs(calendar((stay_there(1.0),), (factory, somebody_else)), DRIVER, FRIDAY)
    assert (cost.free_days_before, cost.free_since) == (3, "Factory day")


def test_where_everybody_is() -> None:
    known = calendar((stay_there(2.0),), legs=(FLIGHT,))
    [on_the_way] = whereabouts(known, FRIDAY - timedelta(days=2, hours=6))
    assert isinstance(on_the_way.holding, Leg)
    [there] = whereabouts(known, FRIDAY)
    assert isinstance(there.holding, Stay)
    assert there.nights_there == 2
    assert there.next_leg is None
    [before] = whereabouts(known, FRIDAY - timedelta(days=30))
    assert before.holding is None
    assert before.next_leg is not None


def test_seasons_are_parted_by_the_winter_break() -> None:
    known = calendar(())
    later = Round(1, "Next year's round", LOW.id, id=3)
    start = FRIDAY + timedelta(days=240)
    two_years = replace(
        known,
        rounds=(*known.rounds, later),
        sessions={
            **known.sessions,
            later.id: (Session(later.id, "race", "Race", start, start + timedelta(hours=2), id=9),),
        },
    )
    assert two_years.season_at(FRIDAY) == known.rounds
    assert two_years.season_at(FRIDAY - timedelta(days=100)) == known.rounds
    assert two_years.season_at(FRIDAY + timedelta(days=30)) == (later,)
    assert two_years.season_at(start + timedelta(days=500)) == (later,)
