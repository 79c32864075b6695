"""Every figure of a source, section or terminal as a calculation: formula, numbers with their units, result, source."""

from __future__ import annotations

import re
from collections.abc import Iterator

from budget.description import Description
from budget.network import Budget
from budget.report.explaining.scene import Scene
from budget.report.explaining.sections import section_steps
from budget.report.explaining.sources import source_steps
from budget.report.explaining.terminals import terminal_steps
from budget.report.explaining.writing import Step, Writer
from budget.report.plain import plain
from budget.report.table import wrapped

__all__ = ["Step", "explain", "explain_text"]

_LEGEND = (
    "Numbers are those of the design's units, to five digits; worked out with their units they give the result as far "
    "as those digits go. Densities, velocities and coefficients are those that were computed, not rounded before use."
)
_SHORT = 85
_BETWEEN = re.compile(r" (?![-+/x^] )")
_BOUND = "\ue000"


def explain(description: Description, budget: Budget, id_: str) -> tuple[Step, ...]:
    """Return every figure of a source, section or terminal, in the order in which it is worked out.

    A step with nothing but a title is a heading. Raises KeyError for an ID that the run does not have. What hangs on no
    source has no figures.
    """
    scene = Scene(description, budget, Writer(description))
    if id_ in description.sources:
        return tuple(source_steps(scene, id_))
    if id_ in description.sections:
        return tuple(section_steps(scene, id_)) if id_ in budget.sections else (_LOOSE,)
    if id_ in description.terminals:
        return tuple(terminal_steps(scene, id_)) if id_ in budget.terminals else (_LOOSE,)
    raise KeyError(id_)


_LOOSE = Step("figures", "", "", "-", "it hangs on no source: a finding says why")


def explain_text(description: Description, budget: Budget, id_: str) -> str:
    """Return every figure of a source, section or terminal as plain text. Raises KeyError like `explain`."""
    lines, notes = _head(description, id_), _Notes()
    for step in explain(description, budget, id_):
        lines += _lines(step, notes)
    return "\n".join([*lines, *notes.lines(), "", *wrapped(_LEGEND)]) + "\n"


class _Notes:
    """Sources that take more than a line, by number; each is printed once, below the figures."""

    def __init__(self) -> None:
        self._numbers: dict[str, int] = {}

    def mark(self, source: str) -> str:
        """Return a source as it stands beside its figure: whole, or the number of its note."""
        if len(source) <= _SHORT:
            return source
        return f"source {self._numbers.setdefault(source, len(self._numbers) + 1)}"

    def lines(self) -> list[str]:
        """Return the notes."""
        if not self._numbers:
            return []
        notes = [line for source, n in self._numbers.items() for line in wrapped(f"{n}. {source}", "  ", "     ")]
        return ["", "Sources", *notes]


def _head(description: Description, id_: str) -> list[str]:
    for kind, parts in (
        ("source", description.sources),
        ("section", description.sections),
        ("terminal", description.terminals),
    ):
        if id_ in parts:
            title = parts[id_].title
            return wrapped(f"{kind} {plain(id_)}" + (f": {plain(title)}" if title else ""))
    raise KeyError(id_)


def _lines(step: Step, notes: _Notes) -> Iterator[str]:
    """Return the lines of a step: what it is and its formula, its numbers, its result, its source."""
    if not (step.formula or step.numbers or step.result or step.source):
        yield from ("", *wrapped(step.title[:1].upper() + step.title[1:]))
        return
    formula = f": {step.formula}" if step.formula else ""
    if step.numbers:
        yield from _broken(f"{step.title}{formula}", "  ", "      ")
        yield from _broken(f"= {step.numbers}", "    ", "      ")
        yield from _broken(f"= {step.result}", "    ", "      ")
    else:
        yield from _broken(f"{step.title}{formula} = {step.result}", "  ", "      ")
    if step.source:
        yield from wrapped(f"({notes.mark(step.source)})", "      ", "      ")


def _broken(text: str, first: str, rest: str) -> list[str]:
    """Break a formula into lines before its operators alone."""
    bound = _BETWEEN.sub(_BOUND, text)
    return [line.replace(_BOUND, " ") for line in wrapped(bound, first, rest)]
