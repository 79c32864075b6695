"""`budget list`: the catalogue and the units, each figure with its source and how it is known."""

from __future__ import annotations

import argparse

from budget.catalogue.listing import Row, aligned, rows
from budget.commands.dispatch import OK, REFUSED, say
from budget.description import nearest
from budget.units import Basis, factors

KINDS = ("pipes", "ducts", "fittings", "fluids", "limits", "units")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take a part of the catalogue and perhaps a name in it."""
    parser.add_argument("kind", choices=KINDS, help="what to list")
    parser.add_argument("name", metavar="NAME", nargs="?", help="an entry for its figures, or a part of its name")


def run(options: argparse.Namespace) -> int:
    """Print the list; 2 where there is no such name."""
    try:
        found = _units(options.name) if options.kind == "units" else rows(options.kind, options.name)
    except LookupError as wrong:
        say(str(wrong.args[0]))
        return REFUSED
    for line in aligned(found).split("\n"):
        print(line.rstrip())
    return OK


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
