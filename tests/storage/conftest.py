"""A run's file to read and to save."""

from pathlib import Path

import pytest

from tests.storage.contents import OLD


@pytest.fixture
def file(tmp_path: Path) -> Path:
    path = tmp_path / "run.toml"
    path.write_bytes(OLD)
    return path
