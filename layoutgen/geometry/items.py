"""Items from areas and positions."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from shapely.geometry.base import BaseGeometry

from layoutgen.comb import ViaRow
from layoutgen.geometry.artwork import Circle, Item, Layer, Point
from layoutgen.geometry.sheet import Sheet

__all__ = ["areas", "circles", "plated_holes"]


def areas(sheet: Sheet, kind: str, name: str, layer: Layer, area: BaseGeometry) -> Iterator[Item]:
    """One item for each connected part of an area."""
    for shape in sheet.grid.polygons(area):
        yield Item(kind=kind, name=name, layer=layer, shape=shape)


def circles(sheet: Sheet, kind: str, layer: Layer, centres: Sequence[Point],
            diameter: float) -> Iterator[Item]:
    """Equal circles, numbered. Diameter in millimetres."""
    on_grid = sheet.grid.number(diameter)
    for number, centre in enumerate(centres, start=1):
        yield Item(kind=kind, name=str(number), layer=layer, shape=Circle(centre, on_grid))


def plated_holes(sheet: Sheet, kind: str, name: str, row: ViaRow,
                 centres: Sequence[Point]) -> Iterator[Item]:
    """Holes of one tool, drawn at their finished diameter as board shops want it."""
    finished, tool = sheet.mm(row.finished), sheet.mm(row.drill)
    for centre in centres:
        yield Item(kind=kind, name=name, layer=Layer.PLATED_DRILLS, shape=Circle(centre, finished), tool=tool)
