"""Files into a real store: what is taken, what is there already, what contradicts; and nothing by halves."""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, datetime

import pytest

from planner.errors import InputError, StoreError
from planner.monitoring.model import Reading
from planner.season.model import Driver, Place, Round, Session
from planner.services.importing import (
    import_file,
    import_readings,
    preview_file,
    preview_readings,
)
from planner.store.store import Store

NOW = datetime(2026, 6, 6, 13, 40, tzinfo=UTC)

# The file of acceptance: a byte-order mark, semicolons, decimal commas, CRLF; good lines between faulty ones.
MIXED = (
    b"\xef\xbb\xbf"
    + "\r\n".join(
        (
            "driver;place;taken_at;spo2_pct;pulse_bpm",
            "Ada;Plateau;2026-06-05 07:12;93,5;61,5",
            "Nobody;Plateau;2026-06-05 07:12;93;61",
            "Ada;Plateau;2026-06-05 07:13;0,95;61",
            "Ada;Plateau;2026-06-05 07:14;950;61",
            "Ada;Plateau;2026-06-05 07:15;96 %;61",
            "Ada;Plateau;2026-06-05 07:16;;61",
            "Ada;Plateau;05.06.2062 07:17;96;61",
            "Zoë;Plateau;05.06.2026 07:18;92;",
            "",
        )
    ).encode()
)


@pytest.fixture
def team(store: Store) -> Store:
    """A store with two drivers and a place at 2 250 m."""
    place = store.add(Place("Plateau", "America/Mexico_City", 2250.0, 2250.0, 19.0, -99.0), by="test")
    for name in ("Ada", "Zoë"):
        store.add(Driver(name, "woman", place.id, 61.5, 171.0), by="test")
    return store


def test_good_lines_are_taken_and_the_others_refused_with_the_reason(team: Store) -> None:
    report = import_readings(team, MIXED, "mixed.csv", "coach", NOW)
    assert (report.taken, report.already_there, report.refused_lines) == (2, 0, 6)
    assert [(fault.line, fault.field, fault.value) for fault in report.refused] == [
        (3, "driver", "Nobody"),
        (4, "spo2_pct", "0,95"),
        (5, "spo2_pct", "950"),
        (6, "spo2_pct", "96 %"),
        (7, "spo2_pct", ""),
        (8, "taken_at", "05.06.2062 07:17"),
    ]
    assert [fault.expected for fault in report.refused] == [
        "a driver known here (Ada, Zoë)",
        "a percentage, not a fraction: write 95",
        "40 to 100 % (saturation read by a pulse oximeter)",
        "a number without unit or sign: 96",
        "a percentage from 40 to 100",
        "a time between 2000 and now (2026-06-06), at most a day ahead",
    ]
    stored = [(r.taken_at, r.spo2_pct, r.pulse_bpm, r.entered_by) for r in team.readings()]
    assert stored == [
        (datetime(2026, 6, 5, 13, 12, tzinfo=UTC), 93.5, 61.5, "coach"),
        (datetime(2026, 6, 5, 13, 18, tzinfo=UTC), 92.0, None, "coach"),
    ]
    assert team.check() == []


def test_a_second_import_adds_nothing(team: Store) -> None:
    first = import_readings(team, MIXED, "mixed.csv", "coach", NOW)
    second = import_readings(team, MIXED, "mixed.csv", "coach", NOW)
    assert (second.taken, second.already_there) == (0, 2)
    assert [str(fault) for fault in second.refused] == [str(fault) for fault in first.refused]
    assert len(team.readings()) == 2


def test_an_import_is_one_change_set_that_can_be_undone(team: Store) -> None:
    import_readings(team, MIXED, "mixed.csv", "coach", NOW)
    last = team.last_change_set()
    assert last is not None
    assert (last.by, last.why) == ("coach", "import of mixed.csv")
    team.undo(last.id, by="coach")
    assert team.readings() == []
    assert import_readings(team, MIXED, "mixed.csv", "coach", NOW).taken == 2


def test_a_corrected_or_removed_reading_does_not_come_back(team: Store) -> None:
    first, second = import_readings(team, MIXED, "mixed.csv", "coach", NOW).records
    team.change(replace(first, spo2_pct=94.0), by="coach", why="typing error")
    team.remove(second, by="coach")
    report = import_readings(team, MIXED, "mixed.csv", "coach", NOW)
    assert (report.taken, report.already_there) == (0, 2)
    assert report.notes == ("2 already there were corrected or removed since and are not brought back",)
    assert [reading.spo2_pct for reading in team.readings()] == [94.0]


def test_a_removed_place_may_come_in_again(store: Store) -> None:
    data = b"name,zone,elevation_m,latitude,longitude\nA,Asia/Tokyo,5,35,136\n"
    (place,) = import_file(store, data, "places.csv", by="coach", now=NOW).records
    store.remove(place, by="coach")
    assert import_file(store, data, "places.csv", by="coach", now=NOW).taken == 1
    assert [each.name for each in store.all(Place)] == ["A"]


def test_a_repetition_within_the_minute_is_a_reading_of_its_own(team: Store) -> None:
    data = b"driver,place,taken_at,spo2_pct\n" + b"".join(
        b"Ada,Plateau,2026-06-05 07:12,%d\n" % value for value in (88, 93, 88)
    )
    report = import_readings(team, data, "two.csv", "coach", NOW)
    assert (report.taken, report.already_there) == (2, 1)


def test_a_preview_tells_the_same_and_writes_nothing(team: Store) -> None:
    before = team.version()
    preview = preview_readings(team, MIXED, "mixed.csv", "coach", NOW)
    assert team.version() == before
    assert team.readings() == []
    report = import_readings(team, MIXED, "mixed.csv", "coach", NOW)
    assert [replace(record, id=0) for record in report.records] == list(preview.records)
    assert (preview.taken, preview.already_there) == (report.taken, report.already_there)
    assert [str(fault) for fault in preview.refused] == [str(fault) for fault in report.refused]


def test_a_file_that_cannot_be_used_leaves_the_store_as_it_was(team: Store) -> None:
    before = team.version()
    with pytest.raises(InputError, match="the missing spo2_pct as well"):
        import_readings(team, b"driver,place,taken_at\nAda,Plateau,2026-06-05 07:12\n", "x.csv", "coach", NOW)
    assert team.version() == before


def test_who_typed_a_reading_is_kept(team: Store) -> None:
    data = b"driver,place,taken_at,spo2_pct,entered_by\nAda,Plateau,2026-06-05 07:12,93,Ada\n"
    (reading,) = import_readings(team, data, "x.csv", "coach", NOW).records
    assert reading.entered_by == "Ada"


def test_a_season_comes_in_file_by_file(store: Store) -> None:
    files = (
        b"name;zone;elevation_m;latitude;longitude\nHarbour;Europe/Rome;5,5;44;12\n",
        b"name,sex,home,mass_kg,height_cm\nAda,woman,harbour,61.5,171\n",
        b"number,round,place\n1,Opening,Harbour\n",
        b"round,kind,session,starts_at,ends_at\nOpening,race,Race,2026-03-29 14:00,2026-03-29 16:00\n",
        b"driver,place,arrive_at,depart_at\nAda,Harbour,2026-01-01 00:00,2026-12-01 00:00\n",
    )
    for number, data in enumerate(files):
        assert import_file(store, data, f"{number}.csv", by="coach", now=NOW).taken == 1
        assert import_file(store, data, f"{number}.csv", by="coach", now=NOW).already_there == 1
    (place,) = store.all(Place)
    assert place.bed_elevation_m == 5.5
    assert store.all(Driver)[0].home_place_id == store.all(Round)[0].place_id == place.id
    assert store.all(Session)[0].starts_at == datetime(2026, 3, 29, 12, 0, tzinfo=UTC)
    assert store.check() == []


def test_what_contradicts_the_store_is_refused_not_dropped(team: Store) -> None:
    data = b"name,zone,elevation_m,latitude,longitude\nPLATEAU,America/Mexico_City,2350,19,-99\n"
    report = preview_file(team, data, "places.csv", by="coach", now=NOW)
    assert (report.kind, report.taken, report.already_there) == ("places", 0, 0)
    assert [(fault.line, fault.field, fault.value) for fault in report.refused] == [
        (2, "track_elevation_m", "2350"),
        (2, "bed_elevation_m", "2350"),
    ]
    with pytest.raises(InputError, match="expected 2250 as already there; correct it in the program"):
        raise report.refused[0]


def test_a_pressure_reduced_to_sea_level_is_refused(team: Store) -> None:
    """computed: the low-latitude model gives 782.6 hPa at 2 250 m; 6 % either way is judgement."""
    data = (
        b"place,measured_at,pressure_hpa\n"
        b"Plateau,2026-06-05 07:00,1013\nPlateau,2026-06-05 08:00,781\nPlateau,2026-06-05 09:00,5000\n"
        b"Nowhere,2026-06-05 07:00,1013\n"
    )
    report = import_file(team, data, "pressures.csv", by="coach", now=NOW)
    assert [record.pressure_hpa for record in report.records] == [781.0]
    assert [(fault.line, fault.field) for fault in report.refused] == [
        (2, "pressure_hpa"),
        (4, "pressure_hpa"),
        (5, "place"),
    ]
    with pytest.raises(InputError, match="expected 736 to 829 hPa at Plateau; a pressure reduced"):
        raise report.refused[0]


def test_two_lines_of_a_file_that_contradict_each_other(store: Store) -> None:
    data = (
        b"name,zone,elevation_m,latitude,longitude\n"
        b"A,Asia/Tokyo,5,35,136\nA,Asia/Tokyo,5,35,136\nA,Asia/Tokyo,6,35,136\n"
    )
    report = import_file(store, data, "places.csv", by="coach", now=NOW)
    assert (report.taken, report.already_there, report.refused_lines) == (1, 1, 1)
    assert report.refused[0].line == 4


def test_an_import_within_a_transaction_that_fails_leaves_nothing(team: Store) -> None:
    def import_and_fail() -> None:
        with team.transaction("coach"):
            assert import_readings(team, MIXED, "mixed.csv", "coach", NOW).taken == 2
            raise StoreError("something else went wrong")

    with pytest.raises(StoreError, match="something else"):
        import_and_fail()
    assert team.all(Reading) == []
