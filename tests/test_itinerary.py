"""An itinerary stays whole through any sequence of edits, across clock changes and the date line."""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, datetime, timedelta

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.errors import InputError
from planner.season.itinerary import (
    Fixed,
    Itinerary,
    Visit,
    broken,
    differences,
    ends_at,
    fixed_points,
    insert_trip,
    move_arrival,
    problems,
    replace_between,
    starts_at,
)
from planner.season.model import Commitment, Leg, Place, Round, Session, Stay
from planner.season.travel import LegTimes

# Invented places on both sides of the date line, in zones with and without summer time.
PLACES = {
    p.id: p
    for p in (
        Place("Lowmere", "Europe/Berlin", 100.0, 100.0, 50.0, 10.0, id=1),
        Place("Nearby Fell", "Europe/Berlin", 900.0, 900.0, 48.5, 10.5, id=2),
        Place("Far Mesa", "America/Denver", 1600.0, 1800.0, 40.0, -105.0, id=3),
        Place("Ostend Bay", "Pacific/Auckland", 10.0, 10.0, -37.0, 175.0, id=4),
        Place("Wester Isle", "Pacific/Honolulu", 10.0, 10.0, 21.0, -157.0, id=5),
    )
}
TIMES = LegTimes(PLACES)
# Runs over the spring clock change of Berlin (30 March 2031) and of Denver (9 March 2031).
DAY_0 = datetime(2031, 3, 1, tzinfo=UTC)
LENGTH_D = 60


def at(day: float) -> datetime:
    return DAY_0 + timedelta(days=day)


def start_itinerary() -> Itinerary:
    return Itinerary(7, (Stay(7, 1, at(0), at(LENGTH_D), id=1),))


FIXED = [
    Fixed("Lowmere round", 1, at(10.3), at(12.7), round_id=1),
    Fixed("factory day", 1, at(40.3), at(40.8), commitment_id=1),
]


def test_a_whole_itinerary_has_no_problems_and_every_flaw_is_named() -> None:
    home = Stay(7, 1, at(0), at(5), id=1)
    leg = Leg(7, 1, 3, at(5), at(5.6), "flight", id=1)
    there = Stay(7, 3, at(5.6), at(9), id=2)
    assert problems(Itinerary(7, (home, leg, there)), PLACES) == []

    def flaws(*entries: Stay | Leg) -> str:
        return " ".join(problems(Itinerary(7, entries), PLACES))

    assert "Nothing is planned from Thu 6 Mar 2031 14:24 UTC" in flaws(
        home, leg, replace(there, arrive_at=at(6))
    )
    assert "overlap" in flaws(home, leg, replace(there, arrive_at=at(5.2)))
    assert "No leg leads from Far Mesa to Nearby Fell" in flaws(home, leg, replace(there, place_id=2))
    assert "No leg leads from Lowmere to Far Mesa" in flaws(home, replace(there, arrive_at=at(5)))
    assert "ends before it begins" in flaws(replace(home, depart_at=at(-1)))
    assert "belongs to another driver" in flaws(replace(home, driver_id=8))
    assert "names place 99" in flaws(replace(home, place_id=99))
    assert "ends where it begins" in flaws(home, replace(leg, to_place_id=1))
    assert "without a zone" in flaws(replace(home, arrive_at=at(0).replace(tzinfo=None)))


def test_fixed_points_and_what_breaks_them() -> None:
    rounds = [Round(1, "Mesa round", 3, id=11), Round(2, "no sessions yet", 2, id=12)]
    sessions = [
        Session(11, "race", "Race", at(20.5), at(20.6)),
        Session(11, "practice", "Practice", at(18.4), at(18.5)),
    ]
    commitments = [
        Commitment(7, "factory", 1, at(2), at(2.3), id=5),
        Commitment(8, "somebody else", 1, at(2), at(2.3), id=6),
    ]
    points = fixed_points(rounds, sessions, commitments, driver_id=7)
    assert [(p.name, p.starts_at, p.ends_at) for p in points] == [
        ("factory", at(2), at(2.3)),
        ("Mesa round", at(18.4), at(20.6)),
    ]
    found = broken(start_itinerary(), points, PLACES)
    assert len(found) == 1
    assert found[0].startswith("Mesa round in Far Mesa needs the driver there")


def test_insert_trip_goes_and_comes_back() -> None:
    plan = insert_trip(start_itinerary(), 3, at(20), at(30), TIMES, FIXED)
    assert [type(e).__name__ for e in plan.entries] == ["Stay", "Leg", "Stay", "Leg", "Stay"]
    assert problems(plan, PLACES) == []
    assert plan.stays[1].arrive_at == at(20)
    assert plan.stays[1].depart_at == at(30)
    with pytest.raises(InputError, match="no broken appointment: factory day in Lowmere"):
        insert_trip(start_itinerary(), 3, at(35), at(45), TIMES, FIXED)
    with pytest.raises(InputError, match="where the driver is not already"):
        insert_trip(start_itinerary(), 1, at(20), at(30), TIMES)
    with pytest.raises(InputError, match="a time after Sat 1 Mar 2031 1"):
        insert_trip(start_itinerary(), 3, at(0.2), at(5), TIMES)
    with pytest.raises(InputError, match="a return to Lowmere before"):
        insert_trip(start_itinerary(), 3, at(20), at(59.9), TIMES)
    with pytest.raises(InputError, match="with its zone"):
        insert_trip(start_itinerary(), 3, at(20).replace(tzinfo=None), at(30), TIMES)


def test_move_arrival_takes_the_time_from_the_stay_before() -> None:
    plan = insert_trip(start_itinerary(), 3, at(20), at(30), TIMES, FIXED)
    earlier = move_arrival(plan, plan.stays[1], at(15), TIMES, FIXED)
    assert earlier.stays[1].arrive_at == at(15)
    assert (
        earlier.legs[0].arrive_at - earlier.legs[0].depart_at
        == plan.legs[0].arrive_at - plan.legs[0].depart_at
    )
    assert problems(earlier, PLACES) == []
    with pytest.raises(InputError, match="Lowmere round"):
        move_arrival(plan, plan.stays[1], at(12), TIMES, FIXED)
    with pytest.raises(InputError, match="before the departure"):
        move_arrival(plan, plan.stays[1], at(31), TIMES, FIXED)
    with pytest.raises(InputError, match="reached by a leg"):
        move_arrival(plan, plan.stays[0], at(1), TIMES, FIXED)


def test_replace_between_two_fixed_points() -> None:
    plan = insert_trip(start_itinerary(), 3, at(20), at(30), TIMES, FIXED)
    visits = [Visit(2, at(15)), Visit(3, at(18), bed_elevation_m=1500.0)]
    new = replace_between(plan, at(13), at(25), visits, TIMES, FIXED)
    assert problems(new, PLACES) == []
    assert [s.place_id for s in new.stays] == [1, 2, 3, 1]
    assert new.stays[2].bed_elevation_m == 1500.0
    assert new.stays[2].depart_at == at(30)
    with pytest.raises(InputError, match="arrival in Far Mesa: 'Sat 15 Mar 2031 12:00 UTC' cannot be used"):
        replace_between(plan, at(14), at(25), [Visit(3, at(14.5))], TIMES)
    with pytest.raises(InputError, match="a last visit to Far Mesa"):
        replace_between(plan, at(13), at(25), [Visit(2, at(15))], TIMES)
    with pytest.raises(InputError, match="a last arrival by"):
        replace_between(plan, at(13), at(25), [Visit(3, at(26))], TIMES)


def test_a_tent_at_home_changes_only_the_bed() -> None:
    plan = insert_trip(start_itinerary(), 3, at(20), at(30), TIMES, FIXED)
    visits = [Visit(1, at(14), None, 0.155, 9.0), Visit(3, at(20))]
    new = replace_between(plan, at(13), at(25), visits, TIMES, FIXED)
    assert problems(new, PLACES) == []
    assert [s.tent_oxygen_fraction for s in new.stays] == [None, 0.155, None, None]
    assert len(new.legs) == len(plan.legs)


def test_differences_keep_numbers_where_they_can() -> None:
    old = insert_trip(start_itinerary(), 3, at(20), at(30), TIMES, FIXED)
    stored = Itinerary(7, tuple(replace(e, id=i + 1) for i, e in enumerate(old.entries)))
    new = replace_between(stored, at(13), at(25), [Visit(2, at(15)), Visit(3, at(18))], TIMES, FIXED)
    changes = differences(stored, new)
    assert [e.id for e in changes.changed] == [1, 3]  # the stay before ends earlier, the last begins earlier
    assert [type(e).__name__ for e in changes.removed] == ["Leg"]
    assert [type(e).__name__ for e in changes.added] == ["Leg", "Stay", "Leg"]


edits = st.lists(
    st.tuples(
        st.sampled_from(["trip", "move", "stretch"]),
        st.integers(1, 5),
        st.floats(0.0, LENGTH_D),
        st.floats(0.0, 12.0),
        st.integers(1, 5),
    ),
    max_size=12,
)


@given(edits)
@settings(max_examples=120, deadline=None)
def test_no_sequence_of_edits_breaks_an_itinerary(steps: list[tuple[str, int, float, float, int]]) -> None:
    plan = start_itinerary()
    for kind, place_id, day, span, other in steps:
        try:
            if kind == "trip":
                plan = insert_trip(plan, place_id, at(day), at(day + span), TIMES, FIXED)
            elif kind == "move":
                stay = plan.stays[other % len(plan.stays)]
                plan = move_arrival(plan, stay, stay.arrive_at + timedelta(days=span - 6.0), TIMES, FIXED)
            else:
                end = min(day + span + 2.0, LENGTH_D - 0.1)
                index = plan.index_at(at(end))
                goal = plan.entries[index] if index is not None else plan.entries[-1]
                last = goal.place_id if isinstance(goal, Stay) else goal.to_place_id
                visits = [Visit(place_id, at(day + span * 0.4)), Visit(last, at(day + span))]
                plan = replace_between(plan, at(day), at(end), visits, TIMES, FIXED)
        except InputError:
            continue  # refused: the plan is the one that was whole before
        assert problems(plan, PLACES) == []
        assert broken(plan, FIXED, PLACES) == []
        # Independent of `problems`: the lengths add up to the whole, which no gap or overlap allows.
        total = sum((ends_at(e) - starts_at(e) for e in plan.entries), timedelta(0))
        assert total == timedelta(days=LENGTH_D)
        assert starts_at(plan.entries[0]) == at(0)
        assert ends_at(plan.entries[-1]) == at(LENGTH_D)
