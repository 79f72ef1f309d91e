"""From one reading to one of four outcomes, with the reason in a sentence. Pure rules, no screen, no store.

Every rule that applies is a finding; the worst finding is the outcome. Numbers are compared as they are and
rounded for the sentence only. No outcome says that a driver is well or may drive: "in range" means just that.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import timedelta
from typing import Final

from planner.monitoring.model import Outcome, Reading, SickPeriod
from planner.physiology.illness import EMERGENCY_SIGNS, lake_louise
from planner.wording import elevation, number, per_cent, per_cent_range

SEVERITY: Final[dict[Outcome, int]] = {"in range": 0, "repeat": 1, "refer": 2, "urgent": 3}

ADVICE: Final[dict[Outcome, str]] = {
    "in range": "",
    # How a reading is taken: Tannheimer 2020; Luks & Swenson 2011, High Alt Med Biol 12:109 (published).
    "repeat": "Measure again: seated and quiet, warm hand, shaded sensor, watch it for two minutes.",
    "refer": "Tell the team physician today.",
    "urgent": "Stop and call the team physician now; with an emergency sign the emergency services too.",
}

# Judgement, all of them: no source gives a figure for these.
CONFIRMS_WITHIN: Final = timedelta(hours=30)  # a second low reading counts: the same morning or the next
SIGNS_LAST: Final = timedelta(hours=12)  # what was stated earlier stands for so long
FAR_BELOW_PCT: Final = 4.0  # under the limit: as much as an oximeter may err (ISO 80601-2-61, from memory)
FALLING_PCT: Final = 3.0  # a drop between two low readings that is more than the oximeter's scatter
LOW_GROUND_M: Final = 1500.0  # below it a symptom score is not put down to the elevation


@dataclass(frozen=True)
class ExpectedRange:
    """The range in which 95 of 100 such readings are expected; `words` say for whom and when."""

    low_pct: float
    mean_pct: float
    high_pct: float
    words: str = ""  # "for her on day 2"
    beyond_validity: bool = False


@dataclass(frozen=True)
class Sample:
    """A reading beside what was expected of it, and how high the driver is and since when, where known."""

    reading: Reading
    expected: ExpectedRange
    elevation_m: float | None = None
    hours_there: float | None = None


@dataclass(frozen=True)
class Finding:
    """One rule that applied."""

    outcome: Outcome
    sentence: str


@dataclass(frozen=True)
class Judgement:
    """The outcome of a reading: its reasons, the worst first, and what to do."""

    outcome: Outcome
    reasons: tuple[str, ...]
    advice: str


def judge(sample: Sample, earlier: Sequence[Sample] = (), ill: SickPeriod | None = None) -> Judgement:
    """Judge a reading by its range, the readings before it, the signs stated and a sick period.

    Parameters: `earlier` are readings of the same driver before this one, in any order; `ill` is the sick
    period that covers the reading, if any.
    """
    before = sorted(
        (s for s in earlier if s.reading.taken_at < sample.reading.taken_at), key=lambda s: s.reading.taken_at
    )
    findings = [
        *_emergency_signs(sample, before),
        *_saturation(sample, before),
        *_symptoms(sample, before),
        *_sick_period(ill),
    ]
    findings.sort(key=lambda f: -SEVERITY[f.outcome])  # stable: signs before numbers
    worst = findings[0].outcome
    return Judgement(worst, tuple(f.sentence for f in findings), ADVICE[worst])


def quality_fault(reading: Reading) -> str:
    """What makes a reading unfit to be judged by its number; empty when it was taken properly."""
    if reading.circumstance != "at rest":
        return f"taken {reading.circumstance}"
    if not reading.warm_hand:
        return "taken with a cold hand"
    return reading.quality_note


def is_low(sample: Sample) -> bool:
    """Whether the number lies below its range, however it was taken."""
    return sample.reading.spo2_pct < sample.expected.low_pct


def is_far_below(sample: Sample) -> bool:
    """Whether it lies further below the lower limit than an oximeter may err (FAR_BELOW_PCT, judgement)."""
    return sample.reading.spo2_pct < sample.expected.low_pct - FAR_BELOW_PCT


def symptom_score(reading: Reading) -> int | None:
    """The Lake Louise total of a reading, or None when the four items were not all asked."""
    items = _items(reading)
    return None if items is None else sum(items)


def _items(reading: Reading) -> tuple[int, int, int, int] | None:
    headache, gut, fatigue, dizziness = reading.headache, reading.gut, reading.fatigue, reading.dizziness
    if headache is None or gut is None or fatigue is None or dizziness is None:
        return None
    return headache, gut, fatigue, dizziness


def _standing(sample: Sample, before: Sequence[Sample]) -> list[Sample]:
    """This sample and the earlier ones whose statements still stand, the newest first."""
    since = sample.reading.taken_at - SIGNS_LAST
    return [sample, *(s for s in reversed(before) if s.reading.taken_at >= since)]


def _emergency_signs(sample: Sample, before: Sequence[Sample]) -> list[Finding]:
    for stated in _standing(sample, before):
        if stated.reading.emergency_signs:
            signs = ", ".join(EMERGENCY_SIGNS[code] for code in stated.reading.emergency_signs)
            return [Finding("urgent", f"Emergency sign stated{_when(stated, sample)}: {signs}.")]
    return []


def _symptoms(sample: Sample, before: Sequence[Sample]) -> list[Finding]:
    """Lake Louise by its published rule: refer. Severe, or low as well: urgent (judgement)."""
    for stated in _standing(sample, before):
        items = _items(stated.reading)
        if items is None:
            continue
        score = lake_louise(*items, stated.hours_there)
        if not score.is_ams:
            return []
        text = f"Lake Louise score {score.total}{_when(stated, sample)}"
        if stated.elevation_m is not None and stated.elevation_m < LOW_GROUND_M:
            ground = elevation(stated.elevation_m)
            return [Finding("refer", f"{text}, which {ground} of elevation hardly explains.")]
        if score.severity == "severe":
            return [Finding("urgent", f"{text}: severe by that score.")]
        if score.severity == "moderate" and is_low(sample):
            return [Finding("urgent", f"{text}: moderate by that score, with a reading below the range.")]
        return [Finding("refer", f"{text}: {score.severity} mountain sickness by that score.")]
    return []


def _sick_period(ill: SickPeriod | None) -> list[Finding]:
    if ill is None:
        return []
    return [Finding("refer", f"Marked ill by {ill.marked_by or 'the team'}: the physician decides.")]


def _saturation(sample: Sample, before: Sequence[Sample]) -> list[Finding]:
    reading, measured = sample.reading, shown(sample)
    fault = quality_fault(reading)
    if reading.left_out:
        return [Finding("repeat", f"{measured}; left out: {reading.left_out}.")]
    if fault:
        return [Finding("repeat", f"{measured}; {fault}, so the number does not count.")]
    if is_low(sample):
        return [_low(sample, before)]
    if reading.spo2_pct > sample.expected.high_pct:
        return [
            Finding(
                "repeat",
                f"{measured}: above it. Check the sensor; carbon monoxide (exhaust) makes it read too high.",
            )
        ]
    return [Finding("in range", f"{measured}.")]


def _low(sample: Sample, before: Sequence[Sample]) -> Finding:
    measured = shown(sample)
    first = _confirming(sample, before)
    if first is None:
        return Finding("repeat", f"{measured}: below it, once so far.")
    earlier = f"{per_cent(first.reading.spo2_pct)}{_when(first, sample)}"
    twice = f"{measured}: below it again ({earlier})"
    if is_far_below(sample):
        return Finding("urgent", f"{twice}, and far below.")
    if _is_worse(sample.reading, first.reading):
        return Finding("urgent", f"{twice}, and getting worse.")
    return Finding("refer", f"{twice}.")


def _confirming(sample: Sample, before: Sequence[Sample]) -> Sample | None:
    """The proper reading just before this one, of the same kind, if it was low too and recent enough."""
    for candidate in reversed(before):
        other = candidate.reading
        if other.taken_at < sample.reading.taken_at - CONFIRMS_WITHIN:
            return None
        is_proper = not quality_fault(other) and not other.left_out
        if is_proper and other.wakefulness == sample.reading.wakefulness:
            return candidate if is_low(candidate) else None
    return None


def _is_worse(now: Reading, then: Reading) -> bool:
    score_now, score_then = symptom_score(now), symptom_score(then)
    more_symptoms = score_now is not None and score_then is not None and score_now > score_then
    return more_symptoms or now.spo2_pct <= then.spo2_pct - FALLING_PCT


def shown(sample: Sample) -> str:
    """As "88 %, expected 91–96 % for her on day 2"; with a decimal where rounding would mislead."""
    value, expected = sample.reading.spo2_pct, sample.expected
    decimals = 1 if _rounding_hides(value, expected) else 0
    limits = per_cent_range(expected.low_pct, expected.high_pct, decimals)
    asleep = " asleep" if sample.reading.wakefulness == "asleep" else ""
    words = f" {expected.words}" if expected.words else ""
    model = " (beyond the model's range)" if expected.beyond_validity else ""
    return f"{per_cent(value, decimals)}{asleep}, expected {limits}{words}{model}"


def _rounding_hides(value: float, expected: ExpectedRange) -> bool:
    is_inside = expected.low_pct <= value <= expected.high_pct
    looks_inside = round(expected.low_pct) <= round(value) <= round(expected.high_pct)
    return is_inside != looks_inside


def _when(stated: Sample, sample: Sample) -> str:
    """Nothing for the reading itself, else how long before it."""
    gap = sample.reading.taken_at - stated.reading.taken_at
    if not gap:
        return ""
    minutes = gap / timedelta(minutes=1)
    if minutes < 1.0:
        return " just before"
    return f" {number(minutes)} min before" if minutes < 90.0 else f" {number(minutes / 60.0)} h before"
