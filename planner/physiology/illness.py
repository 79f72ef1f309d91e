"""Altitude illness: emergency signs, the Lake Louise score and the rules for planning an ascent.

Nothing here diagnoses or clears anybody. Scores and rules are cautions for the coach; the team physician
and local emergency services decide.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Final, Literal, TypeAlias

import numpy as np

from planner.checks import checked
from planner.errors import InputError

RiskClass: TypeAlias = Literal["low", "moderate", "high"]
SicknessSeverity: TypeAlias = Literal["none", "mild", "moderate", "severe"]
AltitudeHistory: TypeAlias = Literal["none or mild", "moderate or severe", "lung or brain oedema"]

EMERGENCY_ADVICE: Final = (
    "Any of these signs: stop, tell the team physician now, go down, give oxygen if there is any, "
    "and call the emergency services."
)

# High altitude lung oedema (usually on days 2 to 4) and brain oedema, as the published signs name them:
# Luks et al. 2024, Wilderness Environ Med 35(1S):2S-19S. Code -> words to show.
EMERGENCY_SIGNS: Final[dict[str, str]] = {
    "breathless_at_rest": "breathless at rest",
    "cough": "cough",
    "chest_tightness": "tightness in the chest",
    "weakness": "unusual weakness",
    "blue_lips": "blue lips",
    "fast_heart_and_breathing": "fast heart and breathing at rest",
    "confusion": "confusion or a change of behaviour",
    "unsteady_walk": "unsteady walk",
}

# Lake Louise acute mountain sickness score, 2018 (Roach et al., High Alt Med Biol 19:4, published).
LEAST_AMS_TOTAL: Final = 3
LEAST_AMS_HEADACHE: Final = 1
LEAST_AMS_HOURS: Final = 6.0
MODERATE_AMS_TOTAL: Final = 6
SEVERE_AMS_TOTAL: Final = 10
HIGHEST_ITEM: Final = 3

# Planned ascent, right-most column that applies (Luks et al. 2024, published).
FIRST_NIGHT_MODERATE_M: Final = 2800.0
FIRST_NIGHT_HIGH_M: Final = 3500.0
SLOW_ABOVE_M: Final = 3000.0
LARGEST_NIGHTLY_GAIN_M: Final = 500.0
EXTRA_NIGHT_EVERY_M: Final = 1000.0
LARGEST_START_M: Final = 1200.0
# A rest day every 3 to 4 days above 3000 m (published): four nights in a row that each climb break it.
MOST_NIGHTS_CLIMBING: Final = 3

_CLASSES: Final[tuple[RiskClass, ...]] = ("low", "moderate", "high")
_OF_HISTORY: Final[dict[str, RiskClass]] = {
    "none or mild": "low",
    "moderate or severe": "moderate",
    "lung or brain oedema": "high",
}


@dataclass(frozen=True)
class SicknessScore:
    """A Lake Louise 2018 score; `is_ams` is the score's own rule, not a diagnosis."""

    total: int
    is_ams: bool
    severity: SicknessSeverity
    why: str


@dataclass(frozen=True)
class AscentRisk:
    """Risk class of a planned ascent with the reason for each column that applied, the worst first."""

    risk: RiskClass
    reasons: tuple[str, ...]


@dataclass(frozen=True)
class AscentCaution:
    """One night of a plan that climbs faster than the published rule; night 0 is the first of the plan."""

    night: int
    sentence: str


def lake_louise(
    headache: int, gut: int, fatigue: int, dizziness: int, hours_since_ascent: float | None = None
) -> SicknessScore:
    """Lake Louise acute mountain sickness score of 2018.

    Mountain sickness by this score needs a headache of at least 1, a total of at least 3, and at least six
    hours since the gain in elevation. There is no sleep item.

    Parameters:
        headache: none 0, mild 1, moderate 2, severe 3 [1].
        gut: appetite, nausea, vomiting, 0 to 3 [1].
        fatigue: fatigue or weakness, 0 to 3 [1].
        dizziness: dizziness or light-headedness, 0 to 3 [1].
        hours_since_ascent: time since the gain in elevation [h]; None = not known, taken as long enough.
    Returns:
        SicknessScore with total, is_ams, severity in words and why.
    Raises:
        InputError: an item that is not a whole number from 0 to 3, or a time out of range.
    Valid:
        A gain in elevation to about 2500 m or more, people who can answer. Not a diagnosis: the physician's.
    Source:
        Roach et al. 2018, High Alt Med Biol 19:4 (published).
    Example:
        >>> lake_louise(0, 2, 2, 2).is_ams, lake_louise(3, 0, 0, 0).severity
        (False, 'mild')
    """
    items = {"headache": headache, "gut": gut, "fatigue": fatigue, "dizziness": dizziness}
    for name, item in items.items():
        if item not in range(HIGHEST_ITEM + 1):
            raise InputError(name, item, f"a whole number from 0 to {HIGHEST_ITEM}")
    total = sum(items.values())
    if hours_since_ascent is not None and float(checked("hours", hours_since_ascent)) < LEAST_AMS_HOURS:
        return SicknessScore(total, False, "none", "less than six hours since the gain in elevation")
    if headache < LEAST_AMS_HEADACHE:
        return SicknessScore(total, False, "none", "no headache")
    if total < LEAST_AMS_TOTAL:
        return SicknessScore(total, False, "none", f"a total below {LEAST_AMS_TOTAL}")
    severity: SicknessSeverity = "mild"
    if total >= SEVERE_AMS_TOTAL:
        severity = "severe"
    elif total >= MODERATE_AMS_TOTAL:
        severity = "moderate"
    return SicknessScore(total, True, severity, f"headache and a total of {total}")


def planned_ascent_risk(
    history: AltitudeHistory, bed_elevations_m: Sequence[float], start_elevation_m: float = 0.0
) -> AscentRisk:
    """Risk class of a planned ascent by its nights and the person's history; the worst column counts.

    Parameters:
        history: worst altitude illness so far as the physician or the driver stated it [word].
        bed_elevations_m: sleeping elevation of each night in order [m], (nights,).
        start_elevation_m: elevation slept at before [m].
    Returns:
        AscentRisk: low, moderate or high, and the reasons.
    Raises:
        InputError: an unknown history or an elevation out of range.
    Valid:
        Unacclimatised people who start below 1200 m; from higher up the table does not speak of the first
        night, and the reasons say so. A class is a caution; medicines and go-ahead are the physician's.
    Source:
        Wilderness Medical Society 2024, Luks et al., Wilderness Environ Med 35(1S):2S-19S (published).
    Example:
        >>> planned_ascent_risk("none or mild", [2900.0]).risk
        'moderate'
    """
    if history not in _OF_HISTORY:
        raise InputError("history", history, f"one of {', '.join(_OF_HISTORY)}")
    beds = [float(b) for b in checked("elevation_m", np.asarray(bed_elevations_m), "bed_elevations_m")]
    start = float(checked("elevation_m", start_elevation_m, "start_elevation_m"))
    found: list[tuple[RiskClass, str]] = [(_OF_HISTORY[history], f"history of altitude illness: {history}")]
    if beds:
        found.append(_first_night(beds[0], start))
        found.append(_ascent_rate(beds, start))
    found.sort(key=lambda f: -_CLASSES.index(f[0]))
    worst = found[0][0]
    reasons = [why for risk, why in found if risk == worst and risk != "low"]
    if start >= LARGEST_START_M:
        reasons.append(f"start above {LARGEST_START_M:.0f} m: the table is made for people from lower down")
    return AscentRisk(worst, tuple(reasons))


def ascent_cautions(bed_elevations_m: Sequence[float], start_elevation_m: float = 0.0) -> list[AscentCaution]:
    """Nights of a plan that climb faster above 3000 m than the published rule allows.

    Parameters:
        bed_elevations_m: sleeping elevation of each night in order [m], (nights,).
        start_elevation_m: elevation slept at before [m].
    Returns:
        A list of AscentCaution, one a broken rule, in the order of the nights; empty = none broken.
    Raises:
        InputError: an elevation out of range.
    Valid:
        Sleeping elevations. A gain counts from 3000 m when the night before lay lower.
    Source:
        At most 500 m more a night above 3000 m, a rest day every 3 to 4 days: Luks et al. 2024,
        Wilderness Environ Med 35(1S):2S-19S (published).
    Example:
        >>> [c.night for c in ascent_cautions([2800.0, 3400.0, 4000.0])]
        [2]
    """
    beds = [float(b) for b in checked("elevation_m", np.asarray(bed_elevations_m), "bed_elevations_m")]
    before = float(checked("elevation_m", start_elevation_m, "start_elevation_m"))
    cautions: list[AscentCaution] = []
    climbing = 0
    for night, bed in enumerate(beds):
        gain = _counted_gain(before, bed)
        if gain > LARGEST_NIGHTLY_GAIN_M:
            cautions.append(
                AscentCaution(night, f"{gain:.0f} m higher than the night before, above 3000 m at most 500 m")
            )
        climbing = climbing + 1 if gain > 0.0 else 0
        if climbing > MOST_NIGHTS_CLIMBING:
            cautions.append(
                AscentCaution(night, f"{climbing} nights in a row climb above 3000 m without a rest day")
            )
        before = bed
    return cautions


def _counted_gain(before_m: float, bed_m: float) -> float:
    """Gain in sleeping elevation that counts for the rule: only what lies above 3000 m."""
    return max(bed_m - max(before_m, SLOW_ABOVE_M), 0.0)


def _first_night(bed_m: float, start_m: float) -> tuple[RiskClass, str]:
    if start_m >= LARGEST_START_M and bed_m <= start_m:
        return "low", "the first night lies no higher than the nights before"
    if bed_m > FIRST_NIGHT_HIGH_M:
        return "high", f"first night at {bed_m:.0f} m, above {FIRST_NIGHT_HIGH_M:.0f} m"
    if bed_m >= FIRST_NIGHT_MODERATE_M:
        return "moderate", (
            f"first night at {bed_m:.0f} m, {FIRST_NIGHT_MODERATE_M:.0f} to {FIRST_NIGHT_HIGH_M:.0f} m"
        )
    return "low", f"first night below {FIRST_NIGHT_MODERATE_M:.0f} m"


def _ascent_rate(beds_m: Sequence[float], start_m: float) -> tuple[RiskClass, str]:
    """The rate column: above 3000 m at most 500 m a night, with an extra night every 1000 m.

    The first night is judged by its own column, so the rate counts from the second night on.
    """
    fast = False
    extra_missing = False
    climbed = 0.0
    for before, bed in pairwise(beds_m):
        gain = _counted_gain(before, bed)
        fast = fast or gain > LARGEST_NIGHTLY_GAIN_M
        climbed = climbed + gain if gain > 0.0 else 0.0  # a night that does not climb is the extra night
        extra_missing = extra_missing or climbed > EXTRA_NIGHT_EVERY_M
    if not fast:
        return "low", "at most 500 m more a night above 3000 m"
    if not extra_missing:
        return "moderate", "more than 500 m more a night above 3000 m, with an extra night every 1000 m"
    return "high", "more than 500 m more a night above 3000 m, without an extra night every 1000 m"
