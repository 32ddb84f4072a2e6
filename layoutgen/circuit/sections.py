"""The comb cut into uniform sections of coupled line, and their modes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from layoutgen.comb import Comb, Stack
from layoutgen.lines import LineSolver, LossMatrices, Modes, StripMatrices

__all__ = ["Section", "SectionSolver", "cut_into_sections"]

Floats = NDArray[np.float64]

_SAME = 1e-10
"""Dimensions closer than this are one. [m]"""


@dataclass(frozen=True, kw_only=True)
class Section:
    """A uniform piece of the comb between two planes.

    Attributes
    ----------
    bottom, top : float
        Heights of the planes above the axis of the shorting vias. [m]
    strips : tuple of int
        Resonators present.
    widths : tuple of float
        Of these. [m]
    """

    bottom: float
    top: float
    strips: tuple[int, ...]
    widths: tuple[float, ...]

    @property
    def length(self) -> float:
        """Along the resonators. [m]"""
        return self.top - self.bottom


def cut_into_sections(comb: Comb, strips: Sequence[int]) -> list[Section]:
    """Sections from the shorts upward, cut wherever a width changes, a line ends, a tap or a chip attaches.

    Parameters
    ----------
    comb : Comb
    strips : sequence of int
        Resonators that are present; the others are left out.
    """
    planes = {0.0}
    for i in strips:
        resonator = comb.resonators[i]
        height = 0.0
        for segment in resonator.segments:
            height += segment.length
            planes.add(height)
        planes.add(resonator.load_position)
    planes |= {feed.tap for feed in comb.feeds if feed.resonator in strips}
    heights = _merged(sorted(planes))
    sections = []
    for bottom, top in pairwise(heights):
        middle = (bottom + top) / 2
        present = [i for i in strips if comb.resonators[i].length > middle]
        widths = tuple(comb.resonators[i].width_at(middle) for i in present)
        sections.append(Section(bottom=bottom, top=top, strips=tuple(present), widths=widths))
    return sections


def _merged(heights: list[float]) -> list[float]:
    merged = heights[:1]
    for height in heights[1:]:
        if height - merged[-1] > _SAME:
            merged.append(height)
    return merged


class SectionSolver:
    """Matrices of sections on one stack-up; what has been solved is kept for the next comb that shares it.

    Parameters
    ----------
    stack : Stack
    reach : float
        Greatest width of a comb, or of its board under a cover, that will be asked for. [m]
    """

    def __init__(self, stack: Stack, reach: float) -> None:
        self.stack = stack
        self._solver = LineSolver(
            height=stack.height,
            eps_r=stack.eps_r,
            thickness=stack.conductor,
            cover=stack.cover,
            reach=reach,
        )
        self._matrices: dict[object, tuple[StripMatrices, Modes]] = {}
        self._losses: dict[object, LossMatrices] = {}
        self._single: dict[float, tuple[Modes, LossMatrices]] = {}

    def modes(self, comb: Comb, sections: Sequence[Section]) -> list[tuple[StripMatrices, Modes]]:
        """Matrices and modes of each section."""
        return [self._matrices[key] for key in self._solve(comb, sections, with_losses=False)]

    def losses(self, comb: Comb, sections: Sequence[Section]) -> list[LossMatrices]:
        """Loss matrices of each section."""
        return [self._losses[key] for key in self._solve(comb, sections, with_losses=True)]

    def single(self, width: float) -> tuple[Modes, LossMatrices]:
        """An isolated strip without side walls."""
        if width not in self._single:
            matrices = self._solver.matrices([0.0], [width], [[0]])[0]
            self._single[width] = matrices.modes(), self._solver.losses([0.0], [width], [[0]])[0]
        return self._single[width]

    def _solve(self, comb: Comb, sections: Sequence[Section], *, with_losses: bool) -> list[object]:
        """Keys of the sections' results; solves the new ones, those that share panels at once."""
        x = np.array([resonator.x for resonator in comb.resonators])
        keys = [_key(comb, section, x) for section in sections]
        known: dict[object, object] = dict(self._losses if with_losses else self._matrices)
        new: dict[object, Section] = {k: s for k, s in zip(keys, sections, strict=True) if k not in known}
        while new:
            widest = max(new.values(), key=lambda section: len(section.strips))
            width_of = dict(zip(widest.strips, widest.widths, strict=True))
            shared = {
                k: s
                for k, s in new.items()
                if all(width_of.get(i) == w for i, w in zip(s.strips, s.widths, strict=True))
            }
            subsets = [[widest.strips.index(i) for i in s.strips] for s in shared.values()]
            centres, widths = x[list(widest.strips)], np.array(widest.widths)
            if with_losses:
                losses = self._solver.losses(centres, widths, subsets, comb.side_walls)
                self._losses.update(zip(shared, losses, strict=True))
            else:
                solved = self._solver.matrices(centres, widths, subsets, comb.side_walls)
                self._matrices.update({k: (m, m.modes()) for k, m in zip(shared, solved, strict=True)})
            new = {k: s for k, s in new.items() if k not in shared}
        return list(keys)


def _key(comb: Comb, section: Section, x: Floats) -> object:
    """Sections with equal keys have equal matrices: positions are relative unless walls fix them."""
    chosen = x[list(section.strips)]
    origin = chosen[0] if comb.side_walls is None else 0.0
    positions = tuple(np.round((chosen - origin) / _SAME).astype(np.int64).tolist())
    widths = tuple(round(w / _SAME) for w in section.widths)
    return positions, widths, comb.side_walls
