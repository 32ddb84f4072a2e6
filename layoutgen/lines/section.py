"""A uniform piece of coupled line: matrices of capacitance, inductance and loss of a set of strips."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.linalg import eigh

from layoutgen.constants import SPEED_OF_LIGHT, VACUUM_PERMEABILITY
from layoutgen.errors import InputError
from layoutgen.lines.kernel import KernelTable, add_walls, build_kernel
from layoutgen.lines.quasistatic import Mesh, StripSystem

__all__ = ["LineSolver", "LossMatrices", "Modes", "StripMatrices", "line_admittance", "line_susceptance"]

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]


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


def line_admittance(
    frequency: ArrayLike,
    modes: Modes,
    length: float,
    *,
    resistance: ArrayLike = 0.0,
    conductance: ArrayLike = 0.0,
) -> tuple[Complexes, Complexes]:
    """Admittance matrix of a piece of coupled line, as two blocks.

    Parameters
    ----------
    frequency : array_like, shape (n_freq,)
        Greater than 0. [Hz]
    modes : Modes
        Of n strips.
    length : float
        Of the piece, greater than 0. [m]
    resistance, conductance : array_like, broadcast to shape (n_freq, n)
        Of each mode, per unit length, in the modes' own normalisation. [ohm/m], [S/m]

    Returns
    -------
    near, far : ndarray, shape (n_freq, n, n)
        Currents into one end per voltage at that end, and per voltage at the other end. [S]

    References
    ----------
    C. R. Paul, "Analysis of Multiconductor Transmission Lines", Wiley, 1994, ch. 4.
    """
    omega = 2 * np.pi * np.atleast_1d(np.asarray(frequency, dtype=float))[:, None]
    if not np.any(resistance) and not np.any(conductance):
        near, far = line_susceptance(frequency, modes, length)
        return np.asarray(1j * near, dtype=np.complex128), np.asarray(1j * far, dtype=np.complex128)
    series = 1j * omega + np.asarray(resistance)
    shunt = 1j * omega * modes.slowness**2 + np.asarray(conductance)
    exponent = np.sqrt(series * shunt) * length
    admittance = np.sqrt(shunt / series)
    current = modes.current
    near = (current * (admittance / np.tanh(exponent))[:, None, :]) @ current.T
    far = (current * (-admittance / np.sinh(exponent))[:, None, :]) @ current.T
    return near, far


def line_susceptance(frequency: ArrayLike, modes: Modes, length: float) -> tuple[Floats, Floats]:
    """Imaginary part of `line_admittance` without loss, where the real part is zero; faster. [S]

    Parameters are those of `line_admittance`, and so are the shapes of what is returned.
    """
    omega = 2 * np.pi * np.atleast_1d(np.asarray(frequency, dtype=float))[:, None]
    phase = omega * modes.slowness * length
    current = modes.current
    near = (current * (-modes.slowness / np.tan(phase))[:, None, :]) @ current.T
    far = (current * (modes.slowness / np.sin(phase))[:, None, :]) @ current.T
    return near, far


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

    def of_modes(self, modes: Modes) -> tuple[Floats, Floats]:
        """Resistance over surface resistance, and capacitance slope, of each lossless mode."""
        return _diagonal(modes.current, self.resistance), _diagonal(modes.voltage, self.capacitance_slope)


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
    reach : float
        Greatest extent of a set of strips, and of the space between side walls. [m]
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
        reach: float,
        mesh: Mesh | None = None,
    ) -> None:
        if not reach > 0:
            raise InputError("LineSolver", "reach", reach, "must be greater than 0")
        self.height, self.eps_r, self.thickness = height, eps_r, thickness
        self.cover, self.reach = cover, reach
        self._mesh = mesh or Mesh()
        self._kernels: dict[tuple[float, float, bool], KernelTable] = {}
        self._walled: dict[tuple[float, float, bool], tuple[float, KernelTable]] = {}

    def matrices(
        self,
        centres: ArrayLike,
        widths: ArrayLike,
        subsets: Sequence[Sequence[int]],
        walls: tuple[float, float] | None = None,
    ) -> list[StripMatrices]:
        """Matrices of each subset of the strips, the others being taken away.

        Parameters
        ----------
        centres, widths : array_like, shape (n,)
            Strips by rising centre. [m]
        subsets : sequence of sequences of int
            Strips present, by index.
        walls : tuple of two floats or None
            Positions of metal side walls. [m]

        Raises
        ------
        InputError
            If strips overlap or the set is wider than the tables reach.
        """
        strips = _Strips(np.asarray(centres, dtype=float), np.asarray(widths, dtype=float), walls)
        system = self._system(strips)
        slab = system.capacitances(self._kernel(self.eps_r, strips), subsets)
        air = system.capacitances(self._kernel(1.0, strips), subsets)
        return [
            StripMatrices(
                capacitance=c, inductance=np.asarray(np.linalg.inv(a) / SPEED_OF_LIGHT**2, dtype=np.float64)
            )
            for c, a in zip(slab, air, strict=True)
        ]

    def losses(
        self,
        centres: ArrayLike,
        widths: ArrayLike,
        subsets: Sequence[Sequence[int]],
        walls: tuple[float, float] | None = None,
    ) -> list[LossMatrices]:
        """Loss matrices of each subset of the strips; parameters are those of `matrices`.

        The resistance is the derivative of the external inductance with respect to a recession of all metal
        walls into the metal, which holds while the skin depth is small against thickness and gaps.

        References
        ----------
        H. A. Wheeler, "Formulas for the skin effect", Proc. IRE 30, 1942 (incremental inductance rule).
        """
        step, contrast = 2e-3 * self.thickness, 1e-3 * self.eps_r
        strips = _Strips(np.asarray(centres, dtype=float), np.asarray(widths, dtype=float), walls)
        smaller = strips.receded(step)
        system, receded = self._system(strips), self._system(smaller, step)
        results = []
        for before, after, slab, rich in zip(
            system.capacitances(self._kernel(1.0, strips), subsets),
            receded.capacitances(self._kernel(1.0, smaller, step), subsets),
            system.capacitances(self._kernel(self.eps_r, strips), subsets),
            system.capacitances(self._kernel(self.eps_r + contrast, strips), subsets),
            strict=True,
        ):
            growth = (np.linalg.inv(after) - np.linalg.inv(before)) / SPEED_OF_LIGHT**2 / step
            results.append(
                LossMatrices(
                    resistance=growth / VACUUM_PERMEABILITY,
                    capacitance_slope=(rich - slab) * self.eps_r / contrast,
                )
            )
        return results

    def _kernel(self, eps_r: float, strips: _Strips, recession: float = 0.0) -> KernelTable:
        """Table of the slab, or of another permittivity, with all metal receded by a little."""
        key = (eps_r, recession, strips.walls is not None)
        if key not in self._kernels:
            self._kernels[key] = build_kernel(
                height=self.height + 2 * recession,
                eps_r=eps_r,
                thickness=self.thickness - 2 * recession,
                cover=self.cover,
                reach=self._table_reach(strips) + 30 * recession,
            )
        if strips.walls is None:
            return self._kernels[key]
        spacing = strips.walls[1] - strips.walls[0]
        if key not in self._walled or self._walled[key][0] != spacing:
            self._walled[key] = spacing, add_walls(self._kernels[key], spacing)
        return self._walled[key][1]

    def _table_reach(self, strips: _Strips) -> float:
        """How far potentials have to be known: to where reflections in side walls have died out. [m]"""
        if strips.walls is None:
            return self.reach
        if self.cover is None:
            return 13.1 * self.reach
        return 2.1 * self.reach + 6 * (self.height + self.cover)

    def _system(self, strips: _Strips, recession: float = 0.0) -> StripSystem:
        if not strips.extent <= self.reach * (1 + 1e-9) + 2 * recession:
            raise InputError(
                "LineSolver",
                "centres",
                f"{strips.extent:.4g} m wide",
                f"must not be wider than the tables, {self.reach:.4g} m",
            )
        return StripSystem(
            centres=strips.centres,
            widths=strips.widths,
            thickness=self.thickness - 2 * recession,
            walls=strips.walls,
            mesh=self._mesh,
        )


@dataclass(frozen=True)
class _Strips:
    """Centres, widths and side walls of a set of strips. [m]"""

    centres: Floats
    widths: Floats
    walls: tuple[float, float] | None

    @property
    def extent(self) -> float:
        """Of the strips, or of the space between the walls."""
        if self.walls is not None:
            return self.walls[1] - self.walls[0]
        return float(np.max(self.centres + self.widths / 2) - np.min(self.centres - self.widths / 2))

    def receded(self, step: float) -> _Strips:
        """All metal walls moved into the metal."""
        walls = None if self.walls is None else (self.walls[0] - step, self.walls[1] + step)
        return _Strips(self.centres, self.widths - 2 * step, walls)


def _diagonal(basis: Floats, matrix: Floats) -> Floats:
    result: Floats = np.einsum("im,ij,jm->m", basis, matrix, basis)
    return result
