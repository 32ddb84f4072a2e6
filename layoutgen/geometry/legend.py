"""Legend: which texts, and where they find room clear of copper and of mask openings."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import product

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely import affinity
from shapely.geometry.base import BaseGeometry

from layoutgen.geometry.artwork import Item, Layer, Point
from layoutgen.geometry.font import text_outline, text_width
from layoutgen.geometry.ground import mark_clearance
from layoutgen.geometry.items import areas
from layoutgen.geometry.mask import open_launches
from layoutgen.geometry.sheet import MM, Sheet

__all__ = ["Text", "items", "place", "windows"]

_SHRINK = (1.0, 0.8)
_FINE, _COARSE = 0.1, 0.25
"""Distance along y between the places that are tried, for a text whose x is fixed and for one that may move.

The fine one is less than the room to spare in a row of masked laminate (see `mask.bare_area`). [mm]
"""


@dataclass(frozen=True, kw_only=True, slots=True)
class Text:
    """One line of the legend in its place.

    Attributes
    ----------
    text : str
        The characters.
    height : float
        Of capitals. [mm]
    box : geometry
        Rectangle that holds the ink.
    """

    text: str
    height: float
    box: shapely.Polygon


def place(sheet: Sheet, bare: BaseGeometry, holes: Sequence[Point],
          marks: Sequence[Point]) -> tuple[tuple[Text, ...], tuple[str, ...]]:
    """Texts that found room, and those that did not.

    Resonator numbers stand below their resonators, chip numbers above their chips, part number and
    revision near the middle of the lower edge of the filter. Room is masked laminate inside the clear
    area; where that is short, a window in the ground fill behind the fence.
    """
    room = _room(sheet, bare, holes, marks)
    x_min, y_min, x_max, y_max = sheet.filter_box.bounds
    found: list[Text] = []
    missing: list[str] = []
    for texts, x, y, free_x in (
        *((((f"R{i}",),), resonator.x * MM, y_min, False)
          for i, resonator in enumerate(sheet.comb.resonators, start=1)),
        *((((f"C{i}",),), resonator.x * MM, y_max, False)
          for i, resonator in enumerate(sheet.comb.resonators, start=1) if resonator.load),
        (_titles(sheet), (x_min + x_max) / 2, y_min, True),
    ):
        lines = _find(sheet, room, texts, (x, y), free_x=free_x)
        if lines:
            found += lines
            keep_off = 3 * sheet.style.legend_clearance
            room = shapely.difference(room, shapely.union_all(
                [line.box.buffer(keep_off, join_style="mitre") for line in lines]))
        else:
            missing.append(" ".join(texts[0]))
    return tuple(found), tuple(missing)


def _titles(sheet: Sheet) -> tuple[tuple[str, ...], ...]:
    """Part number and revision as one line, or as several where a long number finds no room."""
    part, revision = sheet.style.part_number, f"REV {sheet.style.revision}"
    found: list[tuple[str, ...]] = [(f"{part} {revision}",)]
    for count in range(1, 5):
        length = -(-len(part) // count)
        found.append((*(part[i:i + length] for i in range(0, len(part), length)), revision))
    return tuple(found)


def _room(sheet: Sheet, bare: BaseGeometry, holes: Sequence[Point], marks: Sequence[Point]) -> BaseGeometry:
    """Where ink may stand: behind the mask, off the fence, the launches, holes and marks."""
    style = sheet.style
    clear, pad = style.legend_clearance, sheet.ground_vias.pad * MM
    x_min, y_min, x_max, y_max = sheet.board.bounds
    rim = style.least_copper + clear
    inset = style.edge_pullback + rim
    fence = sheet.clear_area.union(sheet.channels)
    outside = fence.buffer(pad + rim, join_style="mitre")
    inside = fence.buffer(-clear, join_style="mitre")
    taken = [
        bare.buffer(clear, join_style="mitre"),
        shapely.difference(outside, inside),
        *(launch.buffer(pad + style.fence_pitch, join_style="mitre") for launch in open_launches(sheet)),
        *(shapely.Point(hole).buffer(style.mounting_hole / 2 + style.hole_clearance + rim) for hole in holes),
        *(shapely.Point(mark).buffer(mark_clearance(sheet) / 2 + rim) for mark in marks),
    ]
    board = shapely.box(x_min + inset, y_min + inset, x_max - inset, y_max - inset)
    return shapely.difference(board, shapely.union_all(taken))


def _find(sheet: Sheet, room: BaseGeometry, choices: Sequence[Sequence[str]], wanted: Point, *,
          free_x: bool) -> list[Text]:
    """Lines of the first choice that has room, as a block at the place nearest to the one that is wanted.

    Full size is tried for every choice before a smaller one. Empty without room.
    """
    style = sheet.style
    centres = _tries(sheet, wanted, free_x=free_x)
    x, y = centres[:, 0], centres[:, 1]
    shapely.prepare(room)
    for shrink, texts in product(_SHRINK, choices):
        height = style.legend_height * shrink
        pitch = height + style.legend_stroke + style.legend_clearance
        width = max(text_width(text, height) for text in texts) + style.legend_stroke
        tall = len(texts) * pitch - style.legend_clearance
        boxes = shapely.box(x - width / 2, y - tall / 2, x + width / 2, y + tall / 2)
        fitting = np.flatnonzero(shapely.contains_properly(room, boxes))
        if fitting.size:
            middle, top = centres[fitting[0]] + (0.0, tall / 2)
            return [_line(sheet, text, height, float(middle), float(top) - index * pitch)
                    for index, text in enumerate(texts)]
    return []


def _line(sheet: Sheet, text: str, height: float, middle: float, top: float) -> Text:
    half = (text_width(text, height) + sheet.style.legend_stroke) / 2
    box = sheet.grid.box(middle - half, top - height - sheet.style.legend_stroke, middle + half, top)
    return Text(text=text, height=height, box=box)


def _tries(sheet: Sheet, wanted: Point, *, free_x: bool) -> NDArray[np.float64]:
    """Places to try, nearest first; ties go to the lower left."""
    _, _, width, height = sheet.board.bounds
    ys = np.arange(_COARSE, height, _COARSE if free_x else _FINE)
    shifts = np.arange(0.0, width / 2, 2 * _COARSE)
    xs = wanted[0] + (np.concatenate((-shifts[:0:-1], shifts)) if free_x else np.zeros(1))
    x, y = (values.ravel() for values in np.meshgrid(xs, ys))
    order = np.lexsort((x, y, np.round(np.hypot(x - wanted[0], y - wanted[1]), 6)))
    return np.stack((x[order], y[order]), axis=1)


def windows(sheet: Sheet, texts: Sequence[Text]) -> tuple[BaseGeometry, ...]:
    """Areas to be kept free of ground fill around the texts."""
    grow = sheet.style.legend_clearance
    return tuple(shapely.transform(text.box.buffer(grow, join_style="mitre"), sheet.grid.snap)
                 for text in texts)


def items(sheet: Sheet, texts: Sequence[Text]) -> Iterator[Item]:
    """Ink of all texts."""
    for text in texts:
        ink = text_outline(text.text, height=text.height, stroke=sheet.style.legend_stroke)
        x, y, _, _ = text.box.bounds
        half = sheet.style.legend_stroke / 2
        placed = affinity.translate(ink, x + half, y + half)
        yield from areas(sheet, "legend", text.text, Layer.TOP_LEGEND, placed)
