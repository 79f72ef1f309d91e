"""Ways to a round on the demo: what is shown, their days, rounds ahead, a driver with nothing planned."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from datetime import timedelta

import pytest
from arrival_on_the_demo import NO_LIMITS, driver_called, everything, looked_at

from planner.errors import InputError, NotFoundError
from planner.season.itinerary import broken, ends_at, problems
from planner.season.model import Driver, Place, Round, Stay
from planner.services.arrival import (
    ORDERS,
    arrival,
    find_round,
    keep_asked,
    next_high_round,
)
from planner.services.arrival_choice import (
    choices,
    choose,
    is_planned,
    refused,
    undo,
)
from planner.services.arrival_days import plan_days
from planner.services.limits import season_limits
from planner.services.season import read_calendar
from planner.services.workspace import FROZEN_CLOCK, now
from planner.store.store import Store

# What is shown ------------------------------------------------------------------------------------------


def test_the_round_at_2250_m_has_at_least_five_kinds_of_way(demo_store: Store) -> None:
    found = looked_at(demo_store, "Bastien", "Talquime")
    assert found.venue.track_elevation_m == 2250.0
    assert {o.kind for o in found.options if o.itinerary is not None} == {
        "usual plan", "straight there", "home first", "half-way stop", "the morning itself",
    }  # fmt: skip
    assert found.gap.since == "Portmerrin Round"
    assert found.calendar.places[found.gap.place.id].track_elevation_m < 100.0
    for option in found.options:
        assert option.feasible == (not option.why)
        assert option.difference.endswith(".")
        if option.itinerary is not None:
            assert option.outlook is not None
            assert option.costs is not None
    # A tent needs the physician's note; lower beds need somebody who knows of some.
    against = {o.kind: " ".join(o.why) for o in found.options if o.itinerary is None}
    assert "no physician's note" in against["tent at home"]
    assert "No beds lower than 2250 m are known" in against["sleep lower"]
    noted = looked_at(demo_store, "Tomé", "Talquime")
    assert any(o.feasible and o.costs and o.costs.tent_nights for o in noted.options)


def test_lower_beds_that_are_typed_make_another_way(demo_store: Store) -> None:
    driver, calendar = driver_called(demo_store, "Bastien"), read_calendar(demo_store)
    given = find_round(calendar, "Talquime", now(demo_store))
    found = arrival(demo_store, driver, given, lower_bed_m=1500.0)
    lower = next(o for o in found.options if o.kind == "sleep lower")
    assert lower.itinerary is not None
    assert [s.bed_elevation_m for s in lower.itinerary.stays if s.place_id == given.place_id] == [1500.0]


def test_every_way_of_every_driver_is_whole(demo_store: Store) -> None:
    """No hole, no overlap, no appointment newly missed, and none that fails for want of a standing start."""
    calendar = read_calendar(demo_store)
    built: Counter[str] = Counter()
    for driver in calendar.drivers:
        for given in calendar.rounds:
            if not calendar.is_high(given):
                continue
            found = arrival(demo_store, driver, given)
            missed = set(broken(found.planned, found.fixed, calendar.places))
            for option in found.options:
                assert "not travelling" not in " ".join(option.why)
                if option.itinerary is None:
                    continue
                built[option.kind] += 1
                assert problems(option.itinerary, calendar.places) == []
                assert set(broken(option.itinerary, found.fixed, calendar.places)) <= missed
    assert built["tent at home"] > 5
    assert built["half-way stop"] > 20


def test_a_low_round_is_not_told_what_it_lacks(demo_store: Store) -> None:
    found = looked_at(demo_store, "Bastien", "Hartsmere")
    assert found.options
    assert all(o.itinerary is not None or o.kind == "home first" for o in found.options)


def test_ranked_by_the_order_that_is_asked(demo_store: Store) -> None:
    driver, calendar = driver_called(demo_store, "Ilse"), read_calendar(demo_store)
    given = find_round(calendar, "14", now(demo_store))
    for order in ORDERS:
        found = arrival(demo_store, driver, given, order=order)
        fits = [o.feasible for o in found.options]
        assert fits == sorted(fits, reverse=True)
        values = [
            {
                "fewest nights away": o.costs.nights_away,
                "fewest flights": o.costs.flights,
                "least travel": o.costs.travel_h,
                "most SpO2 on race morning": -o.outlook.race_spo2_pct.mean,
            }[order]
            for o in found.options
            if o.feasible and o.costs and o.outlook
        ]
        assert values == sorted(values)
        assert len(set(values)) > 1


def test_limits_and_order_are_kept_for_every_plan(demo_store: Store) -> None:
    asked = replace(season_limits(demo_store), lowest_race_spo2_pct=92.0, most_nights_away=5)
    keep_asked(demo_store, asked, "fewest flights", by="coach")
    assert season_limits(demo_store) == asked
    found = looked_at(demo_store, "Ilse", "Talquime")
    assert (found.limits, found.order) == (asked, "fewest flights")
    with pytest.raises(InputError, match="Lowest SpO2 wanted"):
        keep_asked(demo_store, replace(asked, lowest_race_spo2_pct=3.0), "fewest flights", by="coach")
    assert season_limits(demo_store) == asked


def test_the_next_high_round_has_not_begun(demo_store: Store) -> None:
    calendar, at = read_calendar(demo_store), now(demo_store)
    coming = next_high_round(calendar, at)
    assert coming is not None
    assert coming.name == "Sumaqara Round"
    late = next_high_round(calendar, at + timedelta(days=200))
    assert late is not None
    assert late.name == "Kestrelrand Round"  # the last high one, when none is ahead


@pytest.mark.parametrize("asked", ["10", "Talquime Round", "talquime", "  TALQ "])
def test_a_round_by_number_name_or_beginning(demo_store: Store, asked: str) -> None:
    assert find_round(read_calendar(demo_store), asked, now(demo_store)).number == 10


@pytest.mark.parametrize(
    ("asked", "error", "words"),
    [
        ("99", NotFoundError, "there is no round '99'"),
        ("", NotFoundError, "there is no round"),
        ("T", InputError, "one round; it fits Tsukigane Round, Talquime Round"),
    ],
)
def test_a_round_that_is_not_there_or_not_clear(
    demo_store: Store, asked: str, error: type[Exception], words: str
) -> None:
    with pytest.raises(error, match=words):
        find_round(read_calendar(demo_store), asked, now(demo_store))


def test_looking_writes_nothing(demo_store: Store) -> None:
    before = demo_store.version(), everything(demo_store), demo_store.change_sets()
    for asked in ("Talquime", "Sumaqara"):
        found = looked_at(demo_store, "Tomé", asked)
        for option in found.options:
            plan_days(found, option)
            refused(found, option)
            choices(demo_store, found.driver, found.round)
    assert (demo_store.version(), everything(demo_store), demo_store.change_sets()) == before


# Days ---------------------------------------------------------------------------------------------------


def test_the_days_of_a_way(demo_store: Store) -> None:
    found = looked_at(demo_store, "Bastien", "Sumaqara")
    option = next(
        o for o in found.options if o.title == "home first, arrive the day before the first session"
    )
    days = plan_days(found, option)
    assert [d.day for d in days] == [days[0].day + timedelta(days=i) for i in range(len(days))]
    assert (days[0].day.isoformat(), days[-1].day.isoformat()) == ("2026-07-29", "2026-08-09")
    assert option.outlook is not None
    last = days[-1]
    assert last.woke_in == found.venue
    # Beds at 2 900 m, track at 3 200 m, sessions from Friday to Sunday: the demo's own figures.
    assert [d.track_m for d in days[-4:]] == [None, 3200.0, 3200.0, 3200.0]
    assert last.bed_m == 2900.0
    assert last.expected is not None
    # On waking at the beds the reading is higher than an hour or two later at the track.
    assert 0.0 < last.expected.mean - option.outlook.race_spo2_pct.mean < 3.0
    assert last.expected.low < last.expected.mean < last.expected.high
    assert sum(len(d.legs) for d in days) == 2
    shown = {d.day: d.light for d in days if d.light is not None}
    assert {light.day: light for light in option.outlook.light}.items() <= shown.items()
    assert days[0].is_quiet is False
    assert any(d.is_quiet for d in days)
    # Leaving before the usual time of waking, the reading comes before the door and not in the cabin.
    assert days[0].expected is not None
    assert days[0].expected.mean > 96.0


def test_a_way_that_cannot_be_built_has_no_days(demo_store: Store) -> None:
    found = looked_at(demo_store, "Bastien", "Sumaqara")
    tent = next(o for o in found.options if o.kind == "tent at home")
    assert plan_days(found, tent) == []
    assert found.arrives_on(tent) is None


# Rounds ahead -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("at", "earliest"),
    [
        ("2026-08-03T12:00:00+00:00", "2026-08-04"),  # at home since 29 July, by the demo's plan
        ("2026-07-29T07:00:00+00:00", "2026-07-30"),  # in the air on the way home until that noon
    ],
)
def test_a_round_ahead_is_planned_from_now_on(demo_store: Store, at: str, earliest: str) -> None:
    """What has been is no longer to be chosen: every way leaves the past as it was."""
    demo_store.set_setting(FROZEN_CLOCK, at)
    found = looked_at(demo_store, "Bastien", "Sumaqara", NO_LIMITS)
    assert not found.in_hindsight
    built = [o for o in found.options if o.itinerary is not None]
    assert len(built) > 4
    for option in built:
        assert option.itinerary is not None
        assert [e for e in option.itinerary.entries if ends_at(e) <= now(demo_store)] == [
            e for e in found.planned.entries if ends_at(e) <= now(demo_store)
        ]
        assert all(leg.id or leg.depart_at >= now(demo_store) for leg in option.itinerary.legs)
    arrivals = [found.arrives_on(o) for o in built]
    assert min(day for day in arrivals if day).isoformat() == earliest


def test_a_driver_who_is_there_already_is_shown_what_is_left(demo_store: Store) -> None:
    demo_store.set_setting(FROZEN_CLOCK, "2026-06-05T03:00:00+00:00")  # the evening before the first session
    found = looked_at(demo_store, "Bastien", "Talquime", NO_LIMITS)
    assert [o.kind for o in found.options if o.feasible] == ["usual plan"]


# Beginnings ---------------------------------------------------------------------------------------------


def test_a_driver_with_nothing_planned_gets_a_whole_itinerary(demo_store: Store) -> None:
    home = next(p for p in demo_store.all(Place) if p.name == "Vessaly")
    driver = demo_store.add(Driver("Nova Nobody", "woman", home.id, 60.0, 168.0), by="coach")
    given = next(r for r in demo_store.all(Round) if r.name == "Wenchara Round")
    found = arrival(demo_store, driver, given)
    assert found.planned.entries == ()
    assert not any(is_planned(found, o) for o in found.options)
    made = choose(demo_store, found, found.options[0], by="coach")
    after = read_calendar(demo_store).itinerary_of(driver)
    assert problems(after, found.setting.places) == []
    assert [e.place_id for e in after.stays] == [home.id, given.place_id, home.id]
    undo(demo_store, made, by="coach")
    assert read_calendar(demo_store).itinerary_of(driver).entries == ()


@pytest.mark.parametrize("asked", ["Kestrelrand Round", "Azambria Round", "Talquime Round"])
def test_rounds_outside_of_what_is_planned_can_be_reached_too(demo_store: Store, asked: str) -> None:
    """One round planned alone in September; then one just after, one long after, one long before it."""
    home = next(p for p in demo_store.all(Place) if p.name == "Vessaly")
    demo_store.set_setting(FROZEN_CLOCK, "2026-01-10T12:00:00+00:00")
    driver = demo_store.add(Driver("Nova Nobody", "woman", home.id, 60.0, 168.0), by="coach")
    for name in ("Wenchara Round", asked):
        given = next(r for r in demo_store.all(Round) if r.name == name)
        found = arrival(demo_store, driver, given)
        choose(demo_store, found, found.options[0], by="coach")
        calendar = read_calendar(demo_store)
        after = calendar.itinerary_of(driver)
        assert problems(after, calendar.places) == []
        there = after.entries[after.index_at(calendar.starts_at(given)) or 0]
        assert isinstance(there, Stay)
        assert there.place_id == given.place_id


def test_stays_without_legs_have_days_without_light(demo_store: Store) -> None:
    """As a file of stays alone leaves it: nothing is known to have moved the body clock."""
    home = next(p for p in demo_store.all(Place) if p.name == "Vessaly")
    driver = demo_store.add(Driver("Nova Nobody", "woman", home.id, 60.0, 168.0), by="coach")
    given = next(r for r in demo_store.all(Round) if r.name == "Wenchara Round")
    start = read_calendar(demo_store).starts_at(given)
    demo_store.add(
        Stay(driver.id, given.place_id, start - timedelta(days=9), start + timedelta(days=4)), by="coach"
    )
    found = arrival(demo_store, driver, given)
    [planned] = [o for o in found.options if is_planned(found, o)]
    days = plan_days(found, planned)
    assert len(days) > 9
    assert [d.light for d in days] == [None] * len(days)
    assert all(d.expected is not None for d in days)
