"""Dimensions measured from the exported DXF alone give the reported response.

A drawing carries shapes and no electrical figures. The stack-up, the value of the capacitors and their
electrical figures, the height of their bodies, the plating of the holes and the walls that carry a cover
come from the design record; every dimension in the plane of the board is measured.
"""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import dataclass, replace
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import shapely
import skrf
from readers import Dxf, read_dxf
from shapely.geometry.base import BaseGeometry

from layoutgen.circuit import Circuit
from layoutgen.comb import ChipLoad, Comb, Feed, Resonator, Segment, Stack, ViaRow
from layoutgen.design import design
from layoutgen.package import deliver
from layoutgen.spec import load_spec

DEMO = Path(__file__).parents[1] / "outputs" / "harbour-telemetry.toml"
PLATES = """
[part]
number = "PL-3"
[passband]
lower = "2.27 GHz"
upper = "2.33 GHz"
order = 3
[construction]
substrate = "ptfe-microfibre-2.20"
[load]
kind = "plate"
"""
COVERED = """
[part]
number = "CV-3"
[passband]
lower = "1.61 GHz"
upper = "1.72 GHz"
order = 3
[construction]
substrate = "ptfe-ceramic-3.00"
cover = "7.3 mm"
"""
NM = 1e-6
"""A nanometre in millimetres: far below the grid, above the noise of doubles."""


# -- a drawing, measured


@dataclass
class Hole:
    """A plated hole. [mm]"""

    x: float
    y: float
    diameter: float


def measured_comb(dxf: Dxf, record: dict[str, Any]) -> Comb:
    """The comb that is drawn, with what a drawing cannot carry from the record."""
    board = box_of(dxf, "BOARD_OUTLINE")[0]
    pieces = [p for p in shapely.get_parts(dxf.layers["TOP_COPPER"].shape) if not p.interiors]
    # strips and pads have one row of holes; ground fill has holes all around, reference marks have none
    rows = [(piece, row_in(dxf, piece)) for piece in pieces]
    rows = [(piece, row) for piece, row in rows if row and max(h.y for h in row) - min(h.y for h in row) < NM]
    short_line = min(row[0].y for _, row in rows)
    strips = sorted(
        ((p, row) for p, row in rows if abs(row[0].y - short_line) < NM), key=lambda strip: middle(strip[1])
    )
    pads = sorted(
        ((p, row) for p, row in rows if row[0].y > short_line + NM), key=lambda pad: middle(pad[1])
    )
    resonators, feeds = [], []
    for index, (strip, row) in enumerate(strips):
        recorded = record["comb"]["resonators"][index]
        load = None
        if pads:
            load = measured_chip(dxf, strip, *pads[index], recorded["load"])
            assert middle(pads[index][1]) == pytest.approx(middle(row), rel=0, abs=NM)
        resonators.append(measured_resonator(strip, row, board, load, recorded["short"]))
        feeds += measured_feeds(strip, index, short_line, board, record)
    left, right = feeds
    stack = record["comb"]["stack"]
    walls = record["comb"]["side_walls_mm"]
    ground = shapely.union_all([p for p in shapely.get_parts(dxf.layers["TOP_COPPER"].shape)
                                if len(row_in(dxf, p)) > 4])  # fmt: skip
    return Comb(
        stack=Stack(height=stack["height_mm"] / 1e3, eps_r=stack["eps_r"], tan_delta=stack["tan_delta"],
                    conductor=stack["conductor_mm"] / 1e3, conductivity=stack["conductivity_s_per_m"],
                    roughness=stack["roughness_um"] / 1e6,
                    cover=None if stack["cover_mm"] is None else stack["cover_mm"] / 1e3),
        resonators=tuple(resonators), feeds=(left, right),
        width=board[2] / 1e3, height=board[3] / 1e3, short_line=short_line / 1e3,
        ground_clearance=min(ground.distance(below_feed(p)) for p, _ in strips) / 1e3,
        feed_clearance=record["comb"]["feed_clearance_mm"] / 1e3,
        side_walls=None if walls is None else (walls[0] / 1e3, walls[1] / 1e3),
    )  # fmt: skip


def measured_resonator(
    strip: BaseGeometry, row: list[Hole], board: list[float], load: ChipLoad | None, recorded: dict[str, Any]
) -> Resonator:
    """Centre line from the holes, widths from the edges that no feed covers, lengths from the holes' axis."""
    x, axis = middle(row), row[0].y
    pieces: list[tuple[float, float, float]] = []  # width, from, to
    levels = sorted({y for _, y in strip.exterior.coords})
    for bottom, top in pairwise(levels):
        left, _, right, _ = slice_at(strip, (bottom + top) / 2)
        sides = [2 * side for side, edge in ((x - left, left), (right - x, right)) if inside(edge, board)]
        width = float(np.mean(sides))
        if pieces and abs(pieces[-1][0] - width) < NM:
            pieces[-1] = (width, pieces[-1][1], top)
        else:
            pieces.append((width, bottom, top))
    overhang = axis - levels[0]
    segments = [
        Segment(length=(top - max(bottom, axis)) / 1e3, width=width / 1e3)
        for width, bottom, top in pieces if top > axis + NM
    ]  # fmt: skip
    pad = min(2 * overhang, pieces[0][0] - (row[-1].x - row[0].x))
    return Resonator(x=x / 1e3, segments=tuple(segments), short=via_row(row, pad, recorded),
                     overhang=overhang / 1e3, load=load)  # fmt: skip


def measured_chip(
    dxf: Dxf, strip: BaseGeometry, pad: BaseGeometry, row: list[Hole], recorded: dict[str, Any]
) -> ChipLoad:
    """Lands from the paste, body from the assembly drawing, the ground pad from copper."""
    on_line, on_pad = (
        next(box for box in box_of(dxf, "TOP_PASTE") if copper.buffer(NM).covers(shapely.box(*box)))
        for copper in (strip, pad)
    )
    body = next(box for box in box_of(dxf, "TOP_ASSEMBLY") if shapely.box(*box).intersects(pad))
    left, bottom, right, top = pad.bounds
    assert bottom == pytest.approx(on_pad[1], rel=0, abs=NM)
    return ChipLoad(
        case=recorded["case"], capacitance=recorded["capacitance_pf"] / 1e12,
        tolerance=recorded["tolerance_pf"] / 1e12, resistance=recorded["resistance_ohm"],
        inductance=recorded["inductance_nh"] / 1e9, body_height=recorded["body_height_mm"] / 1e3,
        current_height=recorded["current_height_mm"] / 1e3,
        body_length=(body[3] - body[1]) / 1e3, body_width=(body[2] - body[0]) / 1e3,
        land_length=(on_line[3] - on_line[1]) / 1e3, land_width=(on_line[2] - on_line[0]) / 1e3,
        land_gap=(on_pad[1] - strip.bounds[3]) / 1e3,
        pad_length=(top - bottom) / 1e3, pad_width=(right - left) / 1e3,
        via_offset=(row[0].y - bottom) / 1e3, vias=via_row(row, 2 * (row[0].x - left), recorded["vias"]),
    )  # fmt: skip


def measured_feeds(
    strip: BaseGeometry, index: int, short_line: float, board: list[float], record: dict[str, Any]
) -> list[Feed]:
    """The feed that runs from a strip to the board edge, if any."""
    feeds = []
    for number, (side, edge) in enumerate((("left", board[0]), ("right", board[2]))):
        ys = [y for x, y in strip.exterior.coords if abs(x - edge) < NM]
        if ys:
            tap, width = (min(ys) + max(ys)) / 2 - short_line, max(ys) - min(ys)
            impedance = record["comb"]["feeds"][number]["impedance_ohm"]
            feeds.append(Feed(resonator=index, side=side, tap=tap / 1e3, width=width / 1e3,
                              impedance=impedance, launch=None))  # fmt: skip
    return feeds


def via_row(row: list[Hole], pad: float, recorded: dict[str, Any]) -> ViaRow:
    """Holes of a row; the drawing shows finished diameters, the plating is in the record."""
    plating = recorded["drill_mm"] - recorded["finished_mm"]
    pitch = row[1].x - row[0].x if len(row) > 1 else recorded["pitch_mm"]
    return ViaRow(count=len(row), pitch=pitch / 1e3, finished=row[0].diameter / 1e3,
                  drill=(row[0].diameter + plating) / 1e3, pad=pad / 1e3)  # fmt: skip


def row_in(dxf: Dxf, copper: BaseGeometry) -> list[Hole]:
    holes = [Hole(x, y, d) for (x, y), d in dxf.layers["PLATED_DRILLS"].circles]
    return sorted((h for h in holes if copper.contains(shapely.Point(h.x, h.y))), key=lambda h: h.x)


def middle(row: list[Hole]) -> float:
    return sum(hole.x for hole in row) / len(row)


def box_of(dxf: Dxf, layer: str) -> list[list[float]]:
    """Extents of each polyline of a layer."""
    if layer not in dxf.layers:
        return []
    return [list(shapely.Polygon(points).bounds) for points in dxf.layers[layer].polylines]


def slice_at(copper: BaseGeometry, y: float) -> tuple[float, float, float, float]:
    return copper.intersection(shapely.LineString([(-1e3, y), (1e3, y)])).bounds


def inside(x: float, board: list[float]) -> bool:
    return board[0] + NM < x < board[2] - NM


def below_feed(strip: BaseGeometry) -> BaseGeometry:
    """The open end of a strip, where no feed is attached."""
    left, _, right, top = strip.bounds
    return strip.intersection(shapely.box(left, top - 0.1, right, top))


# -- packages


@dataclass
class Built:
    """A package on disk, its design's comb and grid."""

    comb: Comb
    grid: float
    dxf: Dxf
    record: dict[str, Any]
    touchstone: Path

    def response(self, comb: Comb) -> np.ndarray:
        """At the frequencies of the reported one."""
        return Circuit(comb).scattering(self.reported.f)

    @property
    def reported(self) -> skrf.Network:
        return skrf.Network(str(self.touchstone))


@pytest.fixture(scope="module", params=["demo", "plates", "covered"])
def built(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Built:
    folder = tmp_path_factory.mktemp("round-trip")
    path = DEMO
    if request.param != "demo":
        path = folder / "spec.toml"
        path.write_text({"plates": PLATES, "covered": COVERED}[request.param])
    made = design(load_spec(path))
    deliver(made, folder / "package")
    number = made.spec.part.number
    return Built(
        comb=made.comb,
        grid=made.spec.board.grid,
        dxf=read_dxf(folder / "package" / f"{number}.dxf"),
        record=json.loads((folder / "package" / f"{number}.json").read_text()),
        touchstone=folder / "package" / f"{number}.s2p",
    )


def nudged(comb: Comb, step: float) -> dict[str, Comb]:
    """Combs with one dimension of one resonator, or the tap, changed by a little."""
    one, rest = comb.resonators[0], comb.resonators[1:]
    last = one.segments[-1]

    def with_first(**changes: Any) -> Comb:
        return replace(comb, resonators=(replace(one, **changes), *rest))

    return {
        "length": with_first(segments=(*one.segments[:-1], replace(last, length=last.length + step))),
        "width": with_first(segments=(*one.segments[:-1], replace(last, width=last.width + step))),
        "gap": with_first(x=one.x - step),
        "tap": replace(comb, feeds=(replace(comb.feeds[0], tap=comb.feeds[0].tap + step), comb.feeds[1])),
    }


def grid_effect(built: Built) -> float:
    """Least change of the response that one dimension half a grid step off would make."""
    before = built.response(built.comb)
    return min(
        float(np.abs(built.response(comb) - before).max())
        for comb in nudged(built.comb, built.grid / 2).values()
    )


def departure(built: Built, dxf: Dxf) -> float:
    """Largest difference of an S-parameter between the drawing and the report."""
    return float(np.abs(built.response(measured_comb(dxf, built.record)) - built.reported.s).max())


def test_the_drawing_has_the_reported_response(built):
    """Every dimension is drawn on the grid, so not one may be half a step off."""
    assert departure(built, built.dxf) < grid_effect(built)


def test_the_measured_dimensions_are_those_of_the_comb(built):
    drawn, meant = measured_comb(built.dxf, built.record), built.comb

    assert drawn.order == meant.order
    pairs = [*zip(drawn.gaps, meant.gaps, strict=True), (drawn.width, meant.width),
             (drawn.height, meant.height)]  # fmt: skip
    for one, other in zip(drawn.resonators, meant.resonators, strict=True):
        pairs += [(one.x, other.x), (one.length, other.length), (one.width, other.width),
                  (one.overhang, other.overhang)]  # fmt: skip
        assert one.short.count == other.short.count
    for one, other in zip(drawn.feeds, meant.feeds, strict=True):
        assert (one.resonator, one.side) == (other.resonator, other.side)
        pairs += [(one.tap, other.tap), (one.width, other.width)]
    for found, expected in pairs:
        assert found == pytest.approx(expected, rel=0, abs=built.grid / 2)
    assert drawn.ground_clearance >= meant.ground_clearance - built.grid


STEP = 0.005  # mm


def shifted(dxf: Dxf, layer: str, chosen: Callable[[float, float], bool], dx: float, dy: float) -> Dxf:
    """The drawing with some corners and holes of one layer moved."""
    old = dxf.layers[layer]

    def move(x: float, y: float) -> tuple[float, float]:
        return (x + dx, y + dy) if chosen(x, y) else (x, y)

    polylines = [[move(x, y) for x, y in points] for points in old.polylines]
    circles = [(move(x, y), d) for (x, y), d in old.circles]
    assert polylines != old.polylines or circles != old.circles, "something moved"
    return replace(dxf, layers=dxf.layers | {layer: replace(old, polylines=polylines, circles=circles)})


def faults(built: Built) -> dict[str, Dxf]:
    """Drawings in which one dimension is 5 um off, mostly of the second resonator."""
    comb, dxf = built.comb, built.dxf
    second, feed = comb.resonators[1], comb.feeds[0]
    x, axis = second.x * 1e3, comb.short_line * 1e3
    top, half = axis + second.length * 1e3, second.segments[-1].width * 1e3 / 2
    edges = [axis + (feed.tap + side * feed.width / 2) * 1e3 for side in (-1, 1)]

    def on(value: float, *targets: float) -> bool:
        return any(abs(value - target) < NM for target in targets)

    def beside(px: float) -> bool:
        return abs(px - x) <= half + NM

    copper = "TOP_COPPER"
    right_edge = shifted(dxf, copper, lambda px, py: on(px, x + half), STEP, 0)
    aside = shifted(dxf, copper, lambda px, py: abs(px - x) < 3 * half and axis - 1 < py < top + NM, STEP, 0)
    found = {
        "a line is longer": shifted(dxf, copper, lambda px, py: on(py, top) and beside(px), 0, STEP),
        "a line is wider": shifted(right_edge, copper, lambda px, py: on(px, x - half), -STEP, 0),
        "the tap is higher": shifted(
            dxf, copper, lambda px, py: px < comb.resonators[0].x * 1e3 and on(py, *edges), 0, STEP
        ),
        "the shorts are lower": shifted(dxf, "PLATED_DRILLS", lambda px, py: on(py, axis), 0, -STEP),
    }
    if second.load is None:
        holes = shifted(aside, "PLATED_DRILLS", lambda px, py: beside(px) and on(py, axis), STEP, 0)
        return found | {"a gap is wider": holes}
    # the model takes the lands of all chips from the first one
    first, load = comb.resonators[0], second.load
    foot, pad_half = axis + (first.length + load.land_gap) * 1e3, load.pad_width * 1e3 / 2

    def at_foot(px: float, py: float) -> bool:
        return on(py, foot) and abs(px - first.x * 1e3) <= pad_half + NM

    pad = shifted(dxf, copper, at_foot, 0, STEP)
    return found | {"a ground pad is farther from its line": shifted(pad, "TOP_PASTE", at_foot, 0, STEP)}


def test_a_drawing_that_is_5_um_off_does_not_have_the_reported_response(built):
    allowed = grid_effect(built)

    for what, fault in faults(built).items():
        # a longer line under a chip that stays where it is makes up for most of itself: 1.7 times
        assert departure(built, fault) > 1.5 * allowed, what
