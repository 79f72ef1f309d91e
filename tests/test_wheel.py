"""The wheel holds all that the program needs: it works far from the checkout."""

from __future__ import annotations

import os
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]

# Runs in the installed copy: the entry, which opens the first page on the store named by PLANNER_STORE.
FIRST_PAGE = """
from pathlib import Path
from streamlit.testing.v1 import AppTest
import planner
from planner.ui.navigation import pages_folder

package = Path(planner.__file__).parent
at = AppTest.from_file(str(package / "app.py"), default_timeout=30).run()
assert not at.exception and not at.error
print(pages_folder())
print(sum('class="p-answer"' in str(each.proto.body) for each in at.get("html")))
"""


@pytest.fixture(scope="module")
def site(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder that a wheel of this checkout is unpacked into."""
    folder = tmp_path_factory.mktemp("wheel")
    run(ROOT, "-m", "hatchling", "build", "-t", "wheel", "-d", str(folder))
    (wheel,) = folder.glob("*.whl")
    with zipfile.ZipFile(wheel) as packed:
        packed.extractall(folder / "site")
    return folder / "site"


def run(folder: Path, *words: str, **environment: str) -> str:
    """Run Python with these words in a folder; its output, once it has ended well."""
    done = subprocess.run(
        [sys.executable, *words],
        cwd=folder,
        env={**os.environ, **environment},
        capture_output=True,
        text=True,
        check=False,
        timeout=120,
    )
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


def names(folder: Path, pattern: str) -> list[str]:
    return sorted(path.name for path in folder.glob(pattern))


def test_pages_settings_and_the_demo_come_along(site: Path) -> None:
    assert names(ROOT / "pages", "*.py")
    assert names(site / "planner" / "_pages", "*") == names(ROOT / "pages", "*.py")
    assert set(names(ROOT / "demo_data", "*.csv")) <= set(names(site / "planner" / "_demo_data", "*"))
    for file in (".streamlit/config.toml", "physiology/population.json"):
        assert (site / "planner" / file).read_bytes() == (ROOT / "planner" / file).read_bytes()
    assert not list(site.glob("tests*")), "tests are no part of what is installed"


def test_the_demo_and_the_first_page_work_from_it(site: Path, tmp_path: Path) -> None:
    here = {"PYTHONPATH": str(site), "PLANNER_STORE": str(tmp_path / "planner.db")}
    run(tmp_path, "-m", "planner", "demo", **here)
    assert run(tmp_path, "-c", FIRST_PAGE, **here).split("\n")[:-1] == [str(site / "planner" / "_pages"), "1"]
