"""Touchstone 1.1 for two ports: hertz, real and imaginary parts, S11 S21 S12 S22 in a line."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

import numpy as np
from numpy.typing import ArrayLike, NDArray

from layoutgen.errors import InputError

__all__ = ["write"]


def write(frequency_hz: ArrayLike, s: ArrayLike, path: Path, *, impedance: float,
          comments: Sequence[str] = ()) -> None:
    """Write scattering parameters of a two-port.

    Parameters
    ----------
    frequency_hz : array_like, shape (n,)
        Rising. [Hz]
    s : array_like, shape (n, 2, 2)
        Complex scattering parameters. [1]
    path : Path
        File to be made or replaced.
    impedance : float
        Reference impedance of both ports. [ohm]
    comments : sequence of str
        Lines for the head of the file; ASCII.

    Raises
    ------
    InputError
        If shapes disagree, frequencies do not rise, values are not finite, or a comment is no single ASCII
        line.
    """
    frequency = np.asarray(frequency_hz, dtype=float)
    values = np.asarray(s, dtype=complex)
    _check(frequency, values, impedance, comments)
    lines = [f"! {comment}".rstrip() for comment in comments]
    lines.append(f"# Hz S RI R {impedance:.12g}")
    # adding zero turns a minus zero into a plain one
    in_order = np.stack([values[:, 0, 0], values[:, 1, 0], values[:, 0, 1], values[:, 1, 1]], axis=1)
    numbers = np.ascontiguousarray(in_order).view(float) + 0.0
    for hertz, row in zip(frequency.tolist(), numbers.tolist(), strict=True):
        lines.append(f"{hertz:.15g} " + " ".join(f"{number:.12e}" for number in row))
    path.write_bytes(("\n".join(lines) + "\n").encode("ascii"))


def _check(frequency: NDArray[np.float64], values: NDArray[np.complex128], impedance: float,
           comments: Sequence[str]) -> None:
    def require(holds: bool, key: str, got: object, remedy: str) -> None:
        if not holds:
            raise InputError("touchstone.write", key, got, remedy)

    require(frequency.ndim == 1, "frequency_hz", f"shape {frequency.shape}", "must have one axis")
    require(values.shape == (*frequency.shape, 2, 2), "s", f"shape {values.shape}",
            f"must have the shape {(*frequency.shape, 2, 2)}")
    rising = np.all(np.isfinite(frequency)) and np.all(frequency >= 0) and np.all(np.diff(frequency) > 0)
    require(bool(rising), "frequency_hz", None, "must be finite, not negative and rising")
    require(bool(np.all(np.isfinite(values))), "s", None, "must be finite")
    require(impedance > 0, "impedance", impedance, "must be greater than 0")
    for comment in comments:
        require(comment.isascii() and "\n" not in comment and "\r" not in comment, "comments", comment,
                "must be one line of ASCII")
