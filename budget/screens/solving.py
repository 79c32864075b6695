"""What the As installed screen asks for, and what was solved for it."""

from __future__ import annotations

from dataclasses import dataclass, field

from budget.description import Case, read_text
from budget.document import Snapshot
from budget.network.flows import Devices, Flows, solve_flows
from budget.network.flows.edges import find_edges
from budget.report.located import Located, locate
from budget.report.operating import Operating
from budget.screens.beside import Watch


@dataclass(frozen=True, slots=True)
class Request:
    """What is to be solved: a run, its devices, its case."""

    snapshot: Snapshot
    devices: Devices = "given"
    case: str = ""

    @property
    def stated(self) -> Case | None:
        """The case as the file states it."""
        return self.snapshot.description.cases.get(self.case)

    def is_as(self, other: Request | None) -> bool:
        """Whether the same is to be solved."""
        if other is None or self.snapshot.budget is not other.snapshot.budget:
            return False
        return (self.devices, self.case) == (other.devices, other.case)


@dataclass(frozen=True, slots=True)
class Solved:
    """What was solved, with the curves of the sources that were drawn so far."""

    request: Request
    flows: Flows
    findings: tuple[Located, ...]
    curves: dict[str, Operating | None] = field(default_factory=dict)


def solve_request(request: Request, last: Solved | None, watch: Watch) -> Solved:
    """Solve a request, beginning with the flows of the last one where those are of the same network."""
    run, start = request.snapshot.budget.run, None
    if last is not None and last.flows.settled and last.request.case == request.case:
        layout, before = run.layout, last.request.snapshot.budget.run.layout
        same = (layout.topology.legs, layout.terminals.ids) == (before.topology.legs, before.terminals.ids)
        flow = last.flows.solution.flow
        start = flow if same and len(find_edges(layout).start) == len(flow) else None
    flows = solve_flows(run, request.stated, request.devices, start=start, watch=watch)
    snapshot = request.snapshot
    return Solved(request, flows, locate(flows.findings, read_text(snapshot.text), snapshot.description))
