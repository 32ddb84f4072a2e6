"""Green's function of a line charge on a grounded slab, integrated twice for panels.

The potential at height ``u`` above the slab of a unit line charge at height ``v`` is ``G / (2 pi eps0)`` with

    G(x) = integral over k from 0 of  cos(kx) / k *
           [e^-kd + R e^-ks - e^-2kc (e^ks + R e^kd)] / (1 + R e^-2kc),

    d = |u - v|, s = u + v,  R = -(K + e^-2kh) / (1 + K e^-2kh),  K = (eps_r - 1) / (eps_r + 1),

c being the height of the cover. The two logarithms that are singular on a strip (the charge itself and
its image in the upper face of the slab, of strength -K) are integrated in closed form where panels are;
this module holds the smooth rest, tabulated along x.

References
----------
P. Silvester, "TEM wave properties of microstrip transmission lines", Proc. IEE 115, 1968 (images of the
slab).
R. E. Collin, "Field Theory of Guided Waves", 2nd ed., IEEE Press, 1991, ch. 4 (transform of the
layered problem). The expressions above were derived anew for a charge in the air region; the tests
compare them with independent solutions.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.polynomial.legendre import leggauss
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline

from layoutgen.errors import InputError

__all__ = ["KernelTable", "add_walls", "build_kernel", "log_twice"]

Floats = NDArray[np.float64]

_IMAGE_TOLERANCE = 1e-9
_PER_HEIGHT = 16
"""Table points per slab height near the charge."""


@dataclass(frozen=True, kw_only=True)
class KernelTable:
    """The smooth part of the Green's function for charges on the lower (0) and upper (1) faces of the strips.

    Attributes
    ----------
    image : float
        Strength K of the image in the upper face of the slab. [1]
    thickness : float
        Of the strips. [m]
    covered : bool
        True under a cover, where potentials die out along x.
    grid : ndarray
        Distances of the tables. [m]
    rest : tuple of three splines
        Second antiderivative along x of the smooth rest, for the face pairs 00, 01 and 11. [m^2]
    potential : tuple of three splines
        The smooth rest itself. [1]
    mirrored : tuple of three splines or None
        The same for the strips' reflections in side walls, as functions of ``x + x'``, x from the left wall.
    """

    image: float
    thickness: float
    covered: bool
    grid: Floats
    rest: tuple[CubicSpline, CubicSpline, CubicSpline]
    potential: tuple[CubicSpline, CubicSpline, CubicSpline]
    mirrored: tuple[CubicSpline, CubicSpline, CubicSpline] | None = None

    @property
    def reach(self) -> float:
        """Largest distance that the tables cover. [m]"""
        return float(self.grid[-1])

    @property
    def heights(self) -> tuple[tuple[float, float], ...]:
        """Sum and difference of the two heights, for each face pair. [m]"""
        t = self.thickness
        return (0.0, 0.0), (t, t), (2 * t, 0.0)


def log_twice(x: Floats, y: Floats | float) -> Floats:
    """Second antiderivative in x of ``ln sqrt(x^2 + y^2)``, even in x and y. [m^2]"""
    square = x * x + np.square(y)
    with np.errstate(divide="ignore", invalid="ignore"):
        logarithm = np.where(square > 0, np.log(np.where(square > 0, square, 1.0)), 0.0)
        slope = 2 * x * np.abs(y) * np.arctan2(np.abs(x), np.abs(y)) * np.sign(x)
    result: Floats = 0.25 * (x * x - np.square(y)) * logarithm - 0.75 * x * x + 0.5 * slope
    return result


def build_kernel(
    *, height: float, eps_r: float, thickness: float, cover: float | None, reach: float
) -> KernelTable:
    """Tabulate the smooth part of the Green's function of one stack-up without side walls.

    Parameters
    ----------
    height : float
        Slab thickness. [m]
    eps_r : float
        Its relative permittivity, at least 1. [1]
    thickness : float
        Of the strips that lie on the slab, zero allowed. [m]
    cover : float or None
        Height of a metal cover above the slab. [m]
    reach : float
        Largest distance along x that will be asked for. [m]

    Returns
    -------
    KernelTable
    """
    x = _grid(height, min(height, cover) if cover else height, reach)
    pairs = ((0.0, 0.0), (thickness, thickness), (2 * thickness, 0.0))
    image = (eps_r - 1) / (eps_r + 1)
    rest, potential = [], []
    for s, d in pairs:
        twice, itself = _slab_images(x, s, height, image)
        if cover is not None:
            more_twice, more = _cover_part(x, s, d, height, image, cover)
            twice, itself = twice + more_twice, itself + more
        rest.append(_even_spline(x, twice))
        potential.append(_even_spline(x, itself))
    return KernelTable(
        image=image,
        thickness=thickness,
        covered=cover is not None,
        grid=x,
        rest=(rest[0], rest[1], rest[2]),
        potential=(potential[0], potential[1], potential[2]),
    )


def add_walls(kernel: KernelTable, spacing: float) -> KernelTable:
    """The same stack-up between two metal side walls.

    Parameters
    ----------
    kernel : KernelTable
        Without walls. An open one must reach over thirteen spacings, since potentials fall slowly there.
    spacing : float
        Between the walls. [m]

    Raises
    ------
    InputError
        If the table does not reach far enough.
    """
    needed = 2.02 * spacing if kernel.covered else 13 * spacing
    if not kernel.reach >= needed:
        raise InputError("add_walls", "reach", kernel.reach, f"must be at least {needed:.4g} m")
    sums = [_wall_sums(kernel, faces, spacing) for faces in range(3)]
    x = kernel.grid[: int(np.searchsorted(kernel.grid, spacing)) + 2]
    first, second, third = (
        _even_spline(x, spline(x) + apart(x)) for spline, (apart, _) in zip(kernel.rest, sums, strict=True)
    )
    low, mixed, high = (across for _, across in sums)
    return replace(kernel, grid=x, rest=(first, second, third), mirrored=(low, mixed, high))


def _even_spline(x: Floats, y: Floats) -> CubicSpline:
    """Spline of an even function given from zero upward."""
    return CubicSpline(x, y, bc_type=("clamped", "not-a-knot"))


def _grid(height: float, scale: float, reach: float) -> Floats:
    """Points from 0, even near the charge and spreading far from it."""
    step = scale / _PER_HEIGHT
    near = min(6 * height, reach)
    count = int(np.ceil(near / step)) + 2
    points = [*(step * np.arange(count))]
    growth = step
    while points[-1] < reach + growth:
        growth = min(growth * 1.04, height)
        points.append(points[-1] + growth)
    return np.asarray(points)


def _slab_images(x: Floats, s: float, height: float, image: float) -> tuple[Floats, Floats]:
    """Images below the slab, all but the one in its upper face: second antiderivative, and potential."""
    count = 1 if image == 0 else max(2, int(np.ceil(np.log(_IMAGE_TOLERANCE) / np.log(image))))
    n = np.arange(1, count + 1)
    strength = (1 - image**2) * (-image) ** (n - 1)
    depth = np.asarray(s + 2 * n * height, dtype=np.float64)
    twice = np.asarray(log_twice(x[:, None], depth[None, :]) @ strength, dtype=np.float64)
    potential = np.asarray(np.log(np.hypot(x[:, None], depth[None, :])) @ strength, dtype=np.float64)
    # the constant of the antiderivative drops out of every second difference
    return np.asarray(twice - twice[0]), potential


def _cover_part(
    x: Floats, s: float, d: float, height: float, image: float, cover: float
) -> tuple[Floats, Floats]:
    """What a cover adds, by quadrature over the wave number: second antiderivative, and potential."""
    top = 36.0 / (2 * cover - s)
    panels = max(8, int(np.ceil(top * x[-1] / 20)))
    node, weight = leggauss(16)
    edges = np.linspace(0, top, panels + 1)
    half = np.diff(edges) / 2
    k = (edges[:-1, None] + half[:, None] * (node + 1)).ravel()
    w = (half[:, None] * weight).ravel()
    slab = np.exp(-2 * k * height)
    reflection = -(image + slab) / (1 + image * slab)
    numerator = (
        np.exp(k * (s - 2 * cover))
        + reflection * (np.exp(k * (d - 2 * cover)) + np.exp(-k * (d + 2 * cover)))
        + reflection**2 * np.exp(-k * (s + 2 * cover))
    )
    spectrum = -numerator / (1 + reflection * np.exp(-2 * k * cover)) / k
    rise = 2 * np.sin(np.outer(x, k) / 2) ** 2
    weighted = w * spectrum
    return np.asarray(rise @ (weighted / k**2)), np.asarray((1 - rise) @ weighted)


def _wall_sums(kernel: KernelTable, faces: int, spacing: float) -> tuple[CubicSpline, CubicSpline]:
    """Second antiderivatives of the periodic images of two side walls.

    The first, of ``x - x'``, sums the copies at ``2 m A``, m not 0; the second, of ``x + x'``, all
    reflections.
    """
    s, d = kernel.heights[faces]
    potential, reach, image = kernel.potential[faces], kernel.reach, kernel.image
    copies = int(reach // (2 * spacing)) - 1

    def green(z: Floats) -> Floats:
        z = np.abs(z)
        total = potential(np.minimum(z, reach)) - np.log(np.hypot(z, d))
        if image:
            total += image * np.log(np.hypot(z, s))
        return np.asarray(np.where(z > reach, 0.0, total))

    apart = np.linspace(0, 1.05 * spacing, 161)
    sums = np.zeros_like(apart)
    for m in range(1, max(copies, 1) + 1):
        sums += green(apart + 2 * m * spacing) + green(apart - 2 * m * spacing)
    margin = spacing * 0.02
    across = np.linspace(margin, 2 * spacing - margin, 321)
    mirror = np.zeros_like(across)
    for m in range(-copies - 1, copies + 1):
        mirror += green(across + 2 * m * spacing)
    return _even_spline(apart, sums).antiderivative(2), CubicSpline(across, mirror).antiderivative(2)
