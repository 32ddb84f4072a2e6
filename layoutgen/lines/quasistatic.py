"""Capacitance and inductance matrices of any set of strips on a slab, with every coupling.

The charge on the faces of each strip is taken constant on panels that shrink towards the corners and the
potential is tested on the same panels (Galerkin), with every singular integral in closed form. The
matrix of potential coefficients of a set of strips contains that of each subset, so resonators that end
early cost one more solution only.

Reference: R. F. Harrington, "Field Computation by Moment Methods", Macmillan, 1968, ch. 2.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.linalg import cho_factor, cho_solve

from layoutgen.constants import VACUUM_PERMITTIVITY
from layoutgen.errors import InputError
from layoutgen.lines.kernel import KernelTable, add_walls, build_kernel, log_twice

__all__ = ["Mesh", "StripSystem", "solve_strips"]

Floats = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True)
class Mesh:
    """Panels of each strip.

    Attributes
    ----------
    across : int
        Panels of the lower face, and of the upper one; a strip without thickness gets twice as many.
    up : int
        Panels of each side wall; of no meaning for strips without thickness.
    grading : float
        Exponent by which panels shrink towards the corners.
    """

    across: int = 14
    up: int = 3
    grading: float = 3.5

    @property
    def finer(self) -> Mesh:
        """Half as fine again, for an estimate of the error."""
        return Mesh(across=3 * self.across // 2 + self.across % 2, up=self.up + 2, grading=self.grading)


def solve_strips(
    *,
    centres: ArrayLike,
    widths: ArrayLike,
    thickness: float,
    height: float,
    eps_r: float,
    cover: float | None = None,
    walls: tuple[float, float] | None = None,
    mesh: Mesh | None = None,
) -> Floats:
    """Capacitance matrix of parallel strips on a grounded slab.

    Parameters
    ----------
    centres, widths : array_like, shape (n,)
        Centre line and width of each strip, by rising centre. [m]
    thickness : float
        Of all strips, on top of the slab; zero allowed. [m]
    height, eps_r : float
        Of the slab. [m], [1]
    cover : float or None
        Height of a flat metal cover above the slab. [m]
    walls : tuple of two floats or None
        Positions of two metal side walls. [m]
    mesh : Mesh, optional
        Panels of each strip.

    Returns
    -------
    ndarray, shape (n, n)
        Maxwell capacitance matrix, off-diagonal terms negative. [F/m]

    Raises
    ------
    InputError
        If strips overlap, touch a wall or the cover, or a dimension is not positive.

    Notes
    -----
    Against converged solutions the self terms of single strips and pairs are within 0.1 %, the couplings
    of arrays within 1 % (the tests hold the tables), for thickness up to 0.1 of the height and gaps down
    to 0.05 of it.
    """
    system = StripSystem(
        centres=centres, widths=widths, thickness=thickness, walls=walls, mesh=mesh or Mesh()
    )
    if not (height > 0 and eps_r >= 1 and thickness >= 0 and (cover is None or cover > thickness)):
        got = f"height {height}, eps_r {eps_r}, thickness {thickness}, cover {cover}"
        raise InputError("solve_strips", "stack-up", got, "must be a slab of positive height under any cover")
    x, w = np.asarray(centres, dtype=float), np.asarray(widths, dtype=float)
    spacing = 0.0 if walls is None else walls[1] - walls[0]
    around = 13.1 * spacing if cover is None else 2.1 * spacing + 6 * (height + cover)
    reach = max(float(np.max(x + w / 2) - np.min(x - w / 2)), around if walls else 0.0)
    kernel = build_kernel(height=height, eps_r=eps_r, thickness=thickness, cover=cover, reach=reach)
    return system.capacitance(kernel if walls is None else add_walls(kernel, spacing))


class StripSystem:
    """Panels of a set of strips, ready to be solved over any slab, for the whole set or for a subset.

    What does not depend on the slab (the two singular logarithms between all panels) is integrated once.
    Parameters are those of `solve_strips`.
    """

    def __init__(
        self,
        *,
        centres: ArrayLike,
        widths: ArrayLike,
        thickness: float,
        walls: tuple[float, float] | None = None,
        mesh: Mesh,
    ) -> None:
        centre, width = np.atleast_1d(np.asarray(centres, float)), np.atleast_1d(np.asarray(widths, float))
        _check(centre, width, walls)
        centre = centre - (walls[0] if walls else 0.0)
        self._panels = _Panels(centre, width, thickness, mesh)
        self._direct, self._image = self._panels.logarithms()
        self._strips = len(centre)

    def capacitance(self, kernel: KernelTable, strips: Sequence[int] | None = None) -> Floats:
        """Maxwell capacitance matrix of all strips, or of those named with the others taken away. [F/m]"""
        return self.capacitances(kernel, [range(self._strips) if strips is None else strips])[0]

    def capacitances(self, kernel: KernelTable, subsets: Sequence[Sequence[int]]) -> list[Floats]:
        """Maxwell capacitance matrix of each subset, the other strips being taken away. [F/m]"""
        potential = self._potential(kernel)
        owner = self._panels.owner
        results = []
        for subset in subsets:
            keep = np.isin(owner, subset)
            held = (owner[keep][:, None] == np.asarray(subset)[None, :]).astype(float)
            part = potential if keep.all() else potential[np.ix_(keep, keep)]
            charge = cho_solve(cho_factor(part, lower=True, check_finite=False), held, check_finite=False)
            result = held.T @ charge
            results.append((result + result.T) / 2)
        return results

    def _potential(self, kernel: KernelTable) -> Floats:
        """Mean potential on each panel of a unit charge spread over each other one. [V m/C]"""
        total = self._direct + self._panels.smooth(kernel)
        if kernel.image:
            total += kernel.image * self._image
        lengths = self._panels.lengths
        result: Floats = total / (2 * np.pi * VACUUM_PERMITTIVITY * np.outer(lengths, lengths))
        return result


def _check(centre: Floats, width: Floats, walls: tuple[float, float] | None) -> None:
    if not bool(np.all(width > 0)):
        raise InputError("solve_strips", "widths", float(np.min(width)), "must be greater than 0")
    gaps = np.diff(centre) - (width[1:] + width[:-1]) / 2
    if not bool(np.all(gaps > 0)):
        raise InputError("solve_strips", "centres", centre.tolist(), "strips overlap or are out of order")
    if walls is not None:
        clear = min(
            float(np.min(centre - width / 2)) - walls[0], walls[1] - float(np.max(centre + width / 2))
        )
        if not clear > 0.02 * (walls[1] - walls[0]):
            raise InputError(
                "solve_strips", "walls", walls, "a strip touches a side wall or is too near to it"
            )


def _graded(count: int, grading: float) -> Floats:
    """Nodes from -1 to 1 that crowd at both ends."""
    s = np.linspace(-1, 1, count + 1)
    result: Floats = np.sign(s) * (1 - (1 - np.abs(s)) ** grading)
    return result


class _Panels:
    """Panels on the faces of all strips, in the order lower faces, upper faces, side walls.

    The integrals are over both panels of a pair. The smooth rest of the kernel hardly changes over the
    strip's thickness: at the side walls it is interpolated linearly in both heights between its values on
    the faces, and taken at the middle of the panels.
    """

    def __init__(self, centre: Floats, width: Floats, thickness: float, mesh: Mesh) -> None:
        n, self._thickness = len(centre), thickness
        across = mesh.across if thickness else 2 * mesh.across
        self._nodes = centre[:, None] + width[:, None] / 2 * _graded(across, mesh.grading)
        flat_owner = np.repeat(np.arange(n), across)
        flat = np.diff(self._nodes, axis=1).ravel()
        x = self._nodes.ravel()
        self._apart = np.abs(x[:, None] - x[None, :])
        self._together = x[:, None] + x[None, :]
        self.owner, self.lengths = flat_owner, flat
        if thickness == 0:
            return
        self._walls = np.stack([centre - width / 2, centre + width / 2], axis=1).ravel()
        self._v = thickness / 2 * (_graded(mesh.up, mesh.grading) + 1)
        side = np.tile(np.diff(self._v), 2 * n)
        self.owner = np.concatenate([flat_owner, flat_owner, np.repeat(np.arange(n), 2 * mesh.up)])
        self.lengths = np.concatenate([flat, flat, side])
        self._side_lengths, self._flat_lengths = side, flat

    def logarithms(self) -> tuple[Floats, Floats]:
        """Integrals of ``-ln r`` to the charge, and of ``+ln r`` to its image in the slab's face."""
        t = self._thickness
        if t == 0:
            own = _flat_differences(log_twice(self._apart, 0.0), self._nodes.shape)
            return own, -own
        level, apart, twice = (
            _flat_differences(log_twice(self._apart, y), self._nodes.shape) for y in (0.0, t, 2 * t)
        )
        below, above = self._side_to_flat(self._v), self._side_to_flat(self._v + t)
        mirrored = self._side_to_flat(self._v - t)
        side, side_image = self._side_to_side()
        direct = np.block([[level, apart, below.T], [apart.T, level, mirrored.T], [below, mirrored, side]])
        image = np.block([[level, apart, below.T], [apart.T, twice, above.T], [below, above, side_image]])
        return direct, -image

    def smooth(self, kernel: KernelTable) -> Floats:
        """Integrals of the smooth rest of the kernel."""
        low, mixed, high = (
            (self._flat_smooth(kernel, i) for i in range(3))
            if self._thickness
            else (self._flat_smooth(kernel, 0), None, None)
        )
        if mixed is None or high is None:
            return low
        middle = ((self._nodes[:, 1:] + self._nodes[:, :-1]) / 2).ravel()
        rise = (self._v[:-1] + self._v[1:]) / 2 / self._thickness
        flat = self._potentials(kernel, self._walls[:, None], middle[None, :])
        sides, up = len(self._walls), len(rise)
        against = []
        for face in (0, 1):
            mixture = (1 - rise)[None, :, None] * flat[face][:, None, :] + rise[None, :, None] * flat[
                face + 1
            ][:, None, :]
            against.append(mixture.reshape(sides * up, -1) * np.outer(self._side_lengths, self._flat_lengths))
        walls = self._potentials(kernel, self._walls[:, None], self._walls[None, :])
        a, b = rise[:, None], rise[None, :]
        weights = ((1 - a) * (1 - b), a * (1 - b) + (1 - a) * b, a * b)
        side = sum(
            (np.kron(value, weight) for value, weight in zip(walls, weights, strict=True)),
            np.zeros((sides * up, sides * up)),
        )
        side *= np.outer(self._side_lengths, self._side_lengths)
        lower, upper = against
        return np.block([[low, mixed, lower.T], [mixed.T, high, upper.T], [lower, upper, side]])

    def _flat_smooth(self, kernel: KernelTable, faces: int) -> Floats:
        result = -_flat_differences(kernel.rest[faces](self._apart), self._nodes.shape)
        if kernel.mirrored is not None:
            result -= _flat_differences(kernel.mirrored[faces](self._together), self._nodes.shape)
        return result

    @staticmethod
    def _potentials(kernel: KernelTable, x: Floats, y: Floats) -> list[Floats]:
        apart = np.abs(x - y)
        values = [spline(apart, 2) for spline in kernel.rest]
        if kernel.mirrored is not None:
            values = [value - spline(x + y, 2) for value, spline in zip(values, kernel.mirrored, strict=True)]
        return values

    def _side_to_flat(self, heights: Floats) -> Floats:
        """Integrals of ``-ln r``, side panels by rows; heights of their nodes above the flat face."""
        x = self._nodes.ravel()
        total = _log_cross(x[None, None, :] - self._walls[:, None, None], heights[None, :, None])
        n, m = self._nodes.shape
        sides, up = len(self._walls), len(heights) - 1
        parts = np.diff(np.diff(total, axis=1).reshape(sides, up, n, m), axis=3)
        return -parts.reshape(sides * up, -1)

    def _side_to_side(self) -> tuple[Floats, Floats]:
        """Integrals of ``-ln r`` to the charge and to its image."""
        apart = np.abs(self._walls[:, None] - self._walls[None, :])[:, :, None, None]
        v = self._v
        results = []
        for height, sign in ((v[:, None] - v[None, :], 1.0), (v[:, None] + v[None, :], -1.0)):
            parts = sign * np.diff(np.diff(log_twice(height[None, None], apart), axis=2), axis=3)
            size = parts.shape[0] * parts.shape[2]
            results.append(parts.transpose(0, 2, 1, 3).reshape(size, size))
        return results[0], results[1]


def _flat_differences(values: Floats, shape: tuple[int, ...]) -> Floats:
    n, m = shape
    grid = values.reshape(n, m, n, m)
    result: Floats = np.diff(np.diff(grid, axis=1), axis=3).reshape(n * (m - 1), n * (m - 1))
    return result


def _log_cross(x: Floats, y: Floats) -> Floats:
    """Antiderivative in x and in y of ``ln sqrt(x^2 + y^2)``."""
    square = x * x + y * y
    logarithm = np.log(np.where(square > 0, square, 1.0))
    result: Floats = 0.5 * (x * y * (logarithm - 3) + x * x * _angle(y, x) + y * y * _angle(x, y))
    return result


def _angle(top: Floats, bottom: Floats) -> Floats:
    """Arc tangent of top / bottom in -pi/2 to pi/2, zero where both are."""
    result: Floats = np.arctan2(top * np.sign(bottom), np.abs(bottom))
    return result
