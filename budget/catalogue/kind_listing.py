"""Kinds of fittings as blocks of plain text cells; the first line of a block names its columns."""

import textwrap
from collections.abc import Iterable
from typing import TypeAlias

from budget.catalogue.kinds import Check, Kind, Parameter, kind
from budget.catalogue.provenance import how_known

Block: TypeAlias = list[tuple[str, ...]]

WIDTH = 110
"""Columns of a paragraph."""


def kinds_block(names: Iterable[str]) -> Block:
    """A paragraph for each kind: parameters, method, range, source, a check; empty where no name is a kind's."""
    entries = [entry for entry in map(kind, names) if entry is not None]
    if not entries:
        return []
    heading = f"by kind, in [[section.ID.fitting]] or, without parameters, in fittings: {len(entries)}"
    return [(heading,), *((line,) for entry in entries for line in _overview(entry))]


def kind_blocks(entry: Kind) -> list[Block]:
    """Everything the catalogue holds on a kind: formula and range, parameters, checks."""
    about: Block = [
        (entry.name,),
        (f"{entry.group}; carried by a {entry.carries}, {' or '.join(entry.shapes)}",),
        (entry.formula,),
        (f"holds for {entry.validity}",),
        (f"on the {entry.reference}",),
    ]
    about += [(f"scatter of published data: {entry.scatter}",)] if entry.scatter else []
    about += [(entry.note,)] if entry.note else []
    about.append((f"{entry.source}; {_known(entry.known_from, entry.confidence)}",))
    parameters = [("parameter", "range", "default", "meaning"), *(_parameter(p) for p in entry.parameters)]
    checks = [("check at", "published", "within", "source", "known"), *(_check(c) for c in entry.checks)]
    return [about, parameters, checks] if entry.parameters else [about, checks]


def _overview(entry: Kind) -> list[str]:
    parameters = ", ".join(parameter.name for parameter in entry.parameters) or "no parameters"
    where, value, within, source, known = _check(entry.checks[0])
    about = (
        f"method: {entry.formula}; holds for {entry.validity}",
        f"source: {entry.source}; {_known(entry.known_from, entry.confidence)}",
        f"scatter of published data: {entry.scatter or 'not stated'}",
        f"check: {value} within {within} at {where}; {source}; {known}",
    )
    lines = [f"{entry.name} ({entry.carries}): {parameters}"]
    for text in about:
        lines += textwrap.wrap(text, WIDTH, initial_indent="    ", subsequent_indent="        ")
    return lines


def _parameter(parameter: Parameter) -> tuple[str, ...]:
    default = "must be stated" if parameter.default is None else _text(parameter.default)
    return (parameter.name, _range(parameter), default, parameter.meaning)


def _range(parameter: Parameter) -> str:
    if parameter.choices:
        return ", ".join(map(_text, parameter.choices))
    unit = f" {parameter.unit}" if parameter.unit else ""
    if parameter.high is None:
        return f"from {parameter.low:g}{unit}"
    return f"{parameter.low:g} to {parameter.high:g}{unit}"


def _check(check: Check) -> tuple[str, ...]:
    size = f"{check.width * 1000.0:g} mm"
    if check.shape != "round":
        size = f"{check.width * 1000.0:g}x{check.height * 1000.0:g} mm"
    where = ", ".join([*(f"{name} {_text(value)}" for name, value in check.values.items()), size])
    where += "" if check.reynolds == 1e6 else f", Re {check.reynolds:g}"
    return (where, f"{check.value:g}", f"{check.tolerance * 100.0:g} %", check.source, how_known(check.known_from))


def _text(value: float | str) -> str:
    return value if isinstance(value, str) else f"{value:g}"


def _known(known_from: str, confidence: str) -> str:
    return f"{how_known(known_from)} (confidence {confidence})"
