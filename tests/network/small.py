"""Small runs as text, and what follows from them.

The liquid has 1000 kg/m3, 1 mPa s and 4 kJ/(kg K), the gas 1.2 kg/m3 and 18 uPa s. A section of no length with an item
of so many kPa (Pa for the gas) costs just that, so circuits can be added up in one's head.
"""

from __future__ import annotations

from budget.description import Description, Finding, describe, dotted, read_text
from budget.document import take
from budget.network import Budget, Computed, evaluate
from budget.network.topology import Topology, connect
from budget.report.located import Located

LIQUID = """format = 1
[design]
title = "Small run"
[fluid]
name = "custom"
density = 1000
viscosity = 1
specific_heat = 4
temperature = 70
return_temperature = 50
[defaults]
pipe = "steel"
paired = true
takeoff = "none"
[pipe.steel]
roughness = 0.05
"""

GAS = """format = 1
[design]
title = "Small run"
[fluid]
name = "custom"
density = 1.2
viscosity = 0.018
[defaults]
duct = "sheet"
takeoff = "none"
[duct.sheet]
roughness = 0.1
[duct.flex]
catalogue = "flexible"
"""


def description_of(text: str) -> Description:
    """Read a run."""
    return describe(read_text(text))


def topology_of(text: str) -> Topology:
    """Connect a run."""
    return connect(description_of(text))


def evaluated_of(text: str) -> Budget:
    """Work a run out, whatever is wrong with it."""
    return evaluate(description_of(text))


def budget_of(text: str) -> Budget:
    """Work a run out; one with an error is refused."""
    budget = evaluated_of(text)
    errors = [finding for finding in budget.findings if finding.level == "error"]
    assert errors == []
    return budget


def run_of(text: str) -> Computed:
    """Work a run out as arrays."""
    return budget_of(text).run


def findings_of(text: str) -> tuple[Finding, ...]:
    """Return everything found in a run."""
    return evaluated_of(text).findings


def places(findings: tuple[Finding, ...] | list[Finding], level: str = "error") -> list[tuple[str, str]]:
    """Return code and dotted path of each finding of a level."""
    return [(finding.code, dotted(finding.path)) for finding in findings if finding.level == level]


def errors_of(text: str) -> list[tuple[str, str]]:
    """Return code and place of each error in a run."""
    return places(findings_of(text))


def shown(text: str, code: str) -> list[Located]:
    """Return the findings of a code as they are shown, with their figures."""
    return [finding for finding in take(read_text(text)).findings if finding.code == code]
