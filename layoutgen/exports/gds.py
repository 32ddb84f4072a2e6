"""GDSII: one named cell for each kind of object, hierarchy kept.

The top cell refers to one cell for each kind. In it, polygons lie as they are; circles are references to a
cell with one circle. Database unit 1 nm, user unit 1 um, as is usual. The format knows neither circles nor
holes: circles become polygons within 0.05 % of their area, holes are joined to the outer boundary by a seam
of no width (keyhole) that ends in corners of both. Nothing is fractured. The table of layers is a file of
its own, see `layoutgen.exports.layer_table`.
"""

from __future__ import annotations

import datetime
import re
from pathlib import Path

import gdstk

from layoutgen.errors import LayoutError
from layoutgen.exports.keyhole import keyhole
from layoutgen.geometry import Artwork, Circle, Item, Layer, Polygon

__all__ = ["cell_name", "write"]

USER_UNIT = 1e-6
DATABASE_UNIT = 1e-9
UM = 1e3
"""Micrometres in a millimetre: the artwork's unit in the file's user unit."""

MAX_POINTS = 8189
"""Corners of one polygon that every reader takes; the closing one comes on top."""

LIMIT_MM = (2**31 - 1) * DATABASE_UNIT * 1e3
"""Largest coordinate that a four-byte integer holds. [mm]"""

CHORD_ERROR = 5e-4
"""Greatest distance of a chord from its circle, over the radius: two thirds of it is the loss of area."""

TIME_STAMP = datetime.datetime(2000, 1, 1)
"""The same for every file, so that equal artwork gives equal bytes."""


def write(artwork: Artwork, path: Path) -> None:
    """Write an artwork as GDSII.

    Parameters
    ----------
    artwork : Artwork
        To be written; stays as it is.
    path : Path
        File to be made or replaced.

    Raises
    ------
    LayoutError
        If the board is too large for the format or a polygon has too many corners for it.
    """
    if max(artwork.width, artwork.height) > LIMIT_MM:
        raise LayoutError(f"{path.name}: GDSII at 1 nm ends at {LIMIT_MM:.0f} mm; the board is larger")
    library = gdstk.Library(name="LAYOUTGEN", unit=USER_UNIT, precision=DATABASE_UNIT)
    top = gdstk.Cell(cell_name("board_" + artwork.part_number))
    cells: dict[str, gdstk.Cell] = {}
    for item in artwork.items:
        cell = cells.get(item.kind)
        if cell is None:
            cell = cells[item.kind] = gdstk.Cell(cell_name(item.kind))
            top.add(gdstk.Reference(cell))
        if isinstance(item.shape, Circle):
            _add_circle(cells, cell, item, item.shape)
        else:
            cell.add(_boundary(item.layer, item.shape))
    library.add(top, *cells.values())
    library.write_gds(path, max_points=MAX_POINTS, timestamp=TIME_STAMP)


def cell_name(text: str) -> str:
    """Name as the format allows it: at most 32 of A-Z, a-z, 0-9, underscore, question mark, dollar sign."""
    return re.sub(r"[^A-Za-z0-9_?$]", "_", text)[:32]


def _add_circle(cells: dict[str, gdstk.Cell], cell: gdstk.Cell, item: Item, circle: Circle) -> None:
    """Refer to the one circle of this kind and diameter, made when it is first met."""
    name = cell_name(f"{item.kind}_D{circle.diameter * 1e6:.0f}nm")
    if name not in cells:
        radius = circle.diameter / 2 * UM
        cells[name] = gdstk.Cell(name)
        cells[name].add(gdstk.ellipse((0, 0), radius, tolerance=CHORD_ERROR * radius,
                                      layer=item.layer.gds_layer, datatype=item.layer.gds_datatype))
    x, y = circle.centre
    cell.add(gdstk.Reference(cells[name], (x * UM, y * UM)))


def _boundary(layer: Layer, polygon: Polygon) -> gdstk.Polygon:
    ring = keyhole(polygon)
    if len(ring) > MAX_POINTS:
        raise LayoutError(f"a polygon on {layer.name} has {len(ring)} corners; GDSII takes {MAX_POINTS}")
    return gdstk.Polygon([(x * UM, y * UM) for x, y in ring], layer=layer.gds_layer,
                         datatype=layer.gds_datatype)
