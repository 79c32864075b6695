"""The file: its text and spans, the run that it describes, what is wrong with it, and edits to it."""

from budget.description.codes import CODES, Code
from budget.description.finding import Finding, Level, Path, dotted, error, note, warning
from budget.description.libraries import Library
from budget.description.model import (
    Case,
    Description,
    Design,
    Device,
    FittingCount,
    FittingUse,
    Fluid,
    Geometry,
    Item,
    Limits,
    Line,
    Link,
    OwnFitting,
    Run,
    Section,
    Source,
    SourceCase,
    Terminal,
)
from budget.description.reader import describe
from budget.description.source import Source as SourceText
from budget.description.source import read_bytes, read_text
from budget.description.values import nearest
from budget.units import Basis, Quantity

__all__ = [
    "CODES",
    "Basis",
    "Case",
    "Code",
    "Description",
    "Design",
    "Device",
    "Finding",
    "FittingCount",
    "FittingUse",
    "Fluid",
    "Geometry",
    "Item",
    "Level",
    "Library",
    "Limits",
    "Line",
    "Link",
    "OwnFitting",
    "Path",
    "Quantity",
    "Run",
    "Section",
    "Source",
    "SourceCase",
    "SourceText",
    "Terminal",
    "describe",
    "dotted",
    "error",
    "nearest",
    "note",
    "read_bytes",
    "read_text",
    "warning",
]
