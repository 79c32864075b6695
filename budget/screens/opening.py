"""Opening a run in the app, and the way out of it."""

from __future__ import annotations

import sys
from pathlib import Path

from budget.document import Document
from budget.report.plain import plain
from budget.screens.app import BudgetApp
from budget.screens.config import Config, config_folder
from budget.screens.signals import Guard
from budget.screens.themes import load_theme
from budget.storage import StorageError


def open_app(path: Path, config: Config, problems: tuple[str, ...], *, ascii_only: bool, mouse: bool) -> int:
    """Open a file and stay in the app until the user leaves; return the exit code."""
    try:
        document = Document.open(path)
    except StorageError as wrong:
        print(f"budget: {plain(str(wrong))}", file=sys.stderr)
        return 2
    theme, theme_problems = load_theme(config.theme, config_folder())
    app = BudgetApp(document, config, theme, ascii_only=ascii_only, notes=(*problems, *theme_problems))
    guard = Guard(keep=lambda: None, close=app.close_with)
    guard.watch()
    code = app.run(mouse=mouse)
    if guard.code is not None:
        guard.let_go()
        return guard.code
    return code if code is not None else app.return_code or 0
