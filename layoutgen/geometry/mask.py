"""Openings of the solder mask, and paste.

The resonators, the gaps between them and the feeds carry no mask. Around the two lands of each chip a web
of mask keeps the solder where it belongs: off the line and off the vias. Every via is open on both faces,
none is covered on one side only, and none lies in a paste area. The bottom carries no mask at all, so that
the ground plane lies bare on its carrier.
"""

from __future__ import annotations

from collections.abc import Iterator

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.comb import ChipLoad, Resonator
from layoutgen.errors import InputError
from layoutgen.geometry.artwork import Item, Layer
from layoutgen.geometry.items import areas
from layoutgen.geometry.sheet import MM, Sheet

__all__ = ["bare_area", "land_openings", "open_launches", "openings", "paste"]


def bare_area(sheet: Sheet, rows_below: int, rows_above: int) -> BaseGeometry:
    """The area over resonators, gaps and feeds without mask, before webs are put back.

    Parameters
    ----------
    sheet : Sheet
        The comb and its style.
    rows_below, rows_above : int
        Rows of legend that want masked laminate below and above the filter, inside the clear area. They get
        it as far as at least half the ground clearance stays open around the filter.
    """
    x_min, y_min, x_max, y_max = sheet.filter_box.bounds
    reach = sheet.comb.ground_clearance * MM - sheet.style.registration
    below, above = (_reach(sheet, rows) for rows in (rows_below, rows_above))
    box = sheet.grid.box(x_min - reach, y_min - below, x_max + reach, y_max + above)
    beside = sheet.comb.feed_clearance - sheet.style.registration / MM
    beyond = [sheet.along(feed, sheet.launch_end(feed) if feed.launch else -beside,
                          max(sheet.room_beside(feed), sheet.launch_end(feed)), beside)
              for feed in sheet.comb.feeds]
    return shapely.intersection(shapely.union_all([box, *beyond]), sheet.board)


def _reach(sheet: Sheet, rows: int) -> float:
    """How far the bare area reaches beyond the filter. [mm]"""
    style, clearance = sheet.style, sheet.comb.ground_clearance * MM
    row = style.legend_height + style.legend_stroke + style.legend_clearance
    left = clearance - (rows * row + 2 * style.legend_clearance if rows else 0.0)
    return min(max(left, clearance / 2), clearance - style.registration)


def openings(sheet: Sheet, bare: BaseGeometry) -> Iterator[Item]:
    """The bare area without the webs around chips and at the launches."""
    style = sheet.style
    webs = [_around_lands(sheet, resonator, resonator.load)
            for resonator in sheet.comb.resonators if resonator.load]
    webs += [launch.buffer(style.mask_dam, join_style="mitre") for launch in open_launches(sheet)]
    area = shapely.difference(bare, shapely.union_all(webs))
    yield from areas(sheet, "bare_area", "filter", Layer.TOP_MASK_OPENINGS, area)
    for number, launch in enumerate(open_launches(sheet), start=1):
        yield from areas(sheet, "launch_opening", f"port {number}", Layer.TOP_MASK_OPENINGS, launch)
    yield from areas(sheet, "bottom_opening", "ground plane", Layer.BOTTOM_MASK_OPENINGS, sheet.board)


def open_launches(sheet: Sheet) -> tuple[BaseGeometry, ...]:
    """Where a connector is soldered: feed, gaps and ground pads, up to the board edge."""
    grow = sheet.style.mask_expansion / MM
    return tuple(
        sheet.along(feed, 0.0, feed.launch.ground_length + grow,
                    feed.launch.ground_gap + feed.launch.ground_width + grow)
        for feed in sheet.comb.feeds if feed.launch
    )


def _around_lands(sheet: Sheet, resonator: Resonator, chip: ChipLoad) -> BaseGeometry:
    """Mask under and around a chip, a web's width beyond the openings of its lands."""
    style = sheet.style
    reach = style.mask_expansion + style.mask_dam
    x_min, y_min, x_max, y_max = shapely.union_all(list(sheet.lands(resonator, chip))).bounds
    web = sheet.grid.box(x_min - reach, y_min - reach, x_max + reach, y_max + reach)
    radius = chip.vias.drill * MM / 2
    if any(web.distance(shapely.Point(hole)) < radius - style.grid
           for hole in sheet.pad_holes(resonator, chip)):
        raise InputError("ChipLoad", "via_offset", f"{chip.via_offset * MM:.6g} mm",
                         f"must leave {reach:g} mm between the second land and the drill of its vias")
    return web


def land_openings(sheet: Sheet) -> Iterator[Item]:
    """Openings over the lands of the chips; one for both where no web fits between them."""
    style = sheet.style
    for index, resonator in enumerate(sheet.comb.resonators, start=1):
        if resonator.load:
            grown = [land.buffer(style.mask_expansion, join_style="mitre")
                     for land in sheet.lands(resonator, resonator.load)]
            if grown[0].distance(grown[1]) < style.mask_dam - style.grid:
                grown = [shapely.box(*shapely.total_bounds(grown))]
            for opening in grown:
                yield from areas(sheet, "land_opening", f"C{index}", Layer.TOP_MASK_OPENINGS, opening)


def paste(sheet: Sheet) -> Iterator[Item]:
    """Paste on both lands of each chip, of the lands' own size."""
    for index, resonator in enumerate(sheet.comb.resonators, start=1):
        if resonator.load:
            for land in sheet.lands(resonator, resonator.load):
                yield from areas(sheet, "paste", f"C{index}", Layer.TOP_PASTE, land)
