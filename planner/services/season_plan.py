"""What could the free days of a season buy? The search for one driver, and the plan chosen from it."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from datetime import date, datetime, timedelta
from typing import Final

import numpy as np

from planner.errors import InputError, StoreError
from planner.season.constraints import IronCheck, Limits, iron_check, local_date
from planner.season.day_model import Combination, Measure, Rates
from planner.season.day_problem import DaySeason, day_season
from planner.season.evaluate import Costs, RoundOutlook, RoundPoint, Setting, costs, outlooks, round_point
from planner.season.itinerary import Fixed, Itinerary, broken, fixed_points, problems
from planner.season.model import Driver, Place, Round, Stay
from planner.season.nights import ONE_DAY, nights_of
from planner.season.obstacles import in_the_way
from planner.season.search import TradeOff, search
from planner.season.season_task import Lock, SeasonTask, Wish
from planner.services.itineraries import fixed_of, planning_setting, write_itinerary
from planner.services.limits import season_limits
from planner.services.season import Calendar, read_calendar
from planner.services.workspace import now
from planner.store.store import Store

# Free nights may be spent at places whose beds lie at least this high, unless the coach says otherwise.
STAGING_FROM_M: Final = 1200.0  # judgement: below it nothing is gained
AFTER_THE_LAST: Final = timedelta(days=4)  # home by then: judgement
MOST_EXTRA_NIGHTS: Final = 20.0  # how far the curve is followed unless the coach says otherwise: judgement
# The largest rate that may be typed, in nights away; and the largest weight of a round.
HIGHEST_RATE: Final = 10.0
HIGHEST_WEIGHT: Final = 10.0


@dataclass(frozen=True)
class Question:
    """What the coach asks of a season. `weights` and `lowest_spo2_pct` by round; rounds left out count 1.

    `kept_rounds` are rounds whose way there stays as it is planned.
    """

    places: tuple[int, ...]
    rates: Rates = field(default_factory=Rates)
    measure: Measure = "SpO2"
    combination: Combination = "weighted sum"
    weights: Mapping[int, float] = field(default_factory=dict)
    lowest_spo2_pct: Mapping[int, float] = field(default_factory=dict)
    kept_rounds: tuple[int, ...] = ()
    tent: bool = True
    most_extra_nights: float | None = MOST_EXTRA_NIGHTS

    def __post_init__(self) -> None:
        for name in ("tent_night", "flight", "travel_hour"):
            rate = getattr(self.rates, name)
            if not 0.0 <= rate <= HIGHEST_RATE:
                raise InputError(name, rate, f"0 to {HIGHEST_RATE:g} nights away")
        for weight in self.weights.values():
            if not 0.0 <= weight <= HIGHEST_WEIGHT:
                raise InputError("weight", weight, f"0 to {HIGHEST_WEIGHT:g}")
        if self.most_extra_nights is not None and not self.most_extra_nights >= 0.0:
            raise InputError("most extra nights", self.most_extra_nights, "0 or more")


@dataclass(frozen=True)
class Stretch:
    """The free nights before one fixed point, in words: what is planned now and what would be."""

    before: Fixed
    now_words: str
    then_words: str

    @property
    def changes(self) -> bool:
        """Whether the nights differ."""
        return self.now_words != self.then_words


@dataclass(frozen=True)
class PlanOutlook:
    """One plan looked at hour by hour: what it gives at each round that counts, and what it costs."""

    itinerary: Itinerary
    rounds: tuple[RoundOutlook, ...]
    costs: Costs


@dataclass(frozen=True)
class SeasonPlans:
    """The answer to a question: the trade-off, or what stands in the way of any plan."""

    driver: Driver
    question: Question
    model: DaySeason
    curve: TradeOff
    obstacles: tuple[str, ...]
    present: PlanOutlook

    @property
    def points(self) -> list[RoundPoint]:
        """The rounds that count, in time order."""
        return [outlook.point for outlook in self.present.rounds]

    def cost_of(self, outlook: PlanOutlook) -> float:
        """What a plan costs at the coach's rates, in nights away."""
        spent, rates = outlook.costs, self.question.rates
        return (
            spent.nights_away
            + rates.tent_night * spent.tent_nights
            + rates.flight * spent.flights
            + rates.travel_hour * spent.travel_h
        )

    def benefit_of(self, outlook: PlanOutlook) -> float:
        """The benefit of a plan looked at hour by hour, as `mean_benefit` tells it [%]."""
        of_spo2 = self.question.measure == "SpO2"
        values = [(r.race_spo2_pct if of_spo2 else r.race_capacity_pct).mean for r in outlook.rounds]
        weights = [each.weight for each in self.model.problem.rounds]
        counted = [v for v, w in zip(values, weights, strict=True) if w > 0.0]
        if not counted:
            return 0.0
        if self.question.combination == "worst":
            return min(counted)
        return sum(v * w for v, w in zip(values, weights, strict=True)) / sum(weights)

    def mean_benefit(self) -> list[float]:
        """The benefit of each plan as a figure that can be read: the weighted mean, or the worst [%]."""
        if self.question.combination == "worst":
            return [float(b) for b in self.curve.benefit]
        total = sum(each.weight for each in self.model.problem.rounds)
        return [float(b) / total if total else 0.0 for b in self.curve.benefit]

    def outlook_of(self, number: int) -> PlanOutlook:
        """One plan of the curve looked at hour by hour.

        Raises: InputError when the plan cannot be made an itinerary.
        """
        itinerary = self.model.itinerary_of(self.curve.plans[number])
        return _outlook(itinerary, self.points, self.model.task)

    def stretches(self, itinerary: Itinerary) -> list[Stretch]:
        """What an itinerary changes against the present plan, one entry for each fixed point."""
        task = self.model.task
        found, begin = [], task.starts_at
        for point in task.fixed_within():
            words = [
                _nights_words(each, begin, point.starts_at, task) for each in (task.itinerary, itinerary)
            ]
            found.append(Stretch(point, *words))
            begin = point.ends_at
        return found

    def picks(self, most: int) -> list[int]:
        """Numbers of at most so many plans of the curve, evenly from the cheapest to the dearest."""
        count = len(self.curve.cost)
        return sorted({int(i) for i in np.linspace(0, count - 1, min(most, count)).round()}) if count else []


def free_places(calendar: Calendar, driver: Driver) -> list[Place]:
    """The places where free nights might be worth something, the highest first; a driver's own home apart."""
    homes = {each.home_place_id for each in calendar.drivers} - {driver.home_place_id}
    found = [
        p
        for p in calendar.places.values()
        if p.bed_elevation_m >= STAGING_FROM_M and p.id != driver.home_place_id and p.id not in homes
    ]
    return sorted(found, key=lambda p: (-p.bed_elevation_m, p.name))


def high_rounds_ahead(calendar: Calendar, at: datetime) -> list[Round]:
    """The high rounds of this season that have not begun."""
    return [r for r in calendar.season_at(at) if calendar.is_high(r) and calendar.starts_at(r) > at]


def iron_due(calendar: Calendar, driver: Driver, at: datetime) -> IronCheck | None:
    """When the driver's iron is to be looked at before the next round that asks the blood for it, if any."""
    ahead = high_rounds_ahead(calendar, at)
    sessions = [session for each in ahead for session in calendar.sessions[each.id]]
    return iron_check(driver, fixed_points(ahead, sessions, (), driver_id=driver.id), calendar.places)


def season_task(store: Store, driver: Driver, question: Question) -> SeasonTask:
    """The driver's season from the next free morning on as a task for the search.

    Raises: InputError when nothing high lies ahead, or when the driver's plan has a hole or no entry at all.
    """
    calendar, at = read_calendar(store), now(store)
    ahead = high_rounds_ahead(calendar, at)
    if not ahead:
        raise InputError("season", driver.name, "a high round ahead")
    itinerary = calendar.itinerary_of(driver)
    setting = planning_setting(store, calendar, driver, at)
    fixed = tuple(fixed_of(calendar, driver))
    rules = season_limits(store)
    task = SeasonTask(
        setting=setting,
        itinerary=itinerary,
        points=tuple(_point(calendar, each) for each in calendar.season_at(at)),
        fixed=fixed,
        candidates=question.places,
        wishes={each.id: _wish(each, question, rules) for each in ahead},
        from_day=_first_free_day(itinerary, fixed, at, setting),
        until_day=_last_day(itinerary, fixed, ahead, calendar, setting),
        rules=rules,
        rates=question.rates,
        tent=question.tent,
        measure=question.measure,
        combination=question.combination,
    )
    kept = _kept_stretches(task, question.kept_rounds)
    return replace(task, kept=tuple(kept), locks=tuple(_locks(task, kept)))


def search_season(
    store: Store,
    driver: Driver,
    question: Question,
    *,
    progress: Callable[[float], None] | None = None,
    cancelled: Callable[[], bool] | None = None,
) -> SeasonPlans:
    """Search a driver's season; reads the store and writes nothing.

    Raises: InputError as `season_task`; SearchCancelledError when `cancelled` says so.
    """
    task = season_task(store, driver, question)
    model = day_season(task)
    curve = search(
        model.problem, most_extra_cost=question.most_extra_nights, progress=progress, cancelled=cancelled
    )
    obstacles = () if len(curve.cost) else tuple(in_the_way(task, cancelled=cancelled))
    within = {each.round_id for each in model.problem.rounds}
    points = [p for p in task.points if p.round_id in within]
    present = _outlook(task.itinerary, points, task)
    return SeasonPlans(driver, question, model, curve, obstacles, present)


def keep_plan(store: Store, plans: SeasonPlans, number: int, *, by: str) -> int:
    """Make a plan of the curve the driver's itinerary in one change set; gives its id, for `store.undo`.

    Raises: InputError when the plan is not whole or breaks an appointment; StoreError when the season has
    changed since the search.
    """
    task = plans.model.task
    new = plans.outlook_of(number).itinerary
    wrong = [*problems(new, task.setting.places), *broken(new, task.fixed_within(), task.setting.places)]
    if wrong:
        raise InputError("plan", number, f"an itinerary that is whole: {' '.join(wrong)}")
    why = f"season of {plans.driver.name}: plan of {plans.curve.cost[number]:g} nights"
    with store.transaction(by, why) as change_set_id:
        if _ground(read_calendar(store), plans.driver) != _ground_of(task):
            raise StoreError("the season has changed since the search; nothing was written: search again")
        write_itinerary(store, task.itinerary, new, by=by)
    return change_set_id


def _ground(calendar: Calendar, driver: Driver) -> tuple[object, ...]:
    """What a search rests on, to tell whether it has changed since."""
    fixed = tuple(fixed_of(calendar, driver))
    known = next((each for each in calendar.drivers if each.id == driver.id), None)
    return known, calendar.itinerary_of(driver), fixed, dict(calendar.places)


def _ground_of(task: SeasonTask) -> tuple[object, ...]:
    return task.setting.driver, task.itinerary, task.fixed, dict(task.setting.places)


def _outlook(itinerary: Itinerary, points: list[RoundPoint], task: SeasonTask) -> PlanOutlook:
    end = max((f.ends_at for f in task.fixed_within()), default=task.starts_at)
    return PlanOutlook(
        itinerary,
        tuple(outlooks([itinerary], points, task.setting)[0]),
        costs(itinerary, task.starts_at, end, task.setting),
    )


def _point(calendar: Calendar, given: Round) -> RoundPoint:
    place = calendar.place_of(given)
    race_at = calendar.race_of(given).starts_at
    return round_point(given.id, given.name, place, calendar.starts_at(given), race_at)


def _wish(given: Round, question: Question, rules: Limits) -> Wish:
    lowest = question.lowest_spo2_pct.get(given.id, rules.lowest_race_spo2_pct)
    return Wish(question.weights.get(given.id, 1.0), replace(rules, lowest_race_spo2_pct=lowest))


def _first_free_day(itinerary: Itinerary, fixed: tuple[Fixed, ...], at: datetime, setting: Setting) -> date:
    """The first day after now, and after what is going on now, on whose morning the driver is at a place."""
    bound = max((f.ends_at for f in fixed if f.starts_at <= at < f.ends_at), default=at)
    day = local_date(bound, setting.home) + ONE_DAY
    for later in range(15):
        task = _Morning(itinerary, setting, day + later * ONE_DAY)
        if task.is_free(bound):
            return task.day
    raise InputError("plan", setting.driver.name, "a stay within the next days; the plan has none")


@dataclass(frozen=True)
class _Morning:
    itinerary: Itinerary
    setting: Setting
    day: date

    def is_free(self, bound: datetime) -> bool:
        at = SeasonTask(self.setting, self.itinerary, (), (), (), {}, self.day, self.day + ONE_DAY).starts_at
        i = self.itinerary.index_at(at)
        return at >= bound and i is not None and isinstance(self.itinerary.entries[i], Stay)


def _last_day(
    itinerary: Itinerary, fixed: tuple[Fixed, ...], ahead: list[Round], calendar: Calendar, setting: Setting
) -> date:
    """A few days after the last fixed point of the season, when the driver is at a place for the night."""
    until = calendar.ends_at(calendar.season_at(calendar.starts_at(ahead[-1]))[-1])
    last = max((f.ends_at for f in fixed if f.starts_at <= until + AFTER_THE_LAST), default=until)
    for later in range(1, 15):
        at = last + later * ONE_DAY
        i = itinerary.index_at(at)
        entry = itinerary.entries[i] if i is not None else None
        if isinstance(entry, Stay) and entry.place_id == setting.home.id and at - entry.arrive_at >= ONE_DAY:
            return local_date(at, setting.home)
    raise InputError("plan", setting.driver.name, "a way home after the last round")


def _kept_stretches(task: SeasonTask, kept_rounds: tuple[int, ...]) -> list[tuple[datetime, datetime]]:
    """The free time before each round whose way is to stay as it is planned."""
    found = []
    begin = task.starts_at
    for point in task.fixed_within():
        if point.round_id in kept_rounds:
            found.append((begin, point.starts_at))
        begin = point.ends_at
    return found


def _locks(task: SeasonTask, kept: list[tuple[datetime, datetime]]) -> list[Lock]:
    """The nights of the kept stretches that are spent at a place, as the present plan has them."""
    nights = [n for begin, end in kept for n in nights_of(task.itinerary, task.setting.places, begin, end)]
    return [Lock(n.evening, n.evening, n.place_id) for n in nights if n.place_id is not None]


def _nights_words(itinerary: Itinerary, begin: datetime, end: datetime, task: SeasonTask) -> str:
    """The nights of a stretch in words: "5 at home, 2 in Copperdrift"."""
    places, home = task.setting.places, task.setting.home
    counts: list[tuple[str, int]] = []
    for night in nights_of(itinerary, places, begin, end):
        if night.place_id is None:
            where = "on the way"
        elif night.place_id == home.id:
            where = "at home, in the tent" if night.in_tent else "at home"
        else:
            where = f"in {places[night.place_id].name}"
        if counts and counts[-1][0] == where:
            counts[-1] = (where, counts[-1][1] + 1)
        else:
            counts.append((where, 1))
    return ", ".join(f"{n} {where}" for where, n in counts) or "none"
