"""The sized filter: every dimension that matters at radio frequency, and nothing else.

Coordinates are metres with the origin at the lower left corner of the board, x across the resonators
(from port 1 to port 2) and y along them, from the grounded ends (below) to the loaded ends (above).
All resonators are shorted on one line, ``y = short_line``: the axis of their via rows.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

from layoutgen.errors import InputError

__all__ = ["ChipLoad", "Comb", "Feed", "Launch", "Resonator", "Segment", "Stack", "ViaRow"]


class _Checked:
    """Physical sense, checked when an object is made."""

    def _require(self, holds: bool, key: str, remedy: str) -> None:
        if not holds:
            raise InputError(type(self).__name__, key, getattr(self, key), remedy)

    def _positive(self, *keys: str) -> None:
        for key in keys:
            self._require(getattr(self, key) > 0, key, "must be greater than 0")

    def _not_negative(self, *keys: str) -> None:
        for key in keys:
            self._require(getattr(self, key) >= 0, key, "must not be negative")


@dataclass(frozen=True, kw_only=True, slots=True)
class Stack(_Checked):
    """What the strips lie on and under.

    Attributes
    ----------
    height : float
        Thickness of the dielectric between strips and ground plane. [m]
    eps_r, tan_delta : float
        Relative permittivity and loss tangent used by the model. [1]
    conductor : float
        Finished thickness of the copper (foil and plating). [m]
    conductivity : float
        Of the copper. [S/m]
    roughness : float
        Root-mean-square roughness of the copper. [m]
    cover : float or None
        Height of a flat metal cover above the upper face of the dielectric; None when open. [m]
    """

    height: float
    eps_r: float
    tan_delta: float
    conductor: float
    conductivity: float
    roughness: float
    cover: float | None

    def __post_init__(self) -> None:
        self._positive("height", "conductor", "conductivity")
        self._not_negative("roughness")
        self._require(self.eps_r >= 1, "eps_r", "must be at least 1")
        self._require(0 <= self.tan_delta < 1, "tan_delta", "must be from 0 to below 1")
        if self.cover is not None:
            self._require(self.cover > self.conductor, "cover", "must be above the copper")


@dataclass(frozen=True, kw_only=True, slots=True)
class ViaRow(_Checked):
    """Plated holes to the ground plane, in a row across the strip, centred on it.

    Attributes
    ----------
    count : int
        Holes in the row.
    pitch : float
        Centre to centre; of no meaning for one hole. [m]
    drill : float
        Diameter of the tool, which is the outside of the plated barrel. [m]
    finished : float
        Diameter of the finished hole. [m]
    pad : float
        Diameter of the copper each hole needs around it. [m]
    """

    count: int
    pitch: float
    drill: float
    finished: float
    pad: float

    def __post_init__(self) -> None:
        self._require(self.count >= 1, "count", "must be at least 1")
        self._positive("pitch", "finished")
        self._require(self.drill > self.finished, "drill", "must be larger than the finished hole")
        self._require(self.pad > self.drill, "pad", "must leave a ring around the drill")

    @property
    def plating(self) -> float:
        """Thickness of the barrel wall. [m]"""
        return (self.drill - self.finished) / 2

    @property
    def width(self) -> float:
        """Width of the copper that the row needs. [m]"""
        return (self.count - 1) * self.pitch + self.pad

    @property
    def offsets(self) -> tuple[float, ...]:
        """Position of each hole across the strip, from its centre line. [m]"""
        return tuple((i - (self.count - 1) / 2) * self.pitch for i in range(self.count))


@dataclass(frozen=True, kw_only=True, slots=True)
class Segment(_Checked):
    """A piece of a resonator of one width. Length along y, width along x. [m]"""

    length: float
    width: float

    def __post_init__(self) -> None:
        self._positive("length", "width")


@dataclass(frozen=True, kw_only=True, slots=True)
class ChipLoad(_Checked):
    """A chip capacitor from the open end of a resonator to a grounded pad of its own.

    Going up from the open end: the line's own last piece is the first land; a bare gap; the second
    land, which is the lower part of the ground pad; a mask dam; the row of vias.

    Attributes
    ----------
    case : str
        Name of the chip case in the library.
    capacitance : float
        Nominal value, a stocked one. [F]
    tolerance : float
        Half-width of the value's band. [F]
    resistance : float
        Equivalent series resistance, taken constant with frequency. [ohm]
    inductance : float
        What the part adds beyond a plain conductor of the body's outline on the same path. [H]
    body_length, body_width, body_height : float
        Outline of the chip. [m]
    current_height : float
        Mean height of the current in the chip above the lands. [m]
    land_length, land_width : float
        Each land, along and across the line. [m]
    land_gap : float
        Bare laminate between the lands, which is between line end and ground pad. [m]
    pad_length, pad_width : float
        Copper of the ground pad, second land included. [m]
    via_offset : float
        From the lower edge of the ground pad to the axis of its vias. [m]
    vias : ViaRow
        To the ground plane.
    """

    case: str
    capacitance: float
    tolerance: float
    resistance: float
    inductance: float
    body_length: float
    body_width: float
    body_height: float
    current_height: float
    land_length: float
    land_width: float
    land_gap: float
    pad_length: float
    pad_width: float
    via_offset: float
    vias: ViaRow

    def __post_init__(self) -> None:
        self._positive(
            "capacitance",
            "body_length",
            "body_width",
            "body_height",
            "land_length",
            "land_width",
            "land_gap",
            "pad_length",
            "pad_width",
        )
        self._not_negative("tolerance", "resistance", "inductance", "current_height")
        self._require(self.via_offset >= self.land_length, "via_offset", "must lie beyond the second land")
        self._require(self.pad_length > self.via_offset, "pad_length", "must contain the vias")

    @property
    def span(self) -> float:
        """From the middle of one land to the middle of the other. [m]"""
        return self.land_gap + self.land_length

    @property
    def pad_path(self) -> float:
        """From the middle of the second land to the axis of the vias. [m]"""
        return self.via_offset - self.land_length / 2


@dataclass(frozen=True, kw_only=True, slots=True)
class Resonator(_Checked):
    """One line, from its short to its open end.

    Attributes
    ----------
    x : float
        Centre line. [m]
    segments : tuple of Segment
        From the axis of the shorting vias upward; the last one ends in the open end.
    short : ViaRow
        Vias at the grounded end.
    overhang : float
        Copper of the first segment's width beyond the axis of the vias. [m]
    load : ChipLoad or None
        None when the last segments are a printed plate.
    """

    x: float
    segments: tuple[Segment, ...]
    short: ViaRow
    overhang: float
    load: ChipLoad | None

    def __post_init__(self) -> None:
        self._require(len(self.segments) > 0, "segments", "must hold at least one segment")
        self._require(self.overhang >= self.short.pad / 2, "overhang", "must contain the via pads")
        self._require(
            self.segments[0].width >= self.short.width - 1e-9,
            "segments",
            "the first must be as wide as the via row",
        )

    @property
    def length(self) -> float:
        """From the axis of the shorting vias to the open end. [m]"""
        return sum(segment.length for segment in self.segments)

    @property
    def width(self) -> float:
        """Of the line, the longest segment. [m]"""
        return max(self.segments, key=lambda segment: segment.length).width

    @property
    def widest(self) -> float:
        """Width of its widest segment. [m]"""
        return max(segment.width for segment in self.segments)

    def width_at(self, height: float) -> float:
        """Width at a height above the axis of the shorting vias. [m]"""
        top = 0.0
        for segment in self.segments:
            top += segment.length
            if height <= top:
                return segment.width
        return self.segments[-1].width

    @property
    def load_position(self) -> float:
        """Height above the vias at which the chip's current leaves the line. [m]"""
        return self.length - (self.load.land_length / 2 if self.load else 0.0)


@dataclass(frozen=True, kw_only=True, slots=True)
class Launch(_Checked):
    """Copper for a connector at the board edge, on either side of the feed.

    Attributes
    ----------
    ground_gap : float
        Between feed and each ground pad. [m]
    ground_width, ground_length : float
        Each ground pad, along the edge and into the board. [m]
    """

    ground_gap: float
    ground_width: float
    ground_length: float

    def __post_init__(self) -> None:
        self._positive("ground_gap", "ground_width", "ground_length")


@dataclass(frozen=True, kw_only=True, slots=True)
class Feed(_Checked):
    """A tapped feed line, straight from the edge of an outer resonator to the board edge.

    Attributes
    ----------
    resonator : int
        Index of the resonator, from 0.
    side : "left" or "right"
        Board edge it runs to.
    tap : float
        Height of its centre line above the axis of the shorting vias. [m]
    width : float
        Of the feed line. [m]
    impedance : float
        Of the port. [ohm]
    launch : Launch or None
        Connector copper.
    """

    resonator: int
    side: Literal["left", "right"]
    tap: float
    width: float
    impedance: float
    launch: Launch | None

    def __post_init__(self) -> None:
        self._positive("tap", "width", "impedance")
        self._require(self.side in ("left", "right"), "side", 'must be "left" or "right"')


@dataclass(frozen=True, kw_only=True, slots=True)
class Comb(_Checked):
    """A sized comb-line filter.

    Attributes
    ----------
    stack : Stack
        Dielectric, copper, cover.
    resonators : tuple of Resonator
        From port 1 to port 2, by rising x.
    feeds : tuple of Feed
        Port 1 (left) and port 2 (right).
    width, height : float
        Of the board. [m]
    short_line : float
        y of the axis of the shorting vias. [m]
    ground_clearance : float
        Least distance of top ground copper from resonators and their pads. [m]
    feed_clearance : float
        Least distance of top ground copper from the feeds, launches apart. [m]
    side_walls : tuple of two floats or None
        x of the two metal walls that carry the cover; None when open. [m]
    """

    stack: Stack
    resonators: tuple[Resonator, ...]
    feeds: tuple[Feed, Feed]
    width: float
    height: float
    short_line: float
    ground_clearance: float
    feed_clearance: float
    side_walls: tuple[float, float] | None

    def __post_init__(self) -> None:
        self._positive("width", "height", "short_line", "ground_clearance", "feed_clearance")
        self._require(len(self.resonators) >= 2, "resonators", "must be at least two")
        self._require(all(gap > 0 for gap in self.gaps), "gaps", "must be greater than 0")
        for feed in self.feeds:
            if not feed.tap < self.resonators[feed.resonator].length:
                raise InputError("Feed", "tap", feed.tap, "must lie on the resonator")

    @property
    def order(self) -> int:
        """Number of resonators."""
        return len(self.resonators)

    @property
    def gaps(self) -> tuple[float, ...]:
        """Bare laminate between neighbouring resonators at their widest, along the comb. [m]"""
        return tuple(
            right.x - left.x - (left.widest + right.widest) / 2
            for left, right in pairwise(self.resonators)
        )

    def feed_length(self, feed: Feed) -> float:
        """From the resonator's edge to the board edge. [m]"""
        resonator = self.resonators[feed.resonator]
        edge = resonator.width_at(feed.tap) / 2
        return resonator.x - edge if feed.side == "left" else self.width - resonator.x - edge
