"""Stocked capacitances: preferred number series and the values made from them."""

from __future__ import annotations

__all__ = ["E12", "E24", "stocked"]

E12 = (10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82)
E24 = (10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91)

_EXPONENTS = (-14, -13, -12)  # decades that begin at 0.1, 1 and 10 pF


def stocked(series: str) -> tuple[float, ...]:
    """Capacitances that chips of a series are stocked in, from 0.1 to 100 pF.

    Parameters
    ----------
    series : str
        ``"E12"``, ``"E24"``, or ``"0.1 pF"``: steps of 0.1 pF up to 10 pF, then E24, since chips are
        not stocked in such steps above.

    Returns
    -------
    tuple of float
        Rising. [F]

    References
    ----------
    IEC 60063, "Preferred number series for resistors and capacitors".
    """
    if series == "0.1 pF":
        steps = [float(f"{n}e-13") for n in range(1, 101)]
        return (*steps, *(value for value in _decades(E24) if value > steps[-1]))
    return _decades({"E12": E12, "E24": E24}[series])


def _decades(values: tuple[int, ...]) -> tuple[float, ...]:
    return (*(float(f"{n}e{exponent}") for exponent in _EXPONENTS for n in values), 1e-10)
