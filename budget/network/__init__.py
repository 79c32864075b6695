"""The run as a network: layout, flows and drops, circuits, duty, take-up, and what to look at."""

from budget.description.schema import HEADINGS
from budget.network.budget import Budget, evaluate
from budget.network.computed import Computed, compute
from budget.network.layout import lay_out
from budget.network.results import (
    DeviceResult,
    FluidResult,
    ItemResult,
    LegResult,
    LinkResult,
    LossResult,
    RunResult,
    SectionResult,
    SourceResult,
    TerminalResult,
)

__all__ = [
    "HEADINGS",
    "Budget",
    "Computed",
    "DeviceResult",
    "FluidResult",
    "ItemResult",
    "LegResult",
    "LinkResult",
    "LossResult",
    "RunResult",
    "SectionResult",
    "SourceResult",
    "TerminalResult",
    "compute",
    "evaluate",
    "lay_out",
]
