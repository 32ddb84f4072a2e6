"""Green's function of a line charge on a grounded slab, integrated twice for panels.

The potential at height ``u`` above the slab of a unit line charge at height ``v`` is ``G / (2 pi eps0)`` with

    G(x) = integral over k from 0 of  cos(kx) / k *
           [e^-kd + R e^-ks - e^-2kc (e^ks + R e^kd)] / (1 + R e^-2kc),

    d = |u - v|, s = u + v,  R = -(K + e^-2kh) / (1 + K e^-2kh),  K = (eps_r - 1) / (eps_r + 1),

c being the height of the cover. The two logarithms that are singular on a strip (the charge itself and its image
in the upper face of the slab, of strength -K) are integrated in closed form where panels are; this module holds
the smooth rest, tabulated along x.

References
----------
P. Silvester, "TEM wave properties of microstrip transmission lines", Proc. IEE 115, 1968 (images of the slab).
R. E. Collin, "Field Theory of Guided Waves", 2nd ed., IEEE Press, 1991, ch. 4 (transform of the layered
problem). The expressions above were derived anew for a charge in the air region; the tests compare them with
independent solutions.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.polynomial.legendre import leggauss
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline

__all__ = ["KernelTable", "build_kernel", "log_twice"]

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
    reach : float
        Largest distance along x that the tables cover. [m]
    rest : tuple of three splines
        Second antiderivative along x of the smooth rest, for the face pairs 00, 01 and 11. [m^2]
    mirrored : tuple of three splines or None
        The same for the strips' reflections in side walls, as functions of ``x + x'``, x from the left wall.
    """

    image: float
    thickness: float
    reach: float
    rest: tuple[CubicSpline, CubicSpline, CubicSpline]
    mirrored: tuple[CubicSpline, CubicSpline, CubicSpline] | None


def log_twice(x: Floats, y: Floats | float) -> Floats:
    """Second antiderivative in x of ``ln sqrt(x^2 + y^2)``, even in x and y. [m^2]"""
    square = x * x + np.square(y)
    with np.errstate(divide="ignore", invalid="ignore"):
        logarithm = np.where(square > 0, np.log(np.where(square > 0, square, 1.0)), 0.0)
        slope = 2 * x * np.abs(y) * np.arctan2(np.abs(x), np.abs(y)) * np.sign(x)
    result: Floats = 0.25 * (x * x - np.square(y)) * logarithm - 0.75 * x * x + 0.5 * slope
    return result


def build_kernel(
    *,
    height: float,
    eps_r: float,
    thickness: float,
    cover: float | None,
    wall_spacing: float | None,
    reach: float,
) -> KernelTable:
    """Tabulate the smooth part of the Green's function of one stack-up.

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
    wall_spacing : float or None
        Distance between two metal side walls. [m]
    reach : float
        Largest distance along x that will be asked for. [m]

    Returns
    -------
    KernelTable
    """
    x = _grid(height, min(height, cover) if cover else height, reach)
    pairs = ((0.0, 0.0), (thickness, thickness), (2 * thickness, 0.0))  # (s, d) of 00, 01, 11
    image = (eps_r - 1) / (eps_r + 1)
    rest = [_slab_images(x, s, height, image) for s, _ in pairs]
    if cover is not None:
        rest = [r + _cover_part(x, s, d, height, image, cover) for r, (s, d) in zip(rest, pairs, strict=True)]
    mirrored = None
    if wall_spacing is not None:
        rows = [_wall_sums(rest[i], x, s, d, image, wall_spacing) for i, (s, d) in enumerate(pairs)]
        rest = [r + row[0](x) for r, row in zip(rest, rows, strict=True)]
        a, b, c = (row[1] for row in rows)
        mirrored = (a, b, c)
    first, second, third = (CubicSpline(x, r, bc_type=((1, 0.0), "not-a-knot")) for r in rest)
    return KernelTable(image=image, thickness=thickness, reach=reach, rest=(first, second, third),
                       mirrored=mirrored)


def _grid(height: float, scale: float, reach: float) -> Floats:
    """Points from 0, even near the charge and spreading far from it."""
    near = 6 * height
    step = scale / _PER_HEIGHT
    if reach <= near:
        return np.arange(0, reach + 2 * step, step)
    steps = [*np.arange(0, near, step)]
    position, growth = near, step
    while position < reach + growth:
        steps.append(position)
        growth = min(growth * 1.04, height)
        position += growth
    steps.append(position)
    return np.asarray(steps)


def _slab_images(x: Floats, s: float, height: float, image: float) -> Floats:
    """Second antiderivative of the images below the slab, all but the one in its upper face."""
    count = 1 if image == 0 else max(2, int(np.ceil(np.log(_IMAGE_TOLERANCE) / np.log(image))))
    n = np.arange(1, count + 1)
    strength = (1 - image**2) * (-image) ** (n - 1)
    depth = s + 2 * n * height
    result: Floats = log_twice(x[:, None], depth[None, :]) @ strength
    # a constant and the reference of the antiderivative drop out of every second difference
    return result - result[0]


def _cover_part(
    x: Floats, s: float, d: float, height: float, image: float, cover: float
) -> Floats:
    """Second antiderivative of what a cover adds, by quadrature over the wave number."""
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
    result: Floats = (2 * np.sin(np.outer(x, k) / 2) ** 2) @ (w * spectrum / k**2)
    return result


def _wall_sums(
    rest: Floats, x: Floats, s: float, d: float, image: float, spacing: float
) -> tuple[CubicSpline, CubicSpline]:
    """Second antiderivatives of the periodic images of two side walls.

    The first, of ``x - x'``, sums the copies at ``2 m A``, m not 0; the second, of ``x + x'``, all reflections.
    """
    potential = CubicSpline(x, rest, bc_type=((1, 0.0), "not-a-knot")).derivative(2)
    reach = x[-1]
    copies = int(reach // (2 * spacing)) - 1

    def green(z: Floats) -> Floats:
        z = np.abs(z)
        near = -np.log(np.hypot(z, d)) + image * np.log(np.hypot(z, s)) if image else -np.log(np.hypot(z, d))
        total: Floats = near + potential(np.minimum(z, reach))
        return total

    apart = np.linspace(0, spacing, 161)
    sums = sum((green(apart + 2 * m * spacing) + green(apart - 2 * m * spacing) for m in range(1, copies + 1)),
               np.zeros_like(apart))
    margin = spacing * 0.02
    across = np.linspace(margin, 2 * spacing - margin, 321)
    mirror = sum((green(across + 2 * m * spacing) for m in range(-copies - 1, copies + 1)), np.zeros_like(across))
    even = CubicSpline(apart, sums, bc_type=((1, 0.0), "not-a-knot")).antiderivative(2)
    return even, CubicSpline(across, mirror).antiderivative(2)
