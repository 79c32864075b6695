"""Threads that work beside the keyboard: none keeps the app from being left, and none is at work while Python ends."""

from __future__ import annotations

import threading
import time
from collections.abc import Callable

_at_work: set[threading.Thread] = set()


def begin(work: Callable[[], object]) -> threading.Thread:
    """Do a piece of work in a thread of its own."""

    def run() -> None:
        try:
            work()
        finally:
            _at_work.discard(thread)

    thread = threading.Thread(target=run, daemon=True)
    _at_work.add(thread)
    thread.start()
    return thread


def wait_for_all(within: float) -> None:
    """Wait for what is under way, for so many seconds at the most: a disk may hang.

    What still computes while the interpreter is taken down may spoil the exit status.
    """
    until = time.monotonic() + within
    for thread in tuple(_at_work):
        thread.join(max(0.0, until - time.monotonic()))
