"""The season search on the demo: what it finds, what it keeps, what it leaves as it was."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from planner.errors import InputError, StoreError
from planner.season.day_model import Rates
from planner.season.itinerary import broken, problems
from planner.season.model import Driver, Stay
from planner.season.search import SearchCancelledError
from planner.services.limits import keep_limits, kept_limits
from planner.services.season import read_calendar
from planner.services.season_plan import (
    Question,
    SeasonPlans,
    free_places,
    high_rounds_ahead,
    keep_plan,
    search_season,
    season_task,
)
from planner.services.workspace import now
from planner.store.store import Store


def driver_called(store: Store, name: str) -> Driver:
    return next(d for d in store.all(Driver) if d.name.startswith(name))


def question(store: Store, name: str, **changes: object) -> Question:
    places = tuple(p.id for p in free_places(read_calendar(store), driver_called(store, name)))
    return Question(**{"places": places, "most_extra_nights": 8.0, **changes})  # type: ignore[arg-type]


def found(store: Store, name: str = "Ilse", **changes: object) -> SeasonPlans:
    return search_season(store, driver_called(store, name), question(store, name, **changes))


def test_the_demo_has_a_trade_off(demo_store: Store) -> None:
    plans = found(demo_store)
    assert plans.obstacles == ()
    assert len(plans.curve.cost) >= 5
    assert (np.diff(plans.curve.cost) > 0.0).all()
    assert (np.diff(plans.mean_benefit()) > 0.0).all()
    assert plans.curve.cost[-1] <= plans.curve.cost[0] + 8.0 + 1e-9
    # Only what lies ahead counts: the demo's clock stands at the second of its five high rounds.
    assert [p.name for p in plans.points] == ["Sumaqara Round", "Wenchara Round", "Kestrelrand Round"]
    first, last = plans.outlook_of(0), plans.outlook_of(len(plans.curve.cost) - 1)
    assert first.costs.nights_away < last.costs.nights_away
    assert sum(r.race_spo2_pct.mean for r in first.rounds) < sum(r.race_spo2_pct.mean for r in last.rounds)
    changed = [s for s in plans.stretches(last.itinerary) if s.changes]
    assert changed
    assert all(" " in s.now_words for s in changed)
    assert plans.picks(4)[0] == 0
    assert plans.picks(4)[-1] == len(plans.curve.cost) - 1


def test_every_plan_keeps_every_appointment_of_every_driver(demo_store: Store) -> None:
    for driver in demo_store.all(Driver):
        plans = found(demo_store, driver.name)
        task = plans.model.task
        already = set(broken(task.itinerary, task.fixed, task.setting.places))
        for number in plans.picks(3):
            itinerary = plans.outlook_of(number).itinerary
            assert problems(itinerary, task.setting.places) == []
            assert set(broken(itinerary, task.fixed, task.setting.places)) <= already


def test_a_plan_is_kept_in_one_change_set_and_undone(demo_store: Store) -> None:
    driver = driver_called(demo_store, "Ilse")
    before = read_calendar(demo_store).itinerary_of(driver)
    plans = found(demo_store)
    change_set = keep_plan(demo_store, plans, len(plans.curve.cost) - 1, by="coach")
    after = read_calendar(demo_store).itinerary_of(driver)
    expected = plans.outlook_of(len(plans.curve.cost) - 1).itinerary
    assert [replace(e, id=0) for e in after.entries] == [replace(e, id=0) for e in expected.entries]
    assert demo_store.check() == []
    last = demo_store.last_change_set()
    assert last is not None
    assert (last.id, last.by) == (change_set, "coach")
    assert last.why.startswith("season of Ilse Varnholt")
    demo_store.undo(change_set, by="coach")
    assert read_calendar(demo_store).itinerary_of(driver) == before


def test_a_search_writes_nothing_also_when_it_is_stopped(demo_store: Store) -> None:
    version = demo_store.version()
    driver = driver_called(demo_store, "Ilse")
    shares: list[float] = []
    found(demo_store)
    with pytest.raises(SearchCancelledError, match="nothing has been changed"):
        search_season(
            demo_store, driver, question(demo_store, "Ilse"), progress=shares.append,
            cancelled=lambda: len(shares) > 5,
        )  # fmt: skip
    assert 0.0 < shares[-1] < 1.0
    assert demo_store.version() == version


def test_a_plan_from_an_older_season_is_refused(demo_store: Store) -> None:
    plans = found(demo_store)
    stay = next(s for s in demo_store.all(Stay) if s.driver_id == plans.driver.id)
    demo_store.change(replace(stay, bed_elevation_m=30.0), by="somebody")
    version = demo_store.version()
    with pytest.raises(StoreError, match="has changed since the search"):
        keep_plan(demo_store, plans, 0, by="coach")
    assert demo_store.version() == version


def test_a_round_whose_way_is_kept_stays_as_planned(demo_store: Store) -> None:
    driver = driver_called(demo_store, "Ilse")
    sumaqara = next(r for r in read_calendar(demo_store).rounds if r.name == "Sumaqara Round")
    plans = search_season(demo_store, driver, question(demo_store, "Ilse", kept_rounds=(sumaqara.id,)))
    assert len(plans.curve.cost)
    for number in plans.picks(3):
        stretches = plans.stretches(plans.outlook_of(number).itinerary)
        kept = next(s for s in stretches if s.before.name == "Sumaqara Round")
        assert kept.now_words == kept.then_words


def test_limits_of_the_coach_hold_and_what_is_in_the_way_is_named(demo_store: Store) -> None:
    ahead = high_rounds_ahead(read_calendar(demo_store), now(demo_store))
    floors = {ahead[0].id: 99.0}
    plans = found(demo_store, lowest_spo2_pct=floors)
    assert not len(plans.curve.cost)
    assert plans.obstacles == ("In the way: the lowest race-morning SpO2 at Sumaqara Round.",)
    assert plans.mean_benefit() == []
    assert plans.picks(5) == []
    keep_limits(demo_store, kept_limits(demo_store) | {"highest_risk": "low"})
    # The beds at Sumaqara lie at 2 900 m: a first night there is class moderate (published table).
    stopping = found(demo_store)
    for number in stopping.picks(3):
        assert all(r.risk == "low" for r in stopping.outlook_of(number).rounds)


def test_other_questions(demo_store: Store) -> None:
    worst = found(demo_store, combination="worst")
    sums = found(demo_store)
    assert worst.mean_benefit()[-1] <= sums.mean_benefit()[-1]
    capacity = found(demo_store, measure="capacity")
    assert all(60.0 < b < 100.0 for b in capacity.mean_benefit())
    ahead = high_rounds_ahead(read_calendar(demo_store), now(demo_store))
    only_last = found(demo_store, weights={ahead[0].id: 0.0, ahead[1].id: 0.0})
    assert only_last.mean_benefit()[0] > sums.mean_benefit()[0]  # Kestrelrand lies lowest


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"rates": Rates(flight=-1.0)}, "flight"),
        ({"rates": Rates(travel_hour=99.0)}, "travel_hour"),
        ({"weights": {1: 50.0}}, "weight"),
        ({"most_extra_nights": -1.0}, "most extra nights"),
    ],
)
def test_nonsense_is_refused(changes: dict[str, object], words: str) -> None:
    with pytest.raises(InputError, match=words):
        Question(places=(), **changes)  # type: ignore[arg-type]


def test_a_driver_without_a_plan_is_told_so(demo_store: Store) -> None:
    driver = driver_called(demo_store, "Ilse")
    new = demo_store.add(replace(driver, name="New Driver", id=0), by="coach")
    with pytest.raises(InputError, match="plan: 'New Driver'"):
        season_task(demo_store, new, Question(places=()))
