"""What these tests share with those of the command line, the screens and the terminal."""

from tests.commands.conftest import call, run_file
from tests.screens.conftest import play
from tests.terminal.conftest import opened

__all__ = ["call", "opened", "play", "run_file"]
