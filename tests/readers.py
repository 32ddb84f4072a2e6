"""Readers of written files that share nothing with the writers.

DXF is parsed here from its group codes alone (Autodesk's published DXF reference: a group is two lines, code
and value); GDSII is read by python-gdsii and flattened here.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import reduce
from itertools import pairwise
from pathlib import Path

import shapely
from gdsii.elements import ARef, Boundary, SRef
from gdsii.library import Library
from shapely.geometry.base import BaseGeometry

Point = tuple[float, float]
Group = tuple[int, str]


@dataclass
class DxfLayer:
    """Shapes of one layer. [mm]"""

    polylines: list[list[Point]] = field(default_factory=list)
    circles: list[tuple[Point, float]] = field(default_factory=list)  # centre, diameter

    @property
    def shape(self) -> BaseGeometry:
        """Area by the even-odd rule."""
        parts = [shapely.Polygon(points) for points in self.polylines]
        parts += [shapely.Point(centre).buffer(d / 2, quad_segs=32) for centre, d in self.circles]
        return even_odd(parts)


@dataclass
class Dxf:
    """What a DXF file says."""

    header: dict[str, list[Group]]
    declared_layers: list[str]
    layers: dict[str, DxfLayer]


def even_odd(parts: list[BaseGeometry]) -> BaseGeometry:
    """Area covered by an odd number of parts; large ones first."""
    parts = sorted(parts, key=lambda part: -part.area)
    return reduce(lambda one, other: one.symmetric_difference(other), parts, shapely.Polygon())


def read_dxf(path: Path) -> Dxf:
    """Closed polylines and circles of a DXF file, layer by layer; anything else in it is an error."""
    sections = _sections(path)
    header: dict[str, list[Group]] = {}
    for code, value in sections["HEADER"]:
        if code == 9:
            header[value] = []
        else:
            header[next(reversed(header))].append((code, value))
    declared = [dict(entity)[2] for entity in _entities(sections["TABLES"]) if entity[0] == (0, "LAYER")]
    layers: dict[str, DxfLayer] = {}
    for entity in _entities(sections["ENTITIES"]):
        _add(layers, entity)
    return Dxf(header, declared, layers)


def _sections(path: Path) -> dict[str, list[Group]]:
    lines = path.read_text(encoding="utf-8").splitlines()
    groups = [(int(code), value.strip()) for code, value in zip(lines[::2], lines[1::2], strict=True)]
    assert groups[-1] == (0, "EOF")
    starts = [i for i, group in enumerate(groups) if group == (0, "SECTION")]
    stops = [i for i, group in enumerate(groups) if group == (0, "ENDSEC")]
    return {groups[start + 1][1]: groups[start + 2:stop] for start, stop in zip(starts, stops, strict=True)}


def _entities(groups: list[Group]) -> list[list[Group]]:
    starts = [i for i, (code, _) in enumerate(groups) if code == 0]
    return [groups[a:b] for a, b in pairwise([*starts, len(groups)])]


def _add(layers: dict[str, DxfLayer], entity: list[Group]) -> None:
    kind, values = entity[0][1], dict(entity)
    assert values.get(67, "0") == "0", "nothing lies in paper space"
    layer = layers.setdefault(values[8], DxfLayer())
    if kind == "CIRCLE":
        layer.circles.append(((float(values[10]), float(values[20])), 2 * float(values[40])))
    elif kind == "LWPOLYLINE":
        assert int(values[70]) & 1, "a polyline is open"
        for code in (38, 40, 41, 42, 43):  # elevation, widths, bulge, constant width
            assert float(values.get(code, "0")) == 0, f"group {code} of a polyline is not 0"
        xs = [float(value) for code, value in entity if code == 10]
        ys = [float(value) for code, value in entity if code == 20]
        assert len(xs) == int(values[90])
        layer.polylines.append(list(zip(xs, ys, strict=True)))
    else:
        raise AssertionError(f"{kind} is neither a closed polyline nor a circle")


@dataclass
class Gds:
    """What a GDSII file says: cells by name with the number of their elements, and its flat layers. [mm]"""

    cells: dict[str, list[str]]
    layers: dict[tuple[int, int], BaseGeometry]
    corners: int  # most corners of one polygon
    points: dict[tuple[int, int], set[tuple[int, int]]]  # of all polygons, flat [nm]


def read_gds(path: Path) -> Gds:
    """Flat geometry of a GDSII file by layer and datatype."""
    with path.open("rb") as stream:
        library = Library.load(stream)
    structures = {structure.name.decode("ascii"): structure for structure in library}
    mm = library.physical_unit * 1e3
    flat: dict[tuple[int, int], list[list[tuple[int, int]]]] = {}

    def walk(name: str, x: int, y: int) -> None:
        for element in structures[name]:
            assert not isinstance(element, ARef)
            if isinstance(element, SRef):
                assert not element.strans
                assert not element.angle
                dx, dy = element.xy[0]
                walk(element.struct_name.decode("ascii"), x + dx, y + dy)
            else:
                assert isinstance(element, Boundary)
                ring = [(px + x, py + y) for px, py in element.xy]
                flat.setdefault((element.layer, element.data_type), []).append(ring)

    used = {e.struct_name.decode("ascii") for s in library for e in s if isinstance(e, SRef)}
    (top,) = structures.keys() - used
    walk(top, 0, 0)
    return Gds(
        cells={name: [type(element).__name__ for element in s] for name, s in structures.items()},
        layers={key: even_odd([_area(ring, mm) for ring in rings]) for key, rings in flat.items()},
        corners=max(len(ring) for rings in flat.values() for ring in rings),
        points={key: {point for ring in rings for point in ring} for key, rings in flat.items()},
    )


def _area(ring: list[tuple[int, int]], mm: float) -> BaseGeometry:
    """Area of a ring that may hold seams of no width."""
    polygon = shapely.Polygon([(x * mm, y * mm) for x, y in ring])
    if polygon.is_valid:
        return polygon
    parts = shapely.get_parts(shapely.make_valid(polygon))
    return shapely.union_all([part for part in parts if part.area > 0])
