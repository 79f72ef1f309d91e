"""What is computed once for a state of the store and shared by everybody who looks.

The keys are the store's path and its counter of writes: what the store holds, not who asks.
"""

from __future__ import annotations

from datetime import datetime

import streamlit as st

from planner.services.morning import ThisMorning, this_morning
from planner.services.season import Calendar, read_calendar
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


@st.cache_resource(show_spinner=False, max_entries=4)
def _calendar(store_uid: str, store_path: str, version: int, _store: Store) -> Calendar:
    return read_calendar(_store)


@st.cache_resource(show_spinner=False, max_entries=16)
def _morning(
    store_uid: str, store_path: str, version: int, minute: int, _store: Store, _at: datetime
) -> ThisMorning:
    return this_morning(_store, _at)
