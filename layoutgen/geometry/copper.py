"""Copper of the filter itself: resonators with their feeds, ground pads of the chips, vias, bodies."""

from __future__ import annotations

from collections.abc import Iterator

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.errors import InputError
from layoutgen.geometry.artwork import Item, Layer
from layoutgen.geometry.items import areas, plated_holes
from layoutgen.geometry.sheet import MM, Sheet

__all__ = ["bodies", "ground_pads", "pad_vias", "require_apart", "resonators", "short_vias"]


def resonators(sheet: Sheet) -> Iterator[Item]:
    """One polygon for each resonator, a tapped one in one piece with its feed."""
    for index, resonator in enumerate(sheet.comb.resonators):
        feeds = [sheet.strip(feed) for feed in sheet.comb.feeds if feed.resonator == index]
        copper = shapely.union_all([sheet.line(resonator), *feeds])
        kind = "tapped_resonator" if feeds else "resonator"
        yield from areas(sheet, kind, f"R{index + 1}", Layer.TOP_COPPER, copper)


def ground_pads(sheet: Sheet) -> Iterator[Item]:
    """Separate ground copper for each chip."""
    for index, resonator in enumerate(sheet.comb.resonators, start=1):
        if resonator.load:
            pad = sheet.ground_pad(resonator, resonator.load)
            yield from areas(sheet, "ground_pad", f"C{index}", Layer.TOP_COPPER, pad)


def short_vias(sheet: Sheet) -> Iterator[Item]:
    """Vias at the grounded ends."""
    for index, resonator in enumerate(sheet.comb.resonators, start=1):
        holes = sheet.short_holes(resonator)
        yield from plated_holes(sheet, "short_via", f"R{index}", resonator.short, holes)


def pad_vias(sheet: Sheet) -> Iterator[Item]:
    """Vias of the chips' ground pads."""
    for index, resonator in enumerate(sheet.comb.resonators, start=1):
        if resonator.load:
            holes = sheet.pad_holes(resonator, resonator.load)
            yield from plated_holes(sheet, "pad_via", f"C{index}", resonator.load.vias, holes)


def bodies(sheet: Sheet) -> Iterator[Item]:
    """Outlines of the chips, for the assembly drawing."""
    for index, resonator in enumerate(sheet.comb.resonators, start=1):
        if resonator.load:
            body = sheet.body(resonator, resonator.load)
            yield from areas(sheet, "chip_body", f"C{index}", Layer.TOP_ASSEMBLY, body)


def require_apart(sheet: Sheet, ground: BaseGeometry, items: tuple[Item, ...]) -> None:
    """Refuse a comb whose resonators, ground pads and ground fill touch or come too near.

    Raises
    ------
    InputError
        Naming the two objects that touch, or the clearance that is not kept.
    """
    shapes = [item.shape.geometry for item in items]
    tree = shapely.STRtree(shapes)
    first, second = tree.query(shapes, predicate="intersects")
    for one, other in zip(first.tolist(), second.tolist(), strict=True):
        if one < other:
            raise InputError("comb", "resonators", f"{items[one].name} and {items[other].name}",
                             f"must not touch ({items[one].kind} and {items[other].kind})")
    comb = sheet.comb
    filter_parts = [sheet.line(resonator) for resonator in comb.resonators]
    found = shapely.distance(ground, shapely.union_all(filter_parts)) if not ground.is_empty else float("inf")
    least = comb.ground_clearance * MM
    if found < least - sheet.style.grid:
        raise InputError("comb", "ground_clearance", f"{least:.6g} mm",
                         f"a launch comes within {found:.6g} mm of a resonator; widen the board")
