"""How the benchmarks measure: medians of several runs in one process, one thread for every library.

Import this module before numpy: one thread for linear algebra makes ratios mean something on a busy machine.
"""

from __future__ import annotations

import os
import sys
import time
from collections.abc import Callable
from pathlib import Path
from statistics import median
from typing import TypeVar

THREADS = ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS")
for variable in THREADS:
    os.environ.setdefault(variable, "1")
sys.path.insert(0, str(Path(__file__).parents[1]))

Result = TypeVar("Result")


def clock(work: Callable[[], Result], runs: int) -> tuple[float, Result]:
    """Median time of several runs [s], and the result of the last one."""
    times = []
    for _ in range(runs):
        start = time.perf_counter()
        result = work()
        times.append(time.perf_counter() - start)
    return median(times), result


def verdict(what: str, found: float, asked: str, met: bool) -> None:
    """One line: a figure, what was asked of it, and whether it is so."""
    print(f"{what:<58}{found:10.3g}   asked: {asked:<14}{'met' if met else 'NOT MET'}")
