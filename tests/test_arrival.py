"""The ways to reach one round: enumerated, judged by the coach's limits, ranked; whole and defensible."""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, datetime, timedelta

import pytest
from invented_season import BAY, DRIVER, HOME, MESA, PLACES, PUNA, fixed, itinerary, points, setting

from planner.errors import InputError
from planner.season.arrival import Option, arrival_options
from planner.season.arrival_ways import TENT_OXYGEN_FRACTION, gap_before
from planner.season.constraints import Limits
from planner.season.evaluate import RoundPoint
from planner.season.itinerary import Fixed, Itinerary, broken, problems
from planner.season.model import Driver, Place, Stay

NO_LIMITS = Limits(None, None, "high", None, 0.0, 100.0)


def point_of(place: Place) -> RoundPoint:
    return next(p for p in points() if p.place_id == place.id)


def from_bay() -> Itinerary:
    """The whole season so far: each round reached by the first of its options, home in between."""
    base = itinerary()
    for point in points():
        best = arrival_options(base, point, fixed(), setting(), NO_LIMITS)[0]
        assert best.itinerary is not None
        base = best.itinerary
    return base


def options(
    limits: Limits = NO_LIMITS, driver: Driver = DRIVER, lower_bed_m: float | None = None
) -> list[Option]:
    return arrival_options(
        from_bay(), point_of(MESA), fixed(), setting(driver), limits, lower_bed_m=lower_bed_m
    )


def test_every_kind_of_way_is_there() -> None:
    found = options(lower_bed_m=1800.0)
    kinds = {o.kind for o in found}
    assert kinds >= {
        "usual plan",
        "the morning itself",
        "home first",
        "half-way stop",
        "tent at home",
        "sleep lower",
    }
    tent = next(o for o in found if o.kind == "tent at home" and o.itinerary)
    assert tent.itinerary is not None
    assert any(s.tent_oxygen_fraction == TENT_OXYGEN_FRACTION for s in tent.itinerary.stays)
    lower = next(o for o in found if o.kind == "sleep lower")
    assert lower.itinerary is not None
    assert any(s.bed_elevation_m == 1800.0 for s in lower.itinerary.stays)


def test_every_option_is_whole_and_keeps_every_appointment() -> None:
    for option in options():
        if option.itinerary is not None:
            assert problems(option.itinerary, PLACES) == []
            assert broken(option.itinerary, fixed(), PLACES) == []
            arrives = option.arrives_at(point_of(MESA))
            assert arrives is not None
            assert arrives < point_of(MESA).first_session_at


def test_ranking_feasible_first_then_fewest_nights_flights_hours() -> None:
    found = options(Limits(largest_clock_offset_h=2.0, shortest_landing_to_session_h=15.0))
    feasible = [o.feasible for o in found]
    assert feasible == sorted(feasible, reverse=True)
    assert any(feasible)
    assert not all(feasible)
    keys = [(o.costs.nights_away, o.costs.flights, o.costs.travel_h) for o in found if o.feasible and o.costs]
    assert keys == sorted(keys)
    for option in found:
        assert option.feasible == (not option.why)
        assert option.difference.endswith(".")


@pytest.mark.parametrize(
    ("limits", "words"),
    [
        (replace(NO_LIMITS, lowest_race_spo2_pct=99.0), "Race-morning SpO2"),
        (replace(NO_LIMITS, lowest_race_capacity_pct=99.0), "Aerobic capacity"),
        (replace(NO_LIMITS, largest_clock_offset_h=0.5), "Body clock"),
        (replace(NO_LIMITS, shortest_landing_to_session_h=15.0), "from landing to the first session"),
        (replace(NO_LIMITS, longest_travel_h_per_day=8.0), "of travel in one day"),
        (replace(NO_LIMITS, most_nights_away=2), "nights away, at most 2"),
    ],
)
def test_each_limit_names_itself(limits: Limits, words: str) -> None:
    assert any(words in why for o in options(limits) for why in o.why)


def test_history_and_physician_stand_against_options() -> None:
    ill = replace(
        DRIVER, altitude_history="lung or brain oedema", highest_bed_elevation_m=1000.0, tent_note=""
    )
    found = options(replace(NO_LIMITS, highest_risk="moderate"), driver=ill)
    said = [why for o in found for why in o.why]
    assert any("Planned-ascent class high" in why for why in said)
    assert any("no higher than 1000 m" in why for why in said)
    assert any("no physician's note" in why for why in said)
    assert not any(o.feasible for o in found)


def test_above_3000_m_only_with_a_reason() -> None:
    # The beds of High Puna at 3 700 m: 700 m above 3 000 m in one night, the rule allows 500 (published).
    places = {**PLACES, PUNA.id: replace(PUNA, bed_elevation_m=3700.0)}
    high = replace(setting(), places=places)
    point = point_of(PUNA)
    found = arrival_options(from_bay(), point, fixed(), high, NO_LIMITS)
    for option in found:
        if option.feasible and option.outlook:
            assert option.outlook.ascent_warnings == ()
    assert any("Too fast an ascent" in why for o in found for why in o.why)
    reason = replace(NO_LIMITS, ascent_override="decided with the physician on 1 April")
    overridden = arrival_options(from_bay(), point, fixed(), high, reason)
    assert any(o.feasible and o.outlook and o.outlook.ascent_warnings for o in overridden)


def test_the_gap_begins_after_the_last_appointment() -> None:
    gap = gap_before(from_bay(), point_of(MESA), fixed(), setting())
    bay = next(f for f in fixed() if f.place_id == BAY.id)
    assert gap.since == "Bay round"
    assert gap.place == BAY
    assert gap.free_from >= bay.ends_at


def test_somebody_without_any_itinerary_gets_one() -> None:
    found = arrival_options(Itinerary(DRIVER.id, ()), point_of(MESA), [], setting(), NO_LIMITS)
    assert found[0].itinerary is not None
    assert problems(found[0].itinerary, PLACES) == []
    assert {o.kind for o in found} >= {"usual plan", "home first", "tent at home"}


def test_no_free_time_before_a_round_says_so() -> None:
    point = point_of(MESA)
    until = point.first_session_at - timedelta(minutes=30)
    busy = Fixed("sponsor day", HOME.id, until - timedelta(hours=5), until, commitment_id=9)
    with pytest.raises(InputError):
        arrival_options(itinerary(), point, [busy], setting(), NO_LIMITS)


def test_a_stay_that_reaches_the_round_is_kept_as_the_usual_plan() -> None:
    point = point_of(MESA)
    start = datetime(2031, 2, 20, tzinfo=UTC)
    home = Stay(DRIVER.id, HOME.id, start, datetime(2031, 4, 1, 6, tzinfo=UTC), id=1)
    leg = setting().times.leg(DRIVER.id, HOME.id, MESA.id, arrive_at=datetime(2031, 4, 1, 20, tzinfo=UTC))
    home = replace(home, depart_at=leg.depart_at)
    there = Stay(DRIVER.id, MESA.id, leg.arrive_at, leg.arrive_at + timedelta(days=10), id=2)
    plan = Itinerary(DRIVER.id, (home, leg, there))
    usual = next(o for o in arrival_options(plan, point, [], setting(), NO_LIMITS) if o.kind == "usual plan")
    assert usual.itinerary == plan
    assert usual.arrives_at(point) == leg.arrive_at
