"""Sizing and whole commands against a bare import: ``python tests/benchmarks/whole_commands.py``.

- Sizing of a comb of five resonators with every choice made, in this process, everything imported.
- ``plan`` of a specification that leaves every choice open, and ``build`` of the demo, each as a command of
  its own, start of the interpreter included. ``build`` is divided by the baseline: a fresh interpreter that
  imports numpy, scipy.optimize, shapely, gdstk and ezdxf and ends.

Commands run as a user runs them, with as many threads as the libraries choose, and once more with one: on a
busy machine, threads that wait for each other cost more than they give.
"""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
from clock import THREADS, clock, verdict  # first: it sets the number of threads

from layoutgen.sizing import size
from layoutgen.spec import load_spec

DEMO = Path(__file__).parents[2] / "outputs" / "harbour-telemetry.toml"
IMPORTS = "import numpy, scipy.optimize, shapely, gdstk, ezdxf"
COMMAND = "import sys; from layoutgen.cli import main; sys.exit(main())"
FIXED = """
[passband]
lower = "1.62 GHz"
upper = "1.74 GHz"
order = {order}
[construction]
substrate = "hydrocarbon-ceramic-3.55"
thickness = "0.813 mm"
line_width = "1.6 mm"
[load]
case = "0402"
value = "1.5 pF"
[short]
count = 2
"""
OPEN = """
[passband]
lower = "1.62 GHz"
upper = "1.74 GHz"
[[stopband]]
from = "1.0 GHz"
to = "1.40 GHz"
rejection = "40 dB"
[[stopband]]
from = "1.92 GHz"
to = "2.6 GHz"
rejection = "40 dB"
[construction]
substrate = "hydrocarbon-ceramic-3.55"
"""


def fixed_spec(folder: Path, order: int) -> Path:
    """A specification without an open choice, as a file."""
    path = folder / "fixed.toml"
    path.write_text(FIXED.format(order=order), encoding="utf-8")
    return path


def run(words: list[str], folder: Path, threads: str | None) -> None:
    """One interpreter; exit code 3 (a requirement is missed) is as good as 0 here."""
    environment = {key: value for key, value in os.environ.items() if key not in THREADS}
    if threads is not None:
        environment |= dict.fromkeys(THREADS, threads)
    done = subprocess.run([sys.executable, "-c", *words], cwd=folder, env=environment, capture_output=True,
                          check=False)  # fmt: skip
    assert done.returncode in (0, 3), done.stderr.decode()


def main(order: int = 5, runs: int = 5) -> None:
    """Print all figures."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        fixed, free = fixed_spec(folder, order), folder / "open.toml"
        free.write_text(OPEN, encoding="utf-8")
        size(load_spec(fixed))  # imports, once
        seconds, _ = clock(lambda: size(load_spec(fixed)), runs)
        verdict(f"sizing, {order} resonators, choices fixed, s", seconds, "below 1", seconds < 1)
        for threads, said in ((None, "threads as they come"), ("1", "one thread")):
            print(f"\n{said}")
            bare, _ = clock(lambda threads=threads: run([IMPORTS], folder, threads), runs)
            print(f"{'bare import of the five libraries, s (the baseline)':<58}{bare:10.3g}")
            plan, _ = clock(lambda threads=threads: run([COMMAND, "plan", str(free)], folder, threads), runs)
            verdict("plan, all choices open, s", plan, "below 3", plan < 3)
            words = [COMMAND, "build", str(DEMO), "--out", "package"]
            build, _ = clock(lambda threads=threads, words=words: run(words, folder, threads), runs)
            print(f"{'build of the demo, s':<58}{build:10.3g}")
            verdict("build over bare import", build / bare, "at most 5", build <= 5 * bare)


if __name__ == "__main__":
    main()
