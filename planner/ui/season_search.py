"""The search panel of the Season page: what the free days could buy, and the plan that is made of it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Final

import pandas as pd
import streamlit as st

from planner.charts.season_plan import PICKED, season_trade_off_chart
from planner.errors import PlannerError
from planner.season.constraints import IronCheck
from planner.season.model import Driver
from planner.services.season import Calendar
from planner.services.season_plan import (
    PlanOutlook,
    Question,
    SeasonPlans,
    high_rounds_ahead,
    iron_due,
    keep_plan,
    search_season,
)
from planner.ui.errors import in_screen_words, plain_errors
from planner.ui.page import Context, line, note_for_next_run
from planner.ui.season_question import ask
from planner.ui.tables import note, table
from planner.ui.text import literal
from planner.wording import DASH, NO_BREAK, counted, day, number, per_cent, per_cent_range

MOST_LISTED: Final = 10
_FOUND: Final = "plans of the season"
_REFUSED: Final = "why a plan was not kept"
_MADE: Final = "plan of the season kept last"
_RESULT_TITLES: Final = {"SpO2": "SpO2 on race morning", "capacity": "aerobic capacity on race day"}


@dataclass(frozen=True)
class _Found:
    """The answer to a question, and the state of the store that it rests on."""

    version: int
    plans: SeasonPlans


def draw_season_search(ctx: Context, calendar: Calendar, driver: Driver) -> None:
    """Ask, search, compare, keep; nothing is written before a plan is made the itinerary."""
    due = iron_due(calendar, driver, ctx.now)
    if due is not None:
        line(iron_words(driver, due))
    shown = st.toggle(
        f"What could the free days buy {literal(driver.name)}?",
        key="season_search_shown",
        persist_state="session",
        help="Searches the whole season at once, night by night.",
    )
    if not shown:
        return
    with plain_errors():
        _draw_made(ctx, driver)
        if not high_rounds_ahead(calendar, ctx.now):
            line("No high round lies ahead this season.")
            return
        question = ask(ctx, calendar, driver)
        if st.session_state.pop("season_search_stop_pressed", False):
            line("The search was stopped; nothing has been changed.")
        if st.button("Search", type="primary", key="season_search_go"):
            _search(ctx, driver, question)
        _draw_found(ctx, driver, question)


def iron_words(driver: Driver, due: IronCheck) -> str:
    """When iron is to be looked at, in one sentence; what follows from it is the physician's."""
    if due.done_on is not None:
        return f"Iron of {driver.name} was looked at on {day(due.done_on)}, in time for {due.round_name}."
    return (
        f"Iron of {driver.name} is to be looked at from {day(due.due_from)} to {day(due.due_by)}, four to six"
        f" weeks before {due.round_name} (from memory); what follows is the physician's."
    )


def _search(ctx: Context, driver: Driver, question: Question) -> None:
    """Search with a bar. Any press ends the run at the bar's next move; the search has written nothing."""
    version = ctx.store.version()
    place = st.empty()
    with place.container(horizontal=True, vertical_alignment="center", gap="small"):
        words = f"Searching the season of {literal(driver.name)}"
        bar = st.progress(0.0, words)
        st.button("Stop", key="season_search_stop", on_click=_stopped)

    def progress(share: float) -> None:
        bar.progress(share, words)

    plans = search_season(ctx.store, driver, question, progress=progress)
    place.empty()
    st.session_state[_FOUND] = _Found(version, plans)


def _stopped() -> None:
    st.session_state["season_search_stop_pressed"] = True


def _draw_found(ctx: Context, driver: Driver, question: Question) -> None:
    found: _Found | None = st.session_state.get(_FOUND)
    if found is None or found.plans.driver.id != driver.id:
        return
    plans = found.plans
    if found.version != ctx.store.version():
        line("The season has changed since the last search; search again.")
        return
    if plans.question != question:
        line("These plans answer what was asked before; search again for what is asked now.")
    if plans.obstacles:
        line("No plan keeps every limit.")
        for sentence in plans.obstacles:
            line(sentence)
        return
    _draw_plans(ctx, plans)


def _draw_plans(ctx: Context, plans: SeasonPlans) -> None:
    cost, benefit = [float(c) for c in plans.curve.cost], plans.mean_benefit()
    what = _RESULT_TITLES[plans.question.measure]
    over = "the worst" if plans.question.combination == "worst" else "the mean"
    line(
        f"{counted(len(cost), 'plan')} worth a look: from {_nights(cost[0])} to {_nights(cost[-1])},"
        f" {what} {_one(benefit[0])} to {_one(benefit[-1])}, {over} of"
        f" {counted(len(plans.points), 'high round')}."
    )
    chart_key = f"season_curve_{plans.driver.id}"
    pressed = _pressed(chart_key)
    listed = plans.picks(MOST_LISTED)
    if pressed is not None and pressed < len(cost):
        listed = sorted({*listed, pressed})
    chosen = st.selectbox(
        "Look at one plan: press its mark, or choose here",
        listed,
        index=listed.index(pressed) if pressed is not None and pressed in listed else len(listed) // 2,
        format_func=lambda i: f"{_nights(cost[i])}: {what} {_one(benefit[i])}",
        key=f"season_plan_{plans.driver.id}_{pressed}",
    )
    _draw_curve(plans, chosen, chart_key, what)
    _draw_plan(ctx, plans, chosen)


def _draw_curve(plans: SeasonPlans, chosen: int, chart_key: str, what: str) -> None:
    cost, benefit = [float(c) for c in plans.curve.cost], plans.mean_benefit()
    rows = [
        (i, c, b, i == chosen, f"{_nights(c)}, {_one(b)}")
        for i, (c, b) in enumerate(zip(cost, benefit, strict=True))
    ]
    now_cost, now_benefit = plans.cost_of(plans.present), plans.benefit_of(plans.present)
    words = f"the present plan: {_nights(now_cost)}, {_one(now_benefit)}"
    st.vega_lite_chart(
        spec=season_trade_off_chart(
            pd.DataFrame(rows, columns=["plan", "cost", "benefit", "chosen", "words"]),
            pd.DataFrame([(now_cost, now_benefit, words)], columns=["cost", "benefit", "words"]),
            f"{what}, %",
        ),
        theme=None,
        width="stretch",
        on_select="rerun",
        selection_mode=PICKED,
        key=chart_key,
        alt=f"Cost and {what}: {'; '.join(row[4] for row in rows)}; {words}",
    )
    note(
        "Each point gives the most that its cost can buy, night by night over the whole season, under the "
        "limits on Team. The diamond is the present plan; it may break a limit. "
        "Figures are for the model's typical course within a day; people differ by more than plans do."
    )


def _draw_plan(ctx: Context, plans: SeasonPlans, chosen: int) -> None:
    outlook = plans.outlook_of(chosen)
    table(
        ["", "now", "this plan"],
        _compared(plans, outlook),
        right=(1, 2),
        caption="What it gives and costs, hour by hour",
    )
    changed = [s for s in plans.stretches(outlook.itinerary) if s.changes]
    if changed:
        table(
            ["nights before", "now", "this plan"],
            [[s.before.name, s.now_words, s.then_words] for s in changed],
            caption=f"What changes: {counted(len(changed), 'stretch', 'stretches')}",
            stack=True,
        )
    said = st.session_state.pop(_REFUSED, None)
    if said:
        st.error(literal(said))
    st.button(
        "Make it the plan",
        type="primary",
        disabled=not changed,
        on_click=_keep,
        args=(ctx, plans, chosen),
        key="season_plan_keep",
    )


def _compared(plans: SeasonPlans, outlook: PlanOutlook) -> list[list[str]]:
    now, then = plans.present, outlook
    rows = [
        ["nights away", str(now.costs.nights_away), str(then.costs.nights_away)],
        ["flights", str(now.costs.flights), str(then.costs.flights)],
        ["travel, h", number(now.costs.travel_h), number(then.costs.travel_h)],
    ]
    if now.costs.tent_nights or then.costs.tent_nights:
        rows.append(["tent nights", str(now.costs.tent_nights), str(then.costs.tent_nights)])
    for before, after in zip(now.rounds, then.rounds, strict=True):
        rows.append(
            [
                f"{before.point.name}, SpO2 on race morning",
                _spo2(before.race_spo2_pct.mean, before.race_spo2_pct.low, before.race_spo2_pct.high),
                _spo2(after.race_spo2_pct.mean, after.race_spo2_pct.low, after.race_spo2_pct.high),
            ]
        )
    return rows


def _draw_made(ctx: Context, driver: Driver) -> None:
    """The plan that was kept last in this window, with the way back while nothing newer was written."""
    change_set_id = st.session_state.get(_MADE)
    last = ctx.store.last_change_set()
    if change_set_id is not None and last is not None and last.id == change_set_id:
        st.button("Undo the new plan", key="season_plan_undo", on_click=_undo, args=(ctx, change_set_id))


def _keep(ctx: Context, plans: SeasonPlans, chosen: int) -> None:
    """Before the next run: a plan from the state of the season that was on the screen."""
    with plain_errors():
        try:
            st.session_state[_MADE] = keep_plan(ctx.store, plans, chosen, by=ctx.who)
            note_for_next_run(f"Kept: the new plan of {plans.driver.name}. It can be undone below.")
        except PlannerError as error:
            st.session_state[_REFUSED] = in_screen_words(error)


def _undo(ctx: Context, change_set_id: int) -> None:
    with plain_errors():
        try:
            ctx.store.undo(change_set_id, by=ctx.who)
            del st.session_state[_MADE]
            note_for_next_run("Undone: the plan is as it was before.")
        except PlannerError as error:
            st.session_state[_REFUSED] = in_screen_words(error)


def _pressed(chart_key: str) -> int | None:
    """The plan whose mark was pressed last, by what the chart told the run before."""
    event: Any = st.session_state.get(chart_key)
    picked = event.selection.get(PICKED, []) if event is not None else []
    return int(picked[0]["plan"]) if picked else None


def _nights(cost: float) -> str:
    return f"{number(cost, 1).removesuffix('.0')}{NO_BREAK}nights"


def _one(value: float) -> str:
    return per_cent(value, 1)


def _spo2(mean: float, low: float, high: float) -> str:
    return f"{_one(mean)} ({per_cent_range(low, high)})" if mean == mean else DASH
