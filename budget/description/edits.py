"""Edits: small values that change the text of a description and nothing else.

An edit cuts the text at the places it concerns and leaves every other byte alone: comments, blank lines, order,
spelling of numbers, line ends. Before a text is handed back it is read again and compared with what the edit means
for the data; where the two differ the edit is refused.
"""

from collections.abc import Mapping

from budget.description import effects
from budget.description.renames import references
from budget.description.rewriting import Rewriting, read_data
from budget.description.spans import SpanError
from budget.description.spelling import EditError, Literal, Toml, read_path, render_key, render_value
from budget.description.steps import (
    NO_KEY,
    AddTable,
    CopyTable,
    Edit,
    MoveTable,
    RemoveTable,
    RenameKey,
    SetValue,
    Several,
    Unset,
    effect,
    flat,
)

__all__ = [
    "AddTable",
    "CopyTable",
    "Edit",
    "EditError",
    "Literal",
    "MoveTable",
    "RemoveTable",
    "RenameKey",
    "SetValue",
    "Several",
    "Unset",
    "apply_to_text",
    "apply_to_value",
    "read_path",
    "rename_everywhere",
    "render_key",
    "render_value",
]


def apply_to_text(text: str, edit: Edit, *, verify: bool = True, data: Mapping[str, Toml] | None = None) -> str:
    """Return the text after an edit. Raises EditError, with the text as it was, where the edit cannot be made.

    ``data`` is what tomllib made of the text, if it is at hand. Without ``verify`` the result is not read again:
    for a preview only.
    """
    steps = tuple(flat(edit))
    if not all(step.path for step in steps):
        raise EditError(NO_KEY)
    try:
        if not verify:
            return Rewriting(text).after(steps)
        expected = apply_to_value(read_data(text) if data is None else data, edit)
        writing = Rewriting(text)
        new = writing.after(steps)
    except (SpanError, RecursionError) as error:
        raise EditError(f"the text cannot be edited: {error}") from None
    if not effects.agree(expected, read_data(new), frozenset(writing.emptied)):
        raise EditError("the edit would have changed something else as well, so it was not made")
    return new


def apply_to_value(data: Mapping[str, Toml], edit: Edit) -> dict[str, Toml]:
    """Return what an edit makes of the data in a text; the data given stays as it is. Raises EditError."""
    result: Toml = dict(data)
    for step in flat(edit):
        result = effect(result, step)
    return dict(result)


def rename_everywhere(text: str, kind: str, old: str, new: str) -> Edit:
    """Return the edit that renames a table of a kind and everything that refers to it.

    ``kind`` is source, section, terminal, pipe, duct, fitting, device, link or case. Raises EditError where the
    old name does not exist or the new one is taken or cannot be a name.
    """
    keys, values = references(read_data(text), kind, old, new)
    return Several((*(SetValue(path, new) for path in values), *(RenameKey(path, new) for path in keys)))
