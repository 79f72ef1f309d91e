"""What several test files share."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from planner.store.store import Store


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    """A new, empty store in a file of its own."""
    opened = Store.open(tmp_path / "planner.db")
    yield opened
    opened.close()
