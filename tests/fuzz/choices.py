"""Choices taken from bytes, one a byte: the same bytes always choose the same."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TypeVar

T = TypeVar("T")


class Choices:
    """Bytes that are used up choice by choice; when they are, the first is always taken."""

    def __init__(self, data: bytes) -> None:
        self._left = list(reversed(data))

    def number(self, below: int) -> int:
        """Choose a whole number from 0 up to, not including, `below`."""
        taken = 0
        for _ in range(1 if below <= 256 else 2):
            taken = taken * 256 + (self._left.pop() if self._left else 0)
        return taken % below

    def one(self, among: Sequence[T]) -> T:
        """Choose one of some."""
        return among[self.number(len(among))]
