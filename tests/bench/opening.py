"""The app's first frame with the required pressure in it against the first paint of an empty Textual app."""

from __future__ import annotations

import tempfile
import time
from pathlib import Path

from budget.document import Document
from budget.report.figures import Figures
from budget.units import Dimension
from tests.bench.checking import EXAMPLE
from tests.bench.timing import alternating
from tests.terminal.session import RUN, Session

EMPTY = "from textual.app import App\nclass Empty(App[None]):\n    pass\nEmpty().run()"
FULL_PAINT = b"\x1b[24;1H"
"""Sent when the last line of a frame of 24 is painted."""


def _seconds(code: str, wanted: tuple[bytes, ...], config: Path) -> float:
    start = time.perf_counter()
    with Session(EXAMPLE, config=config, code=code) as session:
        while not all(text in session.received for text in wanted):
            if not session.read(0.5) and time.perf_counter() - start > 20.0:
                raise TimeoutError(f"{wanted!r} did not come")
        return time.perf_counter() - start


def report() -> str:
    """Return the ratio, and the times behind it."""
    snapshot = Document.open(EXAMPLE).snapshot
    figures = Figures(snapshot.description)
    required = [figures.text(result.required, Dimension.PRESSURE) for result in snapshot.budget.sources.values()]
    row = next(iter(snapshot.budget.sections.values()))
    computed = figures.text(row.run.drop, Dimension.PRESSURE)
    ours = tuple(text.encode() for text in (required[0], computed))
    with tempfile.TemporaryDirectory() as folder:
        app, empty = alternating(
            lambda: _seconds(RUN, ours, Path(folder)), lambda: _seconds(EMPTY, (FULL_PAINT,), Path(folder))
        )
    return (
        f"first frame of the 40-terminal example with required {required[0]} and {row.id}'s drop {computed} / "
        f"first paint of an empty app: {app / empty:.2f} (at most 2.3; {app * 1e3:.0f} ms / {empty * 1e3:.0f} ms)"
    )
