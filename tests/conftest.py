"""What several test files share."""

from __future__ import annotations

import shutil
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

from planner.services.importing import load_demo
from planner.store.store import Store


@pytest.fixture(scope="session")
def empty_file(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A store file without records, made once; not to be written to."""
    path = tmp_path_factory.mktemp("empty") / "empty.db"
    Store.open(path).close()
    return path


@pytest.fixture
def store(empty_file: Path, tmp_path: Path) -> Iterator[Store]:
    """An empty store in a file of its own."""
    path = tmp_path / "planner.db"
    shutil.copyfile(empty_file, path)
    opened = Store.open(path)
    yield opened
    opened.close()


@pytest.fixture(scope="session")
def demo_file(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A store file with the demo season, built once; not to be written to."""
    folder = tmp_path_factory.mktemp("demo")
    built = Store.open(folder / "built.db")
    load_demo(built)
    built.backup(folder / "demo.db")
    built.close()
    return folder / "demo.db"


@pytest.fixture
def demo_store(demo_file: Path, tmp_path: Path) -> Iterator[Store]:
    """A store with the demo season in a file of its own."""
    path = tmp_path / "demo_copy.db"
    shutil.copyfile(demo_file, path)
    opened = Store.open(path)
    yield opened
    opened.close()


@pytest.fixture(autouse=True)
def _clear_caches_of_the_screens() -> None:
    """Streamlit's caches outlive a test; without Streamlit loaded there is nothing to clear."""
    streamlit = sys.modules.get("streamlit")
    if streamlit is not None:
        streamlit.cache_resource.clear()
        streamlit.cache_data.clear()
