"""Edits on their way into a text: each cuts it at the places it concerns and leaves every other byte alone."""

from collections.abc import Iterable, Iterator, Mapping

from budget.description import blocks, effects, entries
from budget.description.blocks import Splice, splice
from budget.description.finding import Path
from budget.description.source import read_text
from budget.description.spans import SpanIndex
from budget.description.spelling import EditError, Literal, Toml, plain, show
from budget.description.steps import (
    AddTable,
    CopyTable,
    MoveTable,
    RemoveTable,
    RenameKey,
    SetValue,
    Step,
    Unset,
    place_of_copy,
    target_of,
)

MOST_ADDED = 200
"""Keys that one new value may add to a table with lines of its own: each has its place looked for."""


class Rewriting:
    """A text while edits are applied to it."""

    def __init__(self, text: str) -> None:
        """Begin with a text as it is. Raises SpanError."""
        self.emptied: set[Path] = set()
        """Tables that what was taken away may have left empty."""
        self._text = text
        self._index = SpanIndex.of(text)
        self._splices: list[Splice] = []  # not yet in the text
        self._touched: set[Path] = set()  # by those splices
        self._around: set[Path] = set()  # what is touched, and what it lies in

    def after(self, steps: Iterable[Step]) -> str:
        """Apply all steps; those that only replace what is there share one index of the text."""
        for step in steps:
            self._apply(step)
        return splice(self._text, self._splices)

    def _apply(self, step: Step) -> None:
        match step:
            case SetValue(path, value):
                self._settle_around(path)
                if self._index.value(path) is not None:
                    self._splices += entries.set_value(self._index, path, value)
                    self._touch(path)
                    return
                self._settle()
                if path and (blocks.blocks_under(self._index, path) or self._index.occurrences(path)):
                    self._rewrite(path, plain(value))
                else:
                    self._write(entries.set_value(self._index, path, value))
            case RenameKey(path, new_key):
                self._settle_around(path)
                self._splices += entries.rename(self._index, path, new_key)
                self._touch(path)
                self._touch((*path[:-1], new_key))
            case _:
                self._settle()
                self._rearrange(step)

    def _rearrange(self, step: Unset | RemoveTable | AddTable | MoveTable | CopyTable) -> None:
        match step:
            case Unset(path) | RemoveTable(path):
                self.emptied |= {path[:size] for size in range(1, len(path))}
                self._write(entries.remove(self._index, path))
            case AddTable(path, values, after, array):
                self._add(path, values, after, array=array)
            case MoveTable(path):
                target, behind = target_of(step)
                self._replace(blocks.move_blocks(self._index, path, target, behind=behind))
            case CopyTable(path, new_path, changes):
                self._copy(path, new_path, changes)

    def _settle_around(self, path: Path) -> None:
        """Bring the text up to date where a path leads through one that is being changed, or around it."""
        through = any(path[:size] in self._touched for size in range(1, len(path) + 1))
        if through or path in self._around:
            self._settle()

    def _touch(self, path: Path) -> None:
        self._touched.add(path)
        self._around.update(path[:size] for size in range(len(path) + 1))

    def _settle(self) -> None:
        if self._splices:
            self._write(self._splices)

    def _write(self, splices: Iterable[Splice]) -> None:
        self._replace(splice(self._text, splices))

    def _replace(self, text: str) -> None:
        self._text = text
        self._index = SpanIndex.of(text)
        self._splices, self._touched, self._around = [], set(), set()

    def _rewrite(self, path: Path, value: Toml) -> None:
        """Turn a table, or a list of tables, into another one by changing what differs and nothing else."""
        found = effects.get(read_data(self._text), path)
        if type(found) is not type(value):
            raise EditError(f"{show(path)} is a table; its keys are set one by one")
        steps = list(_differences(path, found, value))
        if sum(not entries.exists(self._index, step.path) for step in steps) > MOST_ADDED:
            raise EditError(f"more than {MOST_ADDED} keys would be added to {show(path)} at once; add some at a time")
        gone = [step.path for step in steps if isinstance(step, Unset)]
        cuts = entries.remove_all(self._index, gone) if gone else None
        if cuts is not None:
            self.emptied |= {one[:size] for one in gone for size in range(1, len(one))}
            self._write(cuts)
            steps = steps[len(gone) :]
        for step in steps:
            self._apply(step)
        self._settle()

    def _add(self, path: Path, values: Mapping[str, Toml], after: Path | None, *, array: bool) -> None:
        index = self._index
        if array and index.value(path) is not None:
            self._write(entries.set_value(index, (*path, len(index.items(path))), dict(values)))
            return
        if not array and (index.table(path) is not None or index.value(path) is not None):
            raise EditError(f"{show(path)} exists already")
        self._write(blocks.add_blocks(index, path, [values], after=after, array=array))

    def _copy(self, path: Path, new: Path, changes: Mapping[str, Toml]) -> None:
        data = read_data(self._text)
        original = effects.get(data, path)
        if changes and not isinstance(original, dict):
            raise EditError(f"{show(path)} is not one table")
        place = place_of_copy(data, path, new)
        span = self._index.value(path)
        if blocks.blocks_under(self._index, path):
            self._write(blocks.copy_blocks(self._index, path, new))
        else:
            self._apply(SetValue(place, original if span is None else Literal(self._text[span.start : span.end])))
        for key, value in changes.items():
            if value is not None:
                self._apply(SetValue((*place, key), value))
            elif key in original:
                self._apply(Unset((*place, key)))


def _differences(path: Path, old: Toml, new: Toml) -> Iterator[Step]:
    """Run through the edits that make a new table, or list of tables, out of an old one."""
    if isinstance(old, dict):
        for key in old:
            if key not in new:
                yield Unset((*path, key))
        for key, value in new.items():
            if key not in old or type(old[key]) is not type(value) or old[key] != value:
                yield SetValue((*path, key), value)
        return
    for position in range(len(old) - 1, len(new) - 1, -1):
        yield Unset((*path, position))
    for position, value in enumerate(new):
        if position >= len(old) or old[position] != value:
            yield SetValue((*path, position), value)


def read_data(text: str) -> dict[str, Toml]:
    """Return what tomllib makes of a text. Raises EditError where it can't be read."""
    source = read_text(text)
    if source.data is None:
        raise EditError(f"the text cannot be read: {source.findings[0].message}")
    return source.data
