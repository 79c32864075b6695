"""Work beside the keyboard: in a thread of its own, with word of how far it is, and stopped when it is asked to."""

from __future__ import annotations

import threading
import time
from collections.abc import Callable
from typing import TYPE_CHECKING, TypeVar

from budget.report.plain import plain
from budget.screens.working import begin

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

T = TypeVar("T")

Watch = Callable[[int, float], None]
"""Called by the work after every step; it raises where the work is to stop."""

OFTEN = 0.5
"""Seconds between two words of how far the work is."""


class StoppedError(Exception):
    """The work was stopped."""


class Beside:
    """One piece of work at a time: a new one stops the one before, whose result is forgotten."""

    def __init__(self, app: BudgetApp) -> None:
        """Nothing is done yet."""
        app.works.append(self)
        self._app = app
        self._stop: threading.Event | None = None

    @property
    def working(self) -> bool:
        """Whether something is being worked out."""
        return self._stop is not None

    def stop(self) -> None:
        """Stop what is being worked out; nothing of it is told any more."""
        if self._stop is not None:
            self._stop.set()
            self._stop = None

    def start(
        self,
        work: Callable[[Watch], T],
        done: Callable[[T], object],
        failed: Callable[[str], object],
        progress: Callable[[int], object] | None = None,
    ) -> None:
        """Work something out; then, among the keys, take the result, or say why there is none."""
        self.stop()
        mine = self._stop = threading.Event()
        told = time.monotonic()

        def watch(step: int, _off: float) -> None:
            nonlocal told
            if mine.is_set():
                raise StoppedError
            if progress is not None and time.monotonic() - told > OFTEN:
                told = time.monotonic()
                self._app.call_later(report, step)

        def report(step: int) -> None:
            if progress is not None and self._stop is mine:
                progress(step)

        def finish(take: Callable[[], object]) -> None:
            if self._stop is mine:
                self._stop = None
                take()

        def run() -> None:
            try:
                result = work(watch)
            except StoppedError:
                return
            except Exception as wrong:  # noqa: BLE001 - whatever went wrong is told, and the app goes on
                reason = plain(str(wrong) or type(wrong).__name__)
                self._app.call_later(finish, lambda: failed(reason))
            else:
                self._app.call_later(finish, lambda: done(result))

        begin(run)
