"""A morning's mass, urine and thirst against the driver's own baseline, as one of the four outcomes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from statistics import median
from typing import Final

import numpy as np

from planner.hydration.model import MorningMark
from planner.monitoring.model import Outcome
from planner.physiology.body_water import (
    ALTITUDE_ADD_ON_ML,
    CONCENTRATED_SPECIFIC_GRAVITY,
    DARK_URINE_COLOUR,
    LIKELIHOODS,
    SERIOUS_SPECIFIC_GRAVITY,
    dehydration_signs,
)
from planner.wording import METRIC, UnitChoice, mass, number

# Cheuvront 2004, n=65 (published): morning mass varies by 0.66 %; at least three mornings for a baseline.
BASELINE_MORNINGS: Final = 3
LOOK_AGAIN_PCT: Final = 1.0
ACT_PCT: Final = 2.0
SUSPECT_PCT: Final = 3.0
BASELINE_LOOKS_BACK: Final = timedelta(days=28)  # judgement: mass drifts over a season
DIURESIS_FROM_M: Final = ALTITUDE_ADD_ON_ML[1][0]


@dataclass(frozen=True)
class MorningWater:
    """What a morning's marks say.

    `mass_change_pct` is None without a baseline; `likelihood` is one of none, unclear, likely, very likely.
    """

    outcome: Outcome
    likelihood: str
    mass_change_pct: float | None
    baseline_kg: float | None
    reasons: tuple[str, ...]
    advice: str

    @property
    def sentence(self) -> str:
        """The reasons as one sentence, with what they add up to when they do."""
        text = "; ".join(self.reasons)
        verdict = f": too little water {self.likelihood}" if self.likelihood in LIKELIHOODS[2:] else ""
        return f"{text[:1].upper()}{text[1:]}{verdict}."


def baseline_kg(before: datetime, marks: Sequence[MorningMark]) -> float | None:
    """The driver's own morning mass before an instant: the median of four weeks, of three or more."""
    masses = [
        each.mass_kg
        for each in marks
        if each.mass_kg is not None and before - BASELINE_LOOKS_BACK <= each.at < before
    ]
    return median(masses) if len(masses) >= BASELINE_MORNINGS else None


def judge_morning(
    mark: MorningMark,
    earlier: Sequence[MorningMark],
    elevation_m: float = np.nan,
    units: UnitChoice = METRIC,
) -> MorningWater:
    """Judge a morning's marks by the outcomes of a reading; "urgent" belongs to emergency signs alone.

    Down 1 % is looked at again, down 2 % goes to the physician, beyond 3 % either way the entry is doubted
    first. Parameters: `earlier` are marks of the same driver in any order; `elevation_m` of the bed.
    """
    baseline = baseline_kg(mark.at, earlier)
    change = None
    if baseline is not None and mark.mass_kg is not None:
        change = 100.0 * (mark.mass_kg / baseline - 1.0)
    doubted = change is not None and abs(change) > SUSPECT_PCT
    signs = int(
        dehydration_signs(
            np.nan if change is None or doubted else change,
            np.nan if mark.urine_colour is None else float(mark.urine_colour),
            np.nan if mark.urine_specific_gravity is None else mark.urine_specific_gravity,
            np.nan if mark.thirsty is None else float(mark.thirsty),
        )
    )
    likelihood = LIKELIHOODS[signs]
    reasons = [
        *_mass_reasons(mark, change, baseline, units),
        *_urine_reasons(mark),
        *(["thirsty"] if mark.thirsty else []),
    ]
    if elevation_m >= DIURESIS_FROM_M and not _urine_is_dark(mark):
        reasons.append("pale urine says little up here in the first days: trust mass and thirst")
    outcome, advice = _outcome(change, likelihood, mark, doubted)
    return MorningWater(outcome, likelihood, change, baseline, tuple(reasons), advice)


def _outcome(change: float | None, likelihood: str, mark: MorningMark, doubted: bool) -> tuple[Outcome, str]:
    if doubted and likelihood == "likely":
        return "refer", "Weigh again, and tell the team physician today: urine and thirst point the same way."
    if doubted:
        return "repeat", "Weigh again: an entry so far from the baseline is doubted first."
    serious = (mark.urine_specific_gravity or 0.0) > SERIOUS_SPECIFIC_GRAVITY
    if serious or likelihood == "very likely" or (change is not None and change <= -ACT_PCT):
        return "refer", "Drink and eat before anything else; tell the team physician today."
    if likelihood == "likely" or (change is not None and change <= -LOOK_AGAIN_PCT):
        return "repeat", "Drink with breakfast and weigh again; tell the physician if it stays."
    return "in range", ""


def _mass_reasons(
    mark: MorningMark, change: float | None, baseline: float | None, units: UnitChoice
) -> list[str]:
    if mark.mass_kg is None:
        return ["mass not taken"]
    if change is None:
        return [f"no baseline yet: {BASELINE_MORNINGS} mornings make one"]
    direction = "below" if change < 0.0 else "above"
    return [f"mass {number(abs(change), 1)} % {direction} the usual {mass(baseline, units)}"]


def _urine_reasons(mark: MorningMark) -> list[str]:
    reasons = []
    if mark.urine_colour is not None and mark.urine_colour >= DARK_URINE_COLOUR:
        reasons.append(f"urine colour {mark.urine_colour} of 8")
    gravity = mark.urine_specific_gravity
    if gravity is not None and gravity > CONCENTRATED_SPECIFIC_GRAVITY:
        reasons.append(f"urine specific gravity {number(gravity, 3)}")
    return reasons


def _urine_is_dark(mark: MorningMark) -> bool:
    return bool(_urine_reasons(mark))
