"""For every test: what the program keeps of its own goes to a folder of the test's, never to the user's.

Generated input is the same in every run, so that a change alone makes a test fail; `--hypothesis-profile searching`
looks for more, as `tests/fuzz` does.
"""

from pathlib import Path

import pytest
from hypothesis import settings

settings.register_profile("repeatable", derandomize=True)
settings.register_profile("searching", derandomize=False)
settings.load_profile("repeatable")


@pytest.fixture(autouse=True)
def _own_state(tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch) -> None:
    folder: Path = tmp_path_factory.getbasetemp() / "state"
    monkeypatch.setenv("XDG_STATE_HOME", str(folder))
