"""Choices of drawing that do not matter at radio frequency."""

from __future__ import annotations

from dataclasses import dataclass

from layoutgen.errors import InputError

__all__ = ["Style"]


@dataclass(frozen=True, kw_only=True, slots=True)
class Style:
    """How a comb is drawn. All lengths in millimetres.

    Attributes
    ----------
    part_number, revision : str
        For the legend and for naming.
    grid : float
        Step of all coordinates.
    mask_expansion : float
        Of a mask opening beyond its land or hole, on every side.
    mask_dam : float
        Width of a mask web.
    registration : float
        By how much the mask is kept over the edge of ground copper, and openings off what stays covered.
    edge_pullback : float
        Of ground copper from the board edge, launches apart.
    hole_clearance : float
        Copper to unplated hole.
    least_copper : float
        Narrower pieces of ground fill are not drawn.
    fence_pitch : float
        Greatest distance between vias of the fence.
    launch_pitch : float
        Greatest distance between vias along a launch.
    mounting_hole : float
        Finished diameter.
    mounting_holes : int
        4, one in each corner, or 0.
    mounting_inset : float
        From the board edges to the middle of the mounting holes.
    reference_mark, reference_opening : float
        Diameter of the copper dot and of the mask opening around it.
    legend_height : float
        Of capital letters; shrinks to 0.8 of it where room is short.
    legend_stroke : float
        Line width of the letters.
    legend_clearance : float
        From ink to copper, openings and other ink.
    """

    part_number: str
    revision: str = "A"
    grid: float = 0.001
    mask_expansion: float = 0.05
    mask_dam: float = 0.1
    registration: float = 0.1
    edge_pullback: float = 0.25
    hole_clearance: float = 0.3
    least_copper: float = 0.2
    fence_pitch: float = 2.0
    launch_pitch: float = 1.0
    mounting_hole: float = 2.2
    mounting_holes: int = 4
    mounting_inset: float = 2.6
    reference_mark: float = 1.0
    reference_opening: float = 2.0
    legend_height: float = 1.0
    legend_stroke: float = 0.15
    legend_clearance: float = 0.2

    def __post_init__(self) -> None:
        for key in ("grid", "mask_dam", "least_copper", "fence_pitch", "launch_pitch", "mounting_hole",
                    "mounting_inset", "reference_mark", "legend_height", "legend_stroke"):
            self._require(getattr(self, key) > 0, key, "must be greater than 0")
        for key in ("mask_expansion", "registration", "edge_pullback", "hole_clearance",
                    "legend_clearance"):
            self._require(getattr(self, key) >= 0, key, "must not be negative")
        self._require(bool(self.part_number), "part_number", "must not be empty")
        self._require(self.mounting_holes in (0, 4), "mounting_holes", "must be 4 or 0")
        self._require(self.reference_opening > self.reference_mark, "reference_opening",
                      "must be larger than the mark")

    def _require(self, holds: bool, key: str, remedy: str) -> None:
        if not holds:
            raise InputError("style", key, getattr(self, key), remedy)
