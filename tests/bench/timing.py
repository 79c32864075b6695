"""Measuring: the best of several tries, so that what else the machine does counts little."""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable


def best(call: Callable[[], object], tries: int = 15) -> float:
    """Return the shortest of several runs, s."""
    shortest = float("inf")
    for _ in range(tries):
        start = time.perf_counter()
        call()
        shortest = min(shortest, time.perf_counter() - start)
    return shortest


def alternating(first: Callable[[], float], second: Callable[[], float], tries: int = 9) -> tuple[float, float]:
    """Return the medians of two measurements that are taken in turn, so that both see the same machine."""
    pairs = [(first(), second()) for _ in range(tries)]
    return statistics.median(one for one, _ in pairs), statistics.median(two for _, two in pairs)
