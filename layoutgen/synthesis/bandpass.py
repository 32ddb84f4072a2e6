"""Band-pass transformation: coupling coefficients, external Q, and the ideal lumped ladder.

References
----------
S. B. Cohn, "Direct-coupled-resonator filters", Proc. IRE 45, 1957. G. L. Matthaei, L. Young, E. M. T.
Jones, "Microwave Filters, Impedance-Matching Networks, and Coupling Structures", McGraw-Hill, 1964, sec.
8.02.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from layoutgen.errors import InputError

__all__ = ["Couplings", "couplings", "ladder_response", "normalised_frequency"]

Floats = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True)
class Couplings:
    """What a chain of resonators must have to realise a prototype.

    Attributes
    ----------
    k : tuple of float
        Coupling coefficients between neighbours. [1]
    external_q_in, external_q_out : float
        External Q of the first and the last resonator. [1]
    """

    k: tuple[float, ...]
    external_q_in: float
    external_q_out: float


def couplings(g: ArrayLike, fractional_bandwidth: float) -> Couplings:
    """Coupling coefficients and external Q of a band-pass chain.

    Parameters
    ----------
    g : array_like, shape (n + 2,)
        Prototype values g0 to g(n+1).
    fractional_bandwidth : float
        Bandwidth over the geometric mean of the band edges. [1]
    """
    values = np.asarray(g, dtype=float)
    if not 0 < fractional_bandwidth < 1:
        raise InputError(
            "couplings", "fractional_bandwidth", fractional_bandwidth, "must lie between 0 and 1"
        )
    inner = values[1:-1]
    k = fractional_bandwidth / np.sqrt(inner[:-1] * inner[1:])
    return Couplings(
        k=tuple(float(v) for v in k),
        external_q_in=float(values[0] * values[1] / fractional_bandwidth),
        external_q_out=float(values[-2] * values[-1] / fractional_bandwidth),
    )


def normalised_frequency(frequency: ArrayLike, *, lower: float, upper: float) -> Floats:
    """Low-pass frequency of the band-pass mapping, -1 and +1 at the band edges. [1]

    Parameters
    ----------
    frequency : array_like
        Greater than 0. [Hz]
    lower, upper : float
        Band edges. [Hz]
    """
    f = np.asarray(frequency, dtype=float)
    result: Floats = (f * f - lower * upper) / (f * (upper - lower))
    return result


def ladder_response(
    frequency: ArrayLike, g: ArrayLike, *, lower: float, upper: float, unloaded_q: float = np.inf
) -> NDArray[np.complex128]:
    """S-parameters of the ideal lumped band-pass ladder between its matched terminations.

    Parameters
    ----------
    frequency : array_like, shape (n_freq,)
        [Hz]
    g : array_like, shape (n + 2,)
        Prototype values; g1 is a shunt element.
    lower, upper : float
        Band edges. [Hz]
    unloaded_q : float
        Of every resonator, at its resonance. [1]

    Returns
    -------
    ndarray, shape (n_freq, 2, 2)
        Referred to the ladder's own terminations g0 and g(n+1).
    """
    values = np.asarray(g, dtype=float)
    f = np.atleast_1d(np.asarray(frequency, dtype=float))
    fractional = (upper - lower) / np.sqrt(lower * upper)
    s = 1j * normalised_frequency(f, lower=lower, upper=upper) + 1 / (fractional * unloaded_q)
    a, b, c, d = np.ones_like(s), np.zeros_like(s), np.zeros_like(s), np.ones_like(s)
    for i, value in enumerate(values[1:-1]):
        if i % 2 == 0:
            a, c = a + b * value * s, c + d * value * s
        else:
            b, d = b + a * value * s, d + c * value * s
    source = values[0]
    load = values[-1] if len(values) % 2 else 1 / values[-1]
    total = a * load + b + c * source * load + d * source
    result = np.empty((len(f), 2, 2), dtype=complex)
    result[:, 0, 0] = (a * load + b - c * source * load - d * source) / total
    result[:, 1, 1] = (-a * load + b - c * source * load + d * source) / total
    result[:, 0, 1] = result[:, 1, 0] = 2 * np.sqrt(source * load) / total
    return result
