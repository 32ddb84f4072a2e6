"""The artwork of a comb: what is drawn is what was sized, and a board shop can make it."""

from __future__ import annotations

import dataclasses
from itertools import combinations, pairwise

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from sample_comb import LAUNCH, chip_comb, combs, plate_comb

from layoutgen.comb import Comb
from layoutgen.errors import InputError
from layoutgen.geometry import Artwork, Circle, Layer, Polygon, Style, draw

STYLE = Style(part_number="CL-1690-5.a", revision="B")
GRID = STYLE.grid
MM = 1e3

any_comb = settings(max_examples=12, deadline=None)


def shapes(artwork: Artwork, kind: str) -> list[shapely.Geometry]:
    return [item.shape.geometry for item in artwork.of_kind(kind)]


def strips(artwork: Artwork) -> list[shapely.Geometry]:
    """Copper of all resonators, feeds included, from left to right."""
    return [item.shape.geometry for item in artwork.items if item.kind in ("resonator", "tapped_resonator")]


def cut(copper: shapely.Geometry, x_min: float, x_max: float, y: float) -> list[tuple[float, float]]:
    """Stretches of copper along a horizontal line."""
    line = shapely.LineString([(x_min, y), (x_max, y)]).intersection(copper)
    return sorted((part.bounds[0], part.bounds[2]) for part in shapely.get_parts(line))


# valid geometry


@any_comb
@given(comb=combs())
def test_every_shape_is_valid_on_the_grid_and_turns_at_each_corner(comb):
    for item in draw(comb, STYLE).items:
        if isinstance(item.shape, Circle):
            assert_on_grid(np.array([item.shape.centre]))
            assert_on_grid(np.array([[item.shape.diameter, 0.0]]))
            continue
        assert item.shape.geometry.is_valid, item
        for ring in (item.shape.exterior, *item.shape.holes):
            corners = np.array(ring)
            assert_on_grid(corners)
            before = corners - np.roll(corners, 1, axis=0)
            after = np.roll(corners, -1, axis=0) - corners
            turn = before[:, 0] * after[:, 1] - before[:, 1] * after[:, 0]
            assert np.all(np.abs(turn) > 0.1 * GRID**2), f"{item.kind} {item.name} has an idle corner"


def assert_on_grid(points: np.ndarray) -> None:
    """The very float that the decimal figure stands for, so that every format writes the same figure."""
    assert points.tolist() == np.round(points, 3).tolist()


@any_comb
@given(comb=combs())
def test_items_of_a_layer_do_not_overlap(comb):
    artwork = draw(comb, STYLE)

    for layer in Layer:
        apart = sum(item.shape.geometry.area for item in artwork.on_layer(layer))
        assert apart == pytest.approx(artwork.layer_shape(layer).area, rel=1e-9, abs=1e-12), layer


@any_comb
@given(comb=combs())
def test_nothing_is_narrower_than_a_shop_can_make(comb):
    """Shrinking and growing by half of the least width loses narrow places, and only these.

    The tenth of a square of the grid for each corner is the rounding of discs to the grid.
    """
    artwork = draw(comb, STYLE)

    for layer, least in ((Layer.TOP_COPPER, 0.19), (Layer.BOTTOM_COPPER, 0.19),
                         (Layer.TOP_MASK_OPENINGS, 0.09), (Layer.TOP_PASTE, 0.19)):
        assert_no_sliver(artwork.layer_shape(layer), least)
    board = artwork.layer_shape(Layer.BOARD_OUTLINE)
    assert_no_sliver(board.difference(artwork.layer_shape(Layer.TOP_MASK_OPENINGS)), 0.09)
    assert_no_sliver(board.difference(artwork.layer_shape(Layer.TOP_COPPER)), 0.19)


def assert_no_sliver(shape: shapely.Geometry, least: float) -> None:
    opened = shape.buffer(-least / 2, join_style="mitre").buffer(least / 2, join_style="mitre")
    lost = shape.difference(opened.buffer(GRID))
    assert lost.area < 1e-3, f"{lost.area:.3g} mm² near {lost.representative_point()} is a sliver"


# the filter is drawn as it was sized


@any_comb
@given(comb=combs())
def test_widths_and_gaps_are_the_combs(comb):
    """Cut through the finished copper a third of a millimetre above the shorts and below the open ends."""
    artwork = draw(comb, STYLE)
    copper = artwork.layer_shape(Layer.TOP_COPPER)
    assert_cut(comb, copper, comb.short_line * MM + 0.3, [r.segments[0].width for r in comb.resonators])
    lowest = min(r.length for r in comb.resonators)
    assert_cut(comb, copper, (comb.short_line + lowest) * MM - 0.3,
               [r.segments[-1].width for r in comb.resonators])


def assert_cut(comb: Comb, copper: shapely.Geometry, y: float, widths: list[float]) -> None:
    xs = [resonator.x for resonator in comb.resonators]
    reach = comb.ground_clearance / 2
    found = cut(copper, (xs[0] - widths[0] / 2 - reach) * MM, (xs[-1] + widths[-1] / 2 + reach) * MM, y)
    assert [stop - start for start, stop in found] == pytest.approx([w * MM for w in widths], abs=1e-9)
    gaps = [b - a - (u + v) / 2 for (a, u), (b, v) in pairwise(zip(xs, widths, strict=True))]
    assert [b - a for (_, a), (b, _) in pairwise(found)] == pytest.approx([g * MM for g in gaps], abs=1e-9)


@pytest.mark.parametrize("comb", [chip_comb(), plate_comb()], ids=["chips", "plates"])
def test_gaps_at_the_widest_are_what_the_comb_says(comb):
    lines = strips(draw(comb, STYLE))

    found = [one.distance(other) for one, other in pairwise(lines)]

    assert found == pytest.approx([gap * MM for gap in comb.gaps], abs=GRID)


@any_comb
@given(comb=combs())
def test_lengths_are_the_combs(comb):
    for resonator, copper in zip(comb.resonators, strips(draw(comb, STYLE)), strict=True):
        _, bottom, _, top = copper.bounds
        assert bottom == pytest.approx((comb.short_line - resonator.overhang) * MM, abs=1e-9)
        assert top == pytest.approx((comb.short_line + resonator.length) * MM, abs=1e-9)


@any_comb
@given(comb=combs())
def test_feeds_are_one_piece_with_their_resonators_and_end_at_the_board_edge(comb):
    artwork = draw(comb, STYLE)

    first, last = (item.shape.geometry for item in artwork.of_kind("tapped_resonator"))
    (left, right), height = comb.feeds, comb.short_line * MM

    assert first.bounds[0] == 0.0
    assert last.bounds[2] == pytest.approx(comb.width * MM, abs=1e-9)
    for feed, copper, x in ((left, first, 0.0), (right, last, artwork.width)):
        at_edge = copper.intersection(shapely.LineString([(x, 0), (x, artwork.height)]))
        assert at_edge.length == pytest.approx(feed.width * MM, abs=1e-9)
        assert at_edge.centroid.y == pytest.approx(height + feed.tap * MM, abs=GRID)


@any_comb
@given(comb=combs())
def test_ground_keeps_its_distance(comb):
    """From resonators and pads everywhere, from feeds inside of the launches, from feeds in the launches."""
    artwork = draw(comb, STYLE)
    ground = shapely.union_all(shapes(artwork, "ground_fill"))
    edges = [(r.x * MM - r.segments[-1].width * MM / 2, r.x * MM + r.segments[-1].width * MM / 2)
             for r in comb.resonators]
    filter_only = shapely.box(edges[0][0], 0, edges[-1][1], artwork.height)
    parts = shapely.union_all([*(line.intersection(filter_only) for line in strips(artwork)),
                               *shapes(artwork, "ground_pad")])
    assert parts.distance(ground) >= comb.ground_clearance * MM - GRID

    depth = LAUNCH.ground_length * MM + GRID if comb.feeds[0].launch else 0.0
    for feed, line in zip(comb.feeds, (strips(artwork)[0], strips(artwork)[-1]), strict=True):
        inside = shapely.box(depth, 0, artwork.width - depth, artwork.height)
        clearance = line.intersection(inside).distance(ground.intersection(inside))
        assert clearance >= comb.feed_clearance * MM - GRID
        if feed.launch:
            assert line.distance(ground) == pytest.approx(feed.launch.ground_gap * MM, abs=GRID)


# copper is connected as meant


@any_comb
@given(comb=combs())
def test_every_piece_of_top_copper_is_tied_to_the_plane_but_the_marks(comb):
    artwork = draw(comb, STYLE)
    holes = artwork.layer_shape(Layer.PLATED_DRILLS)
    marks = shapely.union_all(shapes(artwork, "reference_mark"))

    pieces = shapely.get_parts(artwork.layer_shape(Layer.TOP_COPPER))
    (plane,) = shapely.get_parts(artwork.layer_shape(Layer.BOTTOM_COPPER))

    loose = [piece for piece in pieces if not piece.intersects(holes)]
    assert shapely.union_all(loose).symmetric_difference(marks).area < 1e-12
    assert plane.contains(holes)
    chips = sum(resonator.load is not None for resonator in comb.resonators)
    assert len(pieces) - len(loose) >= comb.order + chips + 1


def test_ground_fill_that_no_via_reaches_is_not_drawn():
    """A frame 0.25 to 0.4 mm wide, too narrow for a via pad of 0.6 mm."""
    comb = chip_comb()
    comb = widen(comb, width=comb.width - 1.2e-3, ground_clearance=11.2e-3,
                 resonators=tuple(dataclasses.replace(r, x=r.x - 0.6e-3) for r in comb.resonators),
                 feeds=tuple(dataclasses.replace(feed, launch=None) for feed in comb.feeds))

    artwork = draw(comb, dataclasses.replace(STYLE, mounting_holes=0))

    assert not artwork.of_kind("ground_fill")
    assert {"reference mark 1", "reference mark 2", "reference mark 3"} <= set(artwork.left_out)


@any_comb
@given(comb=combs())
def test_every_via_has_its_ring_of_copper(comb):
    artwork = draw(comb, STYLE)
    pad = comb.resonators[0].short.pad * MM
    for layer in (Layer.TOP_COPPER, Layer.BOTTOM_COPPER):
        copper = artwork.layer_shape(layer).buffer(GRID)
        for item in artwork.on_layer(Layer.PLATED_DRILLS):
            assert copper.contains(shapely.Point(item.shape.centre).buffer(pad / 2)), (layer, item)


@any_comb
@given(comb=combs())
def test_vias_are_the_combs(comb):
    artwork = draw(comb, STYLE)
    for resonator, (number, copper) in zip(comb.resonators, enumerate(strips(artwork), 1), strict=True):
        holes = [item for item in artwork.of_kind("short_via") if item.name == f"R{number}"]
        assert len(holes) == resonator.short.count
        for hole in holes:
            assert hole.shape.diameter == pytest.approx(resonator.short.finished * MM, abs=1e-9)
            assert hole.tool == pytest.approx(resonator.short.drill * MM, abs=1e-9)
            assert hole.shape.centre[1] == pytest.approx(comb.short_line * MM, abs=GRID)
            assert copper.contains(hole.shape.geometry)


@any_comb
@given(comb=combs())
def test_holes_do_not_run_into_each_other(comb):
    holes = [(item.shape.centre, item.tool or item.shape.diameter) for item in draw(comb, STYLE).items
             if item.layer in (Layer.PLATED_DRILLS, Layer.UNPLATED_HOLES)]
    for (one, a), (other, b) in combinations(holes, 2):
        assert np.hypot(one[0] - other[0], one[1] - other[1]) >= (a + b) / 2 + 0.19


@pytest.mark.parametrize("comb", [chip_comb(), plate_comb()], ids=["chips", "plates"])
def test_launch_vias_stand_at_most_a_millimetre_apart(comb):
    artwork = draw(comb, STYLE)
    rows: dict[tuple[bool, float], list[float]] = {}
    for item in artwork.of_kind("launch_via"):
        x, y = item.shape.centre
        rows.setdefault((x < artwork.width / 2, y), []).append(x)

    assert len(rows) == 4
    for xs in rows.values():
        assert max(np.diff(sorted(xs))) <= 1.0 + GRID
        assert len(xs) >= 3


@pytest.mark.parametrize("comb", [chip_comb(), plate_comb()], ids=["chips", "plates"])
def test_the_fence_closes_around_the_clear_area_but_for_the_feeds(comb):
    """Discs of the fence's pitch around its vias, and a disc over each feed, join to a closed ring."""
    artwork = draw(comb, STYLE)
    reach = STYLE.fence_pitch / 2 + GRID
    vias = [item.shape.centre for item in artwork.items if item.kind in ("fence_via", "launch_via")]
    ring = shapely.union_all(shapely.buffer(shapely.points(vias), reach))
    feeds = shapely.union_all([strips(artwork)[0], strips(artwork)[-1]])
    beside = comb.feed_clearance * MM + 0.7

    closed = ring.union(feeds.difference(shapely.box(9, 0, artwork.width - 9, 99)).buffer(beside))

    (outer,) = shapely.get_parts(closed.buffer(0.01))
    middle = shapely.Point(artwork.width / 2, (comb.short_line + comb.resonators[0].length / 2) * MM)
    assert any(shapely.Polygon(hole).contains(middle) for hole in outer.interiors)


# mask, paste, legend


@any_comb
@given(comb=combs())
def test_no_mask_over_resonators_and_gaps_but_around_chips(comb):
    artwork = draw(comb, STYLE)
    masked = artwork.layer_shape(Layer.BOARD_OUTLINE).difference(artwork.layer_shape(Layer.TOP_MASK_OPENINGS))
    lines = shapely.union_all(strips(artwork))
    depth = comb.ground_clearance * MM / 2 - 0.01
    left, right = comb.resonators[0], comb.resonators[-1]
    around = lines.intersection(shapely.box((left.x - left.segments[-1].width / 2) * MM, 0,
                                            (right.x + right.segments[-1].width / 2) * MM, 99))
    around = shapely.box(*around.bounds).buffer(depth)
    chips = [shapely.box(*shapely.total_bounds(pair)) for pair in pairs(shapes(artwork, "paste"))]
    webs = shapely.union_all([chip.buffer(0.16, join_style="mitre") for chip in chips])

    launch = (LAUNCH.ground_length * MM + 0.16) if comb.feeds[0].launch else 0.0
    inside = shapely.box(launch, 0, artwork.width - launch, artwork.height)

    assert masked.intersection(around).difference(webs).area < 1e-9
    assert masked.intersection(lines).intersection(inside).difference(webs).area < 1e-9


def pairs(parts: list[shapely.Geometry]) -> list[tuple[shapely.Geometry, shapely.Geometry]]:
    return list(zip(parts[::2], parts[1::2], strict=True))


@any_comb
@given(comb=combs())
def test_a_mask_dam_stands_on_the_line_and_before_the_vias(comb):
    artwork = draw(comb, STYLE)
    lands = artwork.of_kind("land_opening")
    bare = shapely.union_all(shapes(artwork, "bare_area"))

    assert bool(lands) == any(resonator.load for resonator in comb.resonators)
    for land in lands:
        assert land.shape.geometry.distance(bare) == pytest.approx(STYLE.mask_dam, abs=GRID)
    for via in artwork.of_kind("pad_via"):
        drill = shapely.Point(via.shape.centre).buffer(via.tool / 2)
        assert all(drill.distance(land.shape.geometry) >= STYLE.mask_dam - GRID for land in lands)


@any_comb
@given(comb=combs())
def test_paste_lies_on_bare_copper_and_on_no_hole(comb):
    artwork = draw(comb, STYLE)
    copper = artwork.layer_shape(Layer.TOP_COPPER)
    bare = artwork.layer_shape(Layer.TOP_MASK_OPENINGS)
    holes = artwork.layer_shape(Layer.PLATED_DRILLS)

    for item in artwork.of_kind("paste"):
        paste = item.shape.geometry
        assert copper.covers(paste)
        assert bare.covers(paste)
        assert paste.distance(holes) >= STYLE.mask_dam


def test_lands_are_where_the_chip_is():
    comb = chip_comb()
    artwork = draw(comb, STYLE)

    lands = pairs(shapes(artwork, "paste"))
    for number, (resonator, (low, high)) in enumerate(zip(comb.resonators, lands, strict=True), start=1):
        chip, end = resonator.load, (comb.short_line + resonator.length) * MM
        assert low.bounds == pytest.approx((resonator.x * MM - 0.3, end - 0.5, resonator.x * MM + 0.3, end))
        assert high.distance(low) == pytest.approx(chip.land_gap * MM, abs=GRID)
        body = artwork.of_kind("chip_body")[number - 1].shape.geometry
        assert body.centroid.distance(low) == pytest.approx(body.centroid.distance(high), abs=GRID)
        pad = artwork.of_kind("ground_pad")[number - 1].shape.geometry
        assert pad.area == pytest.approx(chip.pad_length * chip.pad_width * MM**2, rel=1e-9)
        assert high.centroid.y - pad.bounds[1] == pytest.approx(chip.land_length * MM / 2, abs=GRID)


@any_comb
@given(comb=combs())
def test_every_via_is_open_on_both_faces(comb):
    artwork = draw(comb, STYLE)
    holes = artwork.layer_shape(Layer.PLATED_DRILLS)

    assert artwork.layer_shape(Layer.TOP_MASK_OPENINGS).covers(holes)
    assert artwork.layer_shape(Layer.BOTTOM_MASK_OPENINGS).covers(holes)


@any_comb
@given(comb=combs())
def test_the_legend_keeps_off_copper_and_openings(comb):
    artwork = draw(comb, STYLE)
    ink = artwork.layer_shape(Layer.TOP_LEGEND)

    for layer in (Layer.TOP_COPPER, Layer.TOP_MASK_OPENINGS, Layer.PLATED_DRILLS, Layer.UNPLATED_HOLES):
        assert ink.distance(artwork.layer_shape(layer)) >= STYLE.legend_clearance - 2 * GRID, layer
    assert artwork.layer_shape(Layer.BOARD_OUTLINE).contains(ink)


@any_comb
@given(comb=combs())
def test_the_legend_numbers_every_resonator_and_chip_or_says_so(comb):
    artwork = draw(comb, STYLE)
    written = {item.name for item in artwork.of_kind("legend")} | set(artwork.left_out)

    numbers = range(1, comb.order + 1)
    assert {f"R{n}" for n in numbers} <= written
    assert ({f"C{n}" for n in numbers} <= written) == (comb.resonators[0].load is not None)


@pytest.mark.parametrize("comb", [chip_comb(), plate_comb()], ids=["chips", "plates"])
def test_a_usual_board_has_room_for_everything(comb):
    artwork = draw(comb, STYLE)

    assert artwork.left_out == ()
    assert "CL-1690-5.a REV B" in {item.name for item in artwork.of_kind("legend")}
    assert len(artwork.of_kind("reference_mark")) == 3
    assert len(artwork.of_kind("mounting_hole")) == 4


@pytest.mark.parametrize("clearance", [3.9e-3, 4.064e-3, 4.11e-3, 5.3e-3, 6.504e-3])
def test_numbers_stand_on_the_laminate_kept_masked_for_them(clearance):
    """Inside the clear area, so that no window in the ground fill is needed."""
    comb = widen(chip_comb(), ground_clearance=clearance)
    artwork = draw(comb, STYLE)

    numbers = [item.shape.geometry for item in artwork.of_kind("legend") if item.name[0] in "RC"
               and item.name[1:].isdigit()]
    inner = shapely.union_all(shapes(artwork, "fence_via")).bounds

    assert numbers
    assert all(shapely.box(*inner).contains(ink) for ink in numbers)


def test_a_long_part_number_is_set_in_lines():
    long_number = "X" * 64

    artwork = draw(chip_comb(), dataclasses.replace(STYLE, part_number=long_number))

    letters = [item for item in artwork.of_kind("legend") if set(item.name) == {"X"}]
    assert artwork.left_out == ()
    assert len(letters) == 64


def test_reference_marks_have_one_way_round():
    artwork = draw(chip_comb(), STYLE)
    marks = shapely.MultiPoint([item.shape.centre for item in artwork.of_kind("reference_mark")])

    for turned in (lambda p: (artwork.width, artwork.height) - p, lambda p: p * (-1, 1) + (artwork.width, 0),
                   lambda p: p * (1, -1) + (0, artwork.height)):
        assert shapely.transform(marks, turned).hausdorff_distance(marks) > 5


# the board


@pytest.mark.parametrize("comb", [chip_comb(), plate_comb()], ids=["chips", "plates"])
def test_ground_copper_keeps_off_the_board_edge_but_at_launches(comb):
    artwork = draw(comb, STYLE)
    board = artwork.layer_shape(Layer.BOARD_OUTLINE)
    assert board.bounds == pytest.approx((0, 0, comb.width * MM, comb.height * MM))
    rim = board.difference(board.buffer(GRID - STYLE.edge_pullback, join_style="mitre"))
    feed = comb.feeds[0]
    half = (feed.width / 2 + LAUNCH.ground_gap + LAUNCH.ground_width) * MM
    y = (comb.short_line + feed.tap) * MM
    top = shapely.union_all(shapes(artwork, "ground_fill")).intersection(rim)

    assert artwork.layer_shape(Layer.BOTTOM_COPPER).intersection(rim).bounds == pytest.approx(
        (0, y - half, artwork.width, y + half), abs=GRID)
    assert top.bounds == pytest.approx((0, y - half, artwork.width, y + half), abs=GRID)
    assert top.area == pytest.approx(4 * LAUNCH.ground_width * MM * (STYLE.edge_pullback - GRID), rel=1e-9)


@any_comb
@given(comb=combs())
def test_copper_keeps_off_the_mounting_holes(comb):
    artwork = draw(comb, STYLE)
    for layer in (Layer.TOP_COPPER, Layer.BOTTOM_COPPER):
        for item in artwork.of_kind("mounting_hole"):
            room = shapely.Point(item.shape.centre).distance(artwork.layer_shape(layer))
            # the clearing is a polygon of 64 corners inscribed in its circle
            assert room >= (STYLE.mounting_hole / 2 + STYLE.hole_clearance) * np.cos(np.pi / 64) - GRID


def test_the_same_comb_gives_the_same_artwork():
    assert draw(chip_comb(), STYLE) == draw(chip_comb(), STYLE)


# refusals


def widen(comb: Comb, **changes: object) -> Comb:
    return dataclasses.replace(comb, **changes)


def test_no_room_for_mounting_holes_is_refused():
    comb = chip_comb()
    feeds = tuple(dataclasses.replace(feed, launch=None) for feed in comb.feeds)
    comb = widen(comb, ground_clearance=9.5e-3, feeds=feeds)

    with pytest.raises(InputError, match=r"no room for the 2\.2 mm mounting holes"):
        draw(comb, STYLE)

    assert not draw(comb, dataclasses.replace(STYLE, mounting_holes=0)).of_kind("mounting_hole")


def test_a_feed_across_another_resonator_is_refused():
    comb = chip_comb()
    crossing = dataclasses.replace(comb.feeds[0], resonator=1)

    with pytest.raises(InputError, match="R1 and R2"):
        draw(widen(comb, feeds=(crossing, comb.feeds[1])), STYLE)


def test_ground_pads_that_touch_are_refused():
    comb = chip_comb()
    resonators = tuple(dataclasses.replace(r, load=dataclasses.replace(r.load, pad_width=4.2e-3))
                       for r in comb.resonators)

    with pytest.raises(InputError, match="C1 and C2"):
        draw(widen(comb, resonators=resonators), STYLE)


def test_a_launch_that_reaches_the_resonators_clearance_is_refused():
    comb = chip_comb()
    long_launch = dataclasses.replace(LAUNCH, ground_length=9e-3)
    feeds = tuple(dataclasses.replace(feed, launch=long_launch) for feed in comb.feeds)

    with pytest.raises(InputError, match="launch") as refusal:
        draw(widen(comb, feeds=feeds), STYLE)

    assert refusal.value.key == "ground_clearance"


def test_vias_too_near_to_the_land_for_a_dam_are_refused():
    comb = chip_comb()
    resonators = tuple(dataclasses.replace(r, load=dataclasses.replace(r.load, via_offset=0.82e-3))
                       for r in comb.resonators)

    with pytest.raises(InputError, match=r"0\.15 mm") as refusal:
        draw(widen(comb, resonators=resonators), STYLE)

    assert refusal.value.key == "via_offset"


def test_a_filter_that_leaves_the_board_is_refused():
    with pytest.raises(InputError, match="must contain every resonator"):
        draw(widen(chip_comb(), height=20e-3), STYLE)


@pytest.mark.parametrize(("key", "value"), [
    ("grid", 0.0), ("mask_dam", float("nan")), ("part_number", ""), ("mounting_holes", 3),
    ("reference_opening", 1.0), ("edge_pullback", -0.1),
])
def test_a_style_without_sense_is_refused(key, value):
    with pytest.raises(InputError) as refusal:
        dataclasses.replace(STYLE, **{key: value})

    assert refusal.value.key == key


def test_polygons_are_plain_values():
    for item in draw(chip_comb(), STYLE).items:
        if isinstance(item.shape, Polygon):
            hash(item.shape)
            assert all(type(value) is float for point in item.shape.exterior for value in point)
