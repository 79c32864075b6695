"""The command line: one module a command, read only when its command is called.

A command's module has `add_arguments(parser)` and `run(options) -> exit status`. Modules bear the commands' names, so
that nothing else may stand here: `list` and `set` are modules of this package.
"""

from budget.commands.dispatch import main

__all__ = ["main"]
