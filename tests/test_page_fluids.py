"""The Fluids page without a browser: with the demo season, with an own team, in other units."""

from __future__ import annotations

from datetime import timedelta

import pytest
from screens import first_line, html_of, open_page, press, said
from streamlit.testing.v1 import AppTest

from planner.hydration.model import CockpitConditions, MorningMark, Weighing
from planner.season.model import Driver, Place
from planner.services.cockpit import worn_ensemble
from planner.services.workspace import choose_units, last_name, mark_begun_empty, now
from planner.store.store import Store
from planner.wording import UnitChoice


@pytest.fixture
def page(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> AppTest:
    monkeypatch.setenv("PLANNER_STORE", str(demo_store.path))
    return opened()


def opened() -> AppTest:
    at = open_page("fluids")
    assert not at.exception
    assert not at.error
    return at


def part(at: AppTest, name: str) -> AppTest:
    at.button_group(key="fluids_part").set_value(name)
    at.run()
    assert not at.exception
    return at


def typed(at: AppTest, **numbers: float) -> AppTest:
    """Fill number fields by the beginning of their label."""
    for label, value in numbers.items():
        next(n for n in at.number_input if n.label.startswith(label.replace("_", " "))).set_value(value)
    return at


def test_the_first_lines_answer_both_questions(page: AppTest) -> None:
    assert first_line(page).startswith("Qualifying, Talquime Round, Sat 6 Jun, 15:00")
    assert "in the car" in first_line(page)
    assert "Jory Tallowmere drinks more than is lost; Ren Asakiri drinks too little" in said(page)


def test_the_plan_is_a_timeline_with_bottles_and_reasons(page: AppTest) -> None:
    drawn = " ".join(html_of(page))
    assert drawn.count('class="p-step') == 4
    assert 'role="img" aria-label="0.5 bottles"' in drawn
    text = said(page)
    for words in (
        "11:00–13:00 four hours before",
        "13:00–15:00 two hours before",
        "15:00–16:00 in the car",
        "16:00–18:00 after",
        "keeps the figure of sea level",
        "too much water can be as dangerous",
        "cool first",
    ):
        assert words in text


def test_another_driver_session_and_stints(page: AppTest) -> None:
    chosen = page.button_group(key="fluids_driver").value
    page.button_group(key="fluids_driver").set_value(1 if chosen != 1 else 2)
    race = next(o for o in page.selectbox(key="fluids_session").options if o.startswith("Race, Talquime"))
    page.selectbox(key="fluids_session").set_value(race)
    page.number_input(key="fluids_stints").set_value(2)
    page.run()
    assert not page.exception
    assert "in the car, stint 2" in said(page)


def test_the_cockpit_measured_is_kept_and_named(page: AppTest, demo_store: Store) -> None:
    typed(page, Air=50.0, Humidity=14.0)
    page = press(page, "Keep as measured")
    assert not page.exception
    assert "Kept: the cockpit as measured." in said(page)
    kept = [c for c in demo_store.all(CockpitConditions) if c.air_temperature_c == 50.0]
    assert [(c.humidity_pct, c.measured) for c in kept] == [(14.0, True)]
    typed(page, Humidity=140.0)
    page = press(page, "Keep as measured")
    assert not page.exception
    assert "humidity_pct" in page.error[0].value.replace("\\", "")


def test_other_clothing_moves_the_plan(page: AppTest, demo_store: Store) -> None:
    before = said(page)
    page.selectbox[1].set_value("overalls down to the waist")
    page = press(page, "Plan with these")
    assert not page.exception
    assert worn_ensemble(demo_store).name == "overalls down to the waist"
    assert said(page) != before
    typed(page, Insulation=0.9)
    page = press(page, "Keep these figures")
    assert worn_ensemble(demo_store).insulation_clo == 0.9
    assert worn_ensemble(demo_store).source == "typed by the team"


def test_weigh_in_and_weigh_out_in_four_taps(page: AppTest, demo_store: Store) -> None:
    at = typed(part(page, "Weigh"), Mass_before=79.2)
    at = press(at, "Weigh in")
    assert not at.error
    assert "Weighed in at 07:40 with 79.2 kg" in said(at)
    typed(at, Mass_after=78.5, Drunk=600.0)
    at = press(at, "Weigh out")  # one tap beside the numbers; the driver who waits is chosen already
    assert not at.exception
    assert not at.error
    shown = said(at)
    assert "mass −0.9 %" in shown
    assert "900 mL to 1 050 mL" in shown  # published: 1.25 to 1.5 L for each kg, 0.7 kg
    kept = max(demo_store.all(Weighing), key=lambda w: w.id)
    assert (kept.mass_after_kg, kept.drink_ml) == (78.5, 600.0)
    at = press(at, "Take it back")
    assert not at.exception
    assert demo_store.get(Weighing, kept.id).mass_after_kg is None
    at = press(at, "Take back the weigh-in")
    assert not at.exception
    assert kept.id not in {w.id for w in demo_store.all(Weighing)}


@pytest.mark.parametrize(("where", "label"), [("Weigh", "Mass_before"), ("Day", "Mass")])
def test_what_was_half_typed_is_there_after_another_page(page: AppTest, where: str, label: str) -> None:
    at = typed(part(page, where), **{label: 79.2}).run()
    for stem in ("places", "fluids"):
        at = at.switch_page(f"../pages/{stem}.py").run()
        assert not at.exception
    field = next(n for n in at.number_input if n.label.startswith(label.replace("_", " ")))
    assert field.value == 79.2


def test_a_mass_in_pounds_is_refused_and_stays_typed(page: AppTest, demo_store: Store) -> None:
    amount = len(demo_store.all(Weighing))
    at = typed(part(page, "Weigh"), Mass_before=174.0)
    at = press(at, "Weigh in")
    assert not at.exception
    assert "174" in at.error[0].value
    assert "lb would be" in at.error[0].value.replace("\\", "")
    assert next(n for n in at.number_input if n.label.startswith("Mass before")).value == 174.0
    assert len(demo_store.all(Weighing)) == amount


def test_what_was_learned(page: AppTest, demo_store: Store) -> None:
    at = part(page, "Learned")
    shown = said(at)
    assert "Jory Tallowmere: drinks more than is lost" in shown
    assert "Ren Asakiri: drinks too little" in shown
    assert "weighings in like conditions" in shown
    assert len(at.get("vega_lite_chart")) == 1
    amount = len(demo_store.all(Weighing))
    at.selectbox[0].set_value(at.selectbox[0].options[0])
    at.run()
    at = press(at, "Take it out")
    assert not at.exception
    assert len(demo_store.all(Weighing)) == amount - 1


def test_the_day_and_a_morning_marked(page: AppTest, demo_store: Store) -> None:
    at = part(page, "Day")
    assert "Ren Asakiri ○ repeat" in said(at)
    assert "water today" in said(at)
    typed(at, Mass=55.2)
    at = press(at, "Keep the marks")
    assert not at.exception
    assert not at.error
    newest = max(demo_store.all(MorningMark), key=lambda m: m.id)
    assert (newest.mass_kg, newest.at) == (55.2, now(demo_store))
    assert "7 more marked this morning, in range" in said(at)
    at = press(at, "Keep the marks")
    assert "nothing chosen" in at.error[0].value


def test_other_units(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PLANNER_STORE", str(demo_store.path))
    choose_units(demo_store, last_name(demo_store), UnitChoice(mass="lb", volume="fl oz", temperature="F"))
    at = opened()
    assert "fl oz" in first_line(at)
    for name in ("Plan", "Learned", "Day"):
        assert " mL " not in said(part(at, name)).replace("mL/kg", "")
    at = typed(part(at, "Weigh"), Mass_before=174.6)
    at = press(at, "Weigh in")
    assert not at.error
    kept = max(demo_store.all(Weighing), key=lambda w: w.id)
    assert kept.mass_before_kg == pytest.approx(79.2, abs=0.01)  # computed: 174.6 lb


def test_a_team_without_sessions_can_weigh(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PLANNER_STORE", str(store.path))
    mark_begun_empty(store)
    assert first_line(opened()).startswith("No drivers yet. Add the first one on Team")
    home = store.add(Place("Vallmora", "Europe/Madrid", 100.0, 100.0, 41.0, 1.5), by="coach")
    driver = store.add(Driver("Ines Corvo", "woman", home.id, 62.0, 170.0), by="coach")
    at = opened()
    assert first_line(at).startswith("No session to drink for yet.")
    at = press(typed(at, Mass_before=62.1), "Weigh in")
    assert not at.exception
    (kept,) = store.all(Weighing)
    assert (kept.driver_id, kept.session_id) == (driver.id, None)
    assert abs(kept.starts_at - now(store)) < timedelta(minutes=1)


def test_the_driver_page_shows_mass_and_sweat(page: AppTest) -> None:
    at = open_page("driver")
    assert not at.exception
    shown = said(at)
    assert "Usual morning mass 79.1 kg" in shown
    assert "Sweat to expect in Qualifying, Talquime Round: 0.95 L/h" in shown
    assert "weighings in like conditions" in shown
    assert "Drinks and weighings" in [button.label for button in at.button]
