"""Where the names of a description stand: every place that refers to a source, a section, a device and so on."""

import difflib
from collections.abc import Iterator, Mapping

from budget.description.finding import Path
from budget.description.spelling import EditError, Toml, render_key

CONNECTED = ("source", "section", "terminal")
"""Kinds whose IDs are unique together, so that `from` names any of them."""

CARRIERS = ("section", "terminal", "link")
"""Kinds with the keys of a section."""

KINDS = (*CONNECTED, "pipe", "duct", "fitting", "device", "link", "case")


def references(data: Mapping[str, Toml], kind: str, old: str, new: str) -> tuple[list[Path], list[Path]]:
    """Return the keys that are the name itself, and the values that refer to it.

    Raises EditError where the kind or the old name is unknown, or the new name is taken or cannot be one.
    """
    _check(data, kind, old, new)
    keys: list[Path] = [(kind, old)]
    values: list[Path] = []
    if kind in CONNECTED:
        keys += _keys_in_cases(data, old)
        values += _connections(data, old)
    elif kind in ("pipe", "duct"):
        values += _values(data, CARRIERS, (kind,), old)
        if _table(data, "defaults").get(kind) == old:
            values.append(("defaults", kind))
    elif kind == "device":
        values += _values(data, CARRIERS, ("balance",), old)
    elif kind == "fitting":
        for carrier, name, table in _tables(data, CARRIERS):
            if old in _table(table, "fittings"):
                keys.append((carrier, name, "fittings", old))
            values += [
                (carrier, name, "fitting", position, "kind")
                for position, one in enumerate(_list(table, "fitting"))
                if isinstance(one, dict) and one.get("kind") == old
            ]
    return keys, values


def _connections(data: Mapping[str, Toml], old: str) -> Iterator[Path]:
    """Run through the values that name a source, a section or a terminal."""
    yield from _values(data, CARRIERS, ("from", "to"), old)
    yield from _values(data, ("source",), ("sensor",), old)
    for kind, name, case in _tables(data, ("case",)):
        for position, one in enumerate(_list(case, "off")):
            if one == old:
                yield (kind, name, "off", position)
        for source, settings in _table(case, "source").items():
            if isinstance(settings, dict) and settings.get("sensor") == old:
                yield (kind, name, "source", source, "sensor")


def _keys_in_cases(data: Mapping[str, Toml], old: str) -> Iterator[Path]:
    for kind, name, case in _tables(data, ("case",)):
        for part in ("share", "stroke", "source"):
            if old in _table(case, part):
                yield (kind, name, part, old)


def _values(data: Mapping[str, Toml], kinds: tuple[str, ...], keys: tuple[str, ...], old: str) -> Iterator[Path]:
    for kind, name, table in _tables(data, kinds):
        for key in keys:
            if table.get(key) == old:
                yield (kind, name, key)


def _tables(data: Mapping[str, Toml], kinds: tuple[str, ...]) -> Iterator[tuple[str, str, dict[str, Toml]]]:
    for kind in kinds:
        for name, table in _table(data, kind).items():
            if isinstance(table, dict):
                yield kind, name, table


def _table(data: Mapping[str, Toml], key: str) -> dict[str, Toml]:
    found = data.get(key)
    return found if isinstance(found, dict) else {}


def _list(data: Mapping[str, Toml], key: str) -> list[Toml]:
    found = data.get(key)
    return found if isinstance(found, list) else []


def _check(data: Mapping[str, Toml], kind: str, old: str, new: str) -> None:
    if kind not in KINDS:
        raise EditError(f"there is nothing of the kind {render_key(kind)}; it may be {', '.join(KINDS)}")
    names = _table(data, kind)
    if old not in names:
        nearest = difflib.get_close_matches(old, names, n=1, cutoff=0.5)
        hint = f"; did you mean {render_key(nearest[0])}?" if nearest else ""
        raise EditError(f"there is no {kind} {render_key(old)}{hint}")
    if not new or not new.isprintable():
        raise EditError("a name needs at least one character, and no control characters")
    for other in CONNECTED if kind in CONNECTED else (kind,):
        if new != old and new in _table(data, other):
            raise EditError(f"there is a {other} {render_key(new)} already")
