"""Work that may take long, a disk that hangs, say: in a thread of its own, its result among the keys."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, TypeVar

from budget.screens.working import begin

if TYPE_CHECKING:
    import threading

    from budget.screens.app import BudgetApp

T = TypeVar("T")


def in_background(app: BudgetApp, work: Callable[[], T], then: Callable[[T], object]) -> threading.Thread:
    """Do a piece of work, then take its result where the keys are dealt with. What it raises ends the app."""

    def finish(result: T) -> None:
        app.pending -= 1
        then(result)

    def fail(error: Exception) -> None:
        app.pending -= 1
        raise error

    def run() -> None:
        try:
            result = work()
        except Exception as error:  # noqa: BLE001 - it is raised again where the app deals with it
            app.call_later(fail, error)
        else:
            app.call_later(finish, result)

    app.pending += 1
    return begin(run)
