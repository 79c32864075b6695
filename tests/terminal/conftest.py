"""The app on an example, in a pseudo-terminal."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from pathlib import Path

import pytest

from tests.terminal.session import RUN, Session

EXAMPLES = Path(__file__).parents[2] / "examples"
SMALL = (Path(__file__).parents[1] / "screens" / "cottage.toml").read_text()

Open = Callable[..., Session]


@pytest.fixture
def opened(tmp_path: Path) -> Iterator[Open]:
    """Open a run in the app; whatever is opened is closed at the end."""
    sessions: list[Session] = []

    def start(
        text: str = SMALL,
        *,
        size: tuple[int, int] = (80, 24),
        environment: Mapping[str, str] | None = None,
        config: str = "",
        code: str = RUN,
        wait: str = "required",
    ) -> Session:
        file = tmp_path / "run.toml"
        file.write_text(text, encoding="utf-8", newline="")
        (tmp_path / "budget").mkdir(exist_ok=True)
        (tmp_path / "budget" / "config.toml").write_text(config)
        # Of its own what each keeps: the same run in several terminals would be open elsewhere.
        own = {"XDG_STATE_HOME": str(tmp_path / f"state-{len(sessions)}"), **(environment or {})}
        session = Session(file, config=tmp_path, size=size, environment=own, code=code)
        sessions.append(session)
        if wait:
            session.wait_for(wait)
        return session

    yield start
    for session in sessions:
        session.close()
