"""The target `units`: a byte that chooses a dimension, a byte for the unit, then the text of a quantity."""

from __future__ import annotations

import math
import struct
import sys
import unicodedata

from budget.units import Dimension, Quantity, UnitError, bare, bare_unit, basis_of, parse, spell, units_of

DIMENSIONS = tuple(Dimension)
LEAST = sys.float_info.min * 1e12
"""Below it a float has fewer digits, and can't keep a value to 1e-12 in every unit."""


def units(data: bytes) -> None:
    """Read a text as a quantity, and eight of its bytes as a number; write what was read and read that again."""
    if len(data) < 2:
        return
    dimension = DIMENSIONS[data[0] % len(DIMENSIONS)]
    names = units_of(dimension)
    text = data[2:].decode("utf-8", "replace")
    default = bare_unit(dimension, "IP" if data[1] & 1 else "SI", gas=bool(data[1] & 2), small=bool(data[1] & 4))
    for stands_for in (None, default):
        try:
            _write(parse(text, dimension, default_unit=stands_for))
        except UnitError as refused:
            _check_sentence(refused)
    if len(data) >= 10:
        (number,) = struct.unpack("<d", data[2:10])
        try:
            _write(bare(number, dimension, names[data[1] % len(names)]))
        except UnitError as refused:
            _check_sentence(refused)


def _write(quantity: Quantity) -> None:
    """Write a quantity in every unit of its kind; the texts mean the same value."""
    value, dimension = quantity.value, quantity.dimension
    assert math.isfinite(value), quantity
    for unit in units_of(dimension):
        if basis_of(unit, dimension) is not quantity.basis:
            continue
        try:
            text = spell(value, unit, dimension)
            back = parse(text, dimension)
        except UnitError as refused:
            too_large = refused.code == "not-finite" and abs(value) > 1e290
            if not too_large:
                raise
            continue
        assert back.basis is quantity.basis, (quantity, text)
        slack = 1e-9 if dimension is Dimension.TEMPERATURE else LEAST
        assert math.isclose(back.value, value, rel_tol=1e-12, abs_tol=slack), (quantity, text, back)


def _check_sentence(refused: UnitError) -> None:
    said = str(refused)
    assert refused.message, said
    assert refused.remedy, said
    assert len(said) < 500, said
    assert not any(unicodedata.category(c) in ("Cc", "Cf", "Cs", "Zl", "Zp") for c in said), repr(said)
