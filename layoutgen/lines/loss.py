"""Skin effect, roughness and the resistance matrix of coupled strips."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from layoutgen.constants import VACUUM_PERMEABILITY

__all__ = ["roughness_factor", "skin_depth", "surface_resistance"]

Floats = NDArray[np.float64]


def skin_depth(frequency: ArrayLike, conductivity: float) -> Floats:
    """Depth at which the current density has fallen to 1/e. [m]

    Parameters
    ----------
    frequency : array_like
        Greater than 0. [Hz]
    conductivity : float
        Of the conductor. [S/m]
    """
    f = np.asarray(frequency, dtype=float)
    result: Floats = 1 / np.sqrt(np.pi * f * VACUUM_PERMEABILITY * conductivity)
    return result


def roughness_factor(frequency: ArrayLike, *, roughness: float, conductivity: float) -> Floats:
    """Ratio by which roughness raises the surface resistance, from 1 to 2. [1]

    Parameters
    ----------
    frequency : array_like
        Greater than 0. [Hz]
    roughness : float
        Root-mean-square height. [m]
    conductivity : float
        Of the conductor. [S/m]

    References
    ----------
    E. Hammerstad, O. Jensen, "Accurate models for microstrip computer-aided design", IEEE MTT-S International
    Microwave Symposium Digest, 1980 (a fit to S. P. Morgan, J. Applied Physics 20, 1949).
    """
    ratio = roughness / skin_depth(frequency, conductivity)
    result: Floats = 1 + 2 / np.pi * np.arctan(1.4 * ratio**2)
    return result


def surface_resistance(frequency: ArrayLike, *, conductivity: float, roughness: float) -> Floats:
    """Surface resistance of a rough conductor much thicker than the skin depth. [ohm]

    Parameters are those of `roughness_factor`.
    """
    smooth = 1 / (conductivity * skin_depth(frequency, conductivity))
    result: Floats = smooth * roughness_factor(frequency, roughness=roughness, conductivity=conductivity)
    return result
