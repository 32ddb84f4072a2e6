"""Low-pass prototypes: element values, ripple and return loss, a first estimate of the order.

Reference: G. L. Matthaei, L. Young, E. M. T. Jones, "Microwave Filters, Impedance-Matching Networks, and
Coupling Structures", McGraw-Hill, 1964, ch. 4.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from layoutgen.errors import InputError, require_inside

__all__ = [
    "butterworth_g",
    "chebyshev_g",
    "first_order_estimate",
    "return_loss_of_ripple",
    "ripple_factor",
    "ripple_of_return_loss",
]

Floats = NDArray[np.float64]


def ripple_of_return_loss(return_loss_db: float) -> float:
    """Pass-band ripple of a lossless filter whose worst return loss in the band is given. [dB]

    Raises
    ------
    InputError
        If the return loss is not between 0.1 and 60 dB.
    """
    require_inside("ripple_of_return_loss", "return_loss_db", return_loss_db, 0.1, 60)
    return float(-10 * np.log10(1 - 10 ** (-return_loss_db / 10)))


def return_loss_of_ripple(ripple_db: float) -> float:
    """Worst in-band return loss of a lossless filter of the given ripple, the inverse of the above. [dB]"""
    require_inside("return_loss_of_ripple", "ripple_db", ripple_db, 1e-6, 16)
    return float(-10 * np.log10(1 - 10 ** (-ripple_db / 10)))


def ripple_factor(return_loss_db: float) -> float:
    """Largest in-band ``|S11 / S21|`` at a given return loss. [1]"""
    require_inside("ripple_factor", "return_loss_db", return_loss_db, 0.1, 60)
    return float(1 / np.sqrt(10 ** (return_loss_db / 10) - 1))


def butterworth_g(order: int) -> Floats:
    """Element values g0 to g(n+1) of the maximally flat prototype, 3.01 dB at unit frequency.

    Parameters
    ----------
    order : int
        1 to 20.

    Returns
    -------
    ndarray, shape (order + 2,)

    References
    ----------
    Matthaei, Young, Jones 1964, sec. 4.05.
    """
    _check_order(order)
    k = np.arange(1, order + 1)
    return np.concatenate([[1.0], 2 * np.sin((2 * k - 1) * np.pi / (2 * order)), [1.0]])


def chebyshev_g(order: int, ripple_db: float) -> Floats:
    """Element values g0 to g(n+1) of the equal-ripple prototype, ripple level at unit frequency.

    Parameters
    ----------
    order : int
        1 to 20.
    ripple_db : float
        Greater than 0. [dB]

    Returns
    -------
    ndarray, shape (order + 2,)
        The last one differs from 1 for even order.

    References
    ----------
    Matthaei, Young, Jones 1964, eqs. 4.05-2.
    """
    _check_order(order)
    require_inside("chebyshev_g", "ripple_db", ripple_db, 1e-6, 16)
    beta = np.log(1 / np.tanh(ripple_db * np.log(10) / 40))
    gamma = np.sinh(beta / (2 * order))
    k = np.arange(1, order + 1)
    a = np.sin((2 * k - 1) * np.pi / (2 * order))
    b = gamma**2 + np.sin(k * np.pi / order) ** 2
    g = np.empty(order + 2)
    g[0], g[1] = 1.0, 2 * a[0] / gamma
    for i in range(2, order + 1):
        g[i] = 4 * a[i - 2] * a[i - 1] / (b[i - 2] * g[i - 1])
    g[order + 1] = 1.0 if order % 2 else 1 / np.tanh(beta / 4) ** 2
    return g


def first_order_estimate(
    *, rejection_db: float, normalised_frequency: float, return_loss_db: float | None
) -> float:
    """Order, as a real number, at which a prototype just reaches a rejection.

    Parameters
    ----------
    rejection_db : float
        Greater than 0. [dB]
    normalised_frequency : float
        Low-pass frequency of the stop-band edge, above 1. [1]
    return_loss_db : float or None
        In-band return loss of an equal-ripple prototype; None for the maximally flat one. [dB]

    References
    ----------
    Matthaei, Young, Jones 1964, sec. 4.03.
    """
    require_inside("first_order_estimate", "normalised_frequency", normalised_frequency, 1 + 1e-9, 1e9)
    excess = np.sqrt(10 ** (rejection_db / 10) - 1)
    if return_loss_db is None:
        return float(np.log(excess) / np.log(normalised_frequency))
    ratio = excess / ripple_factor(return_loss_db)
    return float(np.arccosh(max(ratio, 1.0)) / np.arccosh(normalised_frequency))


def _check_order(order: int) -> None:
    if not 1 <= order <= 20:
        raise InputError("prototype", "order", order, "must be from 1 to 20")
