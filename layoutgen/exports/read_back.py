"""Written files read again and held against what was meant, before anything is delivered."""

from __future__ import annotations

import csv
import json
import tomllib
from collections import Counter
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import ezdxf.filemanagement
import gdstk
import numpy as np
import shapely
from ezdxf.lldxf.const import DXFError
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from layoutgen.errors import ReadBackError
from layoutgen.exports import layer_table
from layoutgen.geometry import Artwork, Circle, Layer

__all__ = ["csv_table", "dxf", "gds", "json_record", "specification", "svg", "text", "touchstone"]

CHORDS = 1e-3
"""Share of a circle's area that becoming a polygon may take, there and here."""

STEP_MM = 1e-6
"""Coordinate step of the GDS file."""


def gds(artwork: Artwork, path: Path) -> None:
    """Compare a GDS file with the artwork, as areas, layer by layer."""
    try:
        library = gdstk.read_gds(path)
        top, *others = library.top_level()
        scale = library.unit * 1e3
        found = _flat(top, scale)
    except (OSError, RuntimeError, ValueError, MemoryError) as error:
        raise _failed(path, f"cannot be read: {error}") from error
    _require(path, not others, "has more than one top cell")
    wanted = {(layer.gds_layer, layer.gds_datatype): layer for layer in Layer if artwork.on_layer(layer)}
    _require(path, found.keys() == wanted.keys(), f"has the layers {sorted(found)}, not {sorted(wanted)}")
    for key, layer in wanted.items():
        drawn = artwork.layer_shape(layer)
        circles = sum(i.shape.geometry.area for i in artwork.on_layer(layer) if isinstance(i.shape, Circle))
        stray = shapely.symmetric_difference(drawn, found[key]).area
        allowed = drawn.length * STEP_MM + CHORDS * circles
        _require(path, stray <= allowed, f"differs from the artwork by {stray:.3g} mm² on {layer.name}")


def _flat(cell: Any, scale: float) -> dict[tuple[int, int], BaseGeometry]:
    """Area of each layer of a cell with all that it refers to. [mm]"""
    rings: dict[tuple[int, int], list[BaseGeometry]] = {}
    for polygon in cell.get_polygons():
        area = shapely.Polygon(polygon.points * scale)
        # a seam to a hole makes a ring that touches itself
        area = area if area.is_valid else shapely.make_valid(area, method="structure")
        rings.setdefault((polygon.layer, polygon.datatype), []).append(area)
    return {key: shapely.union_all(areas) for key, areas in rings.items()}


def dxf(artwork: Artwork, path: Path) -> None:
    """Compare a DXF file with the artwork, ring by ring and circle by circle, and its units."""
    try:
        document = ezdxf.filemanagement.readfile(path)
    except (OSError, DXFError, ValueError) as error:
        raise _failed(path, f"cannot be read: {error}") from error
    _require(
        path,
        document.header["$INSUNITS"] == 4 and document.header["$MEASUREMENT"] == 1,
        "is not in millimetres",
    )
    found = Counter(_entities(document.modelspace()))
    wanted = Counter(_shapes(artwork))
    _require(
        path,
        found == wanted,
        f"holds {(found - wanted).total()} shapes that the artwork has not, and lacks "
        f"{(wanted - found).total()}",
    )


def _entities(space: Any) -> Iterator[tuple[object, ...]]:
    for entity in space:
        if entity.dxftype() == "CIRCLE":
            centre = entity.dxf.center
            yield entity.dxf.layer, _nm((centre.x, centre.y)), _nm((2 * entity.dxf.radius,))
        elif (
            entity.dxftype() == "LWPOLYLINE" and entity.closed and not entity.has_width and not entity.has_arc
        ):
            yield entity.dxf.layer, tuple(_nm(point) for point in entity.get_points("xy"))
        else:
            yield (entity.dxftype(),)


def _shapes(artwork: Artwork) -> Iterator[tuple[object, ...]]:
    for item in artwork.items:
        if isinstance(item.shape, Circle):
            yield item.layer.dxf_name, _nm(item.shape.centre), _nm((item.shape.diameter,))
        else:
            for ring in (item.shape.exterior, *item.shape.holes):
                yield item.layer.dxf_name, tuple(_nm(point) for point in ring)


def _nm(millimetres: tuple[float, ...]) -> tuple[int, ...]:
    return tuple(round(value * 1e6) for value in millimetres)


def touchstone(
    frequency_hz: NDArray[np.float64], s: NDArray[np.complex128], path: Path, *, impedance: float
) -> None:
    """Compare a Touchstone file with the responses it is to hold."""
    lines = [line for line in _text(path).splitlines() if line and not line.startswith("!")]
    _require(path, lines[:1] == [f"# Hz S RI R {impedance:.12g}"], "lacks its option line")
    try:
        numbers = np.array([[float(word) for word in line.split()] for line in lines[1:]])
    except ValueError as error:
        raise _failed(path, f"holds what is no number: {error}") from error
    _require(path, numbers.shape == (len(frequency_hz), 9), "has another number of points than computed")
    values = numbers[:, 1::2] + 1j * numbers[:, 2::2]
    meant = np.stack([s[:, 0, 0], s[:, 1, 0], s[:, 0, 1], s[:, 1, 1]], axis=1)
    same = np.allclose(numbers[:, 0], frequency_hz, rtol=1e-14, atol=0) and np.allclose(
        values, meant, rtol=0, atol=1e-11
    )
    _require(path, bool(same), "differs from the computed response")


def json_record(meant: Mapping[str, Any], path: Path) -> None:
    """Compare a JSON file with the data it is to hold."""
    try:
        found = json.loads(_text(path))
    except ValueError as error:
        raise _failed(path, f"is not JSON: {error}") from error
    _require(path, found == meant, "differs from the record")


def csv_table(artwork: Artwork, path: Path) -> None:
    """Compare the table of layers with the artwork."""
    rows = list(csv.DictReader(_text(path).splitlines()))
    meant = [
        (layer.name, str(layer.gds_layer), str(layer.gds_datatype), str(len(artwork.on_layer(layer))))
        for layer in Layer
    ]
    try:
        found = [(row["layer"], row["gds_layer"], row["gds_datatype"], row["objects"]) for row in rows]
    except KeyError as error:
        raise _failed(
            path, f"lacks the column {error}; it should have {', '.join(layer_table.HEADER)}"
        ) from error
    _require(path, found == meant, "differs from the artwork's layers")


def svg(path: Path) -> None:
    """Require a well-formed picture with a title."""
    try:
        root = ElementTree.fromstring(_text(path))
    except ElementTree.ParseError as error:
        raise _failed(path, f"is not well-formed: {error}") from error
    space = "{http://www.w3.org/2000/svg}"
    _require(
        path,
        root.tag == f"{space}svg" and root.find(f"{space}title") is not None,
        "is no picture with a title",
    )


def text(meant: str, path: Path) -> None:
    """Compare a text file with its text."""
    _require(path, _text(path) == meant, "differs from what was written")


def specification(meant: bytes, path: Path) -> None:
    """Compare the copy of a specification with the original, and read it as TOML."""
    _require(path, path.read_bytes() == meant, "differs from the specification")
    try:
        tomllib.loads(meant.decode("utf-8-sig"))
    except ValueError as error:
        raise _failed(path, f"is not TOML: {error}") from error


def _text(path: Path) -> str:
    try:
        return path.read_bytes().decode("utf-8")
    except (OSError, UnicodeDecodeError) as error:
        raise _failed(path, f"cannot be read: {error}") from error


def _failed(path: Path, what: str) -> ReadBackError:
    return ReadBackError(f"{path.name}: {what}; nothing was delivered")


def _require(path: Path, holds: bool, what: str) -> None:
    if not holds:
        raise _failed(path, what)
