"""A run with something in every place where a text may stand, found by walking the schema."""

from __future__ import annotations

import copy
import tomllib
from collections.abc import Iterator, Mapping
from itertools import pairwise
from typing import Any

import tomli_w

from budget.description.schema import KEYED, SINGLE, Array, Inline, Spec, Table, Text
from tests.description.sound import SOUND
from tests.hostile.payloads import printable

Place = tuple[str | int, ...]

BASE: dict[str, Any] = tomllib.loads(
    SOUND
    + """
[section.M1.accept]
velocity = "as it is"

[[section.M1.fitting]]
kind = "bend"
radius_ratio = 1.5

[link.L1]
from = "B1"
to = "B2"
size = "DN20"
length = "2 m"
paired = false

[[link.L1.item]]
name = "Meter"
k = 2.0

[case.night]
title = "At night"
off = ["T2"]
share = { T1 = 0.5 }
source = { P1 = { speed = 0.8 } }
"""
)
"""A run with every kind of table."""

READINGS: dict[str, Any] = {"reading": {"T1": {"flow": "0.1 L/s", "note": "x"}, "T3": {"flow": "0.1 L/s"}}}

ENTRIES: Mapping[str, str] = {
    "pipe": "own",
    "duct": "sheet",
    "fitting": "swing joint",
    "device": "V1",
    "source": "P1",
    "section": "M1",
    "terminal": "T1",
    "link": "L1",
    "case": "night",
}
"""Of each table with IDs, the entry in which texts are put."""

REFERENCES = {"from", "to", "pipe", "duct", "balance", "sensor", "kind", "catalogue", "accept", "off"}
"""Keys whose texts name something else."""


def places() -> Iterator[tuple[Place, Spec]]:
    """Yield every place of the format where a value stands, with what may stand there."""
    for name, keys in SINGLE.items():
        yield from _within((name,), Table(keys))
    for name, keys in KEYED.items():
        yield from _within((name, ENTRIES[name]), Table(keys))
    yield ("format",), Text()
    yield ("library",), Text()
    yield ("library", 0), Text()


def free_places() -> Iterator[Place]:
    """Yield the places of texts that name nothing: titles, notes, sources, names."""
    for place, spec in places():
        if (
            isinstance(spec, Text)
            and place[0] not in ("display", "format", "library")
            and not REFERENCES & set(place[1:])
        ):
            yield place


def _within(place: Place, spec: Spec) -> Iterator[tuple[Place, Spec]]:
    match spec:
        case Table(keys):
            for key, inner in keys.items():
                yield from _within((*place, key), inner)
        case Array(keys):
            for key, inner in keys.items():
                yield from _within((*place, 0, key), inner)
        case Inline(inner):
            yield from _within((*place, "velocity" if place[-1] == "accept" else "P1"), inner)
        case _:
            yield place, spec


def put(data: Mapping[str, Any], *texts: tuple[Place, Any]) -> dict[str, Any]:
    """Return a run with values put in places."""
    changed = copy.deepcopy(dict(data))
    for place, value in texts:
        inner: Any = changed
        for key, after in pairwise(place):
            fresh: Any = [] if isinstance(after, int) else {}
            if isinstance(key, int):
                if key == len(inner):
                    inner.append(fresh)
            elif not isinstance(inner.get(key), type(fresh)):
                inner[key] = fresh
            inner = inner[key]
        if isinstance(inner, list):
            inner[:] = [value]
        else:
            inner[place[-1]] = value
    return changed


def filled(payload: str) -> dict[str, Any]:
    """Return the run with a text in every free place, and with names that hold what a name may hold of it."""
    data: dict[str, Any] = renamed(put(BASE, *((place, payload) for place in free_places())), names(payload))
    return data


def names(payload: str) -> dict[str, str]:
    """Return for every name of the run one that holds what a name may hold of a payload."""
    told = (*ENTRIES.values(), "B1", "B2", "C2", "T2", "T3", "H1", "F1", "steel")
    return {name: f"{printable(payload)}{name}" for name in told}


def renamed(data: Any, new: Mapping[str, str]) -> Any:
    """Return a run with other names, as keys and where they are named."""
    if isinstance(data, dict):
        return {new.get(key, key): renamed(value, new) for key, value in data.items()}
    if isinstance(data, list):
        return [renamed(value, new) for value in data]
    return new.get(data, data) if isinstance(data, str) else data


def spelled(data: Mapping[str, Any]) -> str:
    """Spell a run as a file."""
    return tomli_w.dumps(data)
