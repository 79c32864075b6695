"""`budget manual`: the manual that is shipped with the program, a page a topic."""

from __future__ import annotations

import argparse

from budget.commands.dispatch import OK, REFUSED, say
from budget.description import nearest
from budget.manual import TOPICS, page, titles

__all__ = ["TOPICS", "add_arguments", "completions", "page", "run", "titles"]


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
