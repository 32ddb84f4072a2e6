"""A 701-point sweep against scikit-rf: ``python tests/benchmarks/sweep.py``.

The lossless network of two combs of five resonators with chips, that of tests/sample_comb.py (its lines widen
at the vias) and the demo's: layoutgen's, and the same network assembled from parts of scikit-rf
(tests/independent_network.py), to which the matrices of the coupled sections are given as they are. Both
start from the solved sections, and both give the S-parameters of the two ports.
"""

from __future__ import annotations

import json
import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
from clock import clock, verdict  # noqa: I001  first: it sets the number of threads

import numpy as np
from independent_network import assemble
from sample_comb import chip_comb

from layoutgen.circuit import NO_LOSSES, Circuit, SectionSolver
from layoutgen.comb import Comb
from layoutgen.exports.recorded_comb import comb_of


RECORD = Path(__file__).parents[2] / "outputs" / "HT-1710" / "HT-1710.json"


def demo_comb() -> Comb:
    """The comb of the shipped example, from its design record."""
    return comb_of(json.loads(RECORD.read_text(encoding="utf-8"))["comb"])


def compare(comb: Comb, points: int, runs: int) -> float:
    """Print all figures of one comb; the ratio of times when both networks are built anew."""
    frequency = np.linspace(0.9e9, 3.7e9, points)
    solver = SectionSolver(comb.stack, comb.width)
    ready = Circuit(comb, solver)
    ready.scattering(frequency)
    built, _ = clock(lambda: Circuit(comb, solver).scattering(frequency, NO_LOSSES), runs)
    swept, ours = clock(lambda: ready.scattering(frequency, NO_LOSSES), runs)
    lossy, _ = clock(lambda: ready.scattering(frequency), runs)
    theirs_built, theirs = clock(lambda: assemble(comb, solver, frequency).s_external, max(runs // 3, 1))
    assembled, _ = clock(lambda: assemble(comb, solver, frequency), max(runs // 3, 1))
    print(f"{points} points, {comb.order} resonators; greatest difference {np.abs(ours - theirs).max():.1e}")
    for what, seconds in (
        ("layoutgen, network built and swept, ms", built), ("layoutgen, sweep of a built network, ms", swept),
        ("layoutgen, the same with all losses, ms", lossy),
        ("scikit-rf, network assembled and solved, ms", theirs_built),
        ("scikit-rf, of which solution of the assembled network, ms", theirs_built - assembled),
    ):  # fmt: skip
        print(f"{what:<58}{1e3 * seconds:10.3g}")
    ratio = theirs_built / built
    verdict("ratio, both built anew", ratio, "at least 20", ratio >= 20)
    print(f"{'ratio, the solutions alone':<58}{(theirs_built - assembled) / swept:10.3g}")
    return ratio


def main(points: int = 701, runs: int = 9) -> dict[str, float]:
    """Print all figures; ratios by comb."""
    found = {}
    for name, comb in (("sample", chip_comb()), ("demo", demo_comb())):
        print(f"\n{name}")
        found[name] = compare(comb, points, runs)
    return found


if __name__ == "__main__":
    main()
