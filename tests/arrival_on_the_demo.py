"""Ways to the demo's rounds, looked at and compared: what the tests of Arrival share."""

from __future__ import annotations

from planner.season.arrival import Option
from planner.season.constraints import Limits
from planner.season.model import Driver, Leg, Stay
from planner.services.arrival import (
    Arrival,
    arrival,
    find_round,
)
from planner.services.arrival_choice import (
    is_planned,
)
from planner.services.driver import driver_view
from planner.services.morning import DriverRow, morning
from planner.services.season import RoundCost, read_calendar, round_costs
from planner.services.workspace import now
from planner.store.store import Store

NO_LIMITS = Limits(None, None, "high", None, 0.0, 100.0)


def driver_called(store: Store, name: str) -> Driver:
    return next(d for d in store.all(Driver) if d.name.startswith(name))


def looked_at(store: Store, name: str, asked: str, limits: Limits | None = None) -> Arrival:
    calendar = read_calendar(store)
    given = find_round(calendar, asked, now(store))
    return arrival(store, driver_called(store, name), given, limits=limits)


def another(found: Arrival) -> Option:
    """The best way that can be chosen and arrives on another day than planned."""
    [planned] = [o for o in found.options if is_planned(found, o)]
    return next(o for o in found.options if o.feasible and found.arrives_on(o) != found.arrives_on(planned))


def everything(store: Store) -> tuple[list[Stay], list[Leg]]:
    return store.all(Stay), store.all(Leg)


def row_of(store: Store, name: str) -> DriverRow:
    return next(row for row in morning(store) if row.driver.startswith(name))


def cost_of(store: Store, found: Arrival) -> RoundCost:
    calendar = read_calendar(store)
    person = driver_view(store, calendar, found.driver, now(store)).person
    costs = round_costs(calendar, found.driver, now(store), person)
    return next(cost for cost in costs if cost.round.id == found.round.id)
