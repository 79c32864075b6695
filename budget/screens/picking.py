"""Lists to pick a value from: sizes with their bore, words, and what each would drop."""

from __future__ import annotations

from typing import TYPE_CHECKING

from budget.catalogue import pipe_line, standard_sizes
from budget.description import schema
from budget.description.edits import Edit, EditError, SetValue, Several, Unset
from budget.description.finding import Level, Path, dotted
from budget.description.model import Line
from budget.report.figures import NONE, Figures
from budget.report.plain import plain
from budget.screens import joining
from budget.screens.chooser import Choice, Offer
from budget.screens.fitting_list import fittings
from budget.screens.rows import OVER_SIGN
from budget.screens.runs import result_of, run_of
from budget.screens.writing import is_stated, spec_of
from budget.units import Dimension, spell

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp


def offer_for(app: BudgetApp, path: Path) -> Offer | None:
    """Return the list from which a value can be picked, or None where it can only be written."""
    key = str(path[2]) if len(path) == 3 else str(path[-1])
    description = app.document.snapshot.description
    if key in joining.KEYS and len(path) == 3:
        return joining.joints(app, path)
    spec = spec_of(path)
    if key in ("size", "bore") and len(path) == 3:
        return sizes(app, path[:2])
    if key in ("fittings", "fitting") and len(path) == 3:
        return fittings(app, path[:2])
    if key == "balance":
        return _words(app, path, tuple(description.devices))
    if key in ("pipe", "duct"):
        return _words(app, path, tuple(name for kind, name in description.lines if kind == key))
    if isinstance(spec, schema.Choice):
        return _words(app, path, spec.words)
    if isinstance(spec, schema.Flag):
        return _words(app, path, ("true", "false"))
    return None


def sizes(app: BudgetApp, table: Path) -> Offer | None:
    """Offer the sizes of a row's pipe or duct; a duct size may also be written."""
    run = run_of(app.document.snapshot, table)
    if run is None or run.line is None:
        return None
    snapshot, figures = app.document.snapshot, Figures(app.document.snapshot.description)
    path = (*table, "size")

    def edit(size: object) -> Edit:
        bore = (*table, "bore")
        if is_stated(snapshot.text, bore):
            return Several((Unset(bore), SetValue(path, size)))
        return SetValue(path, size)

    def more(size: object) -> tuple[str, ...]:
        return _figures_with(app, table, edit(size), figures)

    duct = run.line.kind == "duct"
    known = sizes_of(run.line, snapshot.description.design.units)
    now = run.geometry.label if run.geometry else ""
    bores = [figures.text(bore, Dimension.LENGTH, small=True) for _, bore in known]
    choices = [
        Choice((plain(size), bore), size, _mark(size == now)) for (size, _), bore in zip(known, bores, strict=True)
    ]

    def write(text: str) -> Choice | None:
        return Choice((plain(text), "as written"), text) if duct else None

    heads = ("size", *_heads(figures), f"bore {figures.unit(Dimension.LENGTH, small=True)}")
    start = next((place for place, (size, _) in enumerate(known) if size == now), 0)
    return Offer(
        f"size of {plain(str(table[1]))}", heads, choices, lambda size: _set(app, edit(size), path),
        more=more, pace=app.trials.pace, write=write, start=start,
    )  # fmt: skip


def sizes_of(line: Line, units: str) -> tuple[tuple[str, float | None], ...]:
    """Return the sizes of a pipe or duct line as written, with their bore in m."""
    if line.own_sizes:
        return tuple(line.own_sizes.items())
    if line.kind == "pipe":
        listed = pipe_line(line.catalogue) if line.catalogue else None
        return tuple((size.written, size.bore) for size in listed.sizes) if listed else ()
    system = "IP" if units == "IP" else "SI"
    unit = "in" if system == "IP" else "mm"
    return tuple((spell(side, unit, Dimension.LENGTH, 6), side) for side in standard_sizes("round", system).sides)


def _words(app: BudgetApp, path: Path, words: tuple[str, ...]) -> Offer | None:
    if not words:
        return None
    table, figures = path[:2], Figures(app.document.snapshot.description)
    flag = isinstance(spec_of(path), schema.Flag)

    def edit(word: object) -> Edit:
        return SetValue(path, word == "true" if flag else word)

    def more(word: object) -> tuple[str, ...]:
        return _figures_with(app, table, edit(word), figures)

    return Offer(
        f"{dotted(path[2:])} of {plain(str(path[1]))}", ("", *_heads(figures)), [Choice((plain(w),), w) for w in words],
        lambda word: _set(app, edit(word), path), more=more, pace=app.trials.pace,
    )  # fmt: skip


def _heads(figures: Figures) -> tuple[str, ...]:
    pressure = figures.unit(Dimension.PRESSURE)
    return (
        figures.unit(Dimension.VELOCITY), figures.unit(Dimension.GRADIENT), f"drop {pressure}", f"required {pressure}",
    )  # fmt: skip


def _figures_with(app: BudgetApp, table: Path, edit: Edit, figures: Figures) -> tuple[str, ...]:
    """Return velocity, gradient, drop and required pressure of a row as they would be after an edit."""
    try:
        after = app.trials.preview(edit)
    except EditError:
        return (NONE, NONE, NONE, NONE)
    run = result_of(after, table)
    source = after.budget.sources.get(app.ledger.source)
    required = figures.text(source.required if source else None, Dimension.PRESSURE)
    if run is None or not run.legs:
        return (NONE, NONE, NONE, required)
    over = {f.code for f in after.findings if f.owner == table[1] and f.level is not Level.NOTE}
    leg = run.legs[0]
    return (
        figures.text(leg.velocity, Dimension.VELOCITY) + (OVER_SIGN if {"velocity", "slow"} & over else ""),
        figures.text(leg.gradient, Dimension.GRADIENT) + (OVER_SIGN if "gradient" in over else ""),
        figures.text(run.drop, Dimension.PRESSURE),
        required,
    )


def _set(app: BudgetApp, edit: Edit, path: Path) -> None:
    try:
        app.apply(edit, f"{dotted(path[2:])} of {path[1]}")
    except EditError as refused:
        app.say(plain(str(refused)), "error")


def _mark(now: bool) -> str:
    return "index" if now else ""
