"""New IDs, counted on from those that there are."""

from __future__ import annotations

import re
from collections.abc import Iterable

_NUMBER_AT_END = re.compile(r"(\d+)(\D*)$")


def new_id(base: str, taken: Iterable[str], *, itself: bool = False) -> str:
    """Return the next free ID after one: FCU-201 gives FCU-202, zeros in front are kept; `itself` if that is free."""
    known = set(taken)
    if itself and base not in known:
        return base
    found = _NUMBER_AT_END.search(base)
    if found is None:
        stem, number, width, tail = f"{base}-", 1, 1, ""
    else:
        stem, tail = base[: found.start()], found.group(2)
        number, width = int(found.group(1)), len(found.group(1))
    while True:
        number += 1
        candidate = f"{stem}{number:0{width}d}{tail}"
        if candidate not in known:
            return candidate
