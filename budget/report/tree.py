"""The run as it hangs together: every source with what hangs on it, in the order of the file."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

from budget.description import Description


class Hung(NamedTuple):
    """A source, section or terminal by its ID, and how many lie between it and the root, 0 for the root itself."""

    id: str
    depth: int


def hang(description: Description) -> Iterator[Hung]:
    """Walk from each source to its terminals; what hangs on nothing known, or in a circle, stands at the end."""
    children: dict[str, list[str]] = {}
    loose = []
    known = set(description.order)
    for side in ("from_", "to"):
        for id_ in description.order:
            part = description.sections.get(id_) or description.terminals.get(id_)
            if part is None or (side == "to" and part.from_ is not None):
                continue
            parent = getattr(part, side)
            if parent in known:
                children.setdefault(parent, []).append(id_)
            elif side == "to" or parent is not None:
                loose.append(id_)
    seen: set[str] = set()
    for root in (*description.sources, *loose, *description.order):
        pending = [Hung(root, 0)]
        while pending:
            one = pending.pop()
            if one.id in seen:
                continue
            seen.add(one.id)
            yield one
            pending += [Hung(child, one.depth + 1) for child in reversed(children.get(one.id, ()))]
