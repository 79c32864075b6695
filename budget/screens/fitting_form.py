"""The form for a fitting with parameters: each with its meaning, its range and its default."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from budget.catalogue import Kind, Parameter
from budget.description.edits import AddTable, Edit, EditError, RemoveTable, SetValue, Several, Unset
from budget.description.finding import Level, Path
from budget.document import Snapshot
from budget.report.figures import Figures, plain_number
from budget.report.plain import plain
from budget.screens.fitting_words import Listed, about, velocity
from budget.screens.form import Blank, Sheet, Told
from budget.screens.runs import Weighed, density_of, losses_of, result_of, run_of
from budget.screens.writing import WritingError, length_of, objection, value_of, written

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

COUNT = Blank("count", "1 or more", "how many of them there are")
COUNT_OF_STANDING = Blank("count", "1 or more; 0 takes it out", "how many of them there are")


def ask(app: BudgetApp, table: Path, entry: Listed, weighed: Weighed | None) -> None:
    """Ask for the count and the parameters of a fitting that stands in a section, or that is to stand there."""
    if entry.kind is None:
        return
    Filling(app, table, entry, entry.kind).begin(weighed)


class Filling:
    """A form while it is filled in: nothing is entered before Enter."""

    def __init__(self, app: BudgetApp, table: Path, entry: Listed, kind: Kind) -> None:
        """Start from the parameters as written, or from their defaults."""
        self.app, self.table, self.entry, self.kind = app, table, entry, kind
        self.before = app.document.snapshot
        self.figures = Figures(self.before.description)
        self.path = entry.path or (*table, "fitting", length_of(self.before.text, (*table, "fitting")))
        """Where it stands, or will."""
        self.stated = {
            parameter.name: written(self.before.text, (*entry.path, parameter.name)) if entry.path else ""
            for parameter in kind.parameters
        }

    def begin(self, weighed: Weighed | None) -> None:
        """Show the form, with what the parameters as they stand lead to."""
        blanks = (*map(_blank, self.kind.parameters), COUNT_OF_STANDING if self.entry.path else COUNT)
        texts = [self.stated[p.name] or _text(p.default) for p in self.kind.parameters]
        standing = f"on {plain(str(self.table[1]))}"
        self.app.form.present(
            Sheet(
                title=f"{self.kind.name} {standing}" if self.entry.path else f"{self.kind.name}, one more {standing}",
                blanks=blanks,
                texts=(*texts, str(self.entry.count or 1)),
                about=about(self.entry, None, self.figures, asking=True),
                attempt=self.attempt,
                accept=self.accept,
                leave=self.leave,
                start=next((n for n, text in enumerate(texts) if not text), 0),
            ),
            self._told(weighed) if weighed else Told(self._lacking(texts), "faint"),
        )
        self.app.turn_to("form")

    def attempt(self, texts: Mapping[str, str]) -> Told:
        """Tell what the values lead to, and show the run with them. Raises WritingError or EditError."""
        edit = self._edit(texts)
        after = self.app.trials.preview(edit)
        if isinstance(edit, RemoveTable):
            self.app.show(after, before=self.before)
            return Told("none of them: Enter takes the fitting out of the section", "warning")
        wrong = objection(self.before, after, self.path)
        if wrong:
            raise WritingError(wrong)
        self.app.show(after, before=self.before)
        doubts = [f for f in after.findings if f.path[: len(self.path)] == self.path and f.level is not Level.ERROR]
        return self._told(self._weighed(after), "; ".join(plain(f.message) for f in doubts))

    def accept(self, texts: Mapping[str, str]) -> None:
        """Enter the values as one step. Raises WritingError or EditError."""
        edit = self._edit(texts)
        if not isinstance(edit, RemoveTable):
            wrong = objection(self.before, self.app.trials.preview(edit), self.path)
            if wrong:
                raise WritingError(wrong)
        self.app.turn_to(self.app.returns_to)
        self.app.apply(edit, f"{self.kind.name} of {self.table[1]}")

    def leave(self) -> None:
        """Go back to the list, with things as they were."""
        self.app.turn_to("list")
        self.app.show(self.before)

    def _edit(self, texts: Mapping[str, str]) -> Edit:
        """Return what the values mean for the text: a default that was not stated stays unstated."""
        count = texts["count"]
        if not count.isdecimal() or (count == "0" and self.entry.path is None):
            raise WritingError("write how many there are, a whole number")
        if int(count) == 0:
            return RemoveTable(self.path)
        if any(not texts[p.name] and p.default is None for p in self.kind.parameters):
            raise WritingError(self._lacking([texts[p.name] for p in self.kind.parameters]))
        values = {p.name: texts[p.name] for p in self.kind.parameters}
        if self.entry.path is None:
            new: dict[str, Any] = {"kind": self.kind.name} | ({"count": int(count)} if count != "1" else {})
            kept = [p.name for p in self.kind.parameters if values[p.name] not in ("", _text(p.default))]
            new |= {name: self._value(name, values[name]) for name in kept}
            return AddTable((*self.table, "fitting"), new, array=True)
        edits: list[Edit] = [SetValue((*self.path, "count"), int(count))] if int(count) != self.entry.count else []
        for parameter in self.kind.parameters:
            before, now = self.stated[parameter.name], values[parameter.name]
            if before and not now:
                edits.append(Unset((*self.path, parameter.name)))
            elif now != (before or _text(parameter.default)):
                edits.append(SetValue((*self.path, parameter.name), self._value(parameter.name, now)))
        return Several(tuple(edits))

    def _value(self, name: str, text: str) -> Any:
        return value_of(text, (*self.path, name), self.stated[name])

    def _weighed(self, after: Snapshot) -> Weighed | None:
        """Return what the fitting costs in a computed run; the fittings of a leg stand as they are read."""
        run = run_of(after, self.table)
        if run is None:
            return None
        count = len(run.fittings) + len(run.uses)
        place = next((n for n, use in enumerate(run.uses) if use.path[:4] == self.path), None)
        return losses_of(result_of(after, self.table), count)[len(run.fittings) + place] if place is not None else None

    def _told(self, weighed: Weighed | None, doubt: str = "") -> Told:
        if weighed is None:
            return Told("what it costs can't be computed until the errors are mended", "error", doubt)
        density = density_of(self.before, self.table)
        drop = self.figures.pressure(weighed.drop, density, unit=True)
        of = f"drop of {weighed.loss.count}" if weighed.loss.count > 1 else "drop of one"
        run = run_of(self.before, self.table)
        legs = ", both legs," if run is not None and run.paired else ""
        where = velocity(weighed.loss, self.figures)
        return Told(f"K {plain_number(weighed.loss.k)}   {of}{legs} {drop}   {where}", "title", doubt)

    def _lacking(self, texts: list[str]) -> str:
        asked = zip(self.kind.parameters, texts, strict=True)
        lacking = [parameter.name for parameter, text in asked if not text and parameter.default is None]
        return f"state {' and '.join(lacking)}"


def try_out(app: BudgetApp) -> None:
    """Tell what the values in the form lead to, or what is wrong with them."""
    sheet = app.form.sheet
    if app.at != "form" or sheet is None:
        return
    try:
        app.form.tell(sheet.attempt(app.form.texts))
    except (WritingError, EditError) as wrong:
        app.show(app.document.snapshot)
        app.form.tell(Told(plain(str(wrong)), "error"))


def enter(app: BudgetApp) -> None:
    """Enter what is written in the form; what can't stand is told, and the form stays."""
    sheet = app.form.sheet
    if sheet is None:
        return
    try:
        sheet.accept(app.form.texts)
    except (WritingError, EditError) as wrong:
        app.form.tell(Told(plain(str(wrong)), "error"))


def _blank(parameter: Parameter) -> Blank:
    words = tuple(map(_text, parameter.choices))
    unit = f" {parameter.unit}" if parameter.unit else ""
    if words:
        may_be = " or ".join(words) if len(words) < 3 else ", ".join(words)
    elif parameter.high is None:
        may_be = f"from {_text(parameter.low)}{unit}" if parameter.low is not None else f"a number{unit}"
    else:
        may_be = f"{_text(parameter.low)} to {_text(parameter.high)}{unit}"
    stated = "must be stated" if parameter.default is None else f"default {_text(parameter.default)}"
    return Blank(parameter.name, f"{may_be}; {stated}", parameter.meaning, words)


def _text(value: float | str | None) -> str:
    return "" if value is None else value if isinstance(value, str) else f"{value:g}"
