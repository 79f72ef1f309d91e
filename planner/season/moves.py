"""All single steps of a day model as matrices: whether allowed, what they cost, what they do to the body."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Final

import numpy as np

from planner.checks import FloatArray
from planner.physiology.body_clock import clock_offset_h, remaining_offset_h
from planner.physiology.illness import LARGEST_NIGHTLY_GAIN_M
from planner.season.day_model import CLOCK_SLACK_H, MOST_NIGHTS_LOST, BoolArray, DayProblem, IntArray, Steps

MOST_PIECES: Final = 3
OFFSET_DIGITS: Final = 6  # offsets that differ by less are one offset; rounding of sums differs in the 12th
LOST: Final = range(MOST_NIGHTS_LOST + 1)


@dataclass(frozen=True)
class Moves:
    """The steps of one problem. Matrices are (beds before, beds after), for each number of nights lost."""

    problem: DayProblem

    @cached_property
    def allowed(self) -> BoolArray:
        """(days, lost, beds, beds) whether a night may follow one `lost + 1` nights earlier."""
        p, count = self.problem, len(self.problem.beds)
        found = np.zeros((p.days, len(LOST), count, count), dtype=bool)
        slow = self.gain_m <= LARGEST_NIGHTLY_GAIN_M if p.ascent_rule else np.ones_like(p.same_place)
        for night in range(p.days):
            here = p.allowed[night][None, :] & slow
            found[night, 0] = here & p.same_place
            for lost in range(min(MOST_NIGHTS_LOST, night) + 1):
                depart = night - lost
                if p.bound[depart : night + 1].any() or not p.air_ok[depart:night].all():
                    continue
                found[night, lost] |= here & ~p.same_place & (p.lost[depart] == lost)
        return found

    @cached_property
    def cost(self) -> FloatArray:
        """(lost, beds, beds) cost of a step."""
        beds = range(len(self.problem.beds))
        return np.array([[[self.problem.step_cost(a, b, lost) for b in beds] for a in beds] for lost in LOST])

    @cached_property
    def gain_m(self) -> FloatArray:
        """(beds, beds) gain in sleeping elevation that the ascent rule counts."""
        beds = range(len(self.problem.beds))
        return np.array([[self.problem.counted_gain_m(a, b) for b in beds] for a in beds])

    @cached_property
    def is_low(self) -> BoolArray:
        """(beds,) whether a night there begins an ascent anew."""
        return np.array([bed.sleeping_m <= self.problem.low_m for bed in self.problem.beds])

    @cached_property
    def _pieces(self) -> FloatArray:
        """(track or not, lost, beds, beds, pieces, 3): target, rising and falling share of each piece."""
        steps, count = Steps(self.problem), len(self.problem.beds)
        table = np.zeros((2, len(LOST), count, count, MOST_PIECES, 3))
        ever = self.allowed.any(axis=0)
        for lost, a, b in np.argwhere(ever):
            for track in (0, 1):
                pieces = steps.pieces(int(a), int(b), int(lost), at_track=bool(track))
                table[track, lost, a, b, : len(pieces)] = pieces
        return table

    def pieces(self, night: int, lost: int, before: IntArray, bed: IntArray) -> FloatArray:
        """(n, pieces, 3) of n steps that end with the same night."""
        track = self.problem.at_track[night, bed].astype(np.intp)
        return np.asarray(self._pieces[track, lost, before, bed])

    def ascent_after(
        self, climbing: IntArray, risk: IntArray, before: IntArray, bed: IntArray
    ) -> tuple[IntArray, IntArray]:
        """Climbing nights in a row and class of the ascent after n steps."""
        climbing = np.where(self.gain_m[before, bed] > 0.0, climbing + 1, 0)
        risk = np.where(self.is_low[before], self.problem.first_night_risk[bed], risk)
        return climbing, np.where(self.is_low[bed], 0, risk)

    def offset_after(
        self, offset_h: FloatArray, night: int, lost: int, before: IntArray, bed: IntArray
    ) -> FloatArray:
        """Body-clock offset on the morning after n steps that end with the same night."""
        zones = self.problem.zones_east_h[night - lost, before, bed]
        crossed = (zones != 0.0) & ~self.problem.same_place[before, bed]
        shifted = np.asarray(clock_offset_h((offset_h + zones) % 24.0))
        return np.asarray(remaining_offset_h(np.where(crossed, shifted, offset_h), 1.0))

    def clock_key(self, night: int, bed: int, offset_h: FloatArray) -> tuple[FloatArray, BoolArray]:
        """What tells body clocks apart after a night in a bed, and whether they keep the limits for sure.

        While the driver has to stay in that bed, the clock only wears off. So it is told apart by what is
        left at the end of those nights, and a limit of a race on the way is known to be kept or not.
        """
        p = self.problem
        last = night
        while (
            last + 1 < p.days
            and not p.air_ok[last + 1]
            and p.allowed[last + 1].sum() == p.allowed[last + 1, bed]
        ):
            last += 1
        kept = np.ones(offset_h.shape, dtype=bool)
        for passed in range(last - night + 1):
            if not p.clock_counts[night + passed]:
                return np.zeros_like(offset_h), kept
            left = np.abs(np.asarray(remaining_offset_h(offset_h, float(passed))))
            for each in p.by_race_night.get(night + passed, []):
                if each.largest_clock_offset_h is not None:
                    kept &= left <= each.largest_clock_offset_h + CLOCK_SLACK_H
        if last + 1 >= p.days or not p.clock_counts[last + 1]:
            return np.zeros_like(offset_h), kept
        left = np.asarray(remaining_offset_h(offset_h, float(last - night)))
        return np.round(left, OFFSET_DIGITS) + 0.0, kept

    @cached_property
    def cheapest_to_go(self) -> FloatArray:
        """(days, beds) least cost from a night in a bed to the end, whatever the limits of the rounds."""
        p = self.problem
        to_go = np.full(p.allowed.shape, np.inf)
        to_go[-1, p.allowed[-1]] = 0.0
        for night in range(p.days - 2, -1, -1):
            for lost in LOST:
                after = night + 1 + lost
                if after < p.days:
                    way = np.where(self.allowed[after, lost], self.cost[lost] + to_go[after][None, :], np.inf)
                    to_go[night] = np.minimum(to_go[night], way.min(axis=1))
        return to_go


def through(pieces: FloatArray, state: FloatArray, slope: FloatArray) -> tuple[FloatArray, FloatArray]:
    """States (n, k) and slopes (n, k) after the pieces (n, pieces, 3) of n steps.

    A piece is convex in the state, because states fall more slowly than they rise; so is every chain of them.
    """
    for piece in range(pieces.shape[1]):
        target, rise, fall = (pieces[:, piece, i, None] for i in range(3))
        gap = target - state
        rate = np.where(gap > 0.0, rise, fall)
        state = state + rate * gap
        slope = slope * (1.0 - rate)
    return state, slope
