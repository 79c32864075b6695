"""`budget list`: the catalogue and the units, each figure with its source and how it is known; the examples."""

from __future__ import annotations

import argparse
import textwrap
from itertools import takewhile

from budget.catalogue.listing import Row, aligned, rows
from budget.commands.dispatch import OK, REFUSED, say
from budget.description import nearest
from budget.report.plain import plain
from budget.shipped import shipped
from budget.units import Basis, factors

KINDS = ("pipes", "ducts", "fittings", "fluids", "limits", "units", "examples")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take a part of the catalogue and perhaps a name in it."""
    parser.add_argument("kind", choices=KINDS, help="what to list")
    parser.add_argument("name", metavar="NAME", nargs="?", help="an entry for its figures, or a part of its name")


def run(options: argparse.Namespace) -> int:
    """Print the list; 2 where there is no such name."""
    try:
        others = {"units": _units, "examples": _examples}
        found = others[options.kind](options.name) if options.kind in others else rows(options.kind, options.name)
    except LookupError as wrong:
        say(str(wrong.args[0]))
        return REFUSED
    for line in aligned(found).split("\n"):
        print(line.rstrip())
    return OK


def _examples(name: str | None) -> list[Row]:
    """List the shipped examples: where each is, and what it shows."""
    files = [file for file in sorted(shipped("examples").glob("*.toml")) if (name or "") in file.stem]
    if not files:
        raise LookupError(f"there is no example {name!r}; budget list examples names them")
    listing = []
    for file in files:
        lines = takewhile(lambda line: line.startswith("#"), file.read_text("utf-8").splitlines())
        about = " ".join(line.lstrip("# ") for line in lines)
        listing += [Row((plain(str(file)),), heading=True), *(Row((line,)) for line in textwrap.wrap(about, 100))]
    return listing


def _units(name: str | None) -> list[Row]:
    """List units: all, those of a dimension, or the one that is spelled so."""
    every = factors()
    wanted = (name or "").strip().lower()
    found = [
        factor
        for factor in every
        if wanted in ("", factor.dimension.value, factor.dimension.value.replace("_", " "))
        or wanted in (spelling.lower() for spelling in (factor.unit, *factor.spellings))
    ]
    if not found:
        known = [*dict.fromkeys(factor.dimension.value for factor in every), *(factor.unit for factor in every)]
        raise LookupError(f"there is no unit or dimension {name!r}; {nearest(wanted, known, 3)}")
    listing = [Row(("dimension", "unit", "in SI", "offset", "also written", "source"), heading=True)]
    for factor in found:
        basis = "" if factor.basis is Basis.PLAIN else f" ({factor.basis.value})"
        listing.append(
            Row((
                f"{factor.dimension.value}{basis}",
                factor.unit,
                f"{factor.factor:.10g}",
                f"{factor.offset:g}" if factor.offset else "",
                ", ".join(factor.spellings),
                factor.source,
            ))
        )  # fmt: skip
    return listing
