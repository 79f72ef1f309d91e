"""Times in files: offsets, wall clocks, and the nights on which clocks change."""

from __future__ import annotations

from datetime import UTC, date, datetime

import pytest

from planner.errors import InputError
from planner.exchange.times import read_date, read_instant


# Expected instants are computed by hand from the stated offsets (US and EU rules of 2026: from memory).
@pytest.mark.parametrize(
    ("text", "zone", "expected"),
    [
        ("2026-05-14T07:12-06:00", None, datetime(2026, 5, 14, 13, 12, tzinfo=UTC)),
        ("2026-05-14 07:12:30+0545", None, datetime(2026, 5, 14, 1, 27, 30, tzinfo=UTC)),
        ("2026-05-14t07:12z", "Asia/Tokyo", datetime(2026, 5, 14, 7, 12, tzinfo=UTC)),
        ("2026-05-14T07:12:00.250000 +00:00", None, datetime(2026, 5, 14, 7, 12, 0, 250000, tzinfo=UTC)),
        ("2026-05-14 07:12", "America/Mexico_City", datetime(2026, 5, 14, 13, 12, tzinfo=UTC)),
        ("14.05.2026 7:12", "Asia/Tokyo", datetime(2026, 5, 13, 22, 12, tzinfo=UTC)),
        ("14.05.2026  07:12:05", "Europe/Vienna", datetime(2026, 5, 14, 5, 12, 5, tzinfo=UTC)),
        ("2026-03-29 01:59", "Europe/Rome", datetime(2026, 3, 29, 0, 59, tzinfo=UTC)),
        ("2026-03-29 03:00", "Europe/Rome", datetime(2026, 3, 29, 1, 0, tzinfo=UTC)),
        ("2026-10-25 03:00", "Europe/Rome", datetime(2026, 10, 25, 2, 0, tzinfo=UTC)),
        ("2026-10-25T02:30+02:00", "Europe/Rome", datetime(2026, 10, 25, 0, 30, tzinfo=UTC)),
    ],
)
def test_reads_an_instant(text: str, zone: str | None, expected: datetime) -> None:
    read = read_instant(text, zone)
    assert read == expected
    assert read.utcoffset() == expected.utcoffset()


@pytest.mark.parametrize(
    ("text", "zone", "message"),
    [
        (
            "2026-03-29 02:30",
            "Europe/Rome",
            "expected a time that exists: the clocks of Europe/Rome jump over it",
        ),
        ("2026-10-25 02:30", "Europe/Rome", r"its offset as well \(\+0200 or \+0100\): .* show it twice"),
        ("2026-05-14 07:12", None, "expected a time with its offset"),
        ("2026-05-14", "Europe/Rome", "expected a date and time"),
        ("05/14/2026 07:12", "Europe/Rome", "expected a date and time"),
        ("2026-02-30 07:12", "Europe/Rome", "expected a date and time"),
        ("2026-05-14 24:30", "Europe/Rome", "expected a date and time"),
        ("31.04.2026 07:12", "Europe/Rome", "expected a date and time"),
        ("2026-05-14 07:12 in the morning", "Europe/Rome", "expected a date and time"),
        ("٢٠٢٦-05-14 07:12", "Europe/Rome", "expected a date and time"),
        ("0001-01-01 00:00+14:00", None, "expected a year from 1900 to 2199"),
        ("", "Europe/Rome", "expected a date and time"),
    ],
)
def test_refuses_a_time_with_the_reason(text: str, zone: str | None, message: str) -> None:
    with pytest.raises(InputError, match=message):
        read_instant(text, zone)


def test_reads_a_day_in_two_notations() -> None:
    assert read_date("2026-05-14") == read_date("14.5.2026") == date(2026, 5, 14)


@pytest.mark.parametrize("text", ["14.5.", "2026-5-14", "2026-02-30", "30.02.2026", "20260514", "May 14", ""])
def test_refuses_a_day(text: str) -> None:
    with pytest.raises(InputError, match="expected a day such as 2026-05-14"):
        read_date(text)
