"""What the coach asks of a season search: what counts, where free nights may go, what they cost."""

from __future__ import annotations

from typing import Final

import streamlit as st

from planner.season.day_model import Combination, Measure, Rates
from planner.season.model import Driver, Round
from planner.services.season import Calendar
from planner.services.season_plan import (
    HIGHEST_RATE,
    HIGHEST_WEIGHT,
    MOST_EXTRA_NIGHTS,
    Question,
    free_places,
    high_rounds_ahead,
)
from planner.ui.page import Context
from planner.ui.tables import note
from planner.ui.text import literal
from planner.wording import elevation

WIDTH: Final = 152  # so that two stand beside each other on a phone
LOWEST_FLOOR_PCT: Final = 50.0
MOST_NIGHTS: Final = 200.0
_MEASURES: Final[dict[Measure, str]] = {"SpO2": "SpO2 on race morning", "capacity": "aerobic capacity"}
_COMBINATIONS: Final[dict[Combination, str]] = {
    "weighted sum": "all high rounds together",
    "worst": "the worst of them",
}
_DEFAULTS: Final = Rates()


def ask(ctx: Context, calendar: Calendar, driver: Driver) -> Question:
    """Draw the fields and return what they ask."""
    ahead = high_rounds_ahead(calendar, ctx.now)
    places = {p.id: p for p in free_places(calendar, driver)}
    with st.container(horizontal=True, vertical_alignment="bottom", gap="small"):
        measure: Measure = st.segmented_control(
            "Gain", list(_MEASURES), default="SpO2", required=True, format_func=_MEASURES.__getitem__,
            key="season_measure", persist_state="session",
        )  # fmt: skip
        combination: Combination = st.segmented_control(
            "Over", list(_COMBINATIONS), default="weighted sum", required=True,
            format_func=_COMBINATIONS.__getitem__, key="season_combination", persist_state="session",
        )  # fmt: skip
    chosen = st.multiselect(
        "Free nights may be spent at home, at the places before and after, and at",
        list(places),
        default=list(places),
        format_func=lambda id: f"{places[id].name}, {elevation(places[id].bed_elevation_m, ctx.units)}",
        key=f"season_places_{driver.id}",
        persist_state="session",
    )
    kept = st.multiselect(
        "Leave the way as planned to",
        [each.id for each in ahead],
        format_func={each.id: each.name for each in ahead}.__getitem__,
        key=f"season_kept_{driver.id}",
        persist_state="session",
        placeholder="no round: every gap may change",
    )
    with st.container(horizontal=True, vertical_alignment="bottom", gap="small"):
        flight = _rate("A flight costs, nights", _DEFAULTS.flight, "flight")
        hour = _rate("A travel hour, nights", _DEFAULTS.travel_hour, "hour")
        tent_night = _DEFAULTS.tent_night
        if driver.tent_note.strip():
            tent_night = _rate("A tent night, nights", _DEFAULTS.tent_night, "tent")
        most = st.number_input(
            "Spend at most, nights", value=MOST_EXTRA_NIGHTS, min_value=0.0, max_value=MOST_NIGHTS, step=None,
            format="%g", placeholder="no limit", width=WIDTH, key="season_most", persist_state="session",
            help="How far above the cheapest plan the curve is followed; empty = to its end.",
        )  # fmt: skip
    weights, floors = _rounds(ahead)
    return Question(
        places=tuple(chosen),
        rates=Rates(tent_night, flight, hour),
        measure=measure,
        combination=combination,
        weights=weights,
        lowest_spo2_pct=floors,
        kept_rounds=tuple(kept),
        tent=bool(driver.tent_note.strip()),
        most_extra_nights=most,
    )


def _rounds(ahead: list[Round]) -> tuple[dict[int, float], dict[int, float]]:
    """How much each round counts, and the lowest SpO2 that is accepted there."""
    weights: dict[int, float] = {}
    floors: dict[int, float] = {}
    with st.expander("What each high round counts, and its lowest SpO2"):
        for each in ahead:
            with st.container(horizontal=True, vertical_alignment="bottom", gap="small"):
                weights[each.id] = st.number_input(
                    f"{literal(each.name)} counts", value=1.0, min_value=0.0, max_value=HIGHEST_WEIGHT,
                    step=None, format="%g", width=2 * WIDTH, key=f"season_weight_{each.id}",
                    persist_state="session",
                )  # fmt: skip
                floor = st.number_input(
                    "at least, %", value=None, min_value=LOWEST_FLOOR_PCT, max_value=100.0, step=None,
                    format="%g", placeholder="as on Team", width=WIDTH, key=f"season_floor_{each.id}",
                    persist_state="session",
                )  # fmt: skip
                if floor is not None:
                    floors[each.id] = floor
        note("A round that counts 0 is not searched for; its limits hold all the same.")
    return weights, floors


def _rate(label: str, default: float, key: str) -> float:
    return st.number_input(
        label, value=default, min_value=0.0, max_value=HIGHEST_RATE, step=None, format="%g", width=WIDTH,
        key=f"season_rate_{key}", persist_state="session", help="In nights away from home; the coach's own.",
    )  # fmt: skip
