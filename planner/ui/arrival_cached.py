"""What the Arrival page keeps of one state of the store: the ways to a round, one way's days, the charts."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime, time
from typing import Any

import pandas as pd
import streamlit as st

from planner.charts.arrival import days_chart, trade_off_chart
from planner.season.arrival import Option
from planner.season.constraints import Limits
from planner.season.model import Driver, Round
from planner.services.arrival import Arrival, Order, arrival
from planner.services.arrival_choice import Choice, ascent_reason_kept, choices
from planner.services.arrival_days import PlanDay, plan_days
from planner.store.store import Store
from planner.ui.arrival_words import day_words, way_words
from planner.ui.frames import frame
from planner.ui.page import Context
from planner.units import from_house
from planner.wording import UnitChoice


@dataclass(frozen=True)
class Asked:
    """What the coach asks for on the page: for whom, for which round, under which limits, in which order."""

    driver: Driver
    round: Round
    limits: Limits
    order: Order
    lower_bed_m: float | None


def arrival_of(context: Context, asked: Asked) -> Arrival:
    """Every way to a round, anew after every write and every hour."""
    return _arrival(_key(context, asked), context.store, asked)


def days_of(context: Context, asked: Asked, found: Arrival, option: Option) -> list[PlanDay]:
    """One way day by day."""
    return _days((*_key(context, asked), option.title), found, option)


def chosen_before(context: Context, found: Arrival) -> tuple[list[Choice], str]:
    """What was chosen before and is in force, the newest first; and why the ascent rule is set aside."""
    store = context.store
    key = (store.uid, str(store.path), store.version(), found.driver.id, found.round.id)
    return _chosen_before(key, store, found)


def trade_off_of(context: Context, asked: Asked, found: Arrival, chosen: Option) -> dict[str, Any]:
    """The chart of what the ways cost and give, one of them picked out."""
    return _trade_off((*_key(context, asked), chosen.title), found, chosen)


def days_chart_of(context: Context, asked: Asked, found: Arrival, option: Option) -> dict[str, Any]:
    """The chart of one way's days, in the reader's unit."""
    days = days_of(context, asked, found, option)
    return _days_chart((*_key(context, asked), option.title, context.units), days, context.units)


def _key(context: Context, asked: Asked) -> tuple[object, ...]:
    store = context.store
    hour = int(context.now.timestamp() // 3600)
    return (store.uid, str(store.path), store.version(), hour, asked)


@st.cache_resource(show_spinner="Working out every way to the round", max_entries=64)
def _arrival(key: tuple[object, ...], _store: Store, _asked: Asked) -> Arrival:
    return arrival(
        _store,
        _asked.driver,
        _asked.round,
        limits=_asked.limits,
        order=_asked.order,
        lower_bed_m=_asked.lower_bed_m,
    )


@st.cache_resource(show_spinner=False, max_entries=64)
def _days(key: tuple[object, ...], _found: Arrival, _option: Option) -> list[PlanDay]:
    return plan_days(_found, _option)


@st.cache_resource(show_spinner=False, max_entries=64)
def _chosen_before(key: tuple[object, ...], _store: Store, _found: Arrival) -> tuple[list[Choice], str]:
    driver, given = _found.driver, _found.round
    return choices(_store, driver, given), ascent_reason_kept(_store, _found.calendar, driver, given)


@st.cache_resource(show_spinner=False, max_entries=64)
def _trade_off(key: tuple[object, ...], _found: Arrival, _chosen: Option) -> dict[str, Any]:
    rows = [
        (
            option.title,
            option.costs.nights_away,
            option.outlook.race_spo2_pct.mean,
            option.outlook.race_spo2_pct.low,
            option.outlook.race_spo2_pct.high,
            option.kind,
            option.feasible,
            option.title == _chosen.title,
            way_words(option),
        )
        for option in _found.options
        if option.costs is not None and option.outlook is not None
    ]
    columns = ["way", "nights", "mean", "low", "high", "kind", "fits", "chosen", "words"]
    limits = _found.limits
    return trade_off_chart(
        pd.DataFrame(rows, columns=columns), limits.lowest_race_spo2_pct, limits.most_nights_away
    )


@st.cache_resource(show_spinner=False, max_entries=64)
def _days_chart(key: tuple[object, ...], _days: list[PlanDay], _units: UnitChoice) -> dict[str, Any]:
    unit = _units.elevation
    at = {day.day: datetime.combine(day.day, time()) for day in _days}
    days = [
        (
            at[day.day],
            day.expected.mean,
            day.expected.low,
            day.expected.high,
            from_house("elevation", day.bed_m, unit),
            day_words(day, _units),
        )
        for day in _days
        if day.expected is not None and day.bed_m is not None
    ]
    track = [
        (at[day.day], from_house("elevation", day.track_m, unit)) for day in _days if day.track_m is not None
    ]
    travel = [(at[day.day], "travel") for day in _days if day.legs]
    return days_chart(
        frame(days, "at", "mean", "low", "high", "bed", "words"),
        frame(track, "at", "elevation"),
        frame(travel, "at", "words"),
        unit,
    )
