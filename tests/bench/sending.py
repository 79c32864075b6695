"""Bytes that go over the link for a cursor move, an edit, a start, and while nothing happens."""

from __future__ import annotations

import shutil
import tempfile
from pathlib import Path

from tests.bench.checking import EXAMPLE
from tests.terminal.session import Session
from tests.terminal.test_bytes import changed_cells


def report() -> str:
    """Return the counts at 80x24 and 200x50."""
    return "\n".join(_at(size, *most) for size, most in (((80, 24), (400, 300, 100)), ((200, 50), (700, 600, 150))))


def _at(size: tuple[int, int], move: int, edit: int, cell: int) -> str:
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "run.toml"
        shutil.copy(EXAMPLE, file)
        with Session(file, config=Path(folder), size=size) as session:
            session.wait_for("required")
            session.settle(0.5)
            start = len(session.received)
            # On a large screen a move to another row also changes the row detail, which is counted apart.
            moved = max(session.press("right"), session.press("left"))
            if size[0] < 120:
                moved = max(moved, session.press("down"), session.press("up"))
            session.press("down", "down", "down", "enter")
            before = session.lines
            sent = session.press("9")
            cells = changed_cells(before, session.lines)
            idle = session.settle(quiet=5.0, limit=5.0)
    return (
        f"bytes at {size[0]}x{size[1]}: start {start}, cursor move {moved} (at most {move}), a keystroke that changes "
        f"{cells} cells {sent} (at most {edit + cell * cells}), idle for 5 s {idle}"
    )
