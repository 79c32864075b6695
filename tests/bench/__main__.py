"""Print every benchmark."""

import compileall
from pathlib import Path

import budget
from tests.bench import checking, computing, opening, sending, solving

# An installed package has its bytecode; a source tree that was just changed has not.
compileall.compile_dir(Path(budget.__file__).parent, quiet=1)

for bench in (computing, checking, opening, sending, solving):
    print(bench.report(), flush=True)
