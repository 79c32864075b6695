"""The fittings of a section: those that stand there, and every one that fits, with what it would cost."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

from budget.catalogue import Kind, fitting, fitting_names, kind, kind_names
from budget.catalogue.fittings import CONSTANT
from budget.description.edits import Edit, EditError, RemoveTable, SetValue, Several, Unset
from budget.description.finding import Path
from budget.description.model import FittingCount, FittingUse, Run
from budget.document import Snapshot
from budget.report.figures import NONE, Figures, plain_number
from budget.report.plain import plain
from budget.screens.chooser import Choice, Offer
from budget.screens.fitting_form import ask
from budget.screens.fitting_words import Listed, about, spelled_parameters
from budget.screens.runs import Weighed, density_of, run_of, weigh
from budget.units import Dimension

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

STATED = ("straight", "branch")


def fittings(app: BudgetApp, table: Path) -> Offer | None:
    """Offer the fittings; left and right count one, Enter enters the counts, asks for parameters, or adds one."""
    snapshot = app.document.snapshot
    run = run_of(snapshot, table)
    if run is None:
        return None
    counting = Counting(app, table, listed(snapshot, run, str(table[0]) == "section", str(table[1])))
    figures, weighed = Figures(snapshot.description), counting.weighed
    legs = ", both legs" if run.paired else ""
    heads = ("fitting", "count", "K", f"drop of one{legs} {figures.unit(Dimension.PRESSURE)}", "parameters")
    density = density_of(snapshot, table)

    def more(value: object) -> tuple[str, ...]:
        entry = _entry(value)
        found = weighed.get(entry)
        k = plain_number(found.loss.k) if found else NONE
        return (str(counting.counts[entry] or ""), k, figures.pressure(found.drop if found else None, density))

    def beneath(value: object) -> tuple[str, ...]:
        return about(_entry(value), weighed.get(_entry(value)), figures)

    choices = [
        Choice((plain(entry.name), _parameters(entry)), entry, "index" if entry.count else "", _words(entry))
        for entry in counting.entries
    ]
    title = f"fittings of {plain(str(table[1]))}, left and right count"
    return Offer(title, heads, choices, counting.take, more=more, beneath=beneath, step=counting.step)


class Counting:
    """The list while its fittings are counted: nothing is entered before Enter."""

    def __init__(self, app: BudgetApp, table: Path, entries: Sequence[Listed]) -> None:
        """Start from the counts as written."""
        self.app, self.table, self.entries = app, table, entries
        self.counts = {entry: entry.count for entry in entries}
        snapshot = app.document.snapshot
        counted = [entry for entry in entries if entry.kind is None]
        kinds = [entry for entry in entries if entry.kind is not None and entry.values is not None]
        found = weigh(
            snapshot,
            table,
            [FittingCount(entry.name, 1, table) for entry in counted],
            [FittingUse(entry.name, 1, entry.values or {}, table) for entry in kinds],
        )
        self.weighed: dict[Listed, Weighed] = {
            entry: one for entry, one in zip((*counted, *kinds), found, strict=True) if one is not None
        }

    def step(self, value: object, by: int) -> None:
        """Count a fitting up or down; the budget runs along."""
        entry = _entry(value)
        if entry.path is None and entry.asks:
            self.app.say("Enter asks for its parameters and its count", "note")
            return
        self.counts[entry] = max(0, self.counts[entry] + by)
        self.app.choosers["list"].refresh_more()
        self.app.trials.later(self._show)

    def take(self, value: object) -> None:
        """Enter the counts as one step; of a fitting with parameters ask for these, of another take one more."""
        entry = _entry(value)
        if entry.asks and not self.edits:
            ask(self.app, self.table, entry, self.weighed.get(entry))
            return
        if not self.edits:
            self.counts[entry] += 1
        try:
            self.app.apply(Several(self.edits), f"fittings of {self.table[1]}")
        except EditError as refused:
            self.app.say(plain(str(refused)), "error")

    @property
    def edits(self) -> tuple[Edit, ...]:
        """What the counts mean for the text: changed counts, removed entries, the last one first."""
        changed = [entry for entry in self.entries if self.counts[entry] != entry.count]
        found: list[Edit] = []
        if any(entry.path is None for entry in changed):
            kept = {e.name: self.counts[e] for e in self.entries if e.path is None and self.counts[e]}
            inline = (*self.table, "fittings")
            found.append(SetValue(inline, kept) if kept else Unset(inline))
        for entry in sorted(changed, key=lambda entry: entry.path[3] if entry.path else -1, reverse=True):
            if entry.path is not None:
                count = self.counts[entry]
                found.append(SetValue((*entry.path, "count"), count) if count else RemoveTable(entry.path))
        return tuple(found)

    def _show(self) -> None:
        if self.app.at != "list":
            return
        try:
            tried = self.app.trials.preview(Several(self.edits)) if self.edits else self.app.document.snapshot
            self.app.show(tried, before=self.app.document.snapshot)
        except EditError as refused:
            self.app.say(plain(str(refused)), "error")


def listed(snapshot: Snapshot, run: Run, section: bool, id_: str) -> tuple[Listed, ...]:
    """Return the fittings that stand on a run, then those of one's own, of the catalogue and by kind that fit it."""
    description = snapshot.description
    standing = [_counted(use) for use in run.fittings] + [_used(use) for use in run.uses]
    there = {_fold(entry.name) for entry in standing if entry.path is None}
    part = description.sections[id_] if section else description.terminals[id_]
    duct = run.line is not None and run.line.kind == "duct"
    shape = run.geometry.shape if run.geometry is not None else None
    names = [*description.fittings]
    names += [name for name in fitting_names() if not duct or _is_constant(name)]
    kinds = [found for name in kind_names("duct" if duct else "pipe") if (found := kind(name)) is not None]
    kinds = [found for found in kinds if shape is None or shape in found.shapes]
    tees = part.takeoff in STATED
    names = [name for name in names if _fold(name) not in there and not (tees and name.startswith("tee "))]
    kinds = [
        found
        for found in kinds
        if not (tees and found.name.startswith("tee ")) and (found.parameters or _fold(found.name) not in there)
    ]
    by_kind = [Listed(found.name, kind=found, values=_defaults(found)) for found in kinds]
    return (*standing, *map(Listed, names), *by_kind)


def _counted(use: FittingCount) -> Listed:
    return Listed(use.name, use.count, _entry_path(use.path))


def _used(use: FittingUse) -> Listed:
    found = kind(use.kind)
    values = dict(_defaults(found) or {}) if found is not None else {}
    path = _entry_path(use.path)
    name = use.kind if path is not None else str(use.path[-1])  # in `fittings` as it is written there
    return Listed(name, use.count, path, found, {**values, **use.values})


def _entry_path(path: Path) -> Path | None:
    return path[:4] if len(path) > 3 and path[2] == "fitting" else None


def _defaults(found: Kind) -> Mapping[str, float | str] | None:
    values = {parameter.name: parameter.default for parameter in found.parameters}
    stated = {name: value for name, value in values.items() if value is not None}
    return stated if len(stated) == len(values) else None


def _is_constant(name: str) -> bool:
    found = fitting(name)
    return found is not None and found.methods == (CONSTANT,)


def _parameters(entry: Listed) -> str:
    if entry.kind is None:
        return ""
    if entry.path is not None:
        return plain(spelled_parameters(entry.values or {}))
    return ", ".join(parameter.name for parameter in entry.kind.parameters)


def _words(entry: Listed) -> str:
    return f"{entry.kind.group} by kind" if entry.kind is not None else ""


def _entry(value: object) -> Listed:
    assert isinstance(value, Listed)  # noqa: S101 - the list is made of nothing else
    return value


def _fold(name: str) -> str:
    return " ".join(name.lower().split())
