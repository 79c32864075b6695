"""The catalogue: pipe and duct lines, fittings by name and by kind, fluids, usual limits, each figure with its source.

The data stand in the TOML files beside this module; each file is read once, when it is first asked for.
"""

from typing import Final

from budget.catalogue.ducts import (
    DuctLine,
    duct_line,
    duct_names,
    is_standard_rectangle,
    is_standard_round,
    nearest_round,
    standard_sizes,
)
from budget.catalogue.fittings import METHODS, Coefficient, Fitting, coefficient, fitting, fitting_names, kinds_by_name
from budget.catalogue.fluids import Fluid, fluid, fluid_names
from budget.catalogue.kinds import Check, Kind, KindCoefficient, Parameter, kind, kind_coefficient, kind_names
from budget.catalogue.limits import Limit, limits
from budget.catalogue.pipes import PipeLine, PipeSize, pipe_line, pipe_names

CATALOGUE_VERSION: Final = "1.1"
"""Version of the data; it changes whenever a figure does."""

__all__ = [
    "CATALOGUE_VERSION",
    "METHODS",
    "Check",
    "Coefficient",
    "DuctLine",
    "Fitting",
    "Fluid",
    "Kind",
    "KindCoefficient",
    "Limit",
    "Parameter",
    "PipeLine",
    "PipeSize",
    "coefficient",
    "duct_line",
    "duct_names",
    "fitting",
    "fitting_names",
    "fluid",
    "fluid_names",
    "is_standard_rectangle",
    "is_standard_round",
    "kind",
    "kind_coefficient",
    "kind_names",
    "kinds_by_name",
    "limits",
    "nearest_round",
    "pipe_line",
    "pipe_names",
    "standard_sizes",
]
