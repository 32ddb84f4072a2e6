"""A comb with fixed choices and free dimensions: from a vector of dimensions to a `Comb`."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from layoutgen.comb import ChipLoad, Comb, Feed, Launch, Resonator, Segment, Stack, ViaRow

__all__ = ["Choices", "Dimensions", "Plate", "Template", "snap"]

Floats = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True)
class Plate:
    """A printed load: the widened end of a resonator. Length and width. [m]"""

    length: float
    width: float


@dataclass(frozen=True, kw_only=True, slots=True)
class Choices:
    """Everything about a comb that is not fitted to the response.

    Attributes
    ----------
    order : int
        Number of resonators.
    stack : Stack
    line_width : float
        Of every resonator. [m]
    short : ViaRow
        Vias of every grounded end.
    load : ChipLoad or Plate
        Of every resonator.
    feed_width, impedance : float
        Of the feeds. [m], [ohm]
    launch : Launch or None
    clearance, feed_clearance : float
        Of top ground copper from the resonators and from the feeds. [m]
    margin : float
        Width of the ground border. [m]
    grid : float
        Step of all drawn dimensions. [m]
    """

    order: int
    stack: Stack
    line_width: float
    short: ViaRow
    load: ChipLoad | Plate
    feed_width: float
    impedance: float
    launch: Launch | None
    clearance: float
    feed_clearance: float
    margin: float
    grid: float

    @property
    def widest(self) -> float:
        """Width of a resonator or its pads, whichever is greater on the strip level. [m]"""
        plate = self.load.width if isinstance(self.load, Plate) else 0.0
        return max(self.line_width, plate)

    @property
    def overhang(self) -> float:
        """Copper beyond the axis of the shorting vias. [m]"""
        return self.short.pad / 2


@dataclass(frozen=True, kw_only=True, slots=True)
class Dimensions:
    """The free dimensions of a symmetric comb; the second half mirrors the first.

    Attributes
    ----------
    gaps : tuple of float
        Between neighbouring resonators at their widest, from the end inward: order // 2 of them. [m]
    lengths : tuple of float
        From the axis of the vias to the open end, from the end inward: (order + 1) // 2 of them. [m]
    tap : float
        Height of the tap. [m]
    """

    gaps: tuple[float, ...]
    lengths: tuple[float, ...]
    tap: float

    def vector(self) -> Floats:
        """All free dimensions in one row."""
        return np.array([*self.gaps, *self.lengths, self.tap])

    @staticmethod
    def of(vector: Floats, order: int) -> Dimensions:
        """Inverse of `vector`."""
        count = order // 2
        values = [float(v) for v in vector]
        return Dimensions(gaps=tuple(values[:count]), lengths=tuple(values[count:-1]), tap=values[-1])


def snap(value: float, step: float) -> float:
    """Nearest multiple of a step; halves go away from zero."""
    return float(np.floor(abs(value) / step + 0.5) * step * np.sign(value))


class Template:
    """Makes combs of given choices."""

    def __init__(self, choices: Choices) -> None:
        self.choices = choices

    def snapped(self, dimensions: Dimensions) -> Dimensions:
        """The same on the grid."""
        grid = self.choices.grid
        return Dimensions(
            gaps=tuple(snap(g, grid) for g in dimensions.gaps),
            lengths=tuple(snap(v, grid) for v in dimensions.lengths),
            tap=snap(dimensions.tap, grid),
        )

    def comb(self, dimensions: Dimensions) -> Comb:
        """The comb of these dimensions, centred on a board that leaves the clearances and the margin."""
        choices = self.choices
        border = choices.clearance + choices.margin
        gaps = _mirrored(dimensions.gaps, choices.order - 1)
        lengths = _mirrored(dimensions.lengths, choices.order)
        x = [border + choices.widest / 2]
        for gap in gaps:
            x.append(x[-1] + choices.widest + gap)
        resonators = tuple(self._resonator(xi, length) for xi, length in zip(x, lengths, strict=True))
        width = x[-1] + choices.widest / 2 + border
        short_line = border + choices.overhang
        height = short_line + max(lengths) + self._beyond_end() + border
        first, last = (
            self._feed(i, side, dimensions.tap) for i, side in ((0, "left"), (choices.order - 1, "right"))
        )
        return Comb(
            stack=choices.stack,
            resonators=resonators,
            feeds=(first, last),
            width=width,
            height=height,
            short_line=short_line,
            ground_clearance=choices.clearance,
            feed_clearance=choices.feed_clearance,
            side_walls=None if choices.stack.cover is None else (0.0, width),
        )

    def _beyond_end(self) -> float:
        load = self.choices.load
        return load.land_gap + load.pad_length if isinstance(load, ChipLoad) else 0.0

    def _resonator(self, x: float, length: float) -> Resonator:
        choices = self.choices
        plate = choices.load if isinstance(choices.load, Plate) else None
        line = length - (plate.length if plate else 0.0)
        segments: list[Segment] = []
        if choices.short.width > choices.line_width:
            segments.append(Segment(length=choices.overhang, width=choices.short.width))
            line -= choices.overhang
        segments.append(Segment(length=line, width=choices.line_width))
        if plate:
            segments.append(Segment(length=plate.length, width=plate.width))
        return Resonator(
            x=x,
            segments=tuple(segments),
            short=choices.short,
            overhang=choices.overhang,
            load=None if isinstance(choices.load, Plate) else choices.load,
        )

    def _feed(self, resonator: int, side: str, tap: float) -> Feed:
        choices = self.choices
        return Feed(
            resonator=resonator,
            side="left" if side == "left" else "right",
            tap=tap,
            width=choices.feed_width,
            impedance=choices.impedance,
            launch=choices.launch,
        )

    def with_order(self, order: int) -> Template:
        """The same choices for another number of resonators."""
        return Template(replace(self.choices, order=order))


def _mirrored(half: Sequence[float], count: int) -> list[float]:
    """A symmetric list of ``count`` values from its first half."""
    return [half[min(i, count - 1 - i)] for i in range(count)]
