"""Written files, read by other readers and compared with the artwork layer by layer."""

from __future__ import annotations

import csv
import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
import shapely
from ezdxf import options
from hypothesis import HealthCheck, given, settings
from pyogrio.raw import read as read_with_gdal
from readers import even_odd, read_dxf, read_gds
from sample_comb import chip_comb, combs, plate_comb

from layoutgen.errors import LayoutError
from layoutgen.exports import dxf, gds, layer_table
from layoutgen.exports.keyhole import keyhole
from layoutgen.geometry import Artwork, Circle, Item, Layer, Polygon, Style, draw

STYLE = Style(part_number="CL-1690-5.a", revision="B")
GDS_STEP = 1e-6  # database unit [mm]
GDS_CIRCLE = 1e-3  # share of a circle's area that a polygon may lose
GDAL_CIRCLE = 1e-3  # its arcs have a chord every four degrees: 0.08 % of the area

WRITERS = {"a.gds": gds.write, "a.dxf": dxf.write, "a.csv": layer_table.write}


@pytest.fixture(scope="module", params=[chip_comb, plate_comb], ids=["chips", "plates"])
def artwork(request) -> Artwork:
    return draw(request.param(), STYLE)


def drawn(artwork: Artwork) -> dict[Layer, shapely.Geometry]:
    shapes = {layer: artwork.layer_shape(layer) for layer in Layer}
    return {layer: shape for layer, shape in shapes.items() if not shape.is_empty}


def circle_area(artwork: Artwork, layer: Layer) -> float:
    return sum(item.shape.geometry.area for item in artwork.on_layer(layer) if isinstance(item.shape, Circle))


def assert_same(artwork: Artwork, read_back: dict[Layer, shapely.Geometry], *, step_mm: float,
                circle: float = 0.0) -> None:
    """Equal to within the file's coordinate step along all edges, and to what circles may lose."""
    shapes = drawn(artwork)
    assert shapes.keys() == read_back.keys()
    for layer, shape in shapes.items():
        stray = shape.symmetric_difference(read_back[layer]).area
        allowed = shape.length * step_mm + circle * circle_area(artwork, layer)
        assert stray <= allowed, f"{layer.name}: {stray:.3g} mm² differs"


def test_gds_holds_the_artwork(artwork, tmp_path):
    gds.write(artwork, tmp_path / "a.gds")

    found = read_gds(tmp_path / "a.gds")

    by_number = {(layer.gds_layer, layer.gds_datatype): layer for layer in Layer}
    layers = {by_number[key]: shape for key, shape in found.layers.items()}
    assert_same(artwork, layers, step_mm=GDS_STEP, circle=GDS_CIRCLE)


def test_gds_circles_keep_their_area(artwork, tmp_path):
    gds.write(artwork, tmp_path / "a.gds")

    found = read_gds(tmp_path / "a.gds").layers[Layer.PLATED_DRILLS.gds_layer, 0]

    exact = [np.pi * item.shape.diameter**2 / 4 for item in artwork.on_layer(Layer.PLATED_DRILLS)]
    np.testing.assert_allclose([part.area for part in found.geoms], exact, rtol=1e-3, atol=0)


def test_gds_has_one_cell_for_each_kind_and_refers_to_it(artwork, tmp_path):
    gds.write(artwork, tmp_path / "a.gds")

    cells = read_gds(tmp_path / "a.gds").cells

    kinds = {item.kind for item in artwork.items}
    assert kinds <= cells.keys()
    assert cells["board_CL_1690_5_a"] == ["SRef"] * len(kinds)
    assert cells["fence_via"] == ["SRef"] * len(artwork.of_kind("fence_via"))
    assert cells["resonator"] == ["Boundary"] * len(artwork.of_kind("resonator"))
    assert all(len(name) <= 32 and name.replace("_", "").isalnum() for name in cells)


def test_gds_adds_no_point_to_polygons(artwork, tmp_path):
    """Seams end in corners that were there; nothing is fractured."""
    gds.write(artwork, tmp_path / "a.gds")

    points = read_gds(tmp_path / "a.gds").points

    for layer in (Layer.BOTTOM_COPPER, Layer.TOP_LEGEND):
        rings = [ring for item in artwork.on_layer(layer)
                 for ring in (item.shape.exterior, *item.shape.holes)]
        corners = {(round(x * 1e6), round(y * 1e6)) for ring in rings for x, y in ring}
        assert points[layer.gds_layer, 0] == corners


def test_gds_refuses_what_its_integers_cannot_hold(tmp_path):
    huge = Artwork(part_number="a", revision="A", width=3000.0, height=10.0, grid=0.001, items=())

    with pytest.raises(LayoutError, match="2147 mm"):
        gds.write(huge, tmp_path / "a.gds")

    assert not (tmp_path / "a.gds").exists()


def test_gds_refuses_a_polygon_it_would_have_to_split(tmp_path):
    angle = np.linspace(0, 2 * np.pi, 9000, endpoint=False)
    ring = tuple((float(x), float(y)) for x, y in np.stack((np.cos(angle), np.sin(angle)), axis=1))
    item = Item(kind="outline", name="board", layer=Layer.BOARD_OUTLINE, shape=Polygon(ring))
    round_board = Artwork(part_number="a", revision="A", width=2.0, height=2.0, grid=0.001, items=(item,))

    with pytest.raises(LayoutError, match="9000 corners"):
        gds.write(round_board, tmp_path / "a.gds")


def test_dxf_holds_the_artwork(artwork, tmp_path):
    """Not a step of difference: the file has the artwork's own floats and true circles."""
    dxf.write(artwork, tmp_path / "a.dxf")

    found = read_dxf(tmp_path / "a.dxf")

    layers = {Layer[name]: layer.shape for name, layer in found.layers.items()}
    assert_same(artwork, layers, step_mm=1e-9)
    assert {layer.dxf_name for layer in Layer} <= set(found.declared_layers)


def test_dxf_says_its_unit_and_extents(artwork, tmp_path):
    dxf.write(artwork, tmp_path / "a.dxf")

    header = read_dxf(tmp_path / "a.dxf").header

    assert header["$ACADVER"] == [(1, "AC1024")]  # R2010
    assert header["$INSUNITS"] == [(70, "4")]  # millimetres
    assert header["$MEASUREMENT"] == [(70, "1")]  # metric
    assert [float(value) for _, value in header["$EXTMIN"]] == [0, 0, 0]
    assert [float(value) for _, value in header["$EXTMAX"]] == [artwork.width, artwork.height, 0]


def test_dxf_is_read_by_a_map_library(artwork, tmp_path):
    """GDAL, which knows nothing of boards: closed lines only, and the same areas."""
    dxf.write(artwork, tmp_path / "a.dxf")

    meta, _, shapes, columns = read_with_gdal(tmp_path / "a.dxf")

    names = columns[list(meta["fields"]).index("Layer")]
    lines = shapely.from_wkb(shapes)
    assert all(shapely.is_closed(lines))
    layers = {Layer[name]: even_odd([shapely.Polygon(line) for line in lines[names == name]])
              for name in set(names)}
    assert_same(artwork, layers, step_mm=1e-6, circle=GDAL_CIRCLE)


def test_dxf_has_no_shape_twice(artwork, tmp_path):
    dxf.write(artwork, tmp_path / "a.dxf")

    for name, layer in read_dxf(tmp_path / "a.dxf").layers.items():
        rings = [tuple(points) for points in layer.polylines]
        assert len(set(rings)) == len(rings), name
        assert len(set(layer.circles)) == len(layer.circles), name


def test_dxf_leaves_the_librarys_switch_as_it_was(artwork, tmp_path):
    before = options.write_fixed_meta_data_for_testing

    with pytest.raises(OSError, match="nowhere"):
        dxf.write(artwork, tmp_path / "nowhere" / "a.dxf")

    assert options.write_fixed_meta_data_for_testing == before


def test_layer_table_names_every_layer_of_the_gds(artwork, tmp_path):
    layer_table.write(artwork, tmp_path / "a.csv")
    gds.write(artwork, tmp_path / "a.gds")

    with (tmp_path / "a.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))

    assert len({(row["gds_layer"], row["gds_datatype"]) for row in rows}) == len(rows) == len(Layer)
    used = {(int(row["gds_layer"]), int(row["gds_datatype"])) for row in rows if int(row["objects"])}
    assert used == read_gds(tmp_path / "a.gds").layers.keys()


@pytest.mark.parametrize("name", WRITERS)
def test_the_same_bytes_twice_and_the_artwork_as_it_was(artwork, tmp_path, name):
    before = repr(artwork)

    WRITERS[name](artwork, tmp_path / name)
    first = (tmp_path / name).read_bytes()
    WRITERS[name](artwork, tmp_path / name)

    assert (tmp_path / name).read_bytes() == first
    assert repr(artwork) == before


SCRIPT = """
import sys
from pathlib import Path
sys.path[:0] = sys.argv[2:]
from sample_comb import chip_comb
from layoutgen.exports import dxf, gds
from layoutgen.geometry import Style, draw
artwork = draw(chip_comb(), Style(part_number="p"))
gds.write(artwork, Path(sys.argv[1] + ".gds"))
dxf.write(artwork, Path(sys.argv[1] + ".dxf"))
"""


def test_the_same_bytes_from_another_process(tmp_path):
    """The order of a set changes with the seed of Python's hashes, that is from run to run."""
    tests, seeds = Path(__file__).parents[1], ("1", "2", "3", "4")
    for seed in seeds:
        subprocess.run([sys.executable, "-c", SCRIPT, str(tmp_path / seed), str(tests), str(tests.parent)],
                       check=True, env={**os.environ, "PYTHONHASHSEED": seed})

    for suffix in (".gds", ".dxf"):
        assert len({(tmp_path / seed).with_suffix(suffix).read_bytes() for seed in seeds}) == 1


@settings(max_examples=5, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(comb=combs())
def test_any_comb_comes_back_from_both_formats(comb, tmp_path):
    artwork = draw(comb, STYLE)
    gds.write(artwork, tmp_path / "a.gds")
    dxf.write(artwork, tmp_path / "a.dxf")

    by_number = {(layer.gds_layer, layer.gds_datatype): layer for layer in Layer}
    from_gds = {by_number[key]: shape for key, shape in read_gds(tmp_path / "a.gds").layers.items()}
    from_dxf = {Layer[name]: layer.shape for name, layer in read_dxf(tmp_path / "a.dxf").layers.items()}

    assert_same(artwork, from_gds, step_mm=GDS_STEP, circle=GDS_CIRCLE)
    assert_same(artwork, from_dxf, step_mm=1e-9)


def square(x: float, y: float, side: float) -> tuple[tuple[float, float], ...]:
    return ((x, y), (x + side, y), (x + side, y + side), (x, y + side))


def test_a_keyhole_keeps_area_and_corners():
    holes = tuple(square(x, y, 1.0)[::-1] for x in (1.0, 4.0, 7.0) for y in (2.0, 5.5))
    polygon = Polygon(square(0.0, 0.0, 9.0), holes)

    ring = keyhole(polygon)

    corners = {corner for part in (polygon.exterior, *holes) for corner in part}
    x, y = np.array(ring).T
    assert set(ring) == corners
    assert abs(x @ np.roll(y, -1) - y @ np.roll(x, -1)) / 2 == pytest.approx(81 - 6, rel=1e-12)
    assert len(ring) == len(corners) + 2 * len(holes)


def test_a_keyhole_does_not_cross_a_slot_to_a_nearer_corner():
    """The corner nearest to the hole lies beyond a slot that is open at the top."""
    slotted = ((0.0, 0.0), (9.0, 0.0), (9.0, 9.0), (5.2, 9.0), (5.2, 5.5), (5.5, 5.0), (5.2, 4.5), (5.2, 2.0),
               (5.0, 2.0), (5.0, 9.0), (0.0, 9.0))
    polygon = Polygon(slotted, (square(4.4, 4.3, 0.4)[::-1],))

    ring = keyhole(polygon)

    seams = [shapely.LineString(edge) for edge in zip(ring, ring[1:] + ring[:1], strict=True)]
    assert all(polygon.geometry.covers(seam) for seam in seams)
