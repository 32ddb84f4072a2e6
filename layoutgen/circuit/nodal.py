"""A nodal admittance matrix over frequency: filled block by block, then seen from a few nodes."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["NodalMatrix"]

Complexes = NDArray[np.complex128]
Indices = Sequence[int] | NDArray[np.int64]


class NodalMatrix:
    """Admittances between nodes, at many frequencies.

    Parameters
    ----------
    frequencies : int
        How many.
    nodes : int
        How many.
    lossless : bool
        True when all admittances are imaginary: they are then kept and solved as real numbers.
    """

    def __init__(self, frequencies: int, nodes: int, *, lossless: bool) -> None:
        self._lossless = lossless
        self._values: NDArray[Any] = np.zeros(
            (frequencies, nodes, nodes), dtype=float if lossless else complex
        )

    def add_block(self, rows: Indices, columns: Indices, block: NDArray[Any]) -> None:
        """Add a block of admittances, shape (n_freq, rows, columns). [S]"""
        self._put(rows, columns, self._part(block))

    def add_susceptances(self, rows: Indices, columns: Indices, block: NDArray[np.float64]) -> None:
        """Add a block of lossless admittances by their imaginary parts, shape (n_freq, rows, columns). [S]"""
        self._put(rows, columns, block if self._lossless else 1j * block)

    def _put(self, rows: Indices, columns: Indices, value: NDArray[Any]) -> None:
        """Neighbouring nodes take the fast way, a view."""
        a, b = np.asarray(rows), np.asarray(columns)
        if (np.diff(a) == 1).all() and (np.diff(b) == 1).all():
            self._values[:, a[0] : a[-1] + 1, b[0] : b[-1] + 1] += value
        else:
            self._values[:, a[:, None], b[None, :]] += value

    def add_to_ground(self, node: int, admittance: NDArray[Any] | complex) -> None:
        """Add an admittance between a node and ground. [S]"""
        self._values[:, node, node] += self._part(admittance)

    def add_between(self, a: int, b: int, admittance: NDArray[Any]) -> None:
        """Add an admittance between two nodes. [S]"""
        value = self._part(admittance)
        for node in (a, b):
            self._values[:, node, node] += value
        self._values[:, a, b] -= value
        self._values[:, b, a] -= value

    def seen_from(self, nodes: Sequence[int]) -> Complexes:
        """Admittances seen from some nodes, the others left open; defined at a resonance too. [S]"""
        kept = np.asarray(nodes)
        rest = np.setdiff1d(np.arange(self._values.shape[1]), kept)
        if rest[-1] - rest[0] == len(rest) - 1:
            inner = self._values[:, rest[0] : rest[-1] + 1, rest[0] : rest[-1] + 1]
        else:
            inner = self._values[:, rest[:, None], rest[None, :]]
        to_kept = np.linalg.solve(inner, self._values[:, rest[:, None], kept[None, :]])
        seen = self._values[:, kept[:, None], kept[None, :]]
        seen = seen - self._values[:, kept[:, None], rest[None, :]] @ to_kept
        return np.asarray(1j * seen if self._lossless else seen, dtype=np.complex128)

    def _part(self, value: NDArray[Any] | complex) -> NDArray[Any]:
        return np.imag(value) if self._lossless else np.asarray(value)
