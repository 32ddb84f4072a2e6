"""A chip capacitor mounted from the end of a strip to a grounded pad: what its path adds.

The path is counted once: the drawn copper, the body as a flat conductor at the true height of its
current, and only then the residual inductance of the part. Neighbouring chips are coupled by the fields
of their paths over the ground plane.

References
----------
F. W. Grover, "Inductance Calculations", Van Nostrand, 1946 (parallel conductors over a plane by images).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from layoutgen.constants import SPEED_OF_LIGHT, VACUUM_PERMEABILITY
from layoutgen.lines.microstrip import air_impedance

__all__ = ["body_capacitance", "path_inductance"]

Floats = NDArray[np.float64]


def path_inductance(
    *, centres: ArrayLike, widths: ArrayLike, heights: ArrayLike, lengths: ArrayLike
) -> Floats:
    """Inductance matrix of parallel flat conductors above the ground plane, side by side.

    Parameters
    ----------
    centres : array_like, shape (n,)
        Of the conductors. [m]
    widths, heights, lengths : array_like, broadcast to shape (n,)
        Of each; the height is that of the current above the ground plane. [m]

    Returns
    -------
    ndarray, shape (n, n)
        Per-unit-length inductance, of thin conductors for the own and of filaments for the mutual terms,
        times the length, which for two of them is the shorter one. [H]
    """
    x = np.asarray(centres, dtype=float)
    width, height, length = (
        np.broadcast_to(np.asarray(v, float), x.shape) for v in (widths, heights, lengths)
    )
    apart = np.square(x[:, None] - x[None, :])
    over, under = (np.square(np.add.outer(height, sign * height)) for sign in (1, -1))
    with np.errstate(divide="ignore"):
        per_metre = VACUUM_PERMEABILITY / (4 * np.pi) * np.log((apart + over) / (apart + under))
    np.fill_diagonal(per_metre, air_impedance(width / height) / SPEED_OF_LIGHT)
    result: Floats = per_metre * np.minimum.outer(length, length)
    return result


def body_capacitance(*, width: float, height: float, slab: float, eps_r: float, length: float) -> float:
    """Capacitance to ground of a chip's body at the height of its current. [F]

    Parameters
    ----------
    width, height, length : float
        Of the body's conductor, the height above the ground plane. [m]
    slab : float
        Thickness of the dielectric below it. [m]
    eps_r : float
        Of the dielectric. [1]

    Notes
    -----
    The strip's capacitance in air, raised by the ratio that a parallel plate over the same two layers has. An
    estimate: half of it appears at the strip's end, a few hundredths of a picofarad.
    """
    in_air = 1 / (SPEED_OF_LIGHT * float(air_impedance(width / height)))
    layered = height / (height - slab + slab / eps_r)
    return in_air * layered * length
