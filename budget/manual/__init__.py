"""The manual: a page of Markdown a topic, and the order in which one would read them."""

from __future__ import annotations

from collections.abc import Mapping
from importlib.resources import files

TOPICS = (
    "start",
    "file",
    "units",
    "connections",
    "results",
    "explain",
    "findings",
    "fittings",
    "fluids",
    "friction",
    "devices",
    "balancing",
    "flows",
    "keys",
    "saving-and-recovery",
    "config",
    "accuracy-and-caution",
)
"""Every topic, in the order in which one would read them."""


def titles() -> Mapping[str, str]:
    """Return the title of every topic's page, its first heading, in reading order."""
    return {topic: page(topic).partition("\n")[0].removeprefix("# ").strip() for topic in TOPICS}


def page(topic: str) -> str:
    """Return the Markdown of a topic."""
    return files("budget.manual").joinpath(f"{topic}.md").read_text(encoding="utf-8")
