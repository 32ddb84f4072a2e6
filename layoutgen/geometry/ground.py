"""Ground fill, ground plane, via fence, mounting holes and reference marks."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.comb import Feed, Launch
from layoutgen.errors import InputError
from layoutgen.geometry.artwork import Point
from layoutgen.geometry.sheet import MM, Sheet

__all__ = ["fence_holes", "fill", "launch_holes", "mounting_holes", "plane", "reference_marks"]


def mounting_holes(sheet: Sheet) -> tuple[Point, ...]:
    """Middles of the mounting holes, one in each corner of the ground frame.

    Raises
    ------
    InputError
        If a hole and the copper around it would reach into the clear area, a feed or the board edge.
    """
    style, (_, _, width, height) = sheet.style, sheet.board.bounds
    if not style.mounting_holes:
        return ()
    inset = style.mounting_inset
    holes = tuple((sheet.grid.number(x), sheet.grid.number(y))
                  for y in (inset, height - inset) for x in (inset, width - inset))
    free = _frame(sheet)
    needed = _kept_free(sheet)
    for hole in holes:
        if not free.contains(shapely.Point(hole)) or free.boundary.distance(shapely.Point(hole)) < needed:
            raise InputError("comb", "width", f"{width:.6g} mm",
                             f"the corners of the ground frame ({height:.6g} mm high) have no room for the "
                             f"{style.mounting_hole:g} mm mounting holes: they need {needed:.6g} mm of "
                             f"copper around a point {inset:g} mm from both edges")
    return holes


def _kept_free(sheet: Sheet) -> float:
    """Radius around a mounting hole with its clearance and a rim of copper. [mm]"""
    return sheet.style.mounting_hole / 2 + sheet.style.hole_clearance + sheet.style.least_copper


def reference_marks(sheet: Sheet, holes: Sequence[Point]) -> tuple[tuple[Point, ...], tuple[str, ...]]:
    """Middles of the marks, in three corners only so that the board has one way round, and those left out."""
    style, (_, _, width, height) = sheet.style, sheet.board.bounds
    radius = mark_clearance(sheet) / 2
    inset = style.edge_pullback + style.least_copper + radius
    beside = style.mounting_inset + _kept_free(sheet) + radius
    wanted = ((beside, inset), (width - beside, inset), (beside, height - inset))
    free = _frame(sheet)
    found: list[Point] = []
    missing: list[str] = []
    for number, (x, y) in enumerate(wanted, start=1):
        mark = (sheet.grid.number(x), sheet.grid.number(y))
        fits = free.contains(shapely.Point(mark).buffer(radius + style.least_copper * 0.99))
        if fits and all(math.dist(mark, other) > 2 * radius for other in (*found, *holes)):
            found.append(mark)
        else:
            missing.append(f"reference mark {number}")
    return tuple(found), tuple(missing)


def mark_clearance(sheet: Sheet) -> float:
    """Diameter of the hole in the ground fill around a reference mark. [mm]"""
    return sheet.style.reference_opening + 2 * sheet.style.registration


def fill(sheet: Sheet, holes: Sequence[Point], marks: Sequence[Point],
         windows: Sequence[BaseGeometry]) -> BaseGeometry:
    """Ground copper on top, before pieces without a via are dropped.

    Parameters
    ----------
    sheet : Sheet
        The comb and its style.
    holes, marks : sequence of Point
        Middles of mounting holes and reference marks. [mm]
    windows : sequence of geometry
        Areas kept free for the legend. [mm]
    """
    style = sheet.style
    copper = shapely.difference(_frame(sheet), shapely.union_all(list(windows)))
    half = style.least_copper / 2 * 0.999
    wide = copper.buffer(-half, join_style="mitre").buffer(half, join_style="mitre")
    copper = shapely.transform(wide, sheet.grid.snap)
    discs = [sheet.grid.disc(hole, style.mounting_hole + 2 * style.hole_clearance) for hole in holes]
    discs += [sheet.grid.disc(mark, mark_clearance(sheet)) for mark in marks]
    return shapely.difference(copper, shapely.union_all(discs))


def plane(sheet: Sheet, holes: Sequence[Point]) -> BaseGeometry:
    """Ground copper on the bottom: whole, but for the board edge and the mounting holes."""
    style = sheet.style
    discs = [sheet.grid.disc(hole, style.mounting_hole + 2 * style.hole_clearance) for hole in holes]
    reach_edge = [sheet.launch(feed, feed.launch) for feed in sheet.comb.feeds if feed.launch]
    copper = shapely.union_all([_pulled_back(sheet), *reach_edge])
    return shapely.difference(copper, shapely.union_all(discs))


def _pulled_back(sheet: Sheet) -> BaseGeometry:
    x_min, y_min, x_max, y_max = sheet.board.bounds
    back = sheet.style.edge_pullback
    return sheet.grid.box(x_min + back, y_min + back, x_max - back, y_max - back)


def _frame(sheet: Sheet) -> BaseGeometry:
    """Ground fill without mounting holes, marks and legend."""
    copper = shapely.difference(_pulled_back(sheet), sheet.clear_area.union(sheet.channels))
    for feed in sheet.comb.feeds:
        if feed.launch:
            gap = sheet.along(feed, 0.0, feed.launch.ground_length, feed.launch.ground_gap)
            copper = shapely.difference(copper.union(sheet.launch(feed, feed.launch)), gap)
    return copper


def launch_holes(sheet: Sheet) -> tuple[Point, ...]:
    """Middles of the vias of the launches: one row in each ground pad, beside the feed."""
    found: list[Point] = []
    for feed in sheet.comb.feeds:
        if feed.launch:
            found += _launch_rows(sheet, feed, feed.launch)
    return tuple(found)


def _launch_rows(sheet: Sheet, feed: Feed, launch: Launch) -> Iterator[Point]:
    pad = sheet.ground_vias.pad * MM
    if launch.ground_width * MM < pad or launch.ground_length * MM < pad:
        raise InputError("Launch", "ground_width", f"{launch.ground_width * MM:.6g} mm",
                         f"must hold vias whose pads are {pad:.6g} mm wide")
    start = pad / 2 + min(sheet.style.edge_pullback, launch.ground_length * MM - pad)
    stop = launch.ground_length * MM - pad / 2
    beside = (feed.width / 2 + launch.ground_gap) * MM + pad / 2
    for depth in _steps(start, stop, sheet.style.launch_pitch, pad):
        x = depth if feed.side == "left" else sheet.comb.width * MM - depth
        for y in (sheet.feed_y(feed) * MM - beside, sheet.feed_y(feed) * MM + beside):
            yield sheet.grid.number(x), sheet.grid.number(y)


def _steps(start: float, stop: float, pitch: float, least: float) -> list[float]:
    """Positions from start towards stop, at most a pitch apart; short of the stop where they would crowd."""
    span = abs(stop - start)
    count = math.ceil(span / pitch - 1e-9)
    if count and span / count < least:
        count -= 1
        stop = start + math.copysign(count * pitch, stop - start)
    return [float(position) for position in np.linspace(start, stop, count + 1)]


def fence_holes(sheet: Sheet, ground: BaseGeometry, taken: Sequence[Point]) -> tuple[Point, ...]:
    """Middles of the fence's vias: around the clear area and along the feeds, where there is fill.

    A via that would crowd one already there (``taken``), leave the copper, or break the mask web to a
    launch's opening is not drawn.
    """
    style, row = sheet.style, sheet.ground_vias
    pad, opening = row.pad * MM, row.drill * MM + 2 * style.mask_expansion
    room = ground.buffer(-(pad / 2 - style.grid), join_style="mitre")
    web = opening / 2 + style.mask_dam
    launches = [sheet.launch(feed, feed.launch).buffer(style.mask_expansion + web, join_style="mitre")
                for feed in sheet.comb.feeds if feed.launch]
    room = shapely.difference(room, shapely.union_all(launches))
    shapely.prepare(room)
    found: list[Point] = []
    for x, y in (*_along_feeds(sheet, pad), *_around(sheet, pad)):
        hole = (sheet.grid.number(x), sheet.grid.number(y))
        apart = all(math.dist(hole, other) >= pad for other in (*taken, *found))
        if apart and shapely.intersects_xy(room, *hole):
            found.append(hole)
    return tuple(found)


def _along_feeds(sheet: Sheet, pad: float) -> Iterator[Point]:
    """On both sides of the channels, from the fence around the clear area outward to launch or edge."""
    clear_x_min, _, clear_x_max, _ = sheet.clear_area.bounds
    width = sheet.board.bounds[2]
    for feed in sheet.comb.feeds:
        inner = clear_x_min if feed.side == "left" else width - clear_x_max
        outer = sheet.launch_end(feed) * MM
        beside = (feed.width / 2 + sheet.comb.feed_clearance) * MM + pad / 2
        if inner - pad / 2 < outer:
            continue
        for depth in _steps(inner - pad / 2, outer, sheet.style.fence_pitch, pad):
            x = depth if feed.side == "left" else width - depth
            yield x, sheet.feed_y(feed) * MM - beside
            yield x, sheet.feed_y(feed) * MM + beside


def _around(sheet: Sheet, pad: float) -> Iterator[Point]:
    """Around the clear area, half a via pad outside it, corners included."""
    x_min, y_min, x_max, y_max = sheet.clear_area.buffer(pad / 2, join_style="mitre").bounds
    across = _steps(x_min, x_max, sheet.style.fence_pitch, pad)
    along = _steps(y_min, y_max, sheet.style.fence_pitch, pad)[1:-1]
    yield from ((x, y) for y in (y_min, y_max) for x in across)
    yield from ((x, y) for x in (x_min, x_max) for y in along)
