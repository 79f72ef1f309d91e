"""A way to a round becomes the plan: what a choice changes, what is refused, what is put back."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from datetime import UTC, datetime, timedelta

import pytest
from arrival_on_the_demo import NO_LIMITS, another, cost_of, driver_called, everything, looked_at, row_of

from planner.errors import InputError, StoreError
from planner.monitoring.model import Reading
from planner.season.itinerary import Itinerary, ends_at, problems, starts_at
from planner.season.model import Commitment, Leg, Place, Stay
from planner.services.arrival import (
    Arrival,
)
from planner.services.arrival_choice import (
    ascent_failures,
    ascent_reason_kept,
    choices,
    choose,
    is_planned,
    refused,
    undo,
)
from planner.services.calendars import driver_calendar
from planner.services.driver import driver_view
from planner.services.season import read_calendar
from planner.services.workspace import now
from planner.store.store import Store

# Choosing -----------------------------------------------------------------------------------------------


def test_choosing_changes_season_driver_and_this_morning(demo_store: Store) -> None:
    """The round has begun: planning in hindsight corrects what is past, and the screens follow."""
    found = looked_at(demo_store, "Bastien", "Talquime")
    assert found.in_hindsight
    row, cost, view = (
        row_of(demo_store, "Bastien"),
        cost_of(demo_store, found),
        driver_view(demo_store, read_calendar(demo_store), found.driver, now(demo_store)),
    )
    option = next(o for o in found.options if o.title.startswith("go as early as the gap allows"))
    choose(demo_store, found, option, by="coach")

    after = driver_view(demo_store, read_calendar(demo_store), found.driver, now(demo_store))
    assert after.beds != view.beds
    assert after.expected_now.mean_pct != view.expected_now.mean_pct
    assert after.expected_now.words == "for him on day 6"  # Monday is day 1, the demo stands on Saturday
    assert row_of(demo_store, "Bastien").where.arrived_at == option.arrives_at(found.point)
    assert row_of(demo_store, "Bastien").expected.words != row.expected.words
    assert row_of(demo_store, "Bastien").expected.low_pct != row.expected.low_pct
    now_given = cost_of(demo_store, found)
    assert now_given.nights_there == cost.nights_there + 3
    assert now_given.outlook is not None
    assert option.outlook is not None
    # The same chain, with what readings teach along the new course.
    assert now_given.outlook.race_capacity_pct.mean == pytest.approx(option.outlook.race_capacity_pct.mean)
    assert now_given.outlook.race_spo2_pct.mean == pytest.approx(option.outlook.race_spo2_pct.mean, abs=1.0)


def test_undo_puts_back_exactly_what_was_planned(demo_store: Store) -> None:
    before, row = everything(demo_store), row_of(demo_store, "Bastien")
    found = looked_at(demo_store, "Bastien", "Talquime")
    first = choose(demo_store, found, another(found), by="coach")
    between = everything(demo_store)
    again = looked_at(demo_store, "Bastien", "Talquime")
    second = choose(demo_store, again, another(again), by="assistant")
    assert choices(demo_store, found.driver, found.round) == [second, first]
    assert choices(demo_store, driver_called(demo_store, "Ilse"), found.round) == []

    undo(demo_store, second, by="coach")
    assert everything(demo_store) == between
    assert choices(demo_store, found.driver, found.round) == [first]
    undo(demo_store, first, by="coach")
    assert everything(demo_store) == before
    assert row_of(demo_store, "Bastien") == row
    assert choices(demo_store, found.driver, found.round) == []
    with pytest.raises(StoreError, match="undone already"):
        undo(demo_store, first, by="coach")
    assert demo_store.check() == []


def entries(itinerary: Itinerary, keep: Iterable[Stay | Leg]) -> list[Stay | Leg]:
    kept = set(keep)
    return [each for each in itinerary.entries if each in kept]


@pytest.mark.parametrize("asked", ["Talquime", "Sumaqara", "Wenchara"])
def test_only_the_stretch_before_the_round_is_written_anew(demo_store: Store, asked: str) -> None:
    found = looked_at(demo_store, "Tomé", asked)
    others = [s for s in demo_store.all(Stay) if s.driver_id != found.driver.id]
    choose(demo_store, found, another(found), by="coach")
    after = read_calendar(demo_store).itinerary_of(found.driver)
    untouched = [
        each
        for each in found.planned.entries
        if ends_at(each) < found.gap.free_from or starts_at(each) > found.point.race_at
    ]
    assert len(untouched) > 20
    assert entries(after, untouched) == untouched
    assert problems(after, found.setting.places) == []
    assert [s for s in demo_store.all(Stay) if s.driver_id != found.driver.id] == others
    assert len(demo_store.change_sets()) == 2  # the demo's and this one
    assert demo_store.change_sets(1)[0].why.startswith(f"{found.driver.name} to {found.round.name}: ")


def test_what_is_chosen_is_what_is_planned_then(demo_store: Store) -> None:
    found = looked_at(demo_store, "Ilse", "Sumaqara")
    option = another(found)
    choose(demo_store, found, option, by="coach")
    after = looked_at(demo_store, "Ilse", "Sumaqara")
    [planned] = [o for o in after.options if is_planned(after, o)]
    assert planned.kind == "usual plan"
    assert after.arrives_on(planned) == found.arrives_on(option)
    assert planned.costs == option.costs
    with pytest.raises(InputError, match="another one than what is planned already"):
        choose(demo_store, after, planned, by="coach")


def move_a_bed(store: Store, found: Arrival) -> None:
    store.change(replace(found.planned.stays[0], bed_elevation_m=50.0), by="assistant")


def add_a_commitment(store: Store, found: Arrival) -> None:
    at = datetime(2026, 11, 20, 9, tzinfo=UTC)
    store.add(
        Commitment(found.driver.id, "filming", found.venue.id, at, at + timedelta(hours=3)), by="assistant"
    )


def forbid_high_beds(store: Store, found: Arrival) -> None:
    store.change(replace(found.driver, highest_bed_elevation_m=1000.0), by="physician")


def correct_a_place(store: Store, found: Arrival) -> None:
    store.change(replace(found.venue, bed_elevation_m=2400.0), by="assistant")


@pytest.mark.parametrize("happening", [move_a_bed, add_a_commitment, forbid_high_beds, correct_a_place])
def test_a_choice_from_a_season_that_is_no_more_is_refused(demo_store: Store, happening) -> None:  # type: ignore[no-untyped-def]
    found = looked_at(demo_store, "Ilse", "Talquime")
    happening(demo_store, found)
    before = demo_store.version(), everything(demo_store)
    with pytest.raises(StoreError, match="the season has changed since the ways to Talquime Round"):
        choose(demo_store, found, another(found), by="coach")
    assert (demo_store.version(), everything(demo_store)) == before
    assert choices(demo_store, found.driver, found.round) == []


def test_a_reading_in_between_does_not_stand_in_the_way(demo_store: Store) -> None:
    found = looked_at(demo_store, "Ilse", "Sumaqara")
    demo_store.add(Reading(found.driver.id, found.venue.id, now(demo_store), 92.0), by="Ilse Varnholt")
    choose(demo_store, found, another(found), by="coach")
    assert len(choices(demo_store, found.driver, found.round)) == 1


def test_a_way_that_something_stands_against_is_refused(demo_store: Store) -> None:
    found = looked_at(demo_store, "Bastien", "Talquime")
    before = demo_store.version()
    late = next(o for o in found.options if o.kind == "the morning itself")
    with pytest.raises(InputError, match="from landing to the first session"):
        choose(demo_store, found, late, by="coach")
    tent = next(o for o in found.options if o.kind == "tent at home")
    with pytest.raises(InputError, match="no physician's note"):
        choose(demo_store, found, tent, by="coach", ascent_reason="because")
    assert demo_store.version() == before


def test_a_write_that_fails_leaves_everything(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    found = looked_at(demo_store, "Ilse", "Talquime")
    before = demo_store.version(), everything(demo_store)

    def fails(*given: object, **named: object) -> None:
        raise StoreError("the disk is full")

    monkeypatch.setattr(Store, "add_all", fails)
    with pytest.raises(StoreError, match="the disk is full"):
        choose(demo_store, found, another(found), by="coach")
    assert (demo_store.version(), everything(demo_store)) == before


# The ascent rule ----------------------------------------------------------------------------------------


@pytest.fixture
def high_store(demo_store: Store) -> Store:
    """The demo with the beds of one venue at 3 700 m: one night from low ground gains 700 m above 3 000 m."""
    place = next(p for p in demo_store.all(Place) if p.name == "Sumaqara")
    demo_store.change(replace(place, bed_elevation_m=3700.0), by="coach")
    return demo_store


def test_above_3000_m_the_rule_holds_unless_a_reason_is_kept(high_store: Store) -> None:
    """At most 500 m a night above 3 000 m (published: Wilderness Medical Society 2024)."""
    found = looked_at(high_store, "Bastien", "Sumaqara", NO_LIMITS)
    assert found.options
    assert not any(o.feasible and o.outlook and o.outlook.ascent_warnings for o in found.options)
    option = next(o for o in found.options if o.title == "home first, arrive 4 days before the first session")
    assert ascent_failures(found, option) == list(option.why)
    assert "700 m higher than the night before" in option.why[0]
    for nothing in ("", "   "):
        with pytest.raises(InputError, match="Too fast an ascent"):
            choose(high_store, found, option, by="coach", ascent_reason=nothing)
    with pytest.raises(InputError, match="at most 300 characters"):
        choose(high_store, found, option, by="coach", ascent_reason="x" * 301)
    assert refused(found, option, "agreed with the physician") == []
    made = choose(high_store, found, option, by="coach", ascent_reason="agreed  with the physician, 3 June")

    given, calendar = found.round, read_calendar(high_store)
    reason = "agreed with the physician, 3 June"
    assert made.ascent_reason == reason
    assert ascent_reason_kept(high_store, calendar, found.driver, given) == reason
    assert high_store.change_sets(1)[0].why.endswith(f"ascent rule set aside: {reason}")
    # The file that the driver is sent says it too; its long lines are folded.
    sent = driver_calendar(high_store, found.driver).decode().replace("\r\n ", "").replace("\\,", ",")
    assert f"ascent rule above 3 000 m set aside: {reason}" in sent
    undo(high_store, made, by="coach")
    assert ascent_reason_kept(high_store, read_calendar(high_store), found.driver, given) == ""


def test_a_reason_is_not_kept_where_the_rule_holds(demo_store: Store) -> None:
    found = looked_at(demo_store, "Ilse", "Sumaqara")
    made = choose(demo_store, found, another(found), by="coach", ascent_reason="not needed")
    assert made.ascent_reason == ""
    assert "set aside" not in demo_store.change_sets(1)[0].why
    assert ascent_reason_kept(demo_store, read_calendar(demo_store), found.driver, found.round) == ""


def test_a_reason_excuses_the_ascent_and_nothing_else(high_store: Store) -> None:
    driver = driver_called(high_store, "Bastien")
    high_store.change(replace(driver, highest_bed_elevation_m=3000.0), by="physician")
    found = looked_at(high_store, "Bastien", "Sumaqara", replace(NO_LIMITS, most_nights_away=2))
    option = next(o for o in found.options if o.title == "home first, arrive 4 days before the first session")
    left = " ".join(refused(found, option, "agreed"))
    assert "no higher than 3000 m" in left
    assert "at most 2 are asked" in left
    assert "Too fast an ascent" not in left
