"""Asking what is to be done, with a list of answers in the ledger's place."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from budget.report.plain import plain
from budget.screens.chooser import Choice, Offer

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

Answer = tuple[str, Callable[[], object]]
"""What can be answered, and what is done then."""


def ask(
    app: BudgetApp,
    question: str,
    answers: tuple[Answer, ...],
    stay: str = "stay",
    otherwise: Callable[[], object] | None = None,
) -> None:
    """Ask, with a list of what can be done; the last is to leave things as they are, which Escape does too."""

    def nothing() -> None:
        app.say("")
        if otherwise is not None:
            otherwise()

    def take(doing: object) -> None:
        if callable(doing):
            doing()

    choices = [Choice((text,), doing) for text, doing in (*answers, (stay, nothing))]
    app.offer(Offer(plain(question), ("",), choices, take, leave=nothing))
