"""For every test: what the program keeps of its own goes to a folder of the test's, never to the user's."""

from pathlib import Path

import pytest


@pytest.fixture(autouse=True)
def _own_state(tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch) -> None:
    folder: Path = tmp_path_factory.getbasetemp() / "state"
    monkeypatch.setenv("XDG_STATE_HOME", str(folder))
