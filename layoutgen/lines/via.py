"""Vias to the ground plane at the end of a strip: self and mutual inductance, resistance.

A via carries its current down at the end of a strip whose own inductance is counted, per unit length, as
if the strip went on for ever. What the end adds is the partial inductance of the via over its image in
the ground plane, less what the strip's missing half would have contributed. Both integrals are
Neumann's, in closed form:

    vertical    (mu0/4 pi) [2h asinh(2h/d) - sqrt(4h^2 + d^2) + d]
    strip end   (mu0/4 pi) [sqrt(4h^2 + e^2) - e]

with d the distance between two vias (the radius for one and the same), e that between two strips' centre
lines (for one and the same strip the geometric mean distance of a tape, 0.2235 of its width). Between
distant resonators the two nearly cancel: the end effect falls with the cube of the distance, not with
the distance.

References
----------
F. W. Grover, "Inductance Calculations", Van Nostrand, 1946, ch. 2 and 3 (filaments, geometric mean
distances). M. E. Goldfarb, R. A. Pucel, "Modeling via hole grounds in microstrip", IEEE Microwave and
Guided Wave Letters 1, 1991, pp. 135-137 (an empirical fit for one via, which the model is compared
with).
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray

from layoutgen.constants import VACUUM_PERMEABILITY
from layoutgen.errors import InputError, require_inside

__all__ = ["goldfarb_pucel_inductance", "grounded_ends_inductance", "via_resistance"]

Floats = NDArray[np.float64]

_TAPE_MEAN_DISTANCE = np.exp(-1.5)
"""Geometric mean distance of a tape from itself over its width (Grover 1946)."""


def grounded_ends_inductance(
    *,
    positions: Sequence[Sequence[float]],
    radii: Sequence[float],
    strip_centres: ArrayLike,
    strip_widths: ArrayLike,
    height: float,
) -> Floats:
    """Inductance matrix of the grounded ends of n parallel strips, vias of each strip in parallel.

    Parameters
    ----------
    positions : sequence of n sequences of float
        x of each strip's vias, which stand in one row across it. [m]
    radii : sequence of n floats
        Outer radius of the vias' barrels, strip by strip. [m]
    strip_centres, strip_widths : array_like, shape (n,)
        Of the strips. [m]
    height : float
        Slab thickness. [m]

    Returns
    -------
    ndarray, shape (n, n)
        Inductance from the strips, at the axis of the vias, to ground. [H]

    Raises
    ------
    InputError
        If vias overlap or a strip has none.

    Notes
    -----
    One via under a strip as narrow as itself agrees with the fit of Goldfarb and Pucel within 12 % over
    its range, while the hole is not wider than deep; wider ones come out lower than the fit.
    """
    where = "grounded_ends_inductance"
    x = np.concatenate([np.asarray(group, dtype=float) for group in positions])
    owner = np.repeat(np.arange(len(positions)), [len(group) for group in positions])
    if len(set(owner.tolist())) != len(positions):
        raise InputError(where, "positions", None, "each strip needs at least one via")
    radius = np.asarray(radii, dtype=float)[owner]
    apart = np.abs(x[:, None] - x[None, :])
    touching = apart < radius[:, None] + radius[None, :]
    np.fill_diagonal(touching, False)
    if touching.any():
        raise InputError(where, "positions", x.tolist(), "vias overlap; the pitch must exceed the drill")
    distance = apart + np.diag(radius)
    partial = _vertical(distance, height)
    held = (owner[:, None] == np.arange(len(positions))[None, :]).astype(float)
    vertical = np.linalg.inv(held.T @ np.linalg.solve(partial, held))
    centres, widths = np.asarray(strip_centres, float), np.asarray(strip_widths, float)
    spacing = np.abs(centres[:, None] - centres[None, :]) + np.diag(_TAPE_MEAN_DISTANCE * widths)
    result: Floats = vertical - _strip_end(spacing, height)
    return (result + result.T) / 2


def _vertical(distance: Floats, height: float) -> Floats:
    d, span = distance, 2 * height
    result: Floats = VACUUM_PERMEABILITY / (4 * np.pi) * (span * np.arcsinh(span / d) - np.hypot(span, d) + d)
    return result


def _strip_end(spacing: Floats, height: float) -> Floats:
    result: Floats = VACUUM_PERMEABILITY / (4 * np.pi) * (np.hypot(2 * height, spacing) - spacing)
    return result


def goldfarb_pucel_inductance(*, height: ArrayLike, radius: ArrayLike) -> Floats:
    """Inductance of one via to ground by the published fit. [H]

    Parameters
    ----------
    height : array_like
        Slab thickness, 0.1 to 0.631 mm as the authors state. [m]
    radius : array_like
        Of the hole. [m]

    Raises
    ------
    InputError
        If the height is outside the fit's range.

    References
    ----------
    Goldfarb and Pucel 1991, eq. 3.
    """
    h, r = np.asarray(height, float), np.asarray(radius, float)
    require_inside("goldfarb_pucel_inductance", "height", h, 100e-6, 631e-6)
    reach = np.hypot(r, h)
    result: Floats = VACUUM_PERMEABILITY / (2 * np.pi) * (h * np.log((h + reach) / r) + 1.5 * (r - reach))
    return result


def via_resistance(
    frequency: ArrayLike, *, height: float, radius: float, plating: float, conductivity: float
) -> Floats:
    """Resistance of one plated barrel. [ohm]

    Parameters
    ----------
    frequency : array_like
        At least 0. [Hz]
    height, radius, plating : float
        Slab thickness, outer radius of the barrel, thickness of its wall. [m]
    conductivity : float
        Of the plating. [S/m]

    References
    ----------
    Goldfarb and Pucel 1991: the direct-current resistance times sqrt(1 + f / f_d),
    ``f_d = 1 / (pi mu0 sigma plating^2)``.
    """
    f = np.asarray(frequency, dtype=float)
    section = np.pi * (radius**2 - (radius - plating) ** 2)
    corner = 1 / (np.pi * VACUUM_PERMEABILITY * conductivity * plating**2)
    result: Floats = height / (conductivity * section) * np.sqrt(1 + f / corner)
    return result
