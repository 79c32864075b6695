"""Generated runs made fit to be balanced: every terminal has something that can take up what remains."""

from __future__ import annotations

import tomllib
from typing import Any

import tomli_w

from budget.network import Computed, compute, lay_out
from tests.independent.runs import generate
from tests.network.small import description_of

WIDE = {"kv": [[0, 1e-5], [10, 1e5]]}
"""A valve that can be set to anything."""


def balanced_text(seed: int) -> str:
    """Return a generated run without diversity, whose terminals all have a valve, or a device that holds any flow."""
    run: dict[str, Any] = tomllib.loads(generate(seed))
    run.setdefault("device", {})["wide"] = WIDE
    for device in run["device"].values():
        device.pop("greatest_drop", None)
    for section in run["section"].values():
        section.pop("diversity", None)
        section.pop("setting", None)
    for terminal in run["terminal"].values():
        terminal.pop("setting", None)
        if run["device"].get(terminal.get("balance", ""), {}).get("holds") != "flow":
            terminal["balance"] = "wide"
    return tomli_w.dumps({"format": run.pop("format"), **run})


def balanced(seed: int) -> Computed:
    """Work such a run out."""
    return compute(lay_out(description_of(balanced_text(seed))))
