"""The file itself: opening, refusing, surviving, copying, checking."""

from __future__ import annotations

import os
import sqlite3
from contextlib import closing
from dataclasses import replace
from pathlib import Path

import pytest
from store_records import BY, HIGH, HOME, at, content, keep_every_kind, some_readings, with_team

from planner.errors import StoreError
from planner.monitoring.model import Reading
from planner.season.model import Driver, Place
from planner.store.database import APPLICATION_ID
from planner.store.store import Store


def one_line(refusal: pytest.ExceptionInfo[StoreError]) -> str:
    text = str(refusal.value)
    assert "\n" not in text
    assert "sqlalche" not in text.lower()
    return text


def raw(path: Path, *statements: str) -> None:
    """Write to a database file behind the program's back."""
    with closing(sqlite3.connect(path)) as connection:
        for statement in statements:
            connection.execute(statement)
        connection.commit()


# Opening --------------------------------------------------------------------------------------------------


def test_a_new_file_is_made_with_its_folder(tmp_path: Path) -> None:
    path = tmp_path / "deep" / "er" / "team.db"
    store = Store.open(path)
    assert store.path == path
    assert path.is_file()
    assert len(store.uid) == 16
    store.add(HOME, by=BY)
    if os.name == "posix":
        companions = [path, *path.parent.glob("team.db-*")]
        assert len(companions) == 3
        assert {file.stat().st_mode & 0o077 for file in companions} == {0}, "health records are nobody else's"
    assert store.check() == []
    store.close()
    other = Store.open(tmp_path / "other.db")
    assert other.uid != store.uid
    other.close()


def test_the_file_is_set_up_as_promised(store: Store) -> None:
    with store._engine.connect() as connection:
        pragma = {
            name: connection.exec_driver_sql(f"PRAGMA {name}").scalar_one()
            for name in ("journal_mode", "foreign_keys", "synchronous", "busy_timeout", "application_id")
        }
    full = 2
    assert pragma == {
        "journal_mode": "wal",
        "foreign_keys": 1,
        "synchronous": full,
        "busy_timeout": 60_000,
        "application_id": APPLICATION_ID,
    }


def test_an_empty_file_becomes_a_store(tmp_path: Path) -> None:
    path = tmp_path / "empty.db"
    path.touch()
    store = Store.open(path)
    assert store.all(Place) == []
    store.close()


def test_another_programs_database_is_refused_and_left_alone(tmp_path: Path) -> None:
    path = tmp_path / "recipes.db"
    raw(path, "CREATE TABLE recipe (name TEXT)", "INSERT INTO recipe VALUES ('soup')")
    before = path.read_bytes()
    with pytest.raises(StoreError, match="database of another program") as refusal:
        Store.open(path)
    assert str(path) in one_line(refusal)
    assert path.read_bytes() == before
    assert sorted(tmp_path.iterdir()) == [path]


def test_a_database_with_another_programs_mark_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "marked.db"
    raw(path, "PRAGMA application_id = 12345", "CREATE TABLE place (id INTEGER)")
    with pytest.raises(StoreError, match="database of another program"):
        Store.open(path)


def test_a_file_of_a_newer_version_is_refused_and_left_alone(store: Store) -> None:
    store.add(HOME, by=BY)
    store.close()
    raw(store.path, "PRAGMA user_version = 99")
    before = store.path.read_bytes()
    with pytest.raises(
        StoreError, match=r"this database has version 99, this program knows 1: update the program$"
    ) as refusal:
        Store.open(store.path)
    assert str(store.path) in one_line(refusal)
    assert store.path.read_bytes() == before


@pytest.mark.parametrize("junk", [b"driver;spo2\nAda;96\n" * 100, b"x", os.urandom(8192)])
def test_what_is_no_database_is_refused_and_left_alone(tmp_path: Path, junk: bytes) -> None:
    path = tmp_path / "readings.csv"
    path.write_bytes(junk)
    with pytest.raises(StoreError, match="this is not a database of this program") as refusal:
        Store.open(path)
    assert str(path) in one_line(refusal)
    assert path.read_bytes() == junk


def test_a_folder_is_refused(tmp_path: Path) -> None:
    with pytest.raises(StoreError, match="this is a folder; name a file"):
        Store.open(tmp_path)
    (tmp_path / "file").write_text("x")
    with pytest.raises(StoreError, match="cannot be opened or made"):
        Store.open(tmp_path / "file" / "planner.db")


def test_a_place_where_nothing_can_be_written_is_refused(tmp_path: Path) -> None:
    """A name that no file system takes stands for it: rights would not stop a privileged user."""
    with pytest.raises(StoreError, match=r"cannot be opened or made \(File name too long\)"):
        Store.open(tmp_path / ("x" * 300))


# Damage ---------------------------------------------------------------------------------------------------


def damaged(store: Store, first_page: int, last_page: int) -> Path:
    """Overwrite some pages of a closed store of 3 000 readings."""
    home, driver = with_team(store)
    store.add_all(some_readings(driver, home, 3000), by=BY)
    store.close()
    page = 4096
    content_ = bytearray(store.path.read_bytes())
    assert len(content_) > last_page * page
    content_[first_page * page : last_page * page] = b"\xa5" * ((last_page - first_page) * page)
    store.path.write_bytes(content_)
    return store.path


def test_a_file_damaged_at_its_start_is_refused_in_one_line(store: Store) -> None:
    path = damaged(store, 0, 1)
    with pytest.raises(StoreError, match="this is not a database of this program") as refusal:
        Store.open(path)
    one_line(refusal)


def open_and_check(path: Path) -> None:
    """Damage shows at the opening or at the check: either way as a StoreError here."""
    opened = Store.open(path)
    found = opened.check()
    opened.close()
    if found:
        raise StoreError("damaged: " + "; ".join(found))


def test_a_damaged_catalogue_is_found_and_said_in_one_line(store: Store) -> None:
    path = damaged(store, 1, 60)
    with pytest.raises(StoreError, match="damaged") as refusal:
        open_and_check(path)
    one_line(refusal)


def test_damage_among_the_records_is_reported_by_check(store: Store) -> None:
    path = damaged(store, 60, 100)
    opened = Store.open(path)
    found = opened.check()
    assert found
    assert all("\n" not in line for line in found)
    with pytest.raises(StoreError, match=r"damaged|refused"):
        opened.backup(path.with_name("backup.db"))
    assert not path.with_name("backup.db").exists()
    opened.close()


def test_a_cut_off_file_is_reported_or_refused(store: Store) -> None:
    home, driver = with_team(store)
    store.add_all(some_readings(driver, home, 3000), by=BY)
    store.close()
    whole = store.path.read_bytes()
    store.path.write_bytes(whole[: len(whole) // 2])
    with pytest.raises(StoreError) as refusal:
        open_and_check(store.path)
    assert one_line(refusal)


# Checking -------------------------------------------------------------------------------------------------


def test_check_finds_what_this_program_would_never_write(store: Store) -> None:
    keep_every_kind(store)
    assert store.check() == []
    raw(
        store.path,
        "UPDATE stay SET depart_at = arrive_at - 1",
        "UPDATE reading SET spo2_pct = 5, wakefulness = 'dozing'",
        "UPDATE weighing SET session_id = 77",
        "INSERT INTO notice VALUES (9, 1, 0, 'note', '', '', NULL)",
        "UPDATE round SET removed_in = 1",
    )
    found = store.check()
    assert any(line.startswith("weighing 1 refers to a session that is not there") for line in found)
    assert any(line.startswith("stay 1: depart_at: ") and "a time after arrive_at" in line for line in found)
    assert any(line.startswith("reading 1: spo2_pct: 5.0 ") for line in found)
    assert any(line.startswith("reading 1: wakefulness: 'dozing' ") for line in found)
    assert "1 notice record(s) are not in the log of changes" in found
    assert "1 session refers to a removed round by round_id" in found
    assert len(found) == 6


def test_check_survives_values_that_cannot_even_be_read(store: Store) -> None:
    keep_every_kind(store)
    raw(
        store.path,
        "UPDATE reading SET emergency_signs = 'cough'",
        "UPDATE stay SET arrive_at = 9000000000000000000",
        "UPDATE driver SET iron_checked_on = 'spring'",
        "UPDATE place SET track_elevation_m = 'high' WHERE id = 1",
    )
    found = store.check()
    assert [line.split(":")[0] for line in found] == [
        "place 1",
        "a driver cannot be read",
        "a stay cannot be read",
        "a reading cannot be read",
    ]
    assert all("\n" not in line for line in found)


@pytest.mark.parametrize(
    ("kind", "statement"),
    [
        (Reading, "UPDATE reading SET taken_at = 9000000000000000000"),
        (Reading, "UPDATE reading SET taken_at = 'morning'"),
        (Reading, "UPDATE reading SET emergency_signs = 'cough'"),
        (Driver, "UPDATE driver SET name = CAST(X'C1C2' AS TEXT)"),
    ],
)
def test_values_that_cannot_be_read_are_said_in_one_line(store: Store, kind: type, statement: str) -> None:
    keep_every_kind(store)
    raw(store.path, statement)
    with pytest.raises(StoreError, match=r"the database is damaged .*; use a backup") as refusal:
        store.all(kind)
    one_line(refusal)


def test_errors_of_the_callers_own_are_not_taken_for_damage(store: Store) -> None:
    with pytest.raises(ValueError, match="my own"), store.transaction(BY):
        raise ValueError("my own")


def test_the_database_itself_guards_references(store: Store) -> None:
    with store._engine.connect() as connection, pytest.raises(Exception, match="FOREIGN KEY"):
        connection.exec_driver_sql("INSERT INTO round (number, name, place_id) VALUES (1, 'x', 5)")


# Backup ---------------------------------------------------------------------------------------------------


def test_a_backup_holds_everything_and_opens_as_a_store(store: Store, tmp_path: Path) -> None:
    keep_every_kind(store)
    store.set_setting("units", "feet")
    target = tmp_path / "copies of mine" / "planner backup.db"
    target.parent.mkdir()
    store.backup(target)
    assert [path.name for path in target.parent.iterdir()] == [target.name], "no leftovers beside it"
    kept = content(store)
    store.add(Place("Later", "UTC", 0.0, 0.0, 0.0, 0.0), by=BY)
    copy = Store.open(target)
    assert content(copy) == kept
    assert (copy.uid, copy.setting("units")) == (store.uid, "feet")
    assert copy.check() == []
    copy.add(Place("Only here", "UTC", 0.0, 0.0, 0.0, 0.0), by=BY)
    assert "Only here" not in {place.name for place in store.all(Place)}
    with copy._engine.connect() as connection:
        assert connection.exec_driver_sql("PRAGMA journal_mode").scalar_one() == "wal"
    copy.close()


def test_a_backup_is_a_single_file_with_what_is_still_in_the_write_ahead_log(
    store: Store, tmp_path: Path
) -> None:
    store.add(HOME, by=BY)
    assert store.path.with_name(store.path.name + "-wal").stat().st_size > 0
    target = tmp_path / "backup.db"
    store.backup(target)
    rollback_journal = b"\x01\x01"  # SQLite's file format, 1.3.3 (published): a write-ahead log would be 2, 2
    assert target.read_bytes()[18:20] == rollback_journal
    lonely = tmp_path / "elsewhere" / "moved.db"
    lonely.parent.mkdir()
    lonely.write_bytes(target.read_bytes())
    with closing(sqlite3.connect(f"file:{lonely}?mode=ro&immutable=1", uri=True)) as connection:
        assert connection.execute("SELECT name FROM place").fetchall() == [(HOME.name,)]


def test_an_older_backup_is_replaced(store: Store, tmp_path: Path) -> None:
    target = tmp_path / "backup.db"
    store.backup(target)
    store.add(HOME, by=BY)
    store.backup(target)
    empty = tmp_path / "made by a temporary name.db"
    empty.touch()
    store.backup(empty)
    assert empty.read_bytes() == target.read_bytes()
    copy = Store.open(target)
    assert copy.all(Place) == store.all(Place)
    copy.close()


def test_a_backup_never_overwrites_the_store_or_a_strangers_file(store: Store, tmp_path: Path) -> None:
    store.add(HOME, by=BY)
    link = tmp_path / "link.db"
    link.symlink_to(store.path)
    hard = tmp_path / "hard.db"
    hard.hardlink_to(store.path)
    letter = tmp_path / "letter.txt"
    letter.write_text("Dear team")
    other = Store.open(tmp_path / "other.db")
    other.add(HIGH, by=BY)
    refused = {
        store.path: "this is the database in use",
        tmp_path / "sub" / ".." / store.path.name: "this is the database in use",
        link: "this is the database in use",
        hard: "this is the database in use",
        store.path.with_name(store.path.name + "-wal"): "this is the database in use",
        store.path.with_name(store.path.name + "-shm"): "this is the database in use",
        letter: "not a backup of this program",
        other.path: "a database that is open",
        tmp_path: "this is a folder",
        tmp_path / "nowhere" / "backup.db": "could not be written",
        tmp_path / ("x" * 300): "could not be written",
    }
    (tmp_path / "sub").mkdir()
    for target, words in refused.items():
        with pytest.raises(StoreError, match=words) as refusal:
            store.backup(target)
        one_line(refusal)
    assert letter.read_text() == "Dear team"
    assert [place.name for place in other.all(Place)] == [HIGH.name]
    assert store.check() == []
    assert not list(tmp_path.glob(".*")), "no unfinished copies stay behind"
    other.close()


def test_a_backup_inside_a_transaction_holds_what_was_kept_before_it(store: Store, tmp_path: Path) -> None:
    store.add(HOME, by=BY)
    with store.transaction(BY):
        store.add(HIGH, by=BY)
        store.backup(tmp_path / "backup.db")
    copy = Store.open(tmp_path / "backup.db")
    assert [place.name for place in copy.all(Place)] == [HOME.name]
    copy.close()


# Restart --------------------------------------------------------------------------------------------------


def test_two_stores_on_one_file_see_each_others_writes(store: Store) -> None:
    other = Store.open(store.path)
    home, driver = with_team(store)
    assert other.get(Place, home.id) == home
    version = store.version()
    reading = other.add(Reading(driver.id, home.id, at(1), 96.0), by="somebody else")
    assert store.version() > version
    assert store.readings() == [reading]
    changed = store.change(replace(reading, spo2_pct=95.0), by=BY)
    assert other.readings() == [changed]
    other.close()


def test_a_store_that_was_never_closed_keeps_everything(store: Store) -> None:
    """As after a power cut: a copy of the files as they lie on the disk opens with all that was written."""
    home, driver = with_team(store)
    store.add_all(some_readings(driver, home, 500), by=BY)
    folder = store.path.parent / "after the cut"
    folder.mkdir()
    for suffix in ("", "-wal"):
        (folder / f"planner.db{suffix}").write_bytes((store.path.parent / f"planner.db{suffix}").read_bytes())
    again = Store.open(folder / "planner.db")
    assert again.readings() == store.readings()
    assert again.check() == []
    again.close()
