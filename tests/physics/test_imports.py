"""The package stands on NumPy alone."""

import subprocess
import sys

import pytest


@pytest.mark.parametrize("package", ["budget.physics", "budget.catalogue"])
def test_a_fresh_process_loads_neither_screens_nor_scipy(package: str) -> None:
    modules = [f"{package}.{name}" for name in ("fluids", "fittings")]
    code = f"import sys, {', '.join(modules)}; print(sorted({{'textual', 'scipy', 'pint'}} & set(sys.modules)))"
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.strip() == "[]"
