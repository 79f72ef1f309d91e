"""How numbers and times are written; the expected texts are the house's typography (judgement)."""

from __future__ import annotations

import math
from datetime import UTC, date, datetime, timedelta

import pytest
from hypothesis import given
from hypothesis import strategies as st

from planner import wording
from planner.errors import InputError
from planner.wording import NO_BREAK, THIN, UnitChoice

FEET = UnitChoice(elevation="ft", temperature="F", mass="lb", volume="fl oz", pressure="kPa")
AT = datetime(2031, 5, 14, 11, 12, tzinfo=UTC)


def spaced(text: str) -> str:
    """The text with its special spaces made plain, for reading."""
    return text.replace(NO_BREAK, " ").replace(THIN, " ")


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        (wording.per_cent(88.4), "88 %"),
        (wording.per_cent_range(90.2, 95.6), "90–96 %"),
        (wording.per_cent(None), "–"),
        (wording.per_cent_range(90.0, math.nan), "–"),
        (wording.elevation(2250.0), "2 250 m"),
        (wording.elevation(2250.0, FEET), "7 382 ft"),
        (wording.pressure(783.4), "783 hPa"),
        (wording.pressure(783.4, FEET), "78.3 kPa"),
        (wording.mass(70.05 + 0.01), "70.1 kg"),
        (wording.mass(70.0, FEET), "154.3 lb"),
        (wording.volume(624.0), "600 mL"),
        (wording.volume(math.nan), "–"),
        (wording.temperature(-3.2), "−3 °C"),
        (wording.temperature(-0.2), "0 °C"),
        (wording.temperature(20.0, FEET), "68 °F"),
        (wording.pulse(64.0), "64/min"),
        (wording.pulse(None), "–"),
        (wording.day(date(2031, 5, 14)), "Wed 14 May"),
        (wording.day(datetime(2031, 5, 14, 3, 0, tzinfo=UTC), "America/Bogota"), "Tue 13 May"),
        (wording.clock(AT, "America/Bogota"), "06:12"),
        (wording.day_and_clock(AT, "Europe/Berlin"), "Wed 14 May, 13:12"),
        (wording.zone_name("Europe/Berlin", AT), "CEST"),
        (wording.zone_name("America/Bogota", AT), "UTC−05:00"),
        (wording.zone_name("Asia/Kathmandu", AT), "UTC+05:45"),
        (wording.age(timedelta(seconds=20)), "just now"),
        (wording.age(timedelta(minutes=40)), "40 min ago"),
        (wording.age(timedelta(hours=3)), "3 h ago"),
        (wording.age(timedelta(days=2, hours=1)), "2 days ago"),
        (wording.counted(1, "driver"), "1 driver"),
        (wording.counted(0, "driver"), "0 drivers"),
        (wording.counted(2, "entry", "entries"), "2 entries"),
    ],
)
def test_written(text: str, expected: str) -> None:
    assert spaced(text) == expected


def test_an_elevation_never_breaks_across_lines() -> None:
    assert wording.elevation(2250.0) == f"2{THIN}250{NO_BREAK}m"


@given(st.floats(allow_nan=True, allow_infinity=True), st.integers(0, 2))
def test_no_number_is_ever_written_as_nan_or_inf(value: float, decimals: int) -> None:
    text = wording.number(value, decimals)
    assert "nan" not in text
    assert "inf" not in text


@given(st.floats(-9999.0, 9999.0))
def test_a_written_number_reads_back(value: float) -> None:
    text = wording.number(value).replace(THIN, "").replace(wording.MINUS, "-")
    assert float(text) == pytest.approx(value, abs=0.5)


def test_an_unknown_unit_is_refused_in_one_line() -> None:
    with pytest.raises(InputError, match=r"unit of elevation: 'yd' cannot be used, expected m or ft"):
        UnitChoice(elevation="yd")
