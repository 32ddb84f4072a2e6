"""The strip solver against finite elements of equal accuracy: ``python tests/benchmarks/strip_solver.py``.

Seven strips of different widths on a slab in a metal box, which both solve exactly: one capacitance matrix.
The baselines are finite elements (scikit-fem, direct sparse solution, one factorisation for all strips)
on grids that crowd geometrically at all 28 corners: of second order, the usual one, and of fourth order,
the best found. Errors are the largest relative ones of the self terms, against a strip solution on a mesh
beyond all curves; the finite elements come down to it from above, as they must.
"""

from __future__ import annotations

import argparse
import sys
from dataclasses import dataclass
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
from clock import clock, verdict  # noqa: I001  first: it sets the number of threads

import numpy as np
from finite_elements import Box, Grid, solve
from numpy.typing import NDArray

from layoutgen.lines import Mesh, StripSystem
from layoutgen.lines.kernel import KernelTable, add_walls, build_kernel

WIDTHS = np.array([2.1, 1.9, 1.7, 1.7, 1.8, 1.9, 2.1])
GAPS = np.array([2.1, 2.7, 2.9, 3.1, 2.6, 1.9])
HEIGHT, EPS_R, COVER, THICKNESS, ASIDE = 1.0, 3.57, 6.0, 0.053, 8.0


@dataclass(frozen=True)
class Point:
    """One solution: its cost [s], its error and the number of unknowns."""

    seconds: float
    error: float
    unknowns: int


def box(strips: int) -> Box:
    """The first strips of the row, in a box that is 8 slab heights wider on each side."""
    widths, gaps = WIDTHS[:strips], GAPS[: strips - 1]
    centres = ASIDE + widths[0] / 2 + np.concatenate([[0], np.cumsum((widths[1:] + widths[:-1]) / 2 + gaps)])
    return Box(width=float(centres[-1] + widths[-1] / 2 + ASIDE), height=HEIGHT, eps_r=EPS_R, cover=COVER,
               thickness=THICKNESS, centres=centres.tolist(), widths=widths.tolist())  # fmt: skip


def table(shape: Box) -> KernelTable:
    """The kernel of the stack-up between its walls: once for all sections."""
    reach = 2.1 * shape.width
    kernel = build_kernel(height=HEIGHT, eps_r=EPS_R, thickness=THICKNESS, cover=COVER, reach=reach)
    return add_walls(kernel, shape.width)


def section(shape: Box, kernel: KernelTable, mesh: Mesh) -> NDArray[np.float64]:
    """Capacitance matrix by the strip solver, panels and all, given the kernel."""
    system = StripSystem(centres=shape.centres, widths=shape.widths, thickness=THICKNESS,
                         walls=(0.0, shape.width), mesh=mesh)  # fmt: skip
    return system.capacitance(kernel)


def error(found: NDArray[np.float64], true: NDArray[np.float64]) -> float:
    return float(np.max(np.abs(np.diag(found) / np.diag(true) - 1)))


def strip_curve(shape: Box, kernel: KernelTable, true: NDArray[np.float64], runs: int) -> list[Point]:
    points = []
    for mesh in (Mesh(across=6, up=1), Mesh(across=8, up=2), Mesh(across=10, up=2), Mesh(), Mesh().finer):
        seconds, found = clock(lambda mesh=mesh: section(shape, kernel, mesh), runs)
        unknowns = 2 * (mesh.across + mesh.up) * len(shape.widths)
        points.append(Point(seconds, error(found, true), unknowns))
    return points


SETTINGS = {
    2: [(0.1, 3.0, 2.0), (0.05, 2.5, 1.5), (0.02, 2.2, 1.2), (0.01, 2.0, 1.0), (0.005, 1.8, 0.8),
        (0.003, 1.7, 0.65)],
    4: [(0.2, 6.0, 6.0), (0.2, 5.0, 5.0), (0.1, 4.0, 4.0), (0.1, 3.0, 2.0), (0.02, 3.0, 2.0)],
}  # fmt: skip
"""Smallest step, growth and largest step of the grids, by order: the best of those tried."""


def element_curve(shape: Box, order: int, true: NDArray[np.float64], steps: int) -> list[Point]:
    points = []
    for smallest, growth, largest in SETTINGS[order][:steps]:
        grid = Grid(smallest=smallest, growth=growth, largest=largest)
        seconds, found = clock(lambda grid=grid: solve(shape, grid, order), 3)
        points.append(Point(seconds, error(found.capacitance, true), found.unknowns))
    return points


def seconds_for(level: float, curve: list[Point]) -> float:
    """What an error costs, on the straight line through the curve in logarithms, continued at its end."""
    errors, seconds = (np.log([getattr(p, key) for p in curve]) for key in ("error", "seconds"))
    slope, intercept = np.polyfit(errors, seconds, 1)
    return float(np.exp(intercept + slope * np.log(level)))


def show(name: str, curve: list[Point]) -> None:
    print(f"\n{name}\n{'unknowns':>10}{'time, ms':>12}{'error':>12}")
    for point in curve:
        print(f"{point.unknowns:>10}{1e3 * point.seconds:>12.2f}{point.error:>12.1e}")


def main(strips: int = 7, steps: int = 6, runs: int = 15) -> dict[int, float]:
    """Print the curves; ratio of times at the accuracy of the default mesh, by order of the elements."""
    shape = box(strips)
    table_seconds, kernel = clock(lambda: table(shape), runs)
    true = section(shape, kernel, Mesh().finer.finer.finer)
    ours = strip_curve(shape, kernel, true, runs)
    elements = {order: element_curve(shape, order, true, steps) for order in SETTINGS}
    show("strip solver", ours)
    for order, curve in elements.items():
        show(f"finite elements of order {order}, graded", curve)
    print("\nratio of times at equal error; the finite elements' from the straight line through their curve")
    print(f"{'error':>12}" + "".join(f"{f'order {order}':>10}" for order in elements))
    for point in ours:
        ratios = [seconds_for(point.error, curve) / point.seconds for curve in elements.values()]
        print(f"{point.error:>12.1e}" + "".join(f"{ratio:>10.0f}" for ratio in ratios))
    print()
    default = ours[3]
    found = {order: seconds_for(default.error, curve) / default.seconds for order, curve in elements.items()}
    for order, ratio in found.items():
        verdict(f"ratio at the error of the default mesh, order {order}", ratio, "at least 100", ratio >= 100)
    verdict(f"section of {strips} strips after the table, ms", 1e3 * default.seconds, "below 10",
            default.seconds < 0.010)  # fmt: skip
    print(f"{'kernel table with walls, once per stack-up, ms':<58}{1e3 * table_seconds:10.3g}")
    return found


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--strips", type=int, default=7, choices=range(2, 8))
    main(parser.parse_args().strips)
