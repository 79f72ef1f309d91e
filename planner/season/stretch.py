"""Ways across a stretch of free nights, found once for all partial plans that reach its beginning.

A way is a bed for every night from one gate to the next. What it does to the state is a rising, convex,
piecewise linear function. A way is dropped only if another with the same end, ascent and body clock costs no
more and leaves no less state whatever the state at the beginning was, between the lowest and the highest that
occurs. With few states at the beginning that is checked at each of them; with many at sample states, and
between two of them by convexity: a convex function lies above its tangents and below its chord.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from planner.checks import FloatArray
from planner.physiology.illness import MOST_NIGHTS_CLIMBING
from planner.season.day_model import ON_THE_WAY, BoolArray, IntArray
from planner.season.moves import LOST, OFFSET_DIGITS, Moves, through

SAMPLES: Final = 8
NO_BEND: Final = 1e-12  # slopes and states that differ by less differ by the rounding of floats


@dataclass(frozen=True)
class Entry:
    """Where a stretch begins: bed and night, body clock and ascent so far, and the states that occur."""

    night: int
    bed: int
    offset_h: float
    climbing: int
    risk: int
    states: FloatArray


@dataclass(frozen=True)
class Ways:
    """Ways across a stretch, one entry each: where they end, at what cost, and the beds of their nights."""

    bed: IntArray
    cost: FloatArray
    travel_h: FloatArray  # decides only between ways that are alike in everything else
    offset_h: FloatArray
    climbing: IntArray
    risk: IntArray
    beds: IntArray  # (n, nights) bed or ON_THE_WAY


@dataclass(frozen=True)
class _Heads:
    """The ways as far as one night."""

    bed: IntArray
    cost: FloatArray
    travel_h: FloatArray
    state: FloatArray  # (n, samples)
    slope: FloatArray
    offset: FloatArray
    climbing: IntArray
    risk: IntArray
    from_night: IntArray
    from_head: IntArray

    def taken(self, chosen: IntArray) -> _Heads:
        return _Heads(**{name: column[chosen] for name, column in vars(self).items()})


class Crossing:
    """Finds the ways across the stretches of one problem; `touched` counts the heads looked at."""

    def __init__(self, moves: Moves) -> None:
        self.moves = moves
        self.problem = moves.problem
        self.touched = 0

    def ways(self, entry: Entry, until: int, *, state_counts: bool, most_cost: float) -> Ways:
        """All ways that are worth keeping from an entry to the night `until`.

        `state_counts` says whether a round ahead asks for the state; a way whose cost with the cheapest end
        is above `most_cost` is left out.
        """
        samples, convex = _samples(entry.states) if state_counts else (np.zeros(1), False)
        heads = {entry.night: _start(entry, samples)}
        for night in range(entry.night + 1, until + 1):
            made = [
                self._moved(heads[night - 1 - lost], night, lost, state_counts)
                for lost in LOST
                if night - 1 - lost in heads
            ]
            here = _joined([m for m in made if len(m.bed)] or made[:1])
            self.touched += len(here.bed)
            affordable = here.cost + self.moves.cheapest_to_go[night, here.bed] <= most_cost
            if self.problem.ascent_rule:
                affordable &= here.climbing <= MOST_NIGHTS_CLIMBING
            here = here.taken(np.flatnonzero(affordable))
            key, keeps = self._clock_keys(here, night, at_gate=night == until)
            here, key = here.taken(np.flatnonzero(keeps)), key[keeps]
            heads[night] = here.taken(_kept(here, key, samples, convex))
        return self._traced(heads, entry.night, until)

    def _moved(self, old: _Heads, night: int, lost: int, state_counts: bool) -> _Heads:
        moves = self.moves
        head, bed = np.nonzero(moves.allowed[night, lost][old.bed])
        before = old.bed[head]
        state, slope = old.state[head], old.slope[head]
        if state_counts:
            state, slope = through(moves.pieces(night, lost, before, bed), state, slope)
        climbing, risk = moves.ascent_after(old.climbing[head], old.risk[head], before, bed)
        if self.problem.clock_counts[night]:
            offset = moves.offset_after(old.offset[head], night, lost, before, bed)
        else:
            offset = np.zeros(len(head))
        return _Heads(
            bed=bed,
            cost=old.cost[head] + moves.cost[lost, before, bed],
            travel_h=old.travel_h[head] + self.problem.hours[before, bed],
            state=state,
            slope=slope,
            offset=offset,
            climbing=climbing,
            risk=risk,
            from_night=np.full(len(head), night - 1 - lost),
            from_head=head,
        )

    def _clock_keys(self, heads: _Heads, night: int, *, at_gate: bool) -> tuple[FloatArray, BoolArray]:
        """What tells the body clocks of the heads apart, and which of them keep the limits ahead for sure."""
        key, keeps = heads.offset.copy(), np.ones(len(heads.bed), dtype=bool)
        for bed in np.unique(heads.bed) if at_gate else ():
            who = heads.bed == bed
            key[who], keeps[who] = self.moves.clock_key(night, int(bed), heads.offset[who])
        return key, keeps

    def _traced(self, heads: dict[int, _Heads], start: int, until: int) -> Ways:
        last = heads[until]
        beds = np.full((len(last.bed), until - start), ON_THE_WAY, dtype=np.intp)
        for i in range(len(last.bed)):
            night, head = until, i
            while night > start:
                here = heads[night]
                beds[i, night - start - 1] = here.bed[head]
                night, head = int(here.from_night[head]), int(here.from_head[head])
        return Ways(last.bed, last.cost, last.travel_h, last.offset, last.climbing, last.risk, beds)

    def states_after(self, entry: Entry, ways: Ways, states: FloatArray) -> FloatArray:
        """(ways, states) the state at the end of each way for each state at its beginning."""
        count, nights = ways.beds.shape
        state = np.broadcast_to(states, (count, len(states)))
        before = np.full(count, entry.bed, dtype=np.intp)
        lost = np.zeros(count, dtype=np.intp)
        slope = np.ones((count, 1))
        for i in range(nights):
            bed = ways.beds[:, i]
            lands = bed != ON_THE_WAY
            pieces = np.zeros((count, 3, 3))
            for gone in LOST:
                who = lands & (lost == gone)
                if who.any():
                    pieces[who] = self.moves.pieces(entry.night + 1 + i, gone, before[who], bed[who])
            state, _ = through(pieces, state, slope)
            before = np.where(lands, bed, before)
            lost = np.where(lands, 0, lost + 1)
        return state


def _start(entry: Entry, samples: FloatArray) -> _Heads:
    one = np.ones(1, dtype=np.intp)
    return _Heads(
        bed=one * entry.bed,
        cost=np.zeros(1),
        travel_h=np.zeros(1),
        state=samples[None, :],
        slope=np.ones((1, len(samples))),
        offset=np.full(1, entry.offset_h),
        climbing=one * entry.climbing,
        risk=one * entry.risk,
        from_night=-one,
        from_head=0 * one,
    )


def _samples(states: FloatArray) -> tuple[FloatArray, bool]:
    """Sample states, and whether what lies between two of them has to be judged by convexity."""
    distinct = np.unique(states)
    if len(distinct) <= SAMPLES:
        return distinct, False
    picked = np.linspace(0, len(distinct) - 1, SAMPLES).round().astype(np.intp)
    return distinct[picked], True


def _joined(parts: list[_Heads]) -> _Heads:
    return _Heads(**{name: np.concatenate([vars(p)[name] for p in parts]) for name in vars(parts[0])})


def _kept(heads: _Heads, clock: FloatArray, samples: FloatArray, convex: bool) -> IntArray:
    """The heads that no other of the same bed, ascent and body clock makes superfluous."""
    key = np.stack(
        [heads.bed, heads.climbing, heads.risk, np.round(clock * 10.0**OFFSET_DIGITS).astype(np.intp)]
    )
    by_state = (-heads.state[:, -1], -heads.state[:, 0])
    order = np.lexsort((heads.travel_h, *by_state, heads.cost, *key))
    if not len(order):
        return order
    group = np.concatenate([[0], np.cumsum((np.diff(key[:, order], axis=1) != 0).any(axis=0))])
    state = heads.state[order]
    bounds = _between(state, heads.slope[order], samples) if convex else None
    # Within a group in order of cost: the one with the highest first sample so far mostly beats what follows.
    best = _best_before(state[:, 0], group)
    seconds = np.flatnonzero(best >= 0)
    no_higher = state[seconds, 0] <= state[best[seconds], 0]
    beaten = _no_lower(state, bounds, best[seconds], seconds)
    doubtful = np.unique(group[seconds[no_higher & ~beaten]])
    left = np.ones(len(order), dtype=bool)
    left[seconds[beaten]] = False
    # Where it does not, all pairs of the group are tried.
    for number in doubtful:
        members = np.flatnonzero(left & (group == number))
        left[members] = _undominated(state, bounds, members)
    return order[left]


def _best_before(value: FloatArray, group: IntArray) -> IntArray:
    """Index of the highest value before each entry within its group of neighbours; -1 for the first."""
    # Lifting each group above the ones before it makes one running maximum serve all of them.
    lifted = value + group * (2.0 * float(np.ptp(value)) + 1.0)
    before = np.concatenate([[-np.inf], np.maximum.accumulate(lifted)[:-1]])
    best = np.maximum.accumulate(np.where(lifted > before, np.arange(len(value)), 0))
    first = np.concatenate([[True], np.diff(group) > 0])
    return np.where(first, -1, np.concatenate([[-1], best[:-1]]))


def _undominated(
    state: FloatArray, bounds: tuple[FloatArray, FloatArray] | None, members: IntArray
) -> BoolArray:
    """Of heads in order of cost, whether none before them beats or equals them."""
    low, high = state[members, 0], state[members, -1]
    # What is no lower at both ends of the samples may be no lower everywhere; the others cannot.
    firsts, seconds = np.nonzero(np.triu((low[:, None] >= low) & (high[:, None] >= high), 1))
    beaten = np.zeros(len(members), dtype=bool)
    beaten[seconds[_no_lower(state, bounds, members[firsts], members[seconds])]] = True
    return ~beaten


def _no_lower(
    state: FloatArray, bounds: tuple[FloatArray, FloatArray] | None, firsts: IntArray, seconds: IntArray
) -> BoolArray:
    """(pairs,) whether the first of each pair is no lower than the second, at samples and between."""
    other = state[seconds]
    found = (state[firsts] >= other).all(axis=1)
    if bounds is not None:
        meet, lowest = bounds[0][firsts], bounds[1][firsts]
        chord = other[:, :-1] * (1.0 - meet) + other[:, 1:] * meet
        found = found & (lowest >= chord).all(axis=1)
    return np.asarray(found)


def _between(state: FloatArray, slope: FloatArray, samples: FloatArray) -> tuple[FloatArray, FloatArray]:
    """(n, intervals) where the tangents of an interval's ends meet, as a share of it, and how high."""
    width = np.diff(samples)
    left, right = state[:, :-1], state[:, 1:]
    bend = slope[:, 1:] - slope[:, :-1]
    bent = bend > NO_BEND
    meet = (left - right + slope[:, 1:] * width) / np.where(bent, bend * width, 1.0)
    meet = np.clip(meet, 0.0, 1.0)
    lowest = np.minimum(left + slope[:, :-1] * meet * width, right - slope[:, 1:] * (1.0 - meet) * width)
    # One line over the whole interval needs no look between its ends.
    return meet, np.where(bent, lowest + NO_BEND, np.inf)
