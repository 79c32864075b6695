"""The target `telling`: all that is told of a run beside its report, whatever hangs on whatever."""

from __future__ import annotations

import itertools
import json

from budget.document import Document
from budget.network.flows import solve_flows
from budget.network.proposals import propose_devices, propose_kv
from budget.report.explain import explain_text
from budget.report.figures import Figures
from budget.report.flows import flows_text, flows_values
from budget.report.profile import index_profile, terminal_profile
from budget.report.schedule import schedule
from budget.report.schedule_text import schedule_csv, schedule_json, schedule_text
from budget.screens import detail
from budget.screens.rows import View, tree

MOST = 8
"""Rows of which everything is told; each proposal works out the whole run anew."""


def telling(data: bytes) -> None:
    """Tell the schedule, calculations, profiles, flows, proposals and rows of a run."""
    try:
        document = Document.of(data.decode("utf-8"))
    except UnicodeDecodeError:
        return
    snapshot = document.snapshot
    description, budget = snapshot.description, snapshot.budget
    figures, found = Figures(description), snapshot.findings
    order = schedule(description, budget, figures)
    schedule_text(description, order, figures, found)
    schedule_csv(order, figures)
    json.dumps(schedule_json("0", "run.toml", description, order, found), allow_nan=False)
    ids = dict.fromkeys((*description.sources, *description.sections, *description.terminals))
    for id_ in itertools.islice(ids, MOST):
        explain_text(description, budget, id_)
        propose_kv(budget.run, id_)
        propose_devices(budget.run, id_)
    for terminal in itertools.islice(budget.terminals, MOST):
        terminal_profile(budget, terminal)
    for source in itertools.islice(budget.sources, MOST):
        index_profile(budget, source)
    view = View(snapshot)
    for row in itertools.islice(tree(description), 10 * MOST):
        view.cells(row)
        view.level(row)
        view.on_index(row)
        detail.lines_of(snapshot, row)
    flows = solve_flows(budget.run, next(iter(description.cases.values()), None))
    flows_text(description, budget, flows)
    json.dumps(flows_values(flows, found), allow_nan=False)
