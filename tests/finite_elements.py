"""Capacitance of strips in a closed metal box by finite elements, by a general library (scikit-fem).

Nothing is shared with the strip solver: triangles of second order (or higher) on a rectangular grid that
shrinks geometrically towards every corner of the strips. A capacitance matrix from the energy of any trial
field is too large (Thomson's principle), so self terms come down to the exact value as the grid gets finer.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import skfem
from numpy.typing import NDArray
from scipy.sparse.linalg import splu
from skfem.helpers import dot, grad

Floats = NDArray[np.float64]
VACUUM_PERMITTIVITY = 8.8541878128e-12  # F/m, CODATA 2018


@dataclass(frozen=True, kw_only=True)
class Box:
    """Strips on a slab in a metal box: walls at x = 0 and x = width, a floor at y = 0 and a lid.

    Attributes
    ----------
    width : float
        Of the box. [m]
    height, eps_r : float
        Of the slab. [m], [1]
    cover : float
        Of the lid above the slab. [m]
    thickness : float
        Of the strips; greater than zero. [m]
    centres, widths : sequence of float
        Of the strips. [m]
    """

    width: float
    height: float
    eps_r: float
    cover: float
    thickness: float
    centres: Sequence[float]
    widths: Sequence[float]


@dataclass(frozen=True, kw_only=True)
class Grid:
    """How fine the grid is.

    Attributes
    ----------
    smallest : float
        Step at a corner, over the thickness of the strips.
    growth : float
        Ratio of a step to its neighbour nearer to a corner.
    largest : float
        Greatest step, over the height of the slab.
    """

    smallest: float = 1e-2
    growth: float = 2.0
    largest: float = 1.0

    @property
    def finer(self) -> Grid:
        """Every step cut in two, and still smaller ones at the corners."""
        return Grid(smallest=self.smallest / 4, growth=self.growth**0.5, largest=self.largest / 2)


@dataclass(frozen=True, kw_only=True)
class Solution:
    """Maxwell capacitance matrix [F/m] and the number of unknowns it took."""

    capacitance: Floats
    unknowns: int


def solve(box: Box, grid: Grid, order: int = 2) -> Solution:
    """Capacitance matrix of a box by finite elements of an order from 2 to 4."""
    x, y = _lines(box, grid)
    element = {2: skfem.ElementTriP2, 3: skfem.ElementTriP3, 4: skfem.ElementTriP4}[order]
    basis = skfem.Basis(skfem.MeshTri.init_tensor(x, y), element())

    @skfem.BilinearForm
    def energy(u, v, w):
        return np.where(w.x[1] < box.height, box.eps_r, 1.0) * dot(grad(u), grad(v))

    stiffness = energy.assemble(basis).tocsc()
    at = basis.doflocs
    potential = np.zeros((at.shape[1], len(box.centres)))
    held = basis.get_dofs().all()  # of the box
    near = 1e-9 * box.thickness
    for strip, (centre, width) in enumerate(zip(box.centres, box.widths, strict=True)):
        inside = np.flatnonzero(
            (np.abs(at[0] - centre) <= width / 2 + near)
            & (at[1] >= box.height - near)
            & (at[1] <= box.height + box.thickness + near)
        )
        potential[inside, strip] = 1.0
        held = np.union1d(held, inside)
    free = np.setdiff1d(np.arange(at.shape[1]), held)
    charge = -stiffness[free] @ potential
    potential[free] = splu(stiffness[np.ix_(free, free)]).solve(charge)
    return Solution(
        capacitance=VACUUM_PERMITTIVITY * (potential.T @ (stiffness @ potential)), unknowns=len(free)
    )


def _lines(box: Box, grid: Grid) -> tuple[Floats, Floats]:
    strips = zip(box.centres, box.widths, strict=True)
    corners = sorted(centre + side * width / 2 for centre, width in strips for side in (-1, 1))
    top = box.height + box.cover
    return (
        _graded([0.0, *corners, box.width], box, grid),
        _graded([0.0, box.height, box.height + box.thickness, top], box, grid),
    )


def _graded(stops: list[float], box: Box, grid: Grid) -> Floats:
    """Grid lines that include all stops and crowd at all but the first and the last."""
    smallest, largest = grid.smallest * box.thickness, grid.largest * box.height
    pieces = [np.array(stops[:1])]
    for start, stop in pairwise(stops):
        length = stop - start
        ends = int(start != stops[0]) + int(stop != stops[-1])
        # steps of a half piece (or of a whole one, when it crowds at one end only) from its corner
        steps = [smallest]
        while sum(steps) < length / ends:
            steps.append(min(steps[-1] * grid.growth, largest))
        nodes = np.concatenate([[0.0], np.cumsum(steps)]) / sum(steps) * length / ends
        if start == stops[0]:
            line = stop - nodes[::-1]
        elif stop == stops[-1]:
            line = start + nodes
        else:
            line = np.concatenate([start + nodes, stop - nodes[-2::-1]])
        line[-1] = stop
        pieces.append(line[1:])
    return np.concatenate(pieces)
