"""What is computed once for a state of the store and shared by everybody who looks.

The keys are the store's path and its counter of writes: what the store holds, not who asks.
"""

from __future__ import annotations

from datetime import datetime

import streamlit as st

from planner.season.model import Driver
from planner.services.driver import BandPoint, DriverView, Window, driver_view
from planner.services.morning import ThisMorning, this_morning
from planner.services.season import Calendar, RoundCost, read_calendar
from planner.store.store import Store
from planner.ui.page import Context


def morning_of(context: Context) -> ThisMorning:
    """This morning, anew after every write and every minute."""
    minute = int(context.now.timestamp() // 60)
    store = context.store
    return _morning(store.uid, str(store.path), store.version(), minute, store, context.now)


def calendar_of(context: Context) -> Calendar:
    """The season as the store holds it, read anew after every write."""
    store = context.store
    return _calendar(store.uid, str(store.path), store.version(), store)


def driver_view_of(context: Context, driver: Driver) -> DriverView:
    """What is known of a driver, anew after every write and every hour."""
    store = context.store
    hour = int(context.now.timestamp() // 3600)
    return _driver_view(
        store.uid, str(store.path), store.version(), driver.id, hour, store, driver, context.now
    )


def costs_of(context: Context, driver: Driver) -> list[RoundCost]:
    """What the present plan gives a driver at the high rounds, by what the readings have taught."""
    view = driver_view_of(context, driver)
    return view.costs


def band_of(context: Context, view: DriverView, window: Window) -> list[BandPoint]:
    """A driver's range over a window, kept as long as the view."""
    store = context.store
    hour = int(context.now.timestamp() // 3600)
    return _band(store.uid, str(store.path), store.version(), view.driver.id, hour, window, view)


@st.cache_resource(show_spinner=False, max_entries=64)
def _driver_view(
    store_uid: str,
    store_path: str,
    version: int,
    driver_id: int,
    hour: int,
    _store: Store,
    _driver: Driver,
    _now: datetime,
) -> DriverView:
    return driver_view(_store, read_calendar(_store), _driver, _now)


@st.cache_resource(show_spinner=False, max_entries=64)
def _band(
    store_uid: str,
    store_path: str,
    version: int,
    driver_id: int,
    hour: int,
    window: Window,
    _view: DriverView,
) -> list[BandPoint]:
    return _view.band(*_view.window(window))


@st.cache_resource(show_spinner=False, max_entries=4)
def _calendar(store_uid: str, store_path: str, version: int, _store: Store) -> Calendar:
    return read_calendar(_store)


@st.cache_resource(show_spinner=False, max_entries=16)
def _morning(
    store_uid: str, store_path: str, version: int, minute: int, _store: Store, _at: datetime
) -> ThisMorning:
    return this_morning(_store, _at)
