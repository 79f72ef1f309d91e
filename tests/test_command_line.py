"""The command line: what it prints, and that every mistake is one line on stderr with status 2."""

from __future__ import annotations

import itertools
import json
import os
import socket
import subprocess
import sys
from pathlib import Path

import pytest

from planner.__main__ import main
from planner.commands.command import Answer
from planner.commands.printing import as_json, as_text
from planner.commands.registry import COMMANDS
from planner.ui import server

AIR_KEYS = [
    "pressure_hpa",
    "pressure_from",
    "air_density_kg_m3",
    "inspired_po2_mmhg",
    "alveolar_po2_mmhg",
    "paco2_mmhg",
    "expected_spo2_pct",
    "low_spo2_pct",
    "high_spo2_pct",
    "aerobic_capacity_pct",
]


def run_module(*words: str, **environment: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "planner", *words],
        capture_output=True,
        text=True,
        timeout=60,
        env={**os.environ, **environment},
        check=False,
    )


def air(capsys: pytest.CaptureFixture[str], *words: str) -> dict[str, object]:
    assert main(["air", *words, "--json"]) == 0
    found: dict[str, object] = json.loads(capsys.readouterr().out)
    return found


@pytest.mark.parametrize(
    ("words", "pressure_hpa", "tolerance", "said"),
    [
        # computed: West 1996 (published constants) by hand, 587.6 mmHg x 1.33322
        (["2240", "--latitude", "19"], 783.4, 1.0, "West 1996"),
        # computed: the libraries ambiance and fluids agree on 771.62
        (["2240", "--latitude", "47"], 771.6, 0.5, "standard atmosphere"),
        # common practice: what was measured beats both models
        (["2240", "--pressure-hpa", "780"], 780.0, 0.0, "measured"),
    ],
)
def test_air_pressure_and_where_it_came_from(
    capsys: pytest.CaptureFixture[str], words: list[str], pressure_hpa: float, tolerance: float, said: str
) -> None:
    found = air(capsys, *words)
    assert list(found) == AIR_KEYS
    assert found["pressure_hpa"] == pytest.approx(pressure_hpa, abs=tolerance)
    assert said in str(found["pressure_from"])


def test_air_days_move_the_saturation_and_asleep_lies_lower(capsys: pytest.CaptureFixture[str]) -> None:
    arrival, third, fourteenth = (
        air(capsys, "2300", "--days", days)["expected_spo2_pct"] for days in ("0", "3", "14")
    )
    assert arrival < third < fourteenth  # type: ignore[operator]
    asleep = air(capsys, "2300", "--asleep")["expected_spo2_pct"]
    assert asleep < arrival  # type: ignore[operator]


def test_air_prints_a_line_for_each_key(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["air", "1600"]) == 0
    printed = capsys.readouterr().out
    assert [line.split()[0] for line in printed.splitlines()[: len(AIR_KEYS)]] == AIR_KEYS


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["air", "99999"], "elevation_m: 99999.0 cannot be used, expected -430 to 9000 m"),
        (["air", "abc"], "'abc' cannot be used, expected a number in m"),
        (["air", "nan"], "'nan' cannot be used"),
        (["air", "inf"], "'inf' cannot be used"),
        (["air"], "required: ELEVATION_M"),
        (["air", "2240", "--latitude", "91"], "latitude_deg: 91.0 cannot be used, expected -90 to 90 deg"),
        (["air", "2240", "--pressure-hpa", "78"], "pressure_hpa: 78.0 cannot be used, expected 300 to 1100"),
        (["air", "2240", "--days", "-1"], "days: -1.0 cannot be used, expected 0 to 3650 d"),
        (["air", "2240", "--lat", "19"], "unrecognized arguments: --lat"),
        (["morning", "--date", "14 May"], "expected a day as 2026-05-14"),
        (["weather"], "invalid choice: 'weather'"),
        (["--port", "80"], "expected a port from 1024 to 65535"),
        (["--port", "eight"], "expected a port from 1024 to 65535"),
        (["read", "no-such-file.csv"], "FILE: 'no-such-file.csv' cannot be used"),
    ],
)
def test_a_mistake_is_one_line_and_status_2(
    capsys: pytest.CaptureFixture[str], words: list[str], said: str
) -> None:
    try:
        status = main(words)
    except SystemExit as stopped:  # argparse leaves this way
        status = stopped.code if isinstance(stopped.code, int) else -1
    printed = capsys.readouterr()
    assert status == 2
    assert printed.out == ""
    assert said in printed.err
    assert printed.err.count("\n") == 1
    assert printed.err.endswith("\n")


@pytest.mark.parametrize("words", [["air", "99999"], ["air", "abc"]])
def test_a_mistake_seen_from_outside(words: list[str]) -> None:
    done = run_module(*words)
    assert done.returncode == 2
    assert done.stdout == ""
    assert len(done.stderr.splitlines()) == 1
    assert "Traceback" not in done.stderr


def test_a_fault_of_the_program_is_one_line_too(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*_: object, **__: object) -> None:
        raise ZeroDivisionError("a\nfault")

    monkeypatch.setattr("planner.services.air.site_air", broken)
    assert main(["air", "1600"]) == 2
    printed = capsys.readouterr()
    assert printed.err == "planner: a fault in the program (ZeroDivisionError: a fault)\n"


def test_a_reader_that_leaves_early_gets_no_complaint() -> None:
    pipe = f"{sys.executable} -m planner air 1600 --json | head -c 1"
    done = subprocess.run(["bash", "-c", pipe], capture_output=True, text=True, check=True)
    assert done.stdout == "{"
    assert done.stderr == ""


def test_air_waits_for_neither_the_screen_nor_the_database() -> None:
    code = (
        "import sys; from planner.__main__ import main; main(['air', '1600', '--json']);"
        "slow = {'streamlit', 'sqlalchemy', 'pandas', 'altair'};"
        "print(sorted(slow & set(sys.modules)), file=sys.stderr)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stderr.strip() == "[]"


def test_what_is_not_known_is_null_in_json_and_a_dash_in_a_table() -> None:
    row = {"driver": "A", "spo2_pct": float("nan"), "why": None, "reasons": ["x", "y"]}
    answer = Answer([row])
    assert json.loads(as_json(answer)) == [{**row, "spo2_pct": None}]
    assert as_text(answer).splitlines() == ["driver  spo2_pct  why  reasons", "A              -  -    x; y"]


def test_every_command_has_its_own_word_and_a_summary() -> None:
    names = [command.name for command in COMMANDS]
    assert len(set(names)) == len(names)
    assert {"air", "morning", "read", "demo", "backup", "check"} <= set(names)
    assert all(command.summary for command in COMMANDS)


def test_help_names_every_command() -> None:
    done = run_module("--help")
    assert done.returncode == 0
    assert all(f"    {command.name} " in done.stdout for command in COMMANDS)


def test_demo_check_read_backup_morning_work_on_one_store(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    store = str(tmp_path / "planner.db")
    assert main(["--store", store, "demo", "--json"]) == 0
    capsys.readouterr()
    assert main(["check", "--store", store, "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["sound"] is True

    assert main(["morning", "--store", store, "--json"]) == 0
    rows = json.loads(capsys.readouterr().out)
    assert len(rows) == 8  # the demo's team has eight drivers
    assert all(list(row) == ["driver", "outcome", "reasons"] for row in rows)

    copy = tmp_path / "copy.db"
    assert main(["backup", str(copy), "--store", store]) == 0
    capsys.readouterr()
    assert main(["check", "--store", str(copy), "--json"]) == 0
    capsys.readouterr()
    assert main(["morning", "--store", str(copy)]) == 0
    assert ".;" not in capsys.readouterr().out  # sentences follow one another as they are
    assert main(["morning", "--store", str(copy), "--json"]) == 0
    assert json.loads(capsys.readouterr().out) == rows


def test_the_store_is_found_by_option_before_variable(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("PLANNER_STORE", str(tmp_path / "by_variable.db"))
    assert main(["check", "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["store"].endswith("by_variable.db")
    assert main(["check", "--json", "--store", str(tmp_path / "by_option.db")]) == 0
    assert json.loads(capsys.readouterr().out)["store"].endswith("by_option.db")


def test_a_file_that_is_no_store_is_refused_in_one_line(tmp_path: Path) -> None:
    wrong = tmp_path / "letter.db"
    wrong.write_text("Dear all, this is a letter and no database of anybody's season.\n" * 40)
    done = run_module("check", "--store", str(wrong))
    assert done.returncode == 2
    assert len(done.stderr.splitlines()) == 1
    assert wrong.read_text().startswith("Dear all")


def test_the_app_is_started_with_the_shipped_settings_as_flags(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    started: list[list[str]] = []
    monkeypatch.setattr("streamlit.web.cli.main", lambda: started.append(list(sys.argv)))
    monkeypatch.setattr(sys, "argv", ["planner"])
    monkeypatch.setenv("PLANNER_STORE", "before")
    assert main(["--store", str(tmp_path / "x.db"), "--port", "8699"]) == 0
    (words,) = started
    pairs = list(itertools.pairwise(words))
    assert ("--server.address", "localhost") in pairs
    assert ("--server.allowedHosts", "localhost") in pairs
    assert ("--server.allowedHosts", "127.0.0.1") in pairs
    assert ("--browser.gatherUsageStats", "false") in pairs
    assert ("--client.showErrorDetails", "none") in pairs
    assert ("--server.port", "8699") in pairs
    assert os.environ["PLANNER_STORE"] == str(tmp_path / "x.db")
    assert Path(words[2]) == server.PACKAGE / "app.py"


def test_a_port_in_use_is_refused_in_one_line(capsys: pytest.CaptureFixture[str]) -> None:
    with socket.socket() as taken:
        taken.bind(("localhost", 0))
        taken.listen()
        number = taken.getsockname()[1]
        assert main(["--port", str(number)]) == 2
    assert capsys.readouterr().err == (
        f"planner: port: {number} cannot be used, expected a port that no other program uses\n"
    )


@pytest.mark.parametrize("pressure_hpa", ["300", "1100"])
def test_air_answers_at_both_ends_of_the_pressures_that_can_be_typed(pressure_hpa, capsys) -> None:
    """computed: 300 and 1100 hPa stand for elevations beyond -430 to 9000 m in the standard atmosphere."""
    assert main(["air", "2240", "--pressure-hpa", pressure_hpa, "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["aerobic_capacity_pct"] <= 100.0


@pytest.mark.parametrize(("pressure_hpa", "told"), [("1013", True), ("780", False)])
def test_air_says_when_a_pressure_cannot_be_that_of_the_place(pressure_hpa, told, capsys) -> None:
    """judgement: further than 6 % from the model atmosphere; 1013 hPa is one reduced to sea level."""
    assert main(["air", "2240", "--pressure-hpa", pressure_hpa]) == 0
    assert ("reduced to sea level" in capsys.readouterr().out) is told
