"""What holds for any valid specification: a sound filter, drawn as sized, or a refusal that helps."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from itertools import combinations
from pathlib import Path

import numpy as np
import pytest
import shapely
from built import contents, small_design
from hypothesis import HealthCheck, event, given, settings
from hypothesis import strategies as st

from layoutgen.design import Design, design
from layoutgen.errors import PhysicalRefusal
from layoutgen.geometry import Artwork, Circle, Item, Layer, Polygon
from layoutgen.library import default_library
from layoutgen.package import deliver
from layoutgen.spec import Spec, load_spec

LAMINATES = [laminate.name for laminate in default_library().laminates()]
NOISE = 1e-6
"""Of a coordinate in millimetres: far below any grid."""


@st.composite
def specifications(draw: st.DrawFn) -> str:
    """Text of a specification that the reader accepts; whether it can be built is another matter."""
    centre, width = draw(st.floats(0.75, 2.9)), draw(st.floats(0.03, 0.13))
    plate = draw(st.integers(0, 3)) == 0
    shape = draw(st.sampled_from(["chebyshev", "chebyshev", "butterworth"]))
    cover = draw(st.sampled_from(["none", "none", "6.7 mm", "11.3 mm"]))
    lines = [
        "[part]", 'number = "PR-1"', "[passband]",
        f'lower = "{centre * (1 - width / 2):.4f} GHz"', f'upper = "{centre * (1 + width / 2):.4f} GHz"',
        f'shape = "{shape}"', f"order = {draw(st.integers(2, 5))}",
    ]  # fmt: skip
    if shape == "chebyshev":
        lines.append(f'return_loss = "{draw(st.floats(13, 24)):.2f} dB"')
    return "\n".join([
        *lines,
        "[construction]", f'substrate = "{draw(st.sampled_from(LAMINATES))}"', f'cover = "{cover}"',
        "[load]", f'kind = "{"plate" if plate else "chip"}"',
        "[board]", f'grid = "{draw(st.sampled_from(["1 um", "2 um", "5 um"]))}"',
        f'connector = "{draw(st.sampled_from(["edge pads", "none"]))}"', "",
    ])  # fmt: skip


def read(text: str, folder: Path) -> Spec:
    path = folder / "any.toml"
    path.write_text(text, encoding="utf-8")
    return load_spec(path)


@pytest.mark.slow
@settings(max_examples=14, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(text=specifications())
def test_any_specification_gives_a_sound_filter_or_a_refusal_with_a_figure(tmp_path_factory, text):
    """The examples change only with this file and the library: the suite gives the same answer twice."""
    made = designed_or_refused(read(text, tmp_path_factory.mktemp("any")))
    if isinstance(made, PhysicalRefusal):
        event("refused")
        assert any(character.isdigit() for character in made.remedy), made
        assert made.where
        assert made.key
        return
    event("designed")
    check_response(made)
    check_shapes(made.artwork)
    check_lines(made)
    check_holes(made)


def designed_or_refused(spec: Spec) -> Design | PhysicalRefusal:
    try:
        return design(spec)
    except PhysicalRefusal as refusal:
        return refusal


def check_response(made: Design) -> None:
    """Passive and reciprocal from far below the band to its third harmonic."""
    s = made.response(made.spec.passband.centre * np.linspace(0.1, 3.3, 161))

    np.testing.assert_allclose(s, s.transpose(0, 2, 1), rtol=0, atol=1e-9)
    lost = np.eye(2) - s.conj().transpose(0, 2, 1) @ s
    assert np.linalg.eigvalsh(lost).min() > -1e-9
    lossless = made.lossless_response(made.spec.passband.centre * np.linspace(0.6, 1.6, 21))
    power = lossless.conj().transpose(0, 2, 1) @ lossless
    np.testing.assert_allclose(power, np.broadcast_to(np.eye(2), power.shape), rtol=0, atol=1e-8)


def check_shapes(artwork: Artwork) -> None:
    """Valid, on the grid, inside the board, and apart from all others of the layer."""
    board = shapely.box(-NOISE, -NOISE, artwork.width + NOISE, artwork.height + NOISE)
    for item in artwork.items:
        area = item.shape.geometry
        assert area.is_valid, item
        assert area.area > 0, item
        assert board.covers(area), item
        steps = np.array(coordinates(item)) / artwork.grid
        assert np.abs(steps - np.round(steps)).max() < NOISE / artwork.grid, item
    for layer in Layer:
        shapes = [(item.kind, item.name, item.shape.geometry) for item in artwork.on_layer(layer)]
        for one, other in combinations(shapes, 2):
            if shapely.box(*one[2].bounds).intersects(shapely.box(*other[2].bounds)):
                assert not one[2].intersects(other[2]), (layer, one[:2], other[:2])


def coordinates(item: Item) -> list[float]:
    """Of all corners; for a circle, of its middle, and its diameter."""
    if isinstance(item.shape, Circle):
        return [*item.shape.centre, item.shape.diameter]
    return [value for ring in (item.shape.exterior, *item.shape.holes) for point in ring for value in point]


def check_lines(made: Design) -> None:
    """Lines, gaps and feeds in the artwork are those of the comb, and no gap is under the shop's limit."""
    comb, artwork = made.comb, made.artwork
    lines = {item.name: item.shape.geometry for item in artwork.on_layer(Layer.TOP_COPPER)
             if item.kind in ("resonator", "tapped_resonator")}  # fmt: skip
    assert set(lines) == {f"R{i + 1}" for i in range(comb.order)}
    axis, exact = comb.short_line * 1e3, {"rel": 0, "abs": NOISE}
    for index, resonator in enumerate(comb.resonators):
        line = lines[f"R{index + 1}"]
        x, top = resonator.x * 1e3, axis + resonator.length * 1e3
        assert line.bounds[1] == pytest.approx(axis - resonator.overhang * 1e3, **exact)
        assert line.bounds[3] == pytest.approx(top, **exact)
        height = axis
        for segment in resonator.segments:
            height += segment.length * 1e3
            across = line.intersection(shapely.LineString([(-1, height - 0.01), (1e3, height - 0.01)])).bounds
            assert across[0] == pytest.approx(x - segment.width * 1e3 / 2, **exact)
            assert across[2] == pytest.approx(x + segment.width * 1e3 / 2, **exact)
    for index, gap in enumerate(comb.gaps):
        drawn = lines[f"R{index + 1}"].distance(lines[f"R{index + 2}"])
        assert drawn == pytest.approx(gap * 1e3, **exact)
        assert drawn >= made.spec.board.shop.min_gap(comb.stack.conductor) * 1e3 - NOISE
    for feed, edge in zip(comb.feeds, (0.0, artwork.width), strict=True):
        at_edge = lines[f"R{feed.resonator + 1}"].intersection(shapely.LineString([(edge, -1), (edge, 1e3)]))
        assert at_edge.bounds[1] == pytest.approx(axis + (feed.tap - feed.width / 2) * 1e3, **exact)
        assert at_edge.bounds[3] == pytest.approx(axis + (feed.tap + feed.width / 2) * 1e3, **exact)


def check_holes(made: Design) -> None:
    """Every plated hole joins both coppers with the shop's ring around it; unplated ones touch none."""
    artwork, ring = made.artwork, made.spec.board.shop.annular_ring * 1e3
    top, bottom = (artwork.layer_shape(layer).buffer(0.5 * artwork.grid)
                   for layer in (Layer.TOP_COPPER, Layer.BOTTOM_COPPER))  # fmt: skip
    holes = artwork.on_layer(Layer.PLATED_DRILLS)
    assert holes
    for hole in holes:
        assert hole.tool > hole.shape.diameter
        land = shapely.Point(hole.shape.centre).buffer(hole.shape.diameter / 2 + ring, quad_segs=32)
        assert top.covers(land), hole
        assert bottom.covers(land), hole
    for one, other in combinations(holes, 2):
        apart = np.hypot(*np.subtract(one.shape.centre, other.shape.centre))
        assert apart > (one.tool + other.tool) / 2, (one, other)
    for hole in artwork.on_layer(Layer.UNPLATED_HOLES):
        assert not hole.shape.geometry.intersects(top)
        assert not hole.shape.geometry.intersects(bottom)


def without(artwork: Artwork, kind: str) -> Artwork:
    return replace(artwork, items=tuple(item for item in artwork.items if item.kind != kind))


def moved(artwork: Artwork, kind: str, step: float) -> Artwork:
    """Artwork with everything of a kind moved along x. [mm]"""

    def move(item: Item) -> Item:
        if item.kind != kind:
            return item
        if isinstance(item.shape, Circle):
            x, y = item.shape.centre
            return replace(item, shape=replace(item.shape, centre=(x + step, y)))
        ring = tuple((x + step, y) for x, y in item.shape.exterior)
        return replace(item, shape=Polygon(ring, item.shape.holes))

    return replace(artwork, items=tuple(move(item) for item in artwork.items))


FAULTS: list[tuple[str, Callable[[Design], None], Callable[[Artwork], Artwork]]] = [
    ("lines 1 um aside", check_lines, lambda artwork: moved(artwork, "resonator", 0.001)),
    ("a line is missing", check_lines, lambda artwork: without(artwork, "resonator")),
    ("no ground plane", check_holes, lambda artwork: without(artwork, "ground_plane")),
    ("vias off their pads", check_holes, lambda artwork: moved(artwork, "pad_via", 0.2)),
    ("half a step off the grid", lambda made: check_shapes(made.artwork),
     lambda artwork: moved(artwork, "ground_pad", 0.0005)),
    ("pads on pads", lambda made: check_shapes(made.artwork),
     lambda artwork: replace(artwork, items=(*artwork.items, artwork.of_kind("ground_pad")[0]))),
]  # fmt: skip


@pytest.mark.parametrize(("check", "fault"), [f[1:] for f in FAULTS], ids=[f[0] for f in FAULTS])
def test_the_checks_above_notice_faults(check, fault):
    made = small_design()
    check(made)

    with pytest.raises(AssertionError):
        check(replace(made, artwork=fault(made.artwork)))


PLATES_UNDER_A_COVER = """
[part]
number = "PC-2"
[passband]
lower = "2.31 GHz"
upper = "2.39 GHz"
order = 2
[construction]
substrate = "ptfe-ceramic-2.94"
cover = "8.3 mm"
[load]
kind = "plate"
"""
FLAT_CHIPS = """
[part]
number = "FC-4"
[passband]
lower = "1.13 GHz"
upper = "1.21 GHz"
shape = "butterworth"
order = 4
[construction]
substrate = "ceramic-thermoset-4.70"
[board]
connector = "none"
"""


@pytest.mark.slow
@pytest.mark.parametrize("text", [PLATES_UNDER_A_COVER, FLAT_CHIPS], ids=["plates", "chips"])
def test_the_same_specification_gives_the_same_bytes(tmp_path, text):
    """Designed twice from the start, not only written twice."""
    for folder in ("one", "two"):
        deliver(design(read(text, tmp_path)), tmp_path / folder)

    assert contents(tmp_path / "one") == contents(tmp_path / "two")
