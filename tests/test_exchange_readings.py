"""Files of readings: what is taken, and every way in which a cell is refused."""

from __future__ import annotations

from datetime import UTC, datetime

import pytest

from planner.errors import RefusedLineError
from planner.exchange.kinds import Parsed
from planner.exchange.readings_file import read_readings
from planner.monitoring.model import Reading
from planner.season.model import Driver, Place, Stay

NOW = datetime(2026, 6, 6, 13, 40, tzinfo=UTC)
DRIVERS = (
    Driver("Ada", "woman", 1, 61.5, 171.0, id=11),
    Driver("Zoë Äbel-Made", "man", 1, 75.0, 180.0, id=12),
)
PLACES = (
    Place("Plateau", "America/Mexico_City", 2250.0, 2250.0, 19.0, -99.0, id=21),
    Place("Harbour", "Europe/Rome", 5.0, 5.0, 44.0, 12.0, id=22),
)
HEADER = "driver,place,taken_at,spo2_pct"


def parsed(text: str) -> Parsed[Reading]:
    return read_readings(text.encode(), "readings.csv", drivers=DRIVERS, places=PLACES, now=NOW)


def test_takes_all_columns() -> None:
    text = (
        "driver,place,taken_at,spo2_pct,pulse_bpm,wakefulness,circumstance,device,warm_hand,quality_note,"
        "emergency_signs,headache,gut,fatigue,dizziness,left_out,entered_by\n"
        "Ada,Plateau,2026-06-05T07:12-06:00,93,61,Asleep,after a session,ring,no,moved,"
        "cough|blue_lips,1,0,2,3,cold hand,'=Ada\n"
    )
    result = parsed(text)
    assert result.refused == ()
    assert result.records == (
        Reading(
            driver_id=11,
            place_id=21,
            taken_at=datetime(2026, 6, 5, 13, 12, tzinfo=UTC),
            spo2_pct=93.0,
            pulse_bpm=61.0,
            wakefulness="asleep",
            circumstance="after a session",
            device="ring",
            warm_hand=False,
            quality_note="moved",
            emergency_signs=("cough", "blue_lips"),
            headache=1,
            gut=0,
            fatigue=2,
            dizziness=3,
            left_out="cold hand",
            entered_by="=Ada",
        ),
    )


def test_what_is_not_given_has_the_usual_value() -> None:
    (reading,) = parsed(f"{HEADER}\nAda,Plateau,2026-06-05 07:12,93\n").records
    assert reading == Reading(11, 21, datetime(2026, 6, 5, 13, 12, tzinfo=UTC), 93.0)


@pytest.mark.parametrize("name", ["zoë äbel-made", " ZOË  ÄBEL-MADE", "Zoe\u0308 A\u0308bel-Made"])
def test_names_are_found_whatever_their_case_and_accents(name: str) -> None:
    (reading,) = parsed(f"{HEADER}\n{name},plateau,2026-06-05 07:12,93\n").records
    assert reading.driver_id == 12


@pytest.mark.parametrize(
    ("cells", "column", "value", "expected"),
    [
        ("Nobody;Plateau;2026-06-05 07:12;93", "driver", "Nobody", r"a driver known here \(Ada, Zoë"),
        ("Ada;Nowhere;2026-06-05 07:12;93", "place", "Nowhere", r"a place known here \(Harbour, Pl"),
        (";Plateau;2026-06-05 07:12;93", "driver", "", "the name of a driver"),
        ("Ada;;2026-06-05 07:12;93", "place", "", "the name of a place: the itinerary has none"),
        ("Ada;Plateau;;93", "taken_at", "", "a date and time"),
        ("Ada;Plateau;yesterday;93", "taken_at", "yesterday", "a date and time"),
        ("Ada;Plateau;05.06.2062 07:12;93", "taken_at", "05.06.2062 07:12", "at most a day"),
        ("Ada;Plateau;1999-12-31 07:12;93", "taken_at", "1999-12-31 07:12", "between 2000 and"),
        ("Ada;Harbour;2026-03-29 02:30;93", "taken_at", "2026-03-29 02:30", "jump over it"),
        ("Ada;Harbour;26.10.2025 02:30;93", "taken_at", "26.10.2025 02:30", "show it twice"),
        ("Ada;Plateau;2026-06-05 07:12;", "spo2_pct", "", "a percentage from 40 to 100"),
        ("Ada;Plateau;2026-06-05 07:12;0,95", "spo2_pct", "0,95", "not a fraction: write 95"),
        ("Ada;Plateau;2026-06-05 07:12;0.875", "spo2_pct", "0.875", "fraction: write 87.5"),
        ("Ada;Plateau;2026-06-05 07:12;950", "spo2_pct", "950", "40 to 100 %"),
        ("Ada;Plateau;2026-06-05 07:12;39", "spo2_pct", "39", "40 to 100 %"),
        ("Ada;Plateau;2026-06-05 07:12;-96", "spo2_pct", "-96", "40 to 100 %"),
        ("Ada;Plateau;2026-06-05 07:12;96 %", "spo2_pct", "96 %", "without unit or sign: 96"),
        ("Ada;Plateau;2026-06-05 07:12;9,6,0", "spo2_pct", "9,6,0", "a number"),
        ("Ada;Plateau;2026-06-05 07:12;nan", "spo2_pct", "nan", "a number"),
        ("Ada;Plateau;2026-06-05 07:12;inf", "spo2_pct", "inf", "a number"),
        ("Ada;Plateau;2026-06-05 07:12;９６", "spo2_pct", "９６", "a number"),
        ("Ada;Plateau;2026-06-05 07:12;93;601", "pulse_bpm", "601", "25 to 230"),
        ("Ada;Plateau;2026-06-05 07:12;93;60;dozing", "wakefulness", "dozing", "awake or asleep"),
        ("Ada;Plateau;2026-06-05 07:12;93;60;awake;maybe", "warm_hand", "maybe", "yes or no"),
        ("Ada;Plateau;2026-06-05 07:12;93;60;awake;yes;4", "headache", "4", "from 0 to 3"),
        ("Ada;Plateau;2026-06-05 07:12;93;60;awake;yes;1.5", "headache", "1.5", "a whole number"),
        ("Ada;Plateau;2026-06-05 07:12;93;60;awake;yes;1;hives", "emergency_signs", "hives", "cough"),
    ],
)
def test_refuses_a_cell_with_its_line_column_and_what_was_wanted(
    cells: str, column: str, value: str, expected: str
) -> None:
    header = "driver;place;taken_at;spo2_pct;pulse_bpm;wakefulness;warm_hand;headache;emergency_signs"
    good = "Ada;Plateau;2026-06-05 07:10;93"
    result = parsed(f"{header}\n{good}\n{cells}\n")
    assert result.lines == (2,)
    assert len(result.records) == 1
    (fault,) = result.refused
    assert (fault.file, fault.line, fault.field, fault.value) == ("readings.csv", 3, column, value)
    with pytest.raises(RefusedLineError, match=expected):
        raise fault


def test_reports_every_fault_of_a_line_and_takes_the_others() -> None:
    result = parsed(
        f"{HEADER},pulse_bpm\n"
        "Nobody,Nowhere,never,0.9,fast\n"
        "Ada,Plateau,2026-06-05 07:12,93,60\n"
        "Ada,Plateau,2026-06-05 07:14,,12\n"
    )
    assert [(fault.line, fault.field) for fault in result.refused] == [
        (2, "driver"),
        (2, "place"),
        (2, "taken_at"),
        (2, "spo2_pct"),
        (2, "pulse_bpm"),
        (4, "spo2_pct"),
        (4, "pulse_bpm"),
    ]
    assert result.lines == (3,)


STAYS = (
    Stay(11, 22, datetime(2026, 6, 1, tzinfo=UTC), datetime(2026, 6, 3, 12, 0, tzinfo=UTC)),
    Stay(11, 21, datetime(2026, 6, 4, 6, 0, tzinfo=UTC), datetime(2026, 6, 10, tzinfo=UTC)),
    Stay(12, 22, datetime(2026, 6, 1, tzinfo=UTC), datetime(2026, 6, 10, tzinfo=UTC)),
)


def test_without_a_place_the_itinerary_tells_it() -> None:
    data = (
        b"driver,taken_at,spo2_pct\n"
        b"Ada,2026-06-02 07:12,97\nAda,2026-06-05 07:12,93\n"
        b"Ada,2026-06-03 20:00,95\nNobody,2026-06-03 20:00,95\n"
    )
    result = read_readings(data, "r.csv", drivers=DRIVERS, places=PLACES, now=NOW, stays=STAYS)
    assert [(reading.place_id, reading.taken_at) for reading in result.records] == [
        (22, datetime(2026, 6, 2, 5, 12, tzinfo=UTC)),
        (21, datetime(2026, 6, 5, 13, 12, tzinfo=UTC)),
    ]
    assert [(fault.line, fault.field) for fault in result.refused] == [(4, "place"), (5, "driver")]
    assert "the name of a place: the itinerary has none for that time" in str(result.refused[0])


def test_a_wall_clock_time_that_fits_two_stays_needs_its_place() -> None:
    # 19:30 on 3 June is shown in Rome at 17:30 UTC and in Mexico City (-06:00) at 01:30 UTC of 4 June.
    stays = (
        Stay(11, 22, datetime(2026, 6, 1, tzinfo=UTC), datetime(2026, 6, 3, 18, 0, tzinfo=UTC)),
        Stay(11, 21, datetime(2026, 6, 4, 1, 0, tzinfo=UTC), datetime(2026, 6, 10, tzinfo=UTC)),
    )
    data = b"driver,taken_at,spo2_pct\nAda,2026-06-03 19:30,97\n"
    result = read_readings(data, "r.csv", drivers=DRIVERS, places=PLACES, now=NOW, stays=stays)
    with pytest.raises(RefusedLineError, match="the itinerary has 2 for that time"):
        raise result.refused[0]


def test_a_file_of_faults_is_refused_as_a_whole(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("planner.exchange.kinds.MOST_FAULTS", 4)
    bad = "Nobody,Plateau,2026-06-05 07:12,0.9\n"
    assert len(parsed(f"{HEADER}\n{bad * 2}").refused) == 4
    with pytest.raises(RefusedLineError, match="line 4, column file: 'more than 4 faults' refused"):
        parsed(f"{HEADER}\n{bad * 3}")


def test_a_reading_may_lie_a_day_ahead_but_no_more() -> None:
    line = "Ada,Plateau,{},93\n"
    assert parsed(f"{HEADER}\n" + line.format("2026-06-07 07:40")).refused == ()
    assert len(parsed(f"{HEADER}\n" + line.format("2026-06-07 07:41")).refused) == 1
