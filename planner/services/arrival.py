"""How should this driver reach this round? The ways to it, ranked by what the coach asks."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, dataclass, replace
from datetime import date, datetime
from typing import Final, Literal, TypeAlias

from planner.errors import InputError, NotFoundError
from planner.season.arrival import Option, arrival_options
from planner.season.arrival_ways import Gap, Kind, gap_before
from planner.season.constraints import Limits, local_date
from planner.season.evaluate import RoundPoint, Setting, round_point
from planner.season.itinerary import Fixed, Itinerary
from planner.season.model import Driver, Place, Round
from planner.services.itineraries import fixed_of, planning_setting
from planner.services.limits import keep_limits, kept_limits, season_limits
from planner.services.season import Calendar, read_calendar
from planner.services.workspace import now
from planner.store.store import Store
from planner.wording import day_and_clock

Order: TypeAlias = Literal[
    "fewest nights away", "fewest flights", "least travel", "most SpO2 on race morning"
]

ORDERS: Final[tuple[Order, ...]] = (
    "fewest nights away",
    "fewest flights",
    "least travel",
    "most SpO2 on race morning",
)
ORDER_SETTING: Final = "order of the ways to a round"
NOT_PLANNED: Final = "Nothing is planned yet: there on the day before, and home after the round."
# Where nothing lies high, that these are not to be had is no news.
HIGH_GROUND_KINDS: Final[tuple[Kind, ...]] = ("half-way stop", "tent at home", "sleep lower")


@dataclass(frozen=True)
class Arrival:
    """Every way for one driver to one round, the best first, as it stood when it was worked out."""

    calendar: Calendar
    driver: Driver
    round: Round
    planned: Itinerary
    point: RoundPoint
    fixed: tuple[Fixed, ...]
    setting: Setting
    gap: Gap
    limits: Limits
    order: Order
    now: datetime
    options: tuple[Option, ...]

    @property
    def venue(self) -> Place:
        """Where the round is held."""
        return self.setting.places[self.point.place_id]

    def arrives_on(self, option: Option) -> date | None:
        """The local day on which an option reaches the venue; None when it cannot be built."""
        at = option.arrives_at(self.point)
        return None if at is None else local_date(at, self.venue)

    @property
    def in_hindsight(self) -> bool:
        """Whether the round has begun, so that a choice corrects what is past."""
        return self.point.first_session_at <= self.now


def arrival(
    store: Store,
    driver: Driver,
    given: Round,
    *,
    limits: Limits | None = None,
    order: Order | None = None,
    lower_bed_m: float | None = None,
) -> Arrival:
    """Work out every way to a round; limits and order are the kept ones unless others are given.

    Raises: InputError when the driver has no free time before the round.
    """
    calendar, at = read_calendar(store), now(store)
    point = _point(calendar, given)
    fixed = tuple(fixed_of(calendar, driver))
    setting = planning_setting(store, calendar, driver, at)
    itinerary = calendar.itinerary_of(driver)
    asked = season_limits(store) if limits is None else limits
    by = kept_order(store) if order is None else order
    # A round that has begun is planned in hindsight: then all before it may be corrected.
    not_before = at if point.first_session_at > at else None
    gap = gap_before(itinerary, point, fixed, setting, not_before)
    options = arrival_options(
        itinerary, point, fixed, setting, asked, lower_bed_m=lower_bed_m, not_before=not_before
    )
    if gap.base != itinerary:
        options = [replace(o, difference=NOT_PLANNED) if o.kind == "usual plan" else o for o in options]
    if not calendar.is_high(given):
        options = [o for o in options if o.itinerary is not None or o.kind not in HIGH_GROUND_KINDS]
    if not_before is not None:
        options = [_not_in_the_past(each, not_before, calendar.places) for each in options]
    return Arrival(
        calendar=calendar,
        driver=driver,
        round=given,
        planned=itinerary,
        point=point,
        fixed=fixed,
        setting=setting,
        gap=gap,
        limits=asked,
        order=by,
        now=at,
        options=tuple(sorted(options, key=lambda option: _rank(option, by))),
    )


def kept_order(store: Store) -> Order:
    """What ranks the ways that keep every limit, as the coach set it or by default."""
    kept = store.setting(ORDER_SETTING)
    return next((order for order in ORDERS if order == kept), ORDERS[0])


def keep_asked(store: Store, limits: Limits, order: Order, *, by: str) -> None:
    """Keep limits and order for every plan, on the screens and on the command line.

    Raises: InputError naming the first limit that cannot be used; then nothing is kept.
    """
    asked = {key: value for key, value in asdict(limits).items() if key in kept_limits(store)}
    with store.transaction(by):
        keep_limits(store, {**kept_limits(store), **asked})
        store.set_setting(ORDER_SETTING, order)


def next_high_round(calendar: Calendar, at: datetime) -> Round | None:
    """The high round that comes next, else the last one of the season; None when none is high."""
    high = [each for each in calendar.season_at(at) if calendar.is_high(each)]
    return next((each for each in high if calendar.starts_at(each) > at), high[-1] if high else None)


def find_round(calendar: Calendar, asked: str, at: datetime) -> Round:
    """The round of that number, name, or beginning of a name; of several seasons the present one first.

    Raises: NotFoundError when there is none; InputError when a beginning fits several.
    """
    wanted = " ".join(asked.split()).casefold()
    for rounds in (calendar.season_at(at), calendar.rounds):
        exact = [each for each in rounds if wanted in (str(each.number), each.name.casefold())]
        found = exact or [each for each in rounds if wanted and each.name.casefold().startswith(wanted)]
        if len(found) > 1:
            raise InputError("ROUND", asked, f"one round; it fits {', '.join(each.name for each in found)}")
        if found:
            return found[0]
    raise NotFoundError(f"there is no round {asked!r}; rounds: {', '.join(r.name for r in calendar.rounds)}")


def _point(calendar: Calendar, given: Round) -> RoundPoint:
    place = calendar.place_of(given)
    return round_point(
        given.id, given.name, place, calendar.starts_at(given), calendar.race_of(given).starts_at
    )


def _not_in_the_past(option: Option, at: datetime, places: Mapping[int, Place]) -> Option:
    """The option, refused when a journey that it adds would have had to begin before now."""
    legs = () if option.itinerary is None else option.itinerary.legs
    gone = [leg for leg in legs if leg.id == 0 and leg.depart_at < at]
    if not gone:
        return option
    left = day_and_clock(gone[0].depart_at, places[gone[0].from_place_id].zone)
    return replace(option, why=(*option.why, f"It leaves on {left}, which is past."))


def _rank(option: Option, order: Order) -> tuple[int, float]:
    """Feasible ones by the coach's order, then the others; what is equal stays as it was ranked before."""
    if option.costs is None or option.outlook is None:
        return 2, 0.0
    if not option.feasible:
        return 1, 0.0
    value: dict[Order, float] = {
        "fewest nights away": option.costs.nights_away,
        "fewest flights": option.costs.flights,
        "least travel": option.costs.travel_h,
        "most SpO2 on race morning": -option.outlook.race_spo2_pct.mean,
    }
    return 0, value[order]
