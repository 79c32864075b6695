"""`budget manual`: the manual that is shipped with the program, a page a topic."""

from __future__ import annotations

import argparse
from collections.abc import Mapping
from importlib.resources import files

from budget.commands.dispatch import OK, REFUSED, say
from budget.description import nearest

TOPICS = (
    "start",
    "file",
    "units",
    "connections",
    "results",
    "findings",
    "fittings",
    "fluids",
    "friction",
    "devices",
    "keys",
    "config",
    "accuracy-and-caution",
)
"""Every topic, in the order in which one would read them."""


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take a topic."""
    parser.add_argument("topic", metavar="TOPIC", nargs="?", help="a topic; without one, all are listed")


def run(options: argparse.Namespace) -> int:
    """Print a page, or the list of pages; 2 where there is no such topic."""
    if options.topic is None:
        width = max(map(len, TOPICS)) + 2
        for topic, title in titles().items():
            print(f"{topic:{width}}{title}")
        return OK
    begun = [topic for topic in TOPICS if topic.startswith(options.topic.lower())]
    if options.topic.lower() not in TOPICS and len(begun) != 1:
        say(f"the manual has no topic {options.topic!r}; {nearest(options.topic, TOPICS)}")
        return REFUSED
    print(page(options.topic.lower() if options.topic.lower() in TOPICS else begun[0]), end="")
    return OK


def completions() -> tuple[str, ...]:
    """Return what may stand for the topic."""
    return TOPICS


def titles() -> Mapping[str, str]:
    """Return the title of every topic's page."""
    return {topic: page(topic).partition("\n")[0].removeprefix("# ").strip() for topic in TOPICS}


def page(topic: str) -> str:
    """Return the Markdown of a topic."""
    return files("budget").joinpath("manual", f"{topic}.md").read_text(encoding="utf-8")
