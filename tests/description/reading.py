"""A file read, computed and reported in one go, as the command does it."""

from __future__ import annotations

import json

from budget.description import describe, read_bytes
from budget.network import evaluate
from budget.report.json import results
from budget.report.located import Located, locate


def findings_in(content: bytes) -> tuple[Located, ...]:
    """Return the findings of a file with their places; its results must be finite figures or null."""
    source = read_bytes(content)
    description = describe(source)
    budget = evaluate(description)
    found = locate(budget.findings, source, description)
    json.dumps(results("0", "run.toml", description, budget, found), allow_nan=False)
    return found
