"""What stands in the way when no plan of a season keeps every limit."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from planner.season.day_model import Rates
from planner.season.day_problem import day_season
from planner.season.itinerary import Fixed
from planner.season.search import search
from planner.season.season_task import (
    ASCENT,
    LANDING,
    LOCKS,
    PHYSICIAN,
    TRAVEL,
    SeasonTask,
    Wish,
    limit_names,
)


def in_the_way(task: SeasonTask, *, cancelled: Callable[[], bool] | None = None) -> list[str]:
    """Each constraint whose setting aside alone would make a plan possible, one sentence each.

    When no single one does, the first night that cannot be reached is named. Empty when a plan is possible.
    Raises: SearchCancelledError when `cancelled` says so.
    """
    if _possible(task, (), cancelled):
        return []
    names = [*limit_names(task), PHYSICIAN, ASCENT, LANDING, TRAVEL, *([LOCKS] if task.locks else [])]
    found = [f"In the way: {name}." for name in names if _possible(task, (name,), cancelled)]
    for point in task.fixed_within():
        if point.commitment_id is not None:
            without = replace(task, fixed=tuple(f for f in task.fixed if f is not point))
            if _possible(without, (), cancelled):
                found.append(f"In the way: the commitment {point.name} in {_place(task, point)}.")
    return found or [_dead_end(task)]


def _possible(task: SeasonTask, without: tuple[str, ...], cancelled: Callable[[], bool] | None) -> bool:
    """Whether any plan exists; the cost is left out of it, so that few partial plans have to be followed."""
    free = replace(task, rates=Rates(0.0, 0.0, 0.0), wishes=_weightless(task))
    return len(search(day_season(free, without).problem, cancelled=cancelled).cost) > 0


def _weightless(task: SeasonTask) -> dict[int, Wish]:
    return {round_id: replace(wish, weight=0.0) for round_id, wish in task.wishes.items()}


def _dead_end(task: SeasonTask) -> str:
    """The pair of fixed points between which the way is cut, whatever the limits of the rounds."""
    bare = replace(task, wishes={}, locks=())
    points = bare.fixed_within()
    for i, point in enumerate(points):
        if not _possible(replace(bare, fixed=tuple(points[: i + 1])), (), None):
            before = f"after {points[i - 1].name} in {_place(task, points[i - 1])}" if i else "from the start"
            return f"In the way: {point.name} in {_place(task, point)} cannot be reached in time {before}."
    return "In the way: more than one limit at once; no single one of them set aside makes a plan possible."


def _place(task: SeasonTask, point: Fixed) -> str:
    return task.setting.places[point.place_id].name
