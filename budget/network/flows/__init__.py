"""The flows as installed: the real network, solved for what its pumps and fans drive."""

from budget.network.flows.cases import Devices, Setup, set_up
from budget.network.flows.graph import Controls, Network
from budget.network.flows.results import Flows, SectionFlow, SourceFlow, TerminalFlow, solve_flows
from budget.network.flows.solve import Solution, solve

__all__ = [
    "Controls",
    "Devices",
    "Flows",
    "Network",
    "SectionFlow",
    "Setup",
    "Solution",
    "SourceFlow",
    "TerminalFlow",
    "set_up",
    "solve",
    "solve_flows",
]
