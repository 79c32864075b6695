"""IDs: sources, sections and terminals share theirs, so that each can be named by it alone."""

from __future__ import annotations

import dataclasses
from collections.abc import Mapping
from typing import Any, TypeVar

from budget.description.finding import Path
from budget.description.model import Section, Terminal
from budget.description.schema import KEYED
from budget.description.source import Source
from budget.description.tables import check_id
from budget.description.values import Reading

SHARED = ("source", "section", "terminal")
"""Tables that share their IDs, in the order in which they have a claim to one."""

P = TypeVar("P", Section, Terminal)


def ids_of(data: Mapping[str, Any]) -> Mapping[Path, str]:
    """Return the ID under which each source, section and terminal is known.

    It is that of the file. Where another has that already, it is one that nothing in the file refers to: what has an ID
    twice is an error, but what hangs on the first must not hang on the second, and both are to be seen.
    """
    paths = [(table, id_) for table in SHARED for id_ in _entries(data, table)]
    stated = {id_ for _, id_ in paths}
    known: dict[Path, str] = {}
    taken: set[str] = set()
    for table, id_ in paths:
        name = id_
        while name in taken or (name != id_ and name in stated):
            name = f"{name} ({table})"
        known[table, id_] = name
        taken.add(name)
    return known


def kept_apart(ids: Mapping[Path, str], parts: Mapping[str, P]) -> dict[str, P]:
    """Return parts under the IDs by which they are known."""
    known = ((ids[part.path], part) for part in parts.values())
    return {id_: part if part.id == id_ else dataclasses.replace(part, id=id_) for id_, part in known}


def file_order(ids: Mapping[Path, str], source: Source) -> tuple[str, ...]:
    """Return the IDs in the order in which they stand in the file."""
    places: list[tuple[int, int, str]] = []
    for path, id_ in ids.items():
        span = source.spans.key(path)
        places.append((span.start if span else 0, len(places), id_))
    return tuple(id_ for _, _, id_ in sorted(places))


def check_ids(reading: Reading, source: Source, data: Mapping[str, Any]) -> None:
    """Find IDs that can't be used, and those that stand twice."""
    seen: dict[str, Path] = {}
    for table in KEYED:
        for id_ in _entries(data, table):
            path: Path = (table, id_)
            check_id(reading, path)
            if table not in SHARED:
                continue
            if id_ in seen:
                line, _ = source.locate(seen[id_])
                reading.wrong("duplicate-id", f"{id_!r} is already the {seen[id_][0]} in line {line}; rename one", path)
            seen.setdefault(id_, path)


def _entries(data: Mapping[str, Any], table: str) -> Mapping[str, Any]:
    entries = data.get(table, {})
    return entries if isinstance(entries, dict) else {}
