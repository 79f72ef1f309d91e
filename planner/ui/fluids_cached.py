"""Fluids computed once for a state of the store: the weighings and a session's plan."""

from __future__ import annotations

from datetime import datetime

import streamlit as st

from planner.hydration.weighings import Weighed
from planner.services.fluids import SessionAt, SessionDrinks, plan_session, weighed_of
from planner.services.season import Calendar
from planner.store.store import Store
from planner.ui.cached import calendar_of
from planner.ui.page import Context
from planner.wording import UnitChoice


def weighed_by(context: Context) -> list[Weighed]:
    """Every finished weighing, read anew after every write."""
    store = context.store
    return _weighed(store.uid, str(store.path), store.version(), store, calendar_of(context))


def drinks_for(context: Context, at: SessionAt, stints: int) -> SessionDrinks:
    """The session's plan for everybody, anew after every write and every hour."""
    store = context.store
    hour = int(context.now.timestamp() // 3600)
    return _drinks(
        store.uid,
        str(store.path),
        store.version(),
        hour,
        at.session.id,
        stints,
        context.units,
        store,
        calendar_of(context),
        weighed_by(context),
        at,
        context.now,
    )


@st.cache_resource(show_spinner=False, max_entries=4)
def _weighed(
    store_uid: str, store_path: str, version: int, _store: Store, _calendar: Calendar
) -> list[Weighed]:
    return weighed_of(_store, _calendar)


@st.cache_resource(show_spinner=False, max_entries=32)
def _drinks(
    store_uid: str,
    store_path: str,
    version: int,
    hour: int,
    session_id: int,
    stints: int,
    units: UnitChoice,
    _store: Store,
    _calendar: Calendar,
    _weighed: list[Weighed],
    _at: SessionAt,
    _now: datetime,
) -> SessionDrinks:
    return plan_session(_store, _calendar, _at, now=_now, weighed=_weighed, stints=stints, units=units)
