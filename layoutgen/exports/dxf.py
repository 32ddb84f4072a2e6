"""DXF of the artwork: R2010, 1:1 in millimetres, one layer for each function, nothing but closed shapes.

Areas are closed polylines of no width, round things are true circles. There is no hatch and no solid: a
closed shape is filled, a closed shape within it is a hole, one within the hole is filled again (even-odd
rule). No shape of one layer overlaps another, so the rule is unambiguous. The bottom is not mirrored.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from ezdxf import options, units  # type: ignore[attr-defined]  # public, but not marked as such
from ezdxf.document import Drawing
from ezdxf.filemanagement import new
from ezdxf.layouts.layout import Modelspace

from layoutgen.geometry import Artwork, Circle, Item, Layer

__all__ = ["write"]

COLOURS = {Layer.TOP_COPPER: 30, Layer.BOTTOM_COPPER: 5, Layer.PLATED_DRILLS: 7, Layer.UNPLATED_HOLES: 8,
           Layer.TOP_MASK_OPENINGS: 3, Layer.BOTTOM_MASK_OPENINGS: 94, Layer.TOP_PASTE: 9,
           Layer.TOP_LEGEND: 4, Layer.BOARD_OUTLINE: 2, Layer.TOP_ASSEMBLY: 1}
"""Colour index of each layer, to tell them apart on a screen."""


def write(artwork: Artwork, path: Path) -> None:
    """Write an artwork as DXF.

    Parameters
    ----------
    artwork : Artwork
        To be written; stays as it is.
    path : Path
        File to be made or replaced.
    """
    with _fixed_dates():
        document = new("R2010", units=units.MM)
        _set_header(document, artwork)
        for layer in Layer:
            document.layers.add(layer.dxf_name, color=COLOURS[layer]).description = layer.purpose
        for item in artwork.items:
            _draw(document.modelspace(), item)
        _order_classes(document)
        document.saveas(path)


def _set_header(document: Drawing, artwork: Artwork) -> None:
    """Units twice, as readers look at one or the other, and what a viewer zooms to."""
    document.header["$INSUNITS"] = units.MM
    document.header["$MEASUREMENT"] = 1
    size = (artwork.width, artwork.height, 0.0)
    document.header["$EXTMIN"], document.header["$EXTMAX"] = (0.0, 0.0, 0.0), size
    document.header["$LIMMIN"], document.header["$LIMMAX"] = (0.0, 0.0), size[:2]
    space = document.modelspace()
    space.reset_extents((0.0, 0.0, 0.0), size)
    space.reset_limits((0.0, 0.0), size[:2])


def _order_classes(document: Drawing) -> None:
    """The library lists the classes in the order of a set, which changes from run to run."""
    for name in sorted(document.entitydb.dxf_types_in_use()):
        document.classes.add_class(name)


def _draw(space: Modelspace, item: Item) -> None:
    where = {"layer": item.layer.dxf_name}
    if isinstance(item.shape, Circle):
        space.add_circle(item.shape.centre, item.shape.diameter / 2, dxfattribs=where)
        return
    for ring in (item.shape.exterior, *item.shape.holes):
        space.add_lwpolyline(ring, close=True, dxfattribs=where)


@contextmanager
def _fixed_dates() -> Iterator[None]:
    """Equal artwork gives equal bytes: no dates, no random identifiers. The library's switch is put back."""
    before = options.write_fixed_meta_data_for_testing
    options.write_fixed_meta_data_for_testing = True
    try:
        yield
    finally:
        options.write_fixed_meta_data_for_testing = before
