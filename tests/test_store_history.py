"""Corrections keep the old value, removing is recoverable, a change set is one thing and can be undone."""

from __future__ import annotations

import random
from dataclasses import replace
from datetime import UTC, datetime
from typing import Any

import pytest
from store_records import BY, HIGH, HOME, at, content, keep_every_kind, some_readings, with_team

from planner.errors import InputError, NotFoundError, PlannerError, StoreError
from planner.hydration.model import CockpitConditions, MorningMark, Weighing
from planner.monitoring.model import Notice, Reading, SickPeriod
from planner.season.model import Commitment, Driver, Leg, Place, PressureMeasurement, Round, Session, Stay
from planner.store.store import Store


def fields_of(record: Any) -> dict[str, Any]:
    return {name: value for name, value in vars(record).items() if name != "id"}


def undo_last(store: Store, by: str = BY) -> None:
    last = store.last_change_set()
    assert last is not None
    store.undo(last.id, by=by)


# Corrections ----------------------------------------------------------------------------------------------


def test_a_correction_keeps_the_old_value_with_who_when_and_why(store: Store) -> None:
    home, driver = with_team(store)
    before = datetime.now(UTC)
    typed = store.add(Reading(driver.id, home.id, at(1), 69.0), by="Ada", why="morning")
    corrected = store.change(replace(typed, spo2_pct=96.0), by="coach", why="typing error")
    added, changed = store.changes(Reading, typed.id)
    assert (added.action, added.by, added.why) == ("add", "Ada", "morning")
    assert added.before is None
    assert added.after == fields_of(typed)
    assert (changed.action, changed.by, changed.why) == ("change", "coach", "typing error")
    assert changed.before == fields_of(typed)
    assert changed.after == fields_of(corrected)
    assert before <= added.at <= changed.at <= datetime.now(UTC)
    assert added.change_set_id < changed.change_set_id
    assert store.changed_ids(Reading) == {typed.id}


def test_changes_of_every_kind_give_back_the_fields_themselves(store: Store) -> None:
    """Instants, dates, tuples and numbers come out of the log as they went into the record."""
    for record in keep_every_kind(store):
        (added,) = store.changes(type(record), record.id)
        assert added.after == fields_of(record)
        store.change(replace(record, **other_value(record)), by=BY)
        _, changed = store.changes(type(record), record.id)
        assert changed.before == fields_of(record)


def other_value(record: Any) -> dict[str, Any]:
    """Another value for one field of any kind of record."""
    for field in ("name", "entered_by", "note", "typed"):
        if hasattr(record, field):
            return {field: f"Changed {record.id}"}
    number = {"Stay": "bed_elevation_m", "Leg": "cabin_altitude_m", "CockpitConditions": "air_speed_m_s"}
    return {number[type(record).__name__]: 2.0}


def test_a_change_that_changes_nothing_is_not_logged(store: Store) -> None:
    home, _ = with_team(store)
    version, sets = store.version(), store.change_sets()
    assert store.change(home, by=BY) == home
    assert len(store.changes(Place, home.id)) == 1
    assert (store.version(), store.change_sets()) == (version, sets)


def test_a_chain_of_changes_reads_as_it_happened(store: Store) -> None:
    home = store.add(HOME, by=BY)
    for elevation in (20.0, 30.0, 40.0):
        home = store.change(replace(home, bed_elevation_m=elevation), by=BY)
    store.remove(home, by=BY)
    store.restore(Place, home.id, by=BY)
    store.change(replace(home, bed_elevation_m=50.0), by=BY)
    shown = [
        (
            change.action,
            change.before and change.before["bed_elevation_m"],
            change.after and change.after["bed_elevation_m"],
        )
        for change in store.changes(Place, home.id)
    ]
    assert shown == [
        ("add", None, 15.5),
        ("change", 15.5, 20.0),
        ("change", 20.0, 30.0),
        ("change", 30.0, 40.0),
        ("remove", 40.0, None),
        ("restore", None, 40.0),
        ("change", 40.0, 50.0),
    ]


# Removing and restoring -----------------------------------------------------------------------------------


def test_removed_records_are_hidden_and_come_back(store: Store) -> None:
    home, driver = with_team(store)
    reading, other = store.add_all(some_readings(driver, home, 2), by=BY)
    store.remove(reading, by=BY, why="wrong driver")
    assert store.all(Reading) == [other]
    assert store.all(Reading, include_removed=True) == [reading, other]
    assert store.readings() == [other]
    assert store.reading_columns()["id"].tolist() == [other.id]
    with pytest.raises(NotFoundError, match=r"^there is no Reading 1$"):
        store.get(Reading, reading.id)
    for write in (
        lambda: store.remove(reading, by=BY),
        lambda: store.change(replace(reading, spo2_pct=95.0), by=BY),
    ):
        with pytest.raises(NotFoundError, match="reading 1 has been removed; restore it first"):
            write()
    assert store.restore(Reading, reading.id, by=BY) == reading
    assert store.readings() == [reading, other]
    with pytest.raises(StoreError, match="reading 1 is not removed"):
        store.restore(Reading, reading.id, by=BY)
    assert [change.action for change in store.changes(Reading, reading.id)] == ["add", "remove", "restore"]


def test_what_never_was_cannot_be_changed_removed_or_restored(store: Store) -> None:
    home, driver = with_team(store)
    ghost = Reading(driver.id, home.id, at(1), 95.0, id=41)
    for write in (
        lambda: store.change(ghost, by=BY),
        lambda: store.remove(ghost, by=BY),
        lambda: store.restore(Reading, 41, by=BY),
    ):
        with pytest.raises(NotFoundError, match=r"^there is no reading 41$"):
            write()


def test_a_driver_goes_and_comes_back_with_everything_of_theirs(store: Store) -> None:
    keep_every_kind(store)
    before = content(store)
    early = store.all(Reading)[0]
    home, driver = store.get(Place, 1), store.get(Driver, 1)
    removed_before = store.add(Reading(driver.id, home.id, at(20), 97.0), by=BY)
    store.remove(removed_before, by=BY)
    store.remove(driver, by=BY)
    of_driver = (Driver, Commitment, Stay, Leg, Reading, SickPeriod, Notice, Weighing, MorningMark)
    for kind in of_driver:
        assert store.all(kind) == [], kind.__name__
    for kind in (Place, Round, Session, PressureMeasurement, CockpitConditions):
        assert store.all(kind) == before[kind.__name__]
    with pytest.raises(StoreError, match=r"it would leave 1 reading refers to a removed driver by driver_id"):
        store.restore(Reading, early.id, by=BY)
    assert store.check() == []
    store.restore(Driver, driver.id, by=BY)
    assert content(store) == before, "what had been removed on its own stays removed"
    assert store.check() == []


def test_a_place_in_use_cannot_be_removed(store: Store) -> None:
    keep_every_kind(store)
    before = content(store)
    with pytest.raises(
        StoreError, match=r"^this place cannot be removed: 1 driver refers to it by home_place_id"
    ):
        store.remove(store.get(Place, 1), by=BY)
    with pytest.raises(StoreError, match=r"^this place cannot be removed: 1 round refers to it by place_id"):
        store.remove(store.get(Place, 2), by=BY)
    with pytest.raises(StoreError, match=r"^this round cannot be removed|^this session cannot be removed"):
        store.remove(store.get(Round, 1), by=BY)  # its session has a weighing
    assert content(store) == before


def test_a_round_goes_with_its_sessions_and_their_conditions(store: Store) -> None:
    keep_every_kind(store)
    weighing = store.get(Weighing, 1)
    store.change(replace(weighing, session_id=None), by=BY)
    before = content(store)
    store.remove(store.get(Round, 1), by=BY)
    assert (store.all(Round), store.all(Session), store.all(CockpitConditions)) == ([], [], [])
    with pytest.raises(StoreError, match="removed round"):
        store.restore(Session, 1, by=BY)
    store.restore(Round, 1, by=BY)
    assert content(store) == before


# Change sets ----------------------------------------------------------------------------------------------


def test_a_transaction_is_one_change_set(store: Store) -> None:
    with store.transaction("coach", "a new driver") as change_set_id:
        home = store.add(HOME, by="coach")
        assert store.get(Place, home.id) == home, "reading inside sees what was written"
        high = store.add(HIGH, by="coach", why="seen on the map")
        store.change(replace(high, bed_elevation_m=2300.0), by="coach")
        store.set_setting("units", "metric")
    assert [each.id for each in store.change_sets()] == [change_set_id]
    for place, why in ((home, "a new driver"), (high, "seen on the map")):
        change = store.changes(Place, place.id)[0]
        assert (change.change_set_id, change.by, change.why) == (change_set_id, "coach", why)


def test_a_transaction_that_fails_leaves_nothing(store: Store) -> None:
    home = store.add(HOME, by=BY)
    version, before = store.version(), content(store)

    class StoppedError(BaseException):
        """As a page's script is stopped from outside."""

    def write_and(stop: type[BaseException]) -> None:
        with store.transaction(BY):
            store.add(HIGH, by=BY)
            store.change(replace(home, bed_elevation_m=99.0), by=BY)
            store.set_setting("units", "feet")
            raise stop

    for stop in (RuntimeError, StoppedError):
        with pytest.raises(stop):
            write_and(stop)
        assert content(store) == before
        assert store.version() == version
        assert store.setting("units") is None
        assert len(store.change_sets()) == 1
    store.add(HIGH, by=BY)  # the thread is free to write again


def test_a_refused_write_inside_leaves_the_rest_standing(store: Store) -> None:
    home, driver = with_team(store)
    with store.transaction(BY):
        good = store.add(Reading(driver.id, home.id, at(1), 96.0), by=BY)
        twice = [Reading(driver.id, home.id, at(2), 96.0), Reading(driver.id, home.id, at(1), 96.0)]
        with pytest.raises(InputError, match="a reading that is not there already"):
            store.add_all(twice, by=BY)
    assert store.readings() == [good]


def test_transactions_inside_transactions_join(store: Store) -> None:
    with store.transaction(BY, "outer") as outer:
        home = store.add(HOME, by=BY)
        with store.transaction(BY, "inner") as inner:
            store.add(HIGH, by=BY)
        assert inner == outer
        with pytest.raises(InputError, match=r"^by: 'somebody' .* Tester, who began this transaction"):
            store.change(home, by="somebody")
        with pytest.raises(StoreError, match="an undo is a change set of its own"):
            store.undo(outer, by=BY)
    assert len(store.all(Place)) == 2
    assert len(store.change_sets()) == 1


def test_an_empty_transaction_leaves_no_trace(store: Store) -> None:
    with store.transaction(BY, "nothing"):
        pass
    assert store.change_sets() == []
    assert store.version() == 1
    with store.transaction(BY, "a setting alone"):
        store.set_setting("units", "feet")
    assert store.change_sets() == []
    assert store.version() == 2


# Undoing --------------------------------------------------------------------------------------------------


def test_undo_takes_back_adding_changing_removing_and_restoring_at_once(store: Store) -> None:
    home, driver = with_team(store)
    kept, gone = store.add_all(some_readings(driver, home, 2), by=BY)
    store.remove(gone, by=BY)
    before = content(store)
    with store.transaction("coach", "a muddle") as muddle:
        store.add(HIGH, by="coach")
        store.change(replace(kept, spo2_pct=50.0), by="coach")
        store.change(replace(kept, spo2_pct=51.0, driver_id=driver.id), by="coach")
        store.restore(Reading, gone.id, by="coach")
        added = store.add(Notice(driver.id, at(1), "note", "x"), by="coach")
        store.remove(added, by="coach")
        store.remove(kept, by="coach")
    after = content(store)
    undone = store.undo(muddle, by="coach")
    assert content(store) == before
    assert (undone.undoes, undone.by, undone.why) == (muddle, "coach", f"undo of change set {muddle}")
    assert [c.action for c in store.changes(Reading, kept.id)][-2:] == ["restore", "change"]
    store.undo(undone.id, by="coach")
    assert content(store) == after
    assert store.check() == []


def test_undo_refuses_when_something_newer_touched_a_record(store: Store) -> None:
    home, driver = with_team(store)
    reading, other = store.add_all(some_readings(driver, home, 2), by="Ada")
    first = store.last_change_set()
    assert first is not None
    store.change(replace(reading, spo2_pct=95.0), by="physician")
    before = content(store)
    refusal = (
        rf"^change set {first.id} cannot be undone: physician changed the same record on \d{{4}}-\d\d-\d\d"
    )
    with pytest.raises(StoreError, match=refusal):
        store.undo(first.id, by="Ada")
    assert content(store) == before
    undo_last(store)
    store.undo(first.id, by="Ada")
    assert store.readings() == []
    assert other.id not in {r.id for r in store.readings()}


def test_undo_refuses_what_was_undone_already_and_what_never_was(store: Store) -> None:
    store.add(HOME, by=BY)
    first = store.last_change_set()
    assert first is not None
    undo = store.undo(first.id, by=BY)
    with pytest.raises(StoreError, match=rf"^change set {first.id} has been undone already$"):
        store.undo(first.id, by=BY)
    store.undo(undo.id, by=BY)  # redo
    assert len(store.all(Place)) == 1
    store.undo(first.id, by=BY)
    assert store.all(Place) == []
    with pytest.raises(NotFoundError, match=r"^there is no change set 77$"):
        store.undo(77, by=BY)


def test_undo_refuses_when_newer_records_refer_to_what_would_go(store: Store) -> None:
    home = store.add(HOME, by=BY)
    first = store.last_change_set()
    assert first is not None
    store.add(Round(1, "Round", home.id), by="coach")
    with pytest.raises(StoreError, match="it would leave 1 round refers to a removed place by place_id"):
        store.undo(first.id, by=BY)
    assert store.all(Place) == [home]


def test_undo_refuses_when_the_name_was_given_to_another(store: Store) -> None:
    high = store.add(HIGH, by=BY)
    store.remove(high, by=BY)
    removal = store.last_change_set()
    assert removal is not None
    again = store.add(HIGH, by=BY)
    with pytest.raises(InputError, match=r"^name: 'Invented Plateau' .* a place that is not there already"):
        store.undo(removal.id, by=BY)
    assert store.all(Place) == [again]


def test_undoing_step_by_step_goes_back_through_all_that_one_person_did(store: Store) -> None:
    states = [content(store)]
    home = store.add(HOME, by="coach")
    states.append(content(store))
    store.change(replace(home, bed_elevation_m=30.0), by="coach")
    states.append(content(store))
    store.remove(home, by="coach")
    store.add(HIGH, by="physician")
    mine = 0
    while (last := store.last_change_set(by="coach")) is not None:
        store.undo(last.id, by="coach")
        mine += 1
        assert content(store)["Place"][:-1] == states[-mine]["Place"]
    assert mine == 3
    assert [place.name for place in store.all(Place)] == [HIGH.name]
    assert store.last_change_set() == store.last_change_set(by="physician")


def test_keys_held_before_survive_corrections_and_removals_but_not_an_undo(store: Store) -> None:
    home, driver = with_team(store)
    kept = store.add_all(some_readings(driver, home, 4), by=BY)
    key = ("driver_id", "taken_at")
    store.change(replace(kept[0], taken_at=at(9)), by=BY)
    store.remove(kept[1], by=BY)
    undone = store.add_all(some_readings(driver, home, 2, first=at(20)), by=BY)
    assert (driver.id, undone[0].taken_at) in store.held_before(Reading, *key)
    undo_last(store)
    assert store.held_before(Reading, *key) == {
        (driver.id, moment) for moment in (*(reading.taken_at for reading in kept), at(9))
    }
    with pytest.raises(InputError, match="a field of Reading"):
        store.held_before(Reading, "colour")


def test_any_sequence_of_writes_can_be_undone_back_to_the_start(store: Store) -> None:
    """Random writes against a plain list of snapshots: undoing them newest first visits every one of them."""
    chance = random.Random(20260514)
    home, driver = with_team(store)
    snapshots: list[tuple[int, dict[str, Any]]] = []
    while len(snapshots) < 60:
        state = content(store)
        try:
            with store.transaction(BY) as change_set_id:
                for _ in range(chance.randint(1, 4)):
                    write_something(store, chance, driver, home)
        except PlannerError:
            assert content(store) == state, "a refused change set leaves everything as it was"
            continue
        if store.change_sets(1)[0].id == change_set_id:  # something was written
            snapshots.append((change_set_id, state))
    assert store.check() == []
    for change_set_id, state in reversed(snapshots):
        store.undo(change_set_id, by=BY)
        assert content(store) == state
    assert store.check() == []


def write_something(store: Store, chance: random.Random, driver: Driver, home: Place) -> None:
    kind = chance.choice((Reading, Round, Place, Stay))
    everything = store.all(kind, include_removed=True)
    live = store.all(kind)
    removed = [record for record in everything if record not in live]
    what = chance.choice(("add", "add", "change", "remove", "restore"))
    if what == "add":
        number = len(everything) + 1
        new: dict[type, Any] = {
            Reading: Reading(driver.id, home.id, at(1 + number % 28), 60.0 + chance.randrange(40)),
            Round: Round(number, f"Round {number}", chance.choice(store.all(Place)).id),
            Place: replace(HIGH, name=f"Place {number}"),
            Stay: Stay(driver.id, chance.choice(store.all(Place)).id, at(1), at(2 + number % 27)),
        }
        store.add(new[kind], by=BY)
    elif what == "change" and live:
        record: Any = chance.choice(live)
        value = float(chance.randrange(40, 100))
        field = {Reading: "spo2_pct", Round: "number", Place: "bed_elevation_m", Stay: "bed_elevation_m"}[
            kind
        ]
        store.change(replace(record, **{field: int(value) if kind is Round else value}), by=BY)
    elif what == "remove" and live:
        store.remove(chance.choice(live), by=BY)
    elif what == "restore" and removed:
        store.restore(kind, chance.choice(removed).id, by=BY)
