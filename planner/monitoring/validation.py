"""What a measurement must fulfil before it is kept; asked by the store and by the preview of files."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, get_args

from planner.errors import InputError
from planner.monitoring.model import Circumstance, Notice, NoticeKind, Reading, SickPeriod, Wakefulness
from planner.physiology.illness import EMERGENCY_SIGNS, HIGHEST_ITEM
from planner.record_checks import (
    Problem,
    after,
    flag,
    found,
    instant,
    number,
    reference,
    text,
    whole,
    word,
    words,
)

WAKEFULNESSES = get_args(Wakefulness)
CIRCUMSTANCES = get_args(Circumstance)
NOTICE_KINDS = get_args(NoticeKind)


def _reading(r: Reading) -> tuple[Problem, ...]:
    return (
        reference("driver_id", r.driver_id),
        reference("place_id", r.place_id),
        instant("taken_at", r.taken_at),
        number("spo2_pct", r.spo2_pct, "spo2_pct"),
        number("pulse_bpm", r.pulse_bpm, "pulse_bpm", optional=True),
        word("wakefulness", r.wakefulness, WAKEFULNESSES),
        word("circumstance", r.circumstance, CIRCUMSTANCES),
        text("device", r.device),
        flag("warm_hand", r.warm_hand),
        text("quality_note", r.quality_note),
        words("emergency_signs", r.emergency_signs, EMERGENCY_SIGNS),
        whole("headache", r.headache, 0, HIGHEST_ITEM, optional=True),
        whole("gut", r.gut, 0, HIGHEST_ITEM, optional=True),
        whole("fatigue", r.fatigue, 0, HIGHEST_ITEM, optional=True),
        whole("dizziness", r.dizziness, 0, HIGHEST_ITEM, optional=True),
        text("left_out", r.left_out),
        text("entered_by", r.entered_by),
    )


def _sick_period(r: SickPeriod) -> tuple[Problem, ...]:
    return (
        reference("driver_id", r.driver_id),
        instant("starts_at", r.starts_at),
        instant("ends_at", r.ends_at, optional=True),
        after("ends_at", r.ends_at, "starts_at", r.starts_at),
        text("marked_by", r.marked_by),
        text("note", r.note),
    )


def _notice(r: Notice) -> tuple[Problem, ...]:
    return (
        reference("driver_id", r.driver_id),
        instant("at", r.at),
        word("kind", r.kind, NOTICE_KINDS),
        text("text", r.text),
        text("entered_by", r.entered_by),
    )


CHECKS: dict[type, Callable[[Any], tuple[Problem, ...]]] = {
    Reading: _reading,
    SickPeriod: _sick_period,
    Notice: _notice,
}


def problems(record: Reading | SickPeriod | Notice) -> list[InputError]:
    """All that is wrong with a record in itself, field by field; empty when it may be kept."""
    return found(CHECKS[type(record)](record))
