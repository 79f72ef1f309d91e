"""Every sensible way to reach one round, evaluated in one pass and ranked by the coach's own limits."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import datetime

from planner.errors import InputError
from planner.season.arrival_ways import TENT_OXYGEN_FRACTION, Gap, Kind, Sketch, gap_before, sketches
from planner.season.constraints import Limits, bed_refused, local_date, worse
from planner.season.evaluate import Costs, RoundOutlook, RoundPoint, Setting, costs, outlooks
from planner.season.itinerary import BrokenAppointmentError, Fixed, Itinerary, replace_between
from planner.season.nights import nights_of


@dataclass(frozen=True)
class Option:
    """One way to reach the round. `itinerary` and what follows from it are None when it cannot be built.

    `why` holds a sentence for everything that stands against it; empty = feasible.
    """

    kind: Kind
    title: str
    itinerary: Itinerary | None
    outlook: RoundOutlook | None
    costs: Costs | None
    why: tuple[str, ...]
    difference: str = ""

    @property
    def feasible(self) -> bool:
        """Whether nothing stands against it."""
        return not self.why

    def arrives_at(self, point: RoundPoint) -> datetime | None:
        """Arrival at the venue before the first session."""
        stays = self.itinerary.stays if self.itinerary else ()
        there = [s for s in stays if s.place_id == point.place_id and s.arrive_at <= point.first_session_at]
        if not there:
            return None
        # A change of bed at the venue is no arrival.
        first = there[-1]
        for stay in reversed(there[:-1]):
            if stay.depart_at != first.arrive_at:
                break
            first = stay
        return first.arrive_at


def arrival_options(
    itinerary: Itinerary,
    point: RoundPoint,
    fixed: Sequence[Fixed],
    setting: Setting,
    limits: Limits,
    *,
    lower_bed_m: float | None = None,
    not_before: datetime | None = None,
) -> list[Option]:
    """Every sensible way to the round, the best first under the coach's limits.

    Feasible ones come first, then fewest nights away, flights, hours of travel, then most saturation on race
    morning. `lower_bed_m` is the elevation of beds near the venue that lie lower than the track, if known;
    what lies before `not_before` is past and stays as it is.
    Raises: InputError when the driver's itinerary leaves no gap before the round.
    """
    gap = gap_before(itinerary, point, fixed, setting, not_before)
    ways = [Sketch("usual plan", "the usual plan", itinerary=gap.base)]
    ways += [
        _built(sketch, gap, point, fixed, setting) for sketch in sketches(gap, point, setting, lower_bed_m)
    ]
    ways = _distinct(ways, gap, point, setting)
    whole = [w.itinerary for w in ways if w.itinerary is not None]
    given = iter(outlooks(whole, [point], setting))
    options = [_judged(s, next(given)[0] if s.itinerary else None, gap, point, setting, limits) for s in ways]
    usual = options[0]
    options = [replace(o, difference=_difference(o, usual, point, setting)) for o in options]
    return sorted(options, key=_rank)


def _built(sketch: Sketch, gap: Gap, point: RoundPoint, fixed: Sequence[Fixed], setting: Setting) -> Sketch:
    if sketch.why:
        return sketch
    try:
        itinerary = replace_between(
            gap.base, gap.free_from, point.first_session_at, sketch.visits, setting.times, fixed
        )
    except InputError as error:
        return replace(sketch, why=_sentence(error))
    return replace(sketch, itinerary=itinerary)


def _sentence(error: InputError) -> str:
    if isinstance(error, BrokenAppointmentError):
        return error.sentence
    return f"{error.field[:1].upper()}{error.field[1:]}: possible is {error.expected}."


def _distinct(ways: list[Sketch], gap: Gap, point: RoundPoint, setting: Setting) -> list[Sketch]:
    """Drop a way whose nights are those of an earlier one, and all but the first impossible one of a kind."""
    seen: set[object] = set()
    kept = []
    for way in ways:
        if way.itinerary is None:
            mark: object = way.kind
        else:
            nights = nights_of(way.itinerary, setting.places, gap.free_from, point.race_at)
            mark = tuple((night.evening, night.place_id, night.sleeping_m) for night in nights)
        if mark not in seen:
            kept.append(way)
        seen.add(mark)
    return kept


def _judged(
    sketch: Sketch,
    outlook: RoundOutlook | None,
    gap: Gap,
    point: RoundPoint,
    setting: Setting,
    limits: Limits,
) -> Option:
    if sketch.itinerary is None or outlook is None:
        return Option(sketch.kind, sketch.title, None, None, None, (sketch.why,))
    spent = costs(sketch.itinerary, gap.free_from, point.race_morning, setting)
    why = [*limit_failures(outlook, spent, limits), *_beds_refused(sketch.itinerary, gap, point, setting)]
    return Option(sketch.kind, sketch.title, sketch.itinerary, outlook, spent, tuple(why))


def limit_failures(outlook: RoundOutlook, spent: Costs, limits: Limits) -> list[str]:
    """What of the coach's limits a plan misses, one sentence each."""
    spo2, capacity = outlook.race_spo2_pct.mean, outlook.race_capacity_pct.mean
    offset, landed = abs(outlook.clock_offset_h), outlook.hours_since_landing
    found = []
    if limits.lowest_race_spo2_pct is not None and spo2 < limits.lowest_race_spo2_pct:
        found.append(
            f"Race-morning SpO2 {spo2:.1f} %, at least {limits.lowest_race_spo2_pct:.0f} % is asked."
        )
    if limits.lowest_race_capacity_pct is not None and capacity < limits.lowest_race_capacity_pct:
        found.append(
            f"Aerobic capacity {capacity:.1f} %, at least {limits.lowest_race_capacity_pct:.0f} % is asked."
        )
    if worse(outlook.risk, limits.highest_risk):
        found.append(f"Planned-ascent class {outlook.risk}, at most {limits.highest_risk} is asked.")
    if limits.largest_clock_offset_h is not None and offset > limits.largest_clock_offset_h:
        asked = f"at most {limits.largest_clock_offset_h:g} h is asked"
        found.append(f"Body clock {offset:.1f} h off on race day, {asked}.")
    if landed is not None and landed < limits.shortest_landing_to_session_h:
        found.append(
            f"{landed:.1f} h from landing to the first session,"
            f" at least {limits.shortest_landing_to_session_h:g} h are asked."
        )
    if spent.longest_travel_h_per_day > limits.longest_travel_h_per_day:
        found.append(
            f"{spent.longest_travel_h_per_day:.1f} h of travel in one day,"
            f" at most {limits.longest_travel_h_per_day:g} h are asked."
        )
    if limits.most_nights_away is not None and spent.nights_away > limits.most_nights_away:
        found.append(f"{spent.nights_away} nights away, at most {limits.most_nights_away} are asked.")
    if outlook.ascent_warnings and not limits.ascent_override.strip():
        found += [f"Too fast an ascent: {warning}." for warning in outlook.ascent_warnings]
    return found


def _beds_refused(itinerary: Itinerary, gap: Gap, point: RoundPoint, setting: Setting) -> list[str]:
    """The physician's word on each bed of the stretch, once each."""
    nights = nights_of(itinerary, setting.places, gap.free_from, point.race_at)
    found = [
        bed_refused(setting.driver, n.bed_m, TENT_OXYGEN_FRACTION if n.in_tent else None, n.sleeping_m)
        for n in nights
        if n.place_id is not None
    ]
    return list(dict.fromkeys(sentence for sentence in found if sentence))


def _rank(option: Option) -> tuple[float, ...]:
    if option.costs is None or option.outlook is None:
        return (2.0, 0.0, 0.0, 0.0, 0.0, 0.0)
    return (
        0.0 if option.feasible else 1.0,
        float(len(option.why)),
        float(option.costs.nights_away),
        float(option.costs.flights),
        option.costs.travel_h,
        -option.outlook.race_spo2_pct.mean,
    )


def _difference(option: Option, usual: Option, point: RoundPoint, setting: Setting) -> str:
    """What sets an option apart from the usual plan, in one sentence."""
    if option.kind == "usual plan":
        return "What is planned now."
    if not (option.costs and option.outlook and usual.costs and usual.outlook):
        return "Cannot be built."
    here, there = option.arrives_at(point), usual.arrives_at(point)
    venue = setting.places[point.place_id]
    days = (local_date(there, venue) - local_date(here, venue)).days if here and there else 0
    parts = [
        _more(days, "day earlier", "day later", "days earlier", "days later"),
        _more(option.costs.nights_away - usual.costs.nights_away, "more night away", "fewer night away",
              "more nights away", "fewer nights away"),
        _more(option.costs.tent_nights - usual.costs.tent_nights, "tent night", "fewer tent night",
              "tent nights", "fewer tent nights"),
        _more(option.costs.flights - usual.costs.flights, "more flight", "fewer flight", "more flights",
              "fewer flights"),
    ]  # fmt: skip
    changes = [part for part in parts if part] or ["same days"]
    gain = option.outlook.race_spo2_pct.mean - usual.outlook.race_spo2_pct.mean
    air = f"race morning {gain:+.1f} points of SpO2" if abs(gain) >= 0.05 else "the same SpO2 on race morning"
    clock = abs(option.outlook.clock_offset_h) - abs(usual.outlook.clock_offset_h)
    hours = (
        f", body clock {abs(clock):.1f} h {'further off' if clock > 0 else 'closer'}"
        if abs(clock) >= 0.05
        else ""
    )
    sentence = f"{', '.join(changes)}; {air}{hours}."
    return sentence[:1].upper() + sentence[1:].replace("-", "−")


def _more(count: int, one_more: str, one_less: str, more: str, less: str) -> str:
    if count == 0:
        return ""
    words = (one_more if count > 0 else one_less) if abs(count) == 1 else (more if count > 0 else less)
    return f"{abs(count)} {words}"
