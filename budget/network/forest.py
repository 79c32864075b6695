"""Trees of legs or zones, numbered so that whatever lies beneath one stands together."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from budget.physics.arrays import Flags, Indices


@dataclass(frozen=True, slots=True, eq=False)
class Forest:
    """Places in an order in which each member is followed by all that lie beneath it."""

    enter: Indices
    """The place of each member."""
    leave: Indices
    """The place behind the last one beneath each."""
    children: tuple[Indices, ...]
    """Of each member those directly beneath it, by their places."""

    @classmethod
    def of(cls, parents: Sequence[int]) -> Forest:
        """Number a forest by the parents of its members, -1 for none; a parent comes before its children."""
        size = [1] * len(parents)
        below: list[list[int]] = [[] for _ in parents]
        for number in range(len(parents) - 1, -1, -1):
            if parents[number] >= 0:
                size[parents[number]] += size[number]
        enter, free, next_root = [0] * len(parents), [0] * len(parents), 0
        for number, parent in enumerate(parents):
            if parent < 0:
                enter[number], next_root = next_root, next_root + size[number]
            else:
                enter[number] = free[parent]
                free[parent] += size[number]
                below[parent].append(number)
            free[number] = enter[number] + 1
        places = np.array(enter, dtype=np.int64)
        return cls(
            places, places + np.array(size, dtype=np.int64), tuple(np.array(some, dtype=np.int64) for some in below)
        )

    def within(self, members: Indices, root: int) -> Flags:
        """Return which members lie beneath a root, or are it; -1 lies nowhere."""
        places = self.enter[members]
        return np.asarray((members >= 0) & (places >= self.enter[root]) & (places < self.leave[root]))

    def child_towards(self, root: int, members: Indices) -> Indices:
        """Return for each member the child of a root beneath which it lies; -1 where it lies beneath none."""
        children = self.children[root]
        if not len(children):
            return np.full(len(members), -1, dtype=np.int64)
        places = self.enter[members]
        nearest = children[np.maximum(np.searchsorted(self.enter[children], places, side="right") - 1, 0)]
        inside = (places >= self.enter[nearest]) & (places < self.leave[nearest])
        return np.asarray(np.where(inside, nearest, -1), dtype=np.int64)
