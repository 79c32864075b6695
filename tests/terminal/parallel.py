"""Many runs in pseudo-terminals, several at a time: they mostly wait."""

from __future__ import annotations

import multiprocessing
from collections.abc import Callable, Sequence
from concurrent.futures import ProcessPoolExecutor
from typing import TypeVar

T = TypeVar("T")


def many(jobs: Sequence[tuple[Callable[..., T], tuple[object, ...]]], at_once: int) -> list[T]:
    """Return what each job gives, in their order; a process that forks has one thread alone."""
    with ProcessPoolExecutor(at_once, multiprocessing.get_context("spawn")) as pool:
        return [done.result() for done in [pool.submit(act, *given) for act, given in jobs]]
