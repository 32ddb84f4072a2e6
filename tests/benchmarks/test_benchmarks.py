"""The benchmarks run; figures are printed when they are run by hand, and never judged here."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

FOLDER = Path(__file__).parent
TINY = {
    "strip_solver": "main(strips=2, steps=2, runs=1)",
    "sweep": "main(points=11, runs=1)",
    "whole_commands": "size(load_spec(fixed_spec(Path('.'), order=2)))",
}


@pytest.mark.parametrize("name", TINY)
def test_it_runs(name, tmp_path):
    """In a process of its own, as a benchmark sets the number of threads before anything is imported."""
    code = f"import sys; sys.path.insert(0, {str(FOLDER)!r}); from {name} import *; {TINY[name]}"
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=tmp_path, capture_output=True, text=True, check=False
    )

    assert done.returncode == 0, done.stderr
    assert name == "whole_commands" or "asked:" in done.stdout


def test_every_benchmark_is_run_here():
    scripts = {path.stem for path in FOLDER.glob("*.py")} - {"clock", "test_benchmarks"}

    assert scripts == TINY.keys()
