"""Coordinates on a grid, and rings without idle corners."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import ArrayLike, NDArray
from shapely.geometry.base import BaseGeometry

from layoutgen.geometry.artwork import Polygon, Ring

__all__ = ["Grid"]

_TIE = 1e-6
"""A coordinate this near to the middle between two grid points, in steps, is a tie."""

_DECIMALS = 9
"""Picometres: makes equal coordinates the same float, whatever sum they came from."""


@dataclass(frozen=True, slots=True)
class Grid:
    """Steps of all coordinates.

    Attributes
    ----------
    step : float
        [mm]
    """

    step: float

    def snap(self, values: ArrayLike) -> NDArray[np.float64]:
        """Nearest grid points, ties away from zero, each as the float its decimal figure stands for."""
        values = np.asarray(values, dtype=float)
        counts = np.floor(np.abs(values) / self.step + 0.5 + _TIE)
        snapped: NDArray[np.float64] = np.round(np.sign(values) * counts * self.step, _DECIMALS) + 0.0
        return snapped

    def number(self, value: float) -> float:
        """One coordinate or length on the grid."""
        return float(self.snap(value))

    def box(self, x_min: float, y_min: float, x_max: float, y_max: float) -> shapely.Polygon:
        """Rectangle with its corners on the grid."""
        return shapely.box(*self.snap((x_min, y_min, x_max, y_max)).tolist())

    def disc(self, centre: tuple[float, float], diameter: float) -> shapely.Polygon:
        """Polygon around a circle's area, for clearing copper, with its corners on the grid."""
        return shapely.transform(shapely.Point(centre).buffer(diameter / 2, quad_segs=16), self.snap)

    def polygons(self, area: BaseGeometry) -> tuple[Polygon, ...]:
        """Every connected part of an area, from the lower left one on, with its corners on the grid."""
        parts = [part for part in shapely.get_parts(shapely.get_parts(area)) if part.area > 0]
        return tuple(sorted((self._polygon(part) for part in parts), key=lambda shape: shape.exterior))

    def _polygon(self, part: shapely.Polygon) -> Polygon:
        holes = (self._ring(hole.coords, clockwise=True) for hole in part.interiors)
        return Polygon(self._ring(part.exterior.coords, clockwise=False), tuple(sorted(holes)))

    def _ring(self, points: Iterable[tuple[float, float]], *, clockwise: bool) -> Ring:
        """Ring in the given sense without duplicate and collinear corners, from its lower left one on."""
        counts = np.rint(self.snap(list(points)) / self.step).astype(np.int64)
        counts = _corners(counts[:-1])
        x, y = counts.T
        if (np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y) < 0) != clockwise:
            counts = counts[::-1]
        first = int(np.lexsort((counts[:, 1], counts[:, 0]))[0])
        ring = self.snap(np.roll(counts, -first, axis=0) * self.step)
        return tuple((float(x), float(y)) for x, y in ring)


def _corners(counts: NDArray[np.int64]) -> NDArray[np.int64]:
    """Points of a closed ring at which it turns; whole numbers, so that the test is exact."""
    while True:
        counts = counts[np.any(counts != np.roll(counts, 1, axis=0), axis=1)]
        before, after = counts - np.roll(counts, 1, axis=0), np.roll(counts, -1, axis=0) - counts
        turns = before[:, 0] * after[:, 1] != before[:, 1] * after[:, 0]
        if turns.all():
            return counts
        counts = counts[turns]
