"""Where every part of a comb lies on the board, in millimetres on the grid."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.comb import ChipLoad, Comb, Feed, Launch, Resonator, ViaRow
from layoutgen.errors import InputError
from layoutgen.geometry.artwork import Point
from layoutgen.geometry.grid import Grid
from layoutgen.geometry.style import Style

__all__ = ["Sheet"]

MM = 1e3
"""Millimetres in a metre: the one place where the comb's metres end."""


@dataclass(frozen=True)
class Sheet:
    """A comb and the style it is drawn in; answers with rectangles and positions.

    Attributes
    ----------
    comb : Comb
        Every dimension that matters at radio frequency.
    style : Style
        The others.
    """

    comb: Comb
    style: Style

    @cached_property
    def grid(self) -> Grid:
        """Steps of all coordinates."""
        return Grid(self.style.grid)

    @cached_property
    def board(self) -> shapely.Polygon:
        """The board's outline."""
        return self._box(0.0, 0.0, self.comb.width, self.comb.height)

    def mm(self, metres: float) -> float:
        """A length of the comb on the grid. [mm]"""
        return self.grid.number(metres * MM)

    def _box(self, x_min: float, y_min: float, x_max: float, y_max: float) -> shapely.Polygon:
        """Rectangle from metres."""
        return self.grid.box(x_min * MM, y_min * MM, x_max * MM, y_max * MM)

    # resonators

    def line(self, resonator: Resonator) -> BaseGeometry:
        """Copper of one resonator, without its feed."""
        base = self.comb.short_line
        pieces, top = [], 0.0
        for index, segment in enumerate(resonator.segments):
            start = base + top if index else base - resonator.overhang
            top += segment.length
            half = segment.width / 2
            pieces.append(self._box(resonator.x - half, start, resonator.x + half, base + top))
        return shapely.union_all(pieces)

    def open_end(self, resonator: Resonator) -> float:
        """y of the open end. [m]"""
        return self.comb.short_line + resonator.length

    def short_holes(self, resonator: Resonator) -> tuple[Point, ...]:
        """Middles of the vias at the grounded end."""
        return self._row(resonator.x, self.comb.short_line, resonator.short)

    def _row(self, x: float, y: float, row: ViaRow) -> tuple[Point, ...]:
        return tuple((self.mm(x + offset), self.mm(y)) for offset in row.offsets)

    # chips

    def ground_pad(self, resonator: Resonator, chip: ChipLoad) -> shapely.Polygon:
        """Copper on the grounded side of a chip."""
        bottom = self.open_end(resonator) + chip.land_gap
        half = chip.pad_width / 2
        return self._box(resonator.x - half, bottom, resonator.x + half, bottom + chip.pad_length)

    def pad_holes(self, resonator: Resonator, chip: ChipLoad) -> tuple[Point, ...]:
        """Middles of the vias of a ground pad."""
        y = self.open_end(resonator) + chip.land_gap + chip.via_offset
        return self._row(resonator.x, y, chip.vias)

    def lands(self, resonator: Resonator, chip: ChipLoad) -> tuple[shapely.Polygon, shapely.Polygon]:
        """Copper under the two terminations, on the line and on the ground pad."""
        end = self.open_end(resonator)
        on_line = min(chip.land_width, resonator.segments[-1].width) / 2
        on_pad = min(chip.land_width, chip.pad_width) / 2
        above = end + chip.land_gap
        return (
            self._box(resonator.x - on_line, end - chip.land_length, resonator.x + on_line, end),
            self._box(resonator.x - on_pad, above, resonator.x + on_pad, above + chip.land_length),
        )

    def body(self, resonator: Resonator, chip: ChipLoad) -> shapely.Polygon:
        """Outline of the chip, midway between the lands."""
        middle = self.open_end(resonator) + chip.land_gap / 2
        half, reach = chip.body_width / 2, chip.body_length / 2
        return self._box(resonator.x - half, middle - reach, resonator.x + half, middle + reach)

    # feeds

    def strip(self, feed: Feed) -> shapely.Polygon:
        """Feed from the board edge to the middle of its resonator."""
        resonator = self.comb.resonators[feed.resonator]
        reach = resonator.x if feed.side == "left" else self.comb.width - resonator.x
        return self.along(feed, 0.0, reach, 0.0)

    def along(self, feed: Feed, start: float, stop: float, beside: float) -> shapely.Polygon:
        """Rectangle around a feed, between two distances from its board edge and to a distance beside it.

        Metres. A negative start reaches beyond the edge.
        """
        y, half = self.comb.short_line + feed.tap, feed.width / 2 + beside
        if feed.side == "left":
            return self._box(start, y - half, stop, y + half)
        return self._box(self.comb.width - stop, y - half, self.comb.width - start, y + half)

    def launch(self, feed: Feed, launch: Launch) -> shapely.Polygon:
        """Rectangle around both ground pads of a launch and the feed between them."""
        return self.along(feed, 0.0, launch.ground_length, launch.ground_gap + launch.ground_width)

    def feed_y(self, feed: Feed) -> float:
        """y of a feed's centre line. [m]"""
        return self.comb.short_line + feed.tap

    # areas

    @cached_property
    def filter_box(self) -> shapely.Polygon:
        """Rectangle around all resonators and ground pads."""
        parts = [self.line(resonator) for resonator in self.comb.resonators]
        parts += [self.ground_pad(resonator, resonator.load)
                  for resonator in self.comb.resonators if resonator.load]
        box = shapely.box(*shapely.total_bounds(parts))
        if not self.board.contains(box):
            raise InputError("comb", "height", f"{self.comb.height * MM:.6g} mm",
                             "the board must contain every resonator and ground pad")
        return box

    @cached_property
    def clear_area(self) -> shapely.Polygon:
        """Rectangle around the filter that is kept free of ground fill, cut at the board edge."""
        x_min, y_min, x_max, y_max = self.filter_box.bounds
        reach = self.mm(self.comb.ground_clearance)
        grown = self.grid.box(x_min - reach, y_min - reach, x_max + reach, y_max + reach)
        return shapely.intersection(grown, self.board)

    @cached_property
    def channels(self) -> BaseGeometry:
        """Where ground fill keeps clear of the feeds, from the launches (else the edge) inward."""
        return shapely.union_all([
            self.along(feed, self.launch_end(feed), max(self.launch_end(feed), self.room_beside(feed)),
                       self.comb.feed_clearance)
            for feed in self.comb.feeds
        ])

    def launch_end(self, feed: Feed) -> float:
        """From a feed's board edge to the inner end of its launch; 0 without one. [m]"""
        return feed.launch.ground_length if feed.launch else 0.0

    def room_beside(self, feed: Feed) -> float:
        """From a feed's board edge to the nearest resonator or ground pad. [m]"""
        x_min, _, x_max, _ = self.filter_box.bounds
        return float(x_min if feed.side == "left" else self.mm(self.comb.width) - x_max) / MM

    @cached_property
    def ground_vias(self) -> ViaRow:
        """Tool used for all ground fill vias: the one that shorts the resonators."""
        return self.comb.resonators[0].short
