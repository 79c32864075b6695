"""The Explain screen: every figure of a row as a calculation, formula, numbers, result and source."""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import TYPE_CHECKING

from budget.document import Snapshot
from budget.report.caution import CAUTION
from budget.report.plain import plain
from budget.screens.page import Line
from budget.screens.rows import Row

if TYPE_CHECKING:
    from budget.report.explain import Step

_OPERATOR = re.compile(r" (?=[-+/x^=] )")


def steps_of(snapshot: Snapshot, row: Row) -> list[Line]:
    """Return the calculation of a row, of an item that of the row it stands on; the caution stands at the end."""
    from budget.report.explain import explain  # noqa: PLC0415 - long, and first shown when it is asked for

    try:
        steps = explain(snapshot.description, snapshot.budget, row.id)
    except KeyError:
        return [Line("nothing is computed", "until the errors are mended", "error")]
    lines = [line for step in steps for line in _lines(step)]
    return [*lines, Line("caution", "", "heading"), Line("", role="faint", pieces=tuple(CAUTION.split()), gap=" ")]


def _lines(step: Step) -> Iterator[Line]:
    """Spell a step; formula and numbers break before their operators alone."""
    label = f"  {plain(step.title)}"
    if not (step.formula or step.numbers or step.result or step.source):
        yield Line(plain(step.title), "", "heading")
        return
    formula, result, source = plain(step.formula), plain(step.result), plain(step.source)
    if step.numbers:
        yield Line(label, pieces=_broken(formula), gap=" ")
        yield Line("", pieces=_broken(f"= {plain(step.numbers)}"), gap=" ")
        yield Line("", role="title", pieces=(f"= {result}",), source=source)
    elif formula:
        yield Line(label, role="title", pieces=(*_broken(formula), f"= {result}"), gap=" ", source=source)
    else:
        yield Line(label, result, "title", source=source)


def _broken(text: str) -> tuple[str, ...]:
    return tuple(_OPERATOR.split(text))
