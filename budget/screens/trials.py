"""Trying an edit out while one types: at once where that is quick, else when the typing pauses."""

from __future__ import annotations

import time
from collections.abc import Callable
from typing import TYPE_CHECKING, Literal

from budget.description.edits import Edit
from budget.document import Snapshot

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

SLOW, PAUSE = 0.15, 0.25
"""Seconds: where a trial takes longer, it waits until so long no key came."""

QUICK, BREATH = 0.02, 0.01
"""Seconds: a list of trials that take longer each is made one by one, with so long for a key between them."""

ROWS = 750
"""A trial of a run of so many rows is taken for slow until one was timed."""

Pace = Literal["at once", "one by one", "marked alone"]
"""How the figures of a list are computed."""


class Trials:
    """What is tried out on the run of an app; how long the last one took decides whether the next one waits."""

    def __init__(self, app: BudgetApp) -> None:
        """Nothing was tried yet."""
        self.clock = time.thread_time
        """What trials are timed by."""
        self._app = app
        self._took: float | None = None
        self._last = 0

    @property
    def seconds(self) -> float:
        """What a trial takes: the last one, or an estimate by the size of the run."""
        return SLOW * len(self._app.ledger.rows) / ROWS if self._took is None else self._took

    @property
    def slow(self) -> bool:
        """Whether a trial would hold up the next key."""
        return self.seconds > SLOW

    @property
    def pace(self) -> Pace:
        """How a list of trials is made without holding up the next key."""
        return "marked alone" if self.slow else "one by one" if self.seconds > QUICK else "at once"

    def preview(self, edit: Edit) -> Snapshot:
        """Return what an edit would lead to. Raises EditError."""
        begun = self.clock()
        try:
            return self._app.document.preview(edit)
        finally:
            self._took = self.clock() - begun

    def later(self, trial: Callable[[], None]) -> None:
        """Do a trial when the present key was dealt with, or when no further one comes; a later one replaces it."""
        self._last += 1
        mine = self._last

        def run() -> None:
            if mine == self._last:
                trial()

        if self.slow:
            self._app.set_timer(PAUSE, run)
        else:
            self._app.call_later(run)
