"""`budget set`: give one key of a run a value; comments, order and line ends of the file stay."""

from __future__ import annotations

import argparse

from budget.commands.changing import change
from budget.description import Path
from budget.description.edits import Edit, EditError, Literal, SetValue


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take the file, the key and its value."""
    parser.add_argument("file", metavar="FILE", help="a run's file")
    parser.add_argument("key", metavar="KEY", help='section.M1.length, terminal."FCU 1".item.0.kv, limits.velocity')
    parser.add_argument(
        "value", metavar="VALUE", help="a TOML value (0.5, true, [1, 2]); anything else is a text, such as 14.5 m"
    )


def run(options: argparse.Namespace) -> int:
    """Set the key; return 0, or 2 where it was refused and the file is as it was."""

    def make(path: Path) -> Edit:
        return SetValue(path, _value(options.value))

    return change(options.file, options.key, make)


def _value(text: str) -> object:
    literal = Literal(text)
    try:
        literal.value()
    except EditError:
        return text
    return literal
