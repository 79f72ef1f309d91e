"""The Arrival page and the command `arrive`: the same ranking, a choice and its undo, what is refused."""

from __future__ import annotations

import json
from dataclasses import replace

import pytest
from screens import first_line, html_of, open_page, press, said
from streamlit.testing.v1 import AppTest

from planner.__main__ import main
from planner.season.model import Driver, Place, Round, Session, Stay
from planner.services.arrival import arrival, find_round
from planner.services.arrival_choice import ascent_reason_kept
from planner.services.limits import season_limits
from planner.services.season import read_calendar
from planner.services.workspace import FROZEN_CLOCK, choose_units, mark_begun_empty, now
from planner.store.store import Store
from planner.wording import UnitChoice

KEYS = [
    "arrive_on", "nights_away", "flights", "race_spo2_pct", "race_capacity_pct", "risk", "clock_offset_h",
    "feasible", "why",
]  # fmt: skip


@pytest.fixture
def at(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> AppTest:
    return opened(demo_store, monkeypatch)


def opened(store: Store, monkeypatch: pytest.MonkeyPatch) -> AppTest:
    monkeypatch.setenv("PLANNER_STORE", str(store.path))
    return sound(open_page("arrival"))


def sound(at: AppTest) -> AppTest:
    assert not at.exception
    assert [error.value for error in at.error] == []
    return at


def to_round(at: AppTest, store: Store, name: str) -> AppTest:
    given = next(r for r in store.all(Round) if r.name.startswith(name))
    at.selectbox(key="arrival_round").set_value(given.id)
    return sound(at.run())


def ways(at: AppTest) -> list[str]:
    return next(box for box in at.selectbox if box.label.startswith("Look at one way")).options


def look_at(at: AppTest, title: str) -> AppTest:
    box = next(box for box in at.selectbox if box.label.startswith("Look at one way"))
    index = next(i for i, option in enumerate(box.options) if title in option)
    box.select_index(index)
    return sound(at.run())


def button(at: AppTest, label: str) -> object:
    return next((each for each in at.button if each.label == label), None)


def limit(at: AppTest, label: str):  # type: ignore[no-untyped-def]
    return next(box for box in (*at.number_input, *at.selectbox) if box.label == label)


def everything(store: Store) -> tuple[list[Stay], int]:
    return store.all(Stay), store.version()


# The page -----------------------------------------------------------------------------------------------


def test_the_first_line_answers_for_the_next_high_round(at: AppTest) -> None:
    line = first_line(at)
    assert line.startswith("Bastien Corvelle to Sumaqara Round: ")
    assert "nights away" in line
    assert "% on race morning (" in line
    shown = said(at)
    assert "First session Fri 7 Aug, 11:00" in shown
    assert "after Simulator" in shown
    assert "This round has begun" not in shown
    assert len(at.get("vega_lite_chart")) == 2


def test_the_round_that_is_on_can_be_looked_at_and_corrected(at: AppTest, demo_store: Store) -> None:
    to_round(at, demo_store, "Talquime")
    shown = said(at)
    assert "after Portmerrin Round" in shown
    assert "This round has begun, so its days before are past" in shown
    for kind in ("usual plan", "straight there", "home first", "half-way stop", "the morning itself"):
        assert kind in shown
    assert "note that allows a tent." in shown
    assert "No beds lower than 2250 m are known near Talquime" in shown
    assert "seek " in shown
    assert "avoid " in shown
    assert "at the track, 2 250 m" in shown


def test_choosing_and_undoing(at: AppTest, demo_store: Store) -> None:
    to_round(at, demo_store, "Talquime")
    before = demo_store.all(Stay)
    planned_before = next(text for text in ways(at) if "the usual plan" in text)
    look_at(at, "home first, arrive 2 days before")
    sound(press(at, "Choose"))
    assert "Kept: Bastien Corvelle to Talquime Round, home first, arrive 2 days before" in said(at)
    assert "This is what is planned." in said(at)
    assert "Planned now: arriving Wed 3 Jun, 4 nights away" in said(at)
    assert demo_store.all(Stay) != before
    at.switch_page("../pages/this_morning.py").run()
    assert "for him on day 4" in said(at)  # Wednesday is day 1, the demo stands on Saturday
    to_round(sound(at.switch_page("../pages/arrival.py").run()), demo_store, "Talquime")
    sound(press(at, "Undo"))
    assert "What was planned before is back." in said(at)
    assert demo_store.all(Stay) == before
    assert next(text for text in ways(at) if "the usual plan" in text) == planned_before
    assert button(at, "Undo") is None


def test_looking_around_writes_nothing(at: AppTest, demo_store: Store) -> None:
    before = everything(demo_store)
    to_round(at, demo_store, "Wenchara")
    for i in range(len(ways(at))):
        next(box for box in at.selectbox if box.label.startswith("Look at one way")).select_index(i)
        sound(at.run())
    at.selectbox(key="driver_shown").select_index(6)
    sound(at.run())
    assert everything(demo_store) == before


def test_a_season_that_changed_meanwhile_is_not_written_over(at: AppTest, demo_store: Store) -> None:
    to_round(at, demo_store, "Talquime")
    look_at(at, "home first, arrive 2 days before")
    place = next(p for p in demo_store.all(Place) if p.name == "Talquime")
    demo_store.change(replace(place, bed_elevation_m=2300.0), by="assistant")
    before = demo_store.all(Stay)
    press(at, "Choose")
    assert not at.exception
    assert ["the season has changed since the ways" in e.value.replace("\\", "") for e in at.error] == [True]
    assert demo_store.all(Stay) == before
    # What is shown now rests on the season as it is, and can be chosen.
    sound(press(sound(at.run()), "Choose"))
    assert demo_store.all(Stay) != before


def test_a_way_that_misses_a_limit_cannot_be_chosen(at: AppTest, demo_store: Store) -> None:
    to_round(at, demo_store, "Talquime")
    look_at(at, "on the morning of the first session")
    assert "Not to be chosen: 4.0 h from landing to the first session" in said(at)
    choose = button(at, "Choose")
    assert choose is not None
    assert choose.disabled  # type: ignore[attr-defined]


def test_limits_change_what_fits_and_can_be_kept(at: AppTest, demo_store: Store) -> None:
    to_round(at, demo_store, "Talquime")
    kept = season_limits(demo_store)
    limit(at, "SpO2 at least, %").set_value(99.0)
    sound(at.run())
    assert "no way keeps every limit" in first_line(at)
    assert "at least 99 % is asked" in said(at)
    limit(at, "SpO2 at least, %").set_value(None)
    limit(at, "Nights at most").set_value(4.0)
    limit(at, "Then").set_value("most SpO2 on race morning")
    sound(at.run())
    assert "nights away, at most 4 are asked" in said(at)
    assert season_limits(demo_store) == kept
    sound(press(at, "Keep for every plan"))
    assert season_limits(demo_store) == replace(kept, most_nights_away=4)
    assert button(at, "Keep for every plan") is None
    assert limit(at, "Nights at most").value == 4.0


def test_lower_beds_are_typed_in_the_readers_unit(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    choose_units(demo_store, "coach", UnitChoice(elevation="ft"))
    at = to_round(opened(demo_store, monkeypatch), demo_store, "Talquime")
    limit(at, "Lower beds, ft").set_value(4921.26)  # computed: 1 500 m / 0.3048
    sound(at.run())
    assert any("sleep at 1500 m" in way for way in ways(at))
    look_at(at, "sleep at 1500 m")
    assert "4 921 ft" in said(at)


def test_the_ascent_rule_is_set_aside_with_a_reason_only(
    demo_store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Beds at 3 700 m: 700 m above 3 000 m in one night, at most 500 m allowed (published: WMS 2024)."""
    place = next(p for p in demo_store.all(Place) if p.name == "Sumaqara")
    demo_store.change(replace(place, bed_elevation_m=3700.0), by="coach")
    at = opened(demo_store, monkeypatch)
    limit(at, "Risk at most").set_value("high")
    limit(at, "Clock within, h").set_value(None)
    sound(at.run())
    look_at(at, "home first, arrive 4 days before")
    assert "Too fast an ascent" in said(at)
    assert button(at, "Choose").disabled  # type: ignore[attr-defined]
    [reason] = [box for box in at.text_input if box.label.startswith("Reason")]
    reason.set_value("agreed with the physician on 3 June")
    sound(at.run())
    sound(press(at, "Choose"))
    assert "The reason given: agreed with the physician on 3 June" in said(at)
    calendar = read_calendar(demo_store)
    driver = next(d for d in calendar.drivers if d.name.startswith("Bastien"))
    given = find_round(calendar, "Sumaqara", now(demo_store))
    assert ascent_reason_kept(demo_store, calendar, driver, given) == "agreed with the physician on 3 June"


def test_every_driver_and_round_of_the_demo_can_be_shown(at: AppTest, demo_store: Store) -> None:
    rounds = at.selectbox(key="arrival_round").options
    assert len(rounds) == 19
    for i in (0, 7, 15, 18):
        at.selectbox(key="driver_shown").select_index(i % 8)
        at.selectbox(key="arrival_round").select_index(i)
        sound(at.run())
        assert len(first_line(at).split()) > 4
    assert len(at.selectbox(key="driver_shown").options) == 8


# Beginnings ---------------------------------------------------------------------------------------------


def test_without_drivers_or_rounds_it_says_what_to_do(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    mark_begun_empty(store)
    assert first_line(opened(store, monkeypatch)).startswith("No drivers yet.")
    home = store.add(Place("Vallmora", "Europe/Madrid", 100.0, 100.0, 41.0, 1.5), by="coach")
    store.add(Driver("Nova Nobody", "woman", home.id, 60.0, 168.0), by="coach")
    assert first_line(opened(store, monkeypatch)).startswith("No rounds yet.")


def test_a_new_team_plans_its_first_round(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    store.set_setting(FROZEN_CLOCK, "2031-03-01T09:00:00+00:00")
    home = store.add(Place("Vallmora", "Europe/Madrid", 100.0, 100.0, 41.0, 1.5), by="coach")
    high = store.add(Place("Alto Cerro", "America/Bogota", 2250.0, 2300.0, 4.0, -74.0), by="coach")
    driver = store.add(Driver("Nova Nobody", "woman", home.id, 60.0, 168.0), by="coach")
    given = store.add(Round(1, "Cerro Round", high.id), by="coach")
    for name, kind, day in (("Practice", "practice", 18), ("Race", "race", 20)):
        start = now(store).replace(day=day, hour=15)
        store.add(Session(given.id, kind, name, start, start.replace(hour=17)), by="coach")  # type: ignore[arg-type]
    at = opened(store, monkeypatch)
    assert "Nothing is planned for this round yet." in said(at)
    look_at(at, "the usual plan")
    assert "there on the day before, and home after the round" in said(at)
    sound(press(at, "Choose"))
    stays = [stay for stay in store.all(Stay) if stay.driver_id == driver.id]
    assert [stay.place_id for stay in stays] == [home.id, high.id, home.id]
    assert "This is what is planned." in said(at)


def test_no_free_time_before_a_round_is_one_plain_line(
    demo_store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    driver = next(d for d in demo_store.all(Driver) if d.name.startswith("Bastien"))
    for stay in demo_store.all(Stay, driver_id=driver.id):
        if stay.arrive_at.month in (7, 8):
            demo_store.remove(stay, by="coach")
    monkeypatch.setenv("PLANNER_STORE", str(demo_store.path))
    at = open_page("arrival")
    assert not at.exception
    assert "no way can be worked out" in first_line(at)
    assert len(at.error) == 1
    assert "Traceback" not in at.error[0].value


# The command --------------------------------------------------------------------------------------------


def answered(capsys: pytest.CaptureFixture[str], store: Store, *command: str) -> list[dict]:
    assert main(["--store", str(store.path), "arrive", *command, "--json"]) == 0
    return json.loads(capsys.readouterr().out)


@pytest.mark.parametrize(("asked", "name"), [("10", "Talquime"), ("sumaqara", "Sumaqara")])
def test_arrive_prints_the_ranking_of_the_page(
    capsys: pytest.CaptureFixture[str],
    demo_store: Store,
    monkeypatch: pytest.MonkeyPatch,
    asked: str,
    name: str,
) -> None:
    rows = answered(capsys, demo_store, asked)
    assert all(list(row) == KEYS for row in rows)
    at = to_round(opened(demo_store, monkeypatch), demo_store, name)
    titles = [row["why"][0].split(": ")[0].lower() for row in rows if row["arrive_on"]]
    shown = [text.split(" ", 3)[-1].removesuffix(" (misses a limit)").lower() for text in ways(at)]
    assert [each.split(": ")[0] for each in shown] == titles
    driver = read_calendar(demo_store).drivers[0]
    found = arrival(demo_store, driver, find_round(read_calendar(demo_store), asked, now(demo_store)))
    for row, option in zip(rows, found.options, strict=True):
        assert row["feasible"] == option.feasible
        assert row["why"][1:] == list(option.why)
        if option.outlook and option.costs:
            assert row["nights_away"] == option.costs.nights_away
            assert row["flights"] == option.costs.flights
            assert row["race_spo2_pct"] == pytest.approx(option.outlook.race_spo2_pct.mean)
            assert row["race_capacity_pct"] == pytest.approx(option.outlook.race_capacity_pct.mean)
            assert row["clock_offset_h"] == pytest.approx(option.outlook.clock_offset_h)
            assert row["risk"] == option.outlook.risk
            assert row["arrive_on"] == str(found.arrives_on(option))
        else:
            assert [row[key] for key in KEYS[:7]] == [None] * 7
    assert any("gives and costs" in body for body in html_of(at))


def test_arrive_for_another_driver_as_a_table(capsys: pytest.CaptureFixture[str], demo_store: Store) -> None:
    assert main(["--store", str(demo_store.path), "arrive", "10", "--driver", "Tomé"]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert lines[0].split() == KEYS
    assert "Tomé Ariquara to Talquime Round: " in lines[-1]
    assert "fewest nights away" in lines[-1]
    assert any("Tent nights at home" in line and "  yes  " in line for line in lines)


@pytest.mark.parametrize(
    ("command", "words"),
    [
        (("99",), "there is no round '99'; rounds: Marrowhead Round"),
        (("t",), "expected one round; it fits Tsukigane Round, Talquime Round"),
        (("10", "--driver", "Nobody"), "driver 'Nobody' is not known: Bastien Corvelle"),
    ],
)
def test_arrive_for_nobody_or_nowhere(
    capsys: pytest.CaptureFixture[str], demo_store: Store, command: tuple[str, ...], words: str
) -> None:
    assert main(["--store", str(demo_store.path), "arrive", *command]) == 2
    captured = capsys.readouterr()
    assert captured.out == ""
    assert captured.err.count("\n") == 1
    assert words in captured.err


def test_arrive_in_an_empty_store(capsys: pytest.CaptureFixture[str], store: Store) -> None:
    assert main(["--store", str(store.path), "arrive", "1"]) == 2
    assert "there are no drivers yet" in capsys.readouterr().err
