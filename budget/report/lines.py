"""What a check prints: a finding, and what a source must deliver, as one line each."""

from __future__ import annotations

from budget.description import Description
from budget.network import SourceResult
from budget.report.figures import NONE, Figures
from budget.report.located import Located
from budget.report.plain import plain


def finding_line(file: str, finding: Located) -> str:
    """Return a finding as one line: file:line:column: level code: message."""
    place = f"{plain(file)}:{finding.line}:{finding.column}"
    return f"{place}: {finding.level.value} {finding.code}: {plain(finding.message)}"


def source_line(file: str, description: Description, result: SourceResult) -> str:
    """Return what a source must deliver as one line: required, duty, in hand, index terminal."""
    figures = Figures(description)
    density = result.fluid.density
    said = [f"required {figures.pressure(result.required, density, unit=True)}"]
    said.append(f"duty {figures.pressure(result.duty, density, unit=True)}")
    if result.available is not None:
        said.append(f"available {figures.pressure(result.available, density, unit=True)}")
    if result.in_hand is not None:
        said.append(f"in hand {figures.pressure(result.in_hand, density, unit=True)}")
    said.append(f"index {', '.join(map(plain, result.index)) or NONE}")
    return f"{plain(file)}: {plain(result.id)}: {', '.join(said)}"
