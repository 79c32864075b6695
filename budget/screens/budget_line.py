"""The budget line: what the circuit spends and what is in hand, always in view."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from budget.description.finding import Level
from budget.description.schema import HEADINGS
from budget.document import Snapshot
from budget.network.results import SourceResult
from budget.report.figures import Figures, share
from budget.report.plain import plain
from budget.screens.lines import Lines, Piece
from budget.screens.rows import INDEX_SIGN, OVER_SIGN, View
from budget.screens.safe import steady, width_of
from budget.screens.themes import Theme
from budget.units import Dimension

HEIGHT = 3

_SHORT = {"plant": "plant", "distribution": "distr", "terminal": "term", "control": "contr", "balancing": "balan"}


class BudgetLine(Lines):
    """Three lines: whose budget it is and what the last edit did, the figures, and what is spent by heading."""

    def __init__(self, theme: Theme, view: View, source: str) -> None:
        """Show the budget of one source."""
        super().__init__(theme, id="budget-line")
        self.view = view
        self.source = source
        self.change = ""
        self.state = ("saved", "faint")

    def show(self, view: View, source: str, change: str, state: tuple[str, str]) -> None:
        """Show the budget of a source, by how much the last edit changed it, and how the run stands to its file.

        `state` is a few words and the role of their style.
        """
        self.view, self.source, self.change, self.state = view, source, change, state
        self.repaint()

    def line(self, y: int, width: int) -> Iterable[Piece]:
        """Spell one of the three lines."""
        result = self.view.snapshot.budget.sources.get(self.source)
        if y == 0:
            return self._headline(result)
        if result is None:
            return ((" nothing can be computed until the errors are mended", "error"),) if y == 1 else ()
        return self._figures(result, width) if y == 1 else self._bars(result, width)

    def _headline(self, result: SourceResult | None) -> Iterator[Piece]:
        yield f" {steady(self.source) or '-'}", "title"
        if result is not None and result.index:
            yield f"  {INDEX_SIGN} ", "index"
            yield " and ".join(steady(id_) for id_ in result.index), "index"
        if self.change:
            yield f"  required {self.change}", "title"
        for level in (Level.ERROR, Level.WARNING):
            count = sum(finding.level is level for finding in self.view.snapshot.findings)
            if count:
                yield f"  {count} {level.value}{'s' if count > 1 else ''}", level.value
        if not self.view.snapshot.readable:
            yield "  the text is not TOML", "error"
        yield f"  {self.state[0]}", self.state[1]
        description = self.view.snapshot.description
        source = description.sources.get(self.source)
        titles = (source.title if source else "", description.design.title)
        yield "  " + ", ".join(plain(title) for title in titles if title), "faint"

    def _figures(self, result: SourceResult, width: int) -> Iterator[Piece]:
        figures, density = self.view.figures, result.fluid.density
        over = result.in_hand is not None and result.in_hand < 0.0
        named = (
            ("required", result.required, "title"),
            ("reserve", result.reserve, ""),
            ("duty", result.duty, "title"),
            ("available", result.available, ""),
            ("in hand", result.in_hand, "over" if over else "good"),
        )
        gap = "   " if width >= 100 else " "
        for name, value, role in named:
            yield f"{gap if name != 'required' else ' '}{name} ", "faint"
            yield figures.pressure(value, density), role
        yield f"{OVER_SIGN if over else ''} {figures.unit(Dimension.PRESSURE)}", "over" if over else "faint"

    def _bars(self, result: SourceResult, width: int) -> Iterator[Piece]:
        spent = [(name, result.spent.get(name, 0.0), result.budget.get(name)) for name in HEADINGS]
        spent = [(name, value, budget) for name, value, budget in spent if value or budget is not None]
        if not spent:
            return
        room = (width - 1) // len(spent) - 1
        whole = max(result.required, 0.0)
        for name, value, budget in spent:
            yield from self._bar(name, value, budget, whole, room, result.fluid.density)

    def _bar(
        self, name: str, value: float, budget: float | None, whole: float, room: int, density: float
    ) -> Iterator[Piece]:
        """Spell one heading: its name, a bar of what is spent of its budget (or of the whole), and the figure."""
        figures = self.view.figures
        figure = figures.pressure(value, density)
        if budget is not None and room >= 26:
            figure += f" of {figures.pressure(budget, density)}"
        label = name if room >= 24 else _SHORT.get(name, name)
        sign = OVER_SIGN if budget is not None and value > budget else " "
        bar = max(0, room - width_of(label) - width_of(figure) - 3)
        filled = min(bar, round(bar * share(value, budget if budget is not None else whole)))
        role = "over" if sign == OVER_SIGN else "bar"
        yield f" {label} ", "faint"
        yield "█" * filled, role
        yield "░" * (bar - filled), "rest"
        yield f" {figure}", "over" if sign == OVER_SIGN else ""
        yield sign, "over"


def change_of(before: Snapshot, after: Snapshot, source: str) -> tuple[str, str]:
    """Return a source and by how much what it requires changed, spelled; "" where that can't be said."""
    old, new = before.budget.sources.get(source), after.budget.sources.get(source)
    if old is None or new is None:
        return source, ""
    return source, Figures(after.description).change(old.required, new.required)
