"""What the Driver page keeps of one state of the store: the view, the chart, the words of the readings."""

from __future__ import annotations

from datetime import datetime
from typing import Any

import streamlit as st

from planner.charts.driver import driver_chart
from planner.season.model import Driver
from planner.services.driver import DriverView, Explanation, JudgedMark, Window, driver_view
from planner.services.readings import reading_words
from planner.services.season import RoundCost, read_calendar
from planner.store.store import Store
from planner.ui.frames import frame
from planner.ui.page import Context
from planner.units import from_house
from planner.wording import day_and_clock, per_cent


def driver_view_of(context: Context, driver: Driver) -> DriverView:
    """What is known of a driver, anew after every write and every hour."""
    store = context.store
    hour = int(context.now.timestamp() // 3600)
    key = (store.uid, str(store.path), store.version(), driver.id, hour)
    return _driver_view(key, store, driver, context.now)


def costs_of(context: Context, driver: Driver) -> list[RoundCost]:
    """What the present plan gives a driver at the high rounds, by what the readings have taught."""
    return driver_view_of(context, driver).costs


def chart_of(context: Context, view: DriverView, window: Window) -> dict[str, Any]:
    """The chart of a driver over a window, in the reader's unit."""
    return _chart((*_key_of(context, view), window, context.units.elevation), view, window)


def explanation_of(context: Context, view: DriverView, reading_id: int) -> Explanation:
    """One reading taken apart."""
    return _explanation((*_key_of(context, view), reading_id), view, reading_id)


def reading_choices(context: Context, view: DriverView, window: Window) -> dict[int, str]:
    """The readings of a window in words by their ids, the newest first."""
    return _choices((*_key_of(context, view), window), view, window)


def _key_of(context: Context, view: DriverView) -> tuple[object, ...]:
    store = context.store
    return (store.uid, str(store.path), store.version(), view.driver.id, view.now)


@st.cache_resource(show_spinner=False, max_entries=64)
def _driver_view(key: tuple[object, ...], _store: Store, _driver: Driver, _now: datetime) -> DriverView:
    return driver_view(_store, read_calendar(_store), _driver, _now)


@st.cache_resource(show_spinner=False, max_entries=128)
def _explanation(key: tuple[object, ...], _view: DriverView, reading_id: int) -> Explanation:
    return _view.explanation(reading_id)


@st.cache_resource(show_spinner=False, max_entries=64)
def _marks(key: tuple[object, ...], _view: DriverView, window: Window) -> tuple[JudgedMark, ...]:
    return _view.marks(*_view.window(window))


@st.cache_resource(show_spinner=False, max_entries=64)
def _choices(key: tuple[object, ...], _view: DriverView, window: Window) -> dict[int, str]:
    return {
        mark.reading.id: f"{reading_words(mark.reading, _zone_of(_view, mark))}: {mark.judgement.outcome}"
        for mark in reversed(_marks(key, _view, window))
    }


@st.cache_resource(show_spinner=False, max_entries=64)
def _chart(key: tuple[object, ...], _view: DriverView, window: Window) -> dict[str, Any]:
    since, until = _view.window(window)
    unit = str(key[-1])
    calendar = _view.calendar
    band = [
        (each.at, each.own.low_pct, each.own.high_pct, each.population.low_pct, each.population.high_pct)
        for each in _view.band(since, until)
    ]
    ground = [(at, from_house("elevation", bed_m, unit)) for at, bed_m in _view.beds if since <= at <= until]
    rounds = [
        (start, from_house("elevation", place.bed_elevation_m, unit), place.name)
        for each in calendar.rounds
        if calendar.is_high(each)
        and since <= (start := calendar.starts_at(each)) <= until
        and (place := calendar.place_of(each))
    ]
    readings = [_mark_row(_view, mark) for mark in _marks(key[:-1], _view, window)]
    return driver_chart(
        frame(band, "at", "low", "high", "population_low", "population_high"),
        frame(ground, "at", "elevation"),
        frame(rounds, "at", "elevation", "label"),
        frame(readings, "at", "spo2", "outcome", "kind", "reading", "words"),
        frame([(_view.now, "today")], "at", "label"),
        unit,
    )


def _mark_row(view: DriverView, mark: JudgedMark) -> tuple[object, ...]:
    reading = mark.reading
    kind = "left out" if reading.left_out else reading.wakefulness
    when = day_and_clock(reading.taken_at, _zone_of(view, mark))
    # Short: on a telephone a long hint would leave the screen.
    words = f"{when}: {per_cent(reading.spo2_pct)}, {mark.judgement.outcome}"
    return (reading.taken_at, reading.spo2_pct, mark.judgement.outcome, kind, reading.id, words)


def _zone_of(view: DriverView, mark: JudgedMark) -> str:
    return view.calendar.places[mark.reading.place_id].zone
