"""A run's file to read and to save."""

import tempfile
from collections.abc import Iterator
from pathlib import Path

import pytest

from tests.storage.contents import OLD
from tests.storage.test_files import hand_over


@pytest.fixture
def file(tmp_path: Path) -> Path:
    path = tmp_path / "run.toml"
    path.write_bytes(OLD)
    return path


@pytest.fixture
def place() -> Iterator[Path]:
    """A folder that a user without privileges owns, with a file and a folder for records."""
    with tempfile.TemporaryDirectory() as name:
        place = Path(name)
        (place / "work").mkdir()
        (place / "state").mkdir()
        (place / "work" / "run.toml").write_bytes(OLD)
        for path in (place, place / "work", place / "state", place / "work" / "run.toml"):
            hand_over(path)
        yield place
