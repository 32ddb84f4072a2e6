"""A uniform piece of coupled line: matrices of capacitance, inductance and loss of a set of strips."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import eigh

from layoutgen.constants import SPEED_OF_LIGHT, VACUUM_PERMEABILITY
from layoutgen.errors import InputError
from layoutgen.lines.kernel import KernelTable, build_kernel
from layoutgen.lines.quasistatic import Mesh, StripSystem

__all__ = ["LineSolver", "LossMatrices", "Modes", "StripMatrices"]

Floats = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True)
class StripMatrices:
    """Per-unit-length matrices of n coupled strips, without loss.

    Attributes
    ----------
    capacitance : ndarray, shape (n, n)
        Maxwell form. [F/m]
    inductance : ndarray, shape (n, n)
        External inductance. [H/m]
    """

    capacitance: Floats
    inductance: Floats

    def modes(self) -> Modes:
        """Quasi-TEM modes, the fastest last."""
        stiffness = np.linalg.inv(self.inductance)
        slowness, voltage = eigh(self.capacitance, (stiffness + stiffness.T) / 2)
        return Modes(slowness=np.sqrt(slowness), voltage=voltage, current=stiffness @ voltage)


@dataclass(frozen=True, kw_only=True)
class Modes:
    """Quasi-TEM modes of n coupled strips.

    Attributes
    ----------
    slowness : ndarray, shape (n,)
        Inverse phase velocity of each mode. [s/m]
    voltage, current : ndarray, shape (n, n)
        Mode patterns by columns, scaled so that ``voltage.T @ current`` is the identity and each mode has an
        inductance of 1 H/m.
    """

    slowness: Floats
    voltage: Floats
    current: Floats


@dataclass(frozen=True, kw_only=True)
class LossMatrices:
    """What turns surface resistance and loss tangent into per-unit-length loss.

    Attributes
    ----------
    resistance : ndarray, shape (n, n)
        Series resistance over surface resistance. [1/m]
    capacitance_slope : ndarray, shape (n, n)
        eps_r dC/d(eps_r); conductance is angular frequency times loss tangent times this. [F/m]
    """

    resistance: Floats
    capacitance_slope: Floats


class LineSolver:
    """Solves sections of strips on one stack-up; holds the kernel tables of that stack-up.

    Parameters
    ----------
    height, eps_r : float
        Of the slab. [m], [1]
    thickness : float
        Of the strips. [m]
    cover : float or None
        Height of a metal cover above the slab. [m]
    walls : tuple of two floats or None
        Positions of metal side walls. [m]
    reach : float
        Greatest extent of a set of strips. [m]
    mesh : Mesh, optional
        Panels of each strip.
    """

    def __init__(
        self,
        *,
        height: float,
        eps_r: float,
        thickness: float,
        cover: float | None,
        walls: tuple[float, float] | None,
        reach: float,
        mesh: Mesh | None = None,
    ) -> None:
        if not reach > 0:
            raise InputError("LineSolver", "reach", reach, "must be greater than 0")
        self.height, self.eps_r, self.thickness = height, eps_r, thickness
        self.cover, self.walls, self.reach = cover, walls, reach
        self._mesh = mesh or Mesh()
        self._slab = self._kernel(eps_r, 0.0)
        self._air = self._kernel(1.0, 0.0)

    def _kernel(self, eps_r: float, recession: float) -> KernelTable:
        reach = self.reach
        spacing = None
        if self.walls is not None:
            spacing = self.walls[1] - self.walls[0] + 2 * recession
            reach = max(reach, 13 * spacing)
        return build_kernel(height=self.height + 2 * recession, eps_r=eps_r,
                            thickness=self.thickness - 2 * recession, cover=self.cover,
                            wall_spacing=spacing, reach=reach)

    def matrices(
        self, centres: Floats, widths: Floats, subsets: Sequence[Sequence[int]]
    ) -> list[StripMatrices]:
        """Matrices of each subset of the strips, the others being taken away.

        Parameters
        ----------
        centres, widths : ndarray, shape (n,)
            Strips by rising centre. [m]
        subsets : sequence of sequences of int
            Strips present, by index.

        Raises
        ------
        InputError
            If strips overlap or the set is wider than the tables reach.
        """
        system = self._system(centres, widths, 0.0)
        slab = system.capacitances(self._slab, subsets)
        air = system.capacitances(self._air, subsets)
        return [StripMatrices(capacitance=c, inductance=np.linalg.inv(a) / SPEED_OF_LIGHT**2)
                for c, a in zip(slab, air, strict=True)]

    def losses(self, centres: Floats, widths: Floats, subsets: Sequence[Sequence[int]]) -> list[LossMatrices]:
        """Loss matrices of each subset of the strips.

        The resistance is the derivative of the external inductance with respect to a recession of all metal
        walls into the metal, which holds while the skin depth is small against thickness and gaps.

        References
        ----------
        H. A. Wheeler, "Formulas for the skin effect", Proc. IRE 30, 1942 (incremental inductance rule).
        """
        step = 2e-3 * self.thickness
        system = self._system(centres, widths, 0.0)
        receded = self._system(centres, widths, step)
        air_receded = self._kernel(1.0, step)
        contrast = 1e-3 * self.eps_r
        richer = self._kernel(self.eps_r + contrast, 0.0)
        results = []
        for before, after, slab, rich in zip(
            system.capacitances(self._air, subsets), receded.capacitances(air_receded, subsets),
            system.capacitances(self._slab, subsets), system.capacitances(richer, subsets), strict=True,
        ):
            growth = (np.linalg.inv(after) - np.linalg.inv(before)) / SPEED_OF_LIGHT**2 / step
            results.append(LossMatrices(resistance=growth / VACUUM_PERMEABILITY,
                                        capacitance_slope=(rich - slab) * self.eps_r / contrast))
        return results

    def _system(self, centres: Floats, widths: Floats, recession: float) -> StripSystem:
        extent = float(np.max(centres + widths / 2) - np.min(centres - widths / 2))
        if not extent <= self.reach:
            raise InputError("LineSolver", "centres", f"{extent:.4g} m wide",
                             f"must not be wider than the tables, {self.reach:.4g} m")
        walls = None if self.walls is None else (self.walls[0] - recession, self.walls[1] + recession)
        return StripSystem(centres=centres, widths=widths - 2 * recession,
                           thickness=self.thickness - 2 * recession, walls=walls, mesh=self._mesh)
