"""What a driver's last weighings show: who drinks more than is lost, who drinks too little."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final, Literal, TypeAlias

from planner.hydration.weighings import Weighed
from planner.physiology.drinking import HIGHEST_LOSS_PCT, TOO_MUCH_WATER_WORDS
from planner.wording import METRIC, UnitChoice, counted, mass, per_cent, volume

FindingKind: TypeAlias = Literal["drinks more than is lost", "drinks too little"]

# Judgement, all four.
LOOKED_AT: Final = 6  # the last so many finished weighings
OFTEN: Final = 2  # so many of them make a habit
LITTLE_SHARE: Final = 0.25  # of the sweat
TELLING_LOSS_PCT: Final = 1.0  # a smaller loss is no reason to drink more
GAIN_ERRORS: Final = 2.0  # a gain counts from so many standard errors of the two weighings


@dataclass(frozen=True)
class DrinkFinding:
    """A habit seen in several weighings, explained; `weighing_ids` are the evidence."""

    driver_id: int
    kind: FindingKind
    sentence: str
    weighing_ids: tuple[int, ...]


def drink_findings(weighed: Sequence[Weighed], units: UnitChoice = METRIC) -> list[DrinkFinding]:
    """Findings of one driver from the last finished weighings, in any order."""
    last = sorted(weighed, key=lambda w: w.weighing.starts_at)[-LOOKED_AT:]
    return [*_drinks_more_than_is_lost(last, units), *_drinks_too_little(last, units)]


def _drinks_more_than_is_lost(last: Sequence[Weighed], units: UnitChoice) -> list[DrinkFinding]:
    gained = [w for w in last if _gain_kg(w) > GAIN_ERRORS * w.error_l_per_h * w.hours]
    if len(gained) < OFTEN:
        return []
    worst = max(gained, key=_gain_kg)
    sentence = (
        f"Heavier after {counted(len(gained), 'session')} of the last {len(last)}, by up to "
        f"{mass(_gain_kg(worst), units)} after {volume(worst.weighing.drink_ml, units)}: more was drunk than "
        f"was lost. Drink less in the car. {TOO_MUCH_WATER_WORDS}"
    )
    return [_finding("drinks more than is lost", sentence, gained)]


def _drinks_too_little(last: Sequence[Weighed], units: UnitChoice) -> list[DrinkFinding]:
    dry = [
        w
        for w in last
        if w.mass_change_pct <= -HIGHEST_LOSS_PCT
        or (w.drunk_share < LITTLE_SHARE and w.mass_change_pct <= -TELLING_LOSS_PCT)
    ]
    if len(dry) < OFTEN:
        return []
    worst = min(dry, key=lambda w: w.mass_change_pct)
    sentence = (
        f"Lost up to {per_cent(-worst.mass_change_pct, 1)} of body mass in "
        f"{counted(len(dry), 'session')} of the last {len(last)}; then "
        f"{volume(worst.weighing.drink_ml, units)} were drunk against "
        f"{volume(worst.sweat_l_per_h * worst.hours * 1000.0, units)} of sweat. Begin earlier and use the "
        f"bottle in the car; from {per_cent(HIGHEST_LOSS_PCT)} on attention suffers."
    )
    return [_finding("drinks too little", sentence, dry)]


def _gain_kg(weighed: Weighed) -> float:
    """Mass gained by drink alone; urine passed in between does not hide it."""
    weighing = weighed.weighing
    after = weighing.mass_before_kg if weighing.mass_after_kg is None else weighing.mass_after_kg
    return after - weighing.mass_before_kg + weighing.urine_ml / 1000.0 - weighing.food_g / 1000.0


def _finding(kind: FindingKind, sentence: str, evidence: Sequence[Weighed]) -> DrinkFinding:
    return DrinkFinding(
        evidence[0].weighing.driver_id, kind, sentence, tuple(w.weighing.id for w in evidence)
    )
