"""Print every benchmark."""

from tests.bench import checking, computing

for bench in (computing, checking):
    print(bench.report(), flush=True)
