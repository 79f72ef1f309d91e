"""Readings and This morning together: typed, judged, shown, corrected, taken back, imported."""

from __future__ import annotations

from dataclasses import replace
from datetime import timedelta
from typing import Any

import pytest
from screens import first_line, html_of, open_page, press, said
from streamlit.testing.v1 import AppTest

from planner.hydration.model import MorningMark
from planner.monitoring.model import Notice, Reading, SickPeriod
from planner.season.model import Driver
from planner.services.morning import this_morning
from planner.services.workspace import now
from planner.store.store import Store


@pytest.fixture(autouse=True)
def _on_the_demo(demo_store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PLANNER_STORE", str(demo_store.path))


def waiting(store: Store) -> tuple[int, str]:
    """The demo's driver who has not measured yet."""
    (row,) = [row for row in this_morning(store, now(store)).rows if row.outcome == "not measured"]
    return row.driver_id, row.driver


def part(at: AppTest, name: str) -> AppTest:
    at.button_group(key="readings_part").set_value(name)
    at.run()
    assert not at.exception
    return at


def field(at: AppTest, label: str) -> Any:
    """The first text or number field whose label begins so."""
    return next(each for each in (*at.text_input, *at.number_input) if each.label.startswith(label))


def typed(at: AppTest, spo2: str, **values: object) -> AppTest:
    """Fill the fields and press the button."""
    field(at, "SpO2, %").set_value(spo2)
    for label, value in values.items():
        field(at, label).set_value(value)
    return press(at, "Keep the reading")


def test_a_reading_typed_changes_this_morning_and_survives_a_restart(demo_store: Store) -> None:
    driver_id, name = waiting(demo_store)
    assert "1 not measured" in first_line(open_page("this_morning"))
    at = typed(open_page("readings"), "93", Pulse="58")
    assert not at.exception
    assert not at.error
    assert f"{name} ● in range" in said(at)
    assert first_line(at) == "8 of 8 drivers measured today."
    looked = open_page("this_morning")
    assert "not measured" not in first_line(looked)
    assert "93 %, expected" in said(looked)

    demo_store.close()
    again = Store.open(demo_store.path)
    newest = again.readings(driver_id=driver_id)[-1]
    assert (newest.spo2_pct, newest.pulse_bpm, newest.entered_by) == (93.0, 58.0, "coach")
    row = next(r for r in this_morning(again, now(again)).rows if r.driver_id == driver_id)
    assert row.outcome == "in range"
    again.close()


def test_a_low_reading_is_shown_back_with_what_to_do(demo_store: Store) -> None:
    at = typed(open_page("readings"), "80")
    text = said(at)
    assert "○ repeat" in text
    assert "80 %, expected" in text
    assert "Measure again: seated and quiet" in text
    again = typed(press(at, "Measure again"), "80")
    assert "■ urgent" in said(again)
    assert "below it again (80 % just before), and far below" in said(again)


def test_the_last_reading_can_be_taken_back(demo_store: Store) -> None:
    driver_id, name = waiting(demo_store)
    before = demo_store.readings(driver_id=driver_id)
    at = typed(open_page("readings"), "93", Body=64.0)
    assert len(demo_store.readings(driver_id=driver_id)) == len(before) + 1
    marks = demo_store.all(MorningMark, driver_id=driver_id)
    assert marks[-1].mass_kg == 64.0
    at = press(at, "Take it back")
    assert f"The reading of {name} was taken back." in said(at)
    assert demo_store.readings(driver_id=driver_id) == before
    assert demo_store.all(MorningMark, driver_id=driver_id) == marks[:-1]


@pytest.mark.parametrize(
    ("spo2", "line"),
    [
        ("0.95", "SpO2: 0.95 cannot be used, expected 40 to 100 %"),
        ("950", "SpO2: 950 cannot be used, expected 40 to 100 %"),
        ("9,5", "SpO2: 9.5 cannot be used, expected 40 to 100 %"),
        ("nine", "SpO2: 'nine' cannot be used, expected 40 to 100 %"),
        ("", "SpO2: nothing given yet, expected 40 to 100 %"),
    ],
)
def test_a_wrong_value_is_named_and_what_was_typed_stays(demo_store: Store, spo2: str, line: str) -> None:
    kept = len(demo_store.readings())
    at = typed(open_page("readings"), spo2, Pulse="61")
    (error,) = at.error
    assert error.value.replace("\\", "").startswith(line)
    assert field(at, "SpO2, %").value == spo2
    assert field(at, "Pulse").value == "61"
    assert len(demo_store.readings()) == kept


def test_a_decimal_comma_and_a_per_cent_sign_are_understood(demo_store: Store) -> None:
    driver_id, _ = waiting(demo_store)
    assert not typed(open_page("readings"), " 92,5 % ").error
    assert demo_store.readings(driver_id=driver_id)[-1].spo2_pct == 92.5


def go(at: AppTest, stem: str) -> AppTest:
    at = at.switch_page(f"../pages/{stem}.py").run()
    assert not at.exception
    return at


def test_what_was_half_typed_is_there_after_another_page(demo_store: Store) -> None:
    driver_id, _ = waiting(demo_store)
    at = open_page("readings")
    field(at, "SpO2, %").set_value("93")
    next(g for g in at.button_group if g.label.startswith("How")).set_value(["At rest"])
    next(g for g in at.button_group if g.label == "Emergency signs").set_value(["confusion"])
    field(at, "Body mass").set_value(64.0)
    at = go(go(at.run(), "places"), "readings")
    assert field(at, "SpO2, %").value == "93"
    assert next(g for g in at.button_group if g.label.startswith("How")).value == ["At rest"]
    assert field(at, "Body mass").value == 64.0
    at = press(at, "Keep the reading")
    kept = demo_store.readings(driver_id=driver_id)[-1]
    assert (kept.spo2_pct, kept.warm_hand, kept.emergency_signs) == (93.0, False, ("confusion",))
    assert field(at, "SpO2, %").value == ""


def test_a_half_typed_reading_gives_way_to_another_driver_and_comes_back(demo_store: Store) -> None:
    driver_id, name = waiting(demo_store)
    other = next(r for r in this_morning(demo_store, now(demo_store)).rows if r.outcome == "in range")
    at = open_page("readings")
    field(at, "SpO2, %").set_value("93")
    at = go(at.run(), "this_morning")
    at.button(key=f"again_{other.driver_id}").click()
    at = go(at.run(), "readings")
    assert f"Half typed: {name}, SpO2 93" in said(at)
    assert field(at, "SpO2, %").value == ""
    at = typed(at, "94")
    assert demo_store.readings(driver_id=other.driver_id)[-1].spo2_pct == 94.0
    at = press(at, "Go on with it")
    assert field(at, "SpO2, %").value == "93"
    at = press(at, "Keep the reading")
    assert demo_store.readings(driver_id=driver_id)[-1].spo2_pct == 93.0
    assert "Half typed" not in said(at)


def test_an_emergency_sign_makes_it_urgent_at_once(demo_store: Store) -> None:
    at = open_page("readings")
    next(g for g in at.button_group if g.label == "Emergency signs").set_value(["confusion"])
    assert "Stop and call the team physician now" in said(at.run())
    at = typed(at, "94")
    assert "■ urgent" in said(at)
    assert "Emergency sign stated: confusion or a change of behaviour." in said(at)
    rows = this_morning(demo_store, now(demo_store)).rows
    assert rows[0].outcome == "urgent"
    assert f"{sum(row.outcome == 'urgent' for row in rows)} urgent" in first_line(open_page("this_morning"))


def test_measure_again_leads_to_the_form_with_that_driver(demo_store: Store) -> None:
    rows = this_morning(demo_store, now(demo_store)).rows
    row = next(r for r in rows if r.outcome == "in range")
    at = open_page("this_morning")
    at.button(key=f"again_{row.driver_id}").click()
    at.run()
    assert not at.exception
    driver = next(g for g in at.button_group if g.label == "Driver")
    assert driver.value == row.driver_id


def test_a_note_and_the_physician_told_are_kept_and_shown(demo_store: Store) -> None:
    driver_id, _ = waiting(demo_store)
    at = open_page("this_morning")
    at.button(key=f"told_{driver_id}").click()
    at.run()
    at.text_input[0].set_value("by telephone")
    at = press(go(go(at.run(), "season"), "this_morning"), "Keep")
    assert not at.exception
    newest = demo_store.all(Notice, driver_id=driver_id)[-1]
    assert (newest.kind, newest.text, newest.entered_by) == ("told the physician", "by telephone", "coach")
    assert "(coach): by telephone" in said(open_page("this_morning"))


def test_a_note_without_words_is_refused(demo_store: Store) -> None:
    driver_id, _ = waiting(demo_store)
    at = open_page("this_morning")
    at.button(key=f"note_{driver_id}").click()
    at = press(at.run(), "Keep")
    assert at.error[0].value.replace("\\", "").startswith("note: nothing given yet, expected 1 to 500")


def test_a_correction_keeps_the_old_value_visible(demo_store: Store) -> None:
    driver = sorted(demo_store.all(Driver), key=lambda d: d.name)[0]
    newest = demo_store.readings(driver_id=driver.id)[-1]
    at = part(open_page("readings"), "Correct")
    field(at, "SpO2, %").set_value(f"{newest.spo2_pct + 2.0:g}")
    field(at, "Why is it corrected?").set_value("read the wrong figure")
    at = press(at, "Keep the correction")
    assert not at.error
    assert demo_store.get(Reading, newest.id).spo2_pct == newest.spo2_pct + 2.0
    old, new = f"{newest.spo2_pct:.0f}", f"{newest.spo2_pct + 2.0:.0f}"
    assert f"SpO2 {old} → {new} (read the wrong figure)" in said(at)


def test_a_correction_needs_a_reason(demo_store: Store) -> None:
    at = part(open_page("readings"), "Correct")
    field(at, "SpO2, %").set_value("90.5")
    at = press(at, "Keep the correction")
    assert at.error[0].value.replace("\\", "").startswith("why: nothing given yet")
    assert field(at, "SpO2, %").value == "90.5"


def test_two_who_correct_the_same_reading_see_each_other(demo_store: Store) -> None:
    driver = sorted(demo_store.all(Driver), key=lambda d: d.name)[0]
    newest = demo_store.readings(driver_id=driver.id)[-1]
    one, other = (part(open_page("readings"), "Correct") for _ in range(2))
    for at, spo2 in ((one, "91"), (other, "92")):
        field(at, "SpO2, %").set_value(spo2)
        field(at, "Why is it corrected?").set_value("typing error")
        at.run()
    assert not press(one, "Keep the correction").error
    other = press(other, "Keep the correction")
    assert "somebody corrected this reading meanwhile" in other.error[0].value
    assert demo_store.get(Reading, newest.id).spo2_pct == 91.0
    assert field(other, "SpO2, %").value == "92"
    assert f"SpO2 {newest.spo2_pct:g} → 91" in said(other)
    assert not press(other, "Keep the correction").error
    assert demo_store.get(Reading, newest.id).spo2_pct == 92.0


def test_a_correction_touches_only_what_was_changed_in_it(demo_store: Store) -> None:
    driver = sorted(demo_store.all(Driver), key=lambda d: d.name)[0]
    newest = demo_store.readings(driver_id=driver.id)[-1]
    at = part(open_page("readings"), "Correct")
    field(at, "Why is it corrected?").set_value("pulse misread")
    field(at, "Pulse").set_value("77")
    at.run()
    demo_store.change(replace(newest, spo2_pct=90.0), by="physician", why="seen on the display")
    at = press(at.run(), "Keep the correction")
    assert not at.error
    kept = demo_store.get(Reading, newest.id)
    assert (kept.spo2_pct, kept.pulse_bpm) == (90.0, 77.0)


def test_a_reading_left_out_stays_and_asks_for_another(demo_store: Store) -> None:
    driver = sorted(demo_store.all(Driver), key=lambda d: d.name)[0]
    at = part(open_page("readings"), "Correct")
    field(at, "Leave it out, because").set_value("borrowed oximeter")
    at = press(at, "Keep the correction")
    assert not at.error
    row = next(r for r in this_morning(demo_store, now(demo_store)).rows if r.driver_id == driver.id)
    assert row.reading is not None
    assert row.reading.left_out == "borrowed oximeter"
    marks = [body for body in html_of(open_page("this_morning")) if "left-out cross" in body]
    assert len(marks) == 1


def test_a_removed_reading_can_be_put_back(demo_store: Store) -> None:
    driver = sorted(demo_store.all(Driver), key=lambda d: d.name)[0]
    before = demo_store.readings(driver_id=driver.id)
    at = press(part(open_page("readings"), "Correct"), "Remove the reading")
    assert demo_store.readings(driver_id=driver.id) == before[:-1]
    assert "Removed:" in said(at)
    press(at, "Put back")
    assert demo_store.readings(driver_id=driver.id) == before


def test_a_sick_period_begins_and_ends(demo_store: Store) -> None:
    driver = sorted(demo_store.all(Driver), key=lambda d: d.name)[0]
    at = press(part(open_page("readings"), "Correct"), "Mark ill")
    assert not at.error
    period = demo_store.all(SickPeriod, driver_id=driver.id)[-1]
    assert period.ends_at is None
    row = next(r for r in this_morning(demo_store, now(demo_store)).rows if r.driver_id == driver.id)
    assert any(reason.startswith("Marked ill by the driver") for reason in row.reasons)
    at = press(at, "Well again from now on")
    assert demo_store.get(SickPeriod, period.id).ends_at == now(demo_store)


def test_a_sick_period_marked_by_mistake_is_taken_back(demo_store: Store) -> None:
    driver = sorted(demo_store.all(Driver), key=lambda d: d.name)[0]
    before = demo_store.all(SickPeriod, driver_id=driver.id)
    at = press(part(open_page("readings"), "Correct"), "Mark ill")
    press(at, "Marked by mistake")
    assert demo_store.all(SickPeriod, driver_id=driver.id) == before
    rows = this_morning(demo_store, now(demo_store)).rows
    row = next(r for r in rows if r.driver_id == driver.id)
    assert not any("Marked ill" in reason for reason in row.reasons)


FILE = (
    "\ufeffdriver;place;taken_at;spo2_pct;pulse_bpm\r\n"
    "{name};{place};{at};92,5;60\r\n"
    "Nobody Known;{place};{at};92;60\r\n"
    "{name};{place};{at};0,95;60\r\n"
)


def test_an_import_is_shown_before_it_is_taken(demo_store: Store) -> None:
    driver_id, name = waiting(demo_store)
    at_now = now(demo_store)
    row = next(r for r in this_morning(demo_store, at_now).rows if r.driver_id == driver_id)
    taken_at = (at_now - timedelta(minutes=20)).strftime("%Y-%m-%dT%H:%M+00:00")
    data = FILE.format(name=name, place=row.where.place.name, at=taken_at).encode()
    kept = len(demo_store.readings())
    at = part(open_page("readings"), "Import")
    at.file_uploader[0].set_value(("mornings.csv", data, "text/csv"))
    at.run()
    assert not at.error
    text = said(at)
    assert "1 reading to take, 0 already there, 2 lines refused." in text
    assert "Nobody Known" in text
    assert "0,95" in text
    assert len(demo_store.readings()) == kept
    at = press(at, "Take 1 reading")
    assert not at.error
    assert len(demo_store.readings()) == kept + 1
    assert first_line(at) == "8 of 8 drivers measured today."
    at = press(at, "Undo the import")
    assert not at.error
    assert len(demo_store.readings()) == kept
    assert first_line(at) == "7 of 8 drivers measured today."
