"""Findings with their place in the file and their figures written in the design's units."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from budget.description import Description, Finding, Level, Path, SourceText
from budget.report.figures import Figures
from budget.units import Dimension

FAULTS_OF_KEYS = frozenset({"unknown-key", "unknown-table", "unknown-fitting", "unknown-code"})
"""Findings about a key itself; all others point at the value that stands there."""


@dataclass(frozen=True, slots=True)
class Located:
    """A finding as it is shown: its sentence whole, its table and key, its line and column from 1."""

    level: Level
    code: str
    message: str
    path: Path
    owner: str
    table: str
    key: str
    line: int
    column: int


def locate(findings: Iterable[Finding], source: SourceText, description: Description) -> tuple[Located, ...]:
    """Return findings with their places, in the order of the file; each once."""
    figures = Figures(description)
    found: dict[Located, None] = {}
    for finding in findings:
        line, column = source.locate(finding.path, key=finding.code in FAULTS_OF_KEYS)
        placed = Located(
            finding.level,
            finding.code,
            _sentence(finding, figures),
            finding.path,
            finding.owner,
            finding.table,
            finding.key,
            line,
            column,
        )
        found.setdefault(placed, None)
    return tuple(sorted(found, key=lambda one: (one.line, one.column)))


def _sentence(finding: Finding, figures: Figures) -> str:
    if not finding.figures:
        return finding.message
    spelled = [figures.text(value, Dimension(measure), unit=True) for value, measure in finding.figures]
    return finding.message.format(*spelled)
