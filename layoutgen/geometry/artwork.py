"""Artwork: plain shapes on named layers, in millimetres, and nothing about any file format.

From this room on all lengths are millimetres. Every point of a polygon and every circle's centre and
diameter lies on the artwork's grid already; writers only translate.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

import shapely
from shapely.geometry.base import BaseGeometry

__all__ = ["Artwork", "Circle", "Item", "Layer", "Point", "Polygon", "Ring"]

Point = tuple[float, float]
"""x and y. [mm]"""

Ring = tuple[Point, ...]
"""Corners in order; the last one joins the first and is not repeated."""

QUARTER_SEGMENTS = 32
"""Chords per quarter of a circle where one has to become a polygon: 0.04 % of the area is lost."""


class Layer(Enum):
    """A layer of the artwork: GDS layer number, GDS datatype, what its shapes are, and its purpose.

    The name doubles as the DXF layer name. Nothing is mirrored: the bottom is seen through the board.
    """

    TOP_COPPER = (1, 0, "copper", "strips, pads and ground fill on the component side, finished size")
    BOTTOM_COPPER = (2, 0, "copper", "ground plane, finished size")
    PLATED_DRILLS = (10, 0, "hole", "plated through holes, top to bottom, FINISHED diameter")
    UNPLATED_HOLES = (11, 0, "hole", "holes without plating, finished diameter")
    TOP_MASK_OPENINGS = (21, 0, "opening", "where the top solder mask is ABSENT")
    BOTTOM_MASK_OPENINGS = (22, 0, "opening", "where the bottom solder mask is ABSENT")
    TOP_PASTE = (23, 0, "opening", "apertures of the solder paste stencil")
    TOP_LEGEND = (25, 0, "ink", "part number, revision, resonator numbers, as outlines")
    BOARD_OUTLINE = (30, 0, "outline", "routed edge of the board, centre of no tool")
    TOP_ASSEMBLY = (40, 0, "documentation", "outlines of mounted bodies; for reading, not for making")

    def __init__(self, gds_layer: int, gds_datatype: int, holds: str, purpose: str) -> None:
        self.gds_layer = gds_layer
        self.gds_datatype = gds_datatype
        self.holds = holds
        self.purpose = purpose

    @property
    def dxf_name(self) -> str:
        """Name of the layer in a DXF file."""
        return self.name


@dataclass(frozen=True, slots=True)
class Polygon:
    """An area with straight edges.

    Attributes
    ----------
    exterior : Ring
        Outer boundary, counter-clockwise. [mm]
    holes : tuple of Ring
        Inner boundaries, clockwise. [mm]
    """

    exterior: Ring
    holes: tuple[Ring, ...] = ()

    @property
    def geometry(self) -> BaseGeometry:
        """The same area for plane geometry."""
        return shapely.Polygon(self.exterior, self.holes)


@dataclass(frozen=True, slots=True)
class Circle:
    """A true circle.

    Attributes
    ----------
    centre : Point
        [mm]
    diameter : float
        [mm]
    """

    centre: Point
    diameter: float

    @property
    def geometry(self) -> BaseGeometry:
        """The inscribed polygon of 128 corners."""
        return shapely.Point(self.centre).buffer(self.diameter / 2, quad_segs=QUARTER_SEGMENTS)


@dataclass(frozen=True, kw_only=True, slots=True)
class Item:
    """One object of the artwork.

    Attributes
    ----------
    kind : str
        What it is, one word for all of its like: ``"resonator"``, ``"short_via"``. A kind has one layer.
    name : str
        Which one it is: ``"R3"``.
    layer : Layer
        Where it is drawn.
    shape : Polygon or Circle
        Its area.
    tool : float or None
        For a plated hole, the diameter of the drill, larger than the finished hole. [mm]
    """

    kind: str
    name: str
    layer: Layer
    shape: Polygon | Circle
    tool: float | None = None


@dataclass(frozen=True, kw_only=True, slots=True)
class Artwork:
    """Everything that is to be made, layer by layer.

    Attributes
    ----------
    part_number, revision : str
        As in the legend.
    width, height : float
        Of the board, whose lower left corner is the origin. [mm]
    grid : float
        Step on which every coordinate lies. [mm]
    items : tuple of Item
        In drawing order. Items of one layer do not overlap.
    left_out : tuple of str
        Legend texts and reference marks for which the board had no room.
    """

    part_number: str
    revision: str
    width: float
    height: float
    grid: float
    items: tuple[Item, ...]
    left_out: tuple[str, ...] = ()

    def on_layer(self, layer: Layer) -> tuple[Item, ...]:
        """Items of one layer, in drawing order."""
        return tuple(item for item in self.items if item.layer is layer)

    def of_kind(self, kind: str) -> tuple[Item, ...]:
        """Items of one kind, in drawing order."""
        return tuple(item for item in self.items if item.kind == kind)

    def layer_shape(self, layer: Layer) -> BaseGeometry:
        """Union of all items of one layer; parts of the result are not connected with each other."""
        return shapely.union_all([item.shape.geometry for item in self.on_layer(layer)])
