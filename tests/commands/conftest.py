"""What the tests of the commands share."""

from pathlib import Path

import pytest

from tests.commands.calls import RUN, Caller


@pytest.fixture
def call(capsys: pytest.CaptureFixture[str]) -> Caller:
    return Caller(capsys)


@pytest.fixture
def run_file(tmp_path: Path) -> Path:
    path = tmp_path / "run.toml"
    path.write_bytes(RUN.encode())
    return path
