"""The design record: one JSON file that, with the GDS, is enough to rebuild the part in three dimensions.

A unit stands in the name of every key that has one. Numbers keep their full precision down to picometres;
predicted figures are rounded to what is sensible to read.
"""

from __future__ import annotations

import json
import math
import sys
from collections.abc import Mapping
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path
from typing import Any

from layoutgen import __version__
from layoutgen.circuit import Judgement, Performance
from layoutgen.comb import Comb
from layoutgen.design import Design
from layoutgen.errors import InputError
from layoutgen.exports import recorded_board as board
from layoutgen.exports.recorded_board import whole
from layoutgen.exports.recorded_comb import MM, comb_data, comb_of, rounded
from layoutgen.spec import Spec

__all__ = [
    "FORMAT",
    "VERSION",
    "comb_from_record",
    "is_record",
    "judgement_data",
    "performance_data",
    "record",
    "text_of",
    "write",
]

FORMAT = "layoutgen design record"
VERSION = 1
LIBRARIES = ("numpy", "scipy", "shapely", "gdstk", "ezdxf", "matplotlib")
_LINE = 240
"""A list or table without further ones in it stands on one line up to this many characters."""

_COORDINATES = (
    "millimetres; x and y from the lower left corner of the board, x from port 1 to port 2, y from the "
    "grounded to the loaded ends; z upward from the face of the bottom copper that touches the dielectric; "
    "the bottom is not mirrored; indices count from 0, names (R1, C1) from 1"
)


def record(design: Design, files: Mapping[str, str] | None = None) -> dict[str, Any]:
    """Everything about a design, as plain data.

    Parameters
    ----------
    design : Design
    files : mapping of str to str, optional
        Name and purpose of each file of the package the record belongs to.

    Returns
    -------
    dict
        Ready for JSON; the same for the same design.
    """
    spec, comb = design.spec, design.comb
    return {
        "format": FORMAT,
        "version": VERSION,
        "part": {"number": spec.part.number, "title": spec.part.title, "revision": spec.part.revision},
        "coordinates": _COORDINATES,
        "requirement": _requirement(spec),
        "verdict": {
            "met": design.verdict.met,
            "requirements": [judgement_data(j) for j in design.verdict.judgements],
        },
        "predicted": performance_data(design.verdict.performance),
        "synthesis": _synthesis(design),
        "stack_up": board.stack_up(design),
        "layers": board.layers(),
        "board": {
            "width_mm": rounded(comb.width, MM),
            "height_mm": rounded(comb.height, MM),
            "grid_mm": rounded(design.artwork.grid),
            "shop": spec.board.shop.name,
            "left_out_of_artwork": list(design.artwork.left_out),
        },
        "cover": board.cover(comb),
        "ports": board.ports(comb),
        "parts": board.parts(comb),
        "comb": comb_data(comb),
        "derived": _derived(comb),
        "vias": board.vias(design),
        "unplated_holes": board.unplated_holes(design.artwork),
        "choices": [{"key": n.key, "value": n.value, "reason": n.reason} for n in design.notes],
        "warnings": list(design.warnings),
        "specification": {
            "file": spec.path.name,
            "written": dict(spec.written),
            "defaults": list(spec.defaults),
            "overrides": list(spec.overrides),
        },
        "files": [{"name": name, "purpose": purpose} for name, purpose in (files or {}).items()],
        "versions": _versions(),
    }


def write(design: Design, path: Path, files: Mapping[str, str] | None = None) -> None:
    """Write the record of a design as JSON.

    Parameters
    ----------
    design : Design
    path : Path
        File to be made or replaced.
    files : mapping of str to str, optional
        As for `record`.
    """
    path.write_bytes((text_of(record(design, files)) + "\n").encode("utf-8"))


def comb_from_record(data: Mapping[str, Any]) -> Comb:
    """The sized comb of a record, to within a picometre.

    Parameters
    ----------
    data : mapping
        As read from the JSON file.

    Raises
    ------
    InputError
        If this is no record of a known version, or its numbers make no comb.
    """
    if not is_record(data):
        raise InputError("design record", "format", data.get("format"), f'must be "{FORMAT}"')
    if data.get("version") != VERSION:
        raise InputError("design record", "version", data.get("version"), f"must be {VERSION}")
    return comb_of(data["comb"])


def is_record(data: object) -> bool:
    """True when parsed JSON bears the mark of a design record, of whatever version."""
    return isinstance(data, Mapping) and data.get("format") == FORMAT


def judgement_data(judgement: Judgement) -> dict[str, Any]:
    """One requirement and what came of it; the three figures are in its unit."""
    found: dict[str, Any] = {
        "requirement": judgement.requirement,
        "key": judgement.key,
        "met": judgement.met,
        "unit": judgement.unit,
        "asked": round(judgement.asked, 4),
        "found": round(judgement.found, 4),
        "margin": round(judgement.margin, 4),
    }
    if not judgement.met:
        found |= {"limited_by": judgement.limit, "would_help": judgement.remedy}
    return found


def performance_data(performance: Performance) -> dict[str, Any]:
    """Predicted figures: frequencies to the hertz, levels to a thousandth of a decibel."""
    spurious = performance.spurious

    def hertz(value: float | None) -> float | None:
        return None if value is None else whole(value)

    return {
        "centre_hz": hertz(performance.centre),
        "lower_3db_hz": hertz(performance.lower_3db),
        "upper_3db_hz": hertz(performance.upper_3db),
        "bandwidth_3db_hz": hertz(performance.bandwidth_3db),
        "lower_ripple_lossless_hz": hertz(performance.lower_ripple),
        "upper_ripple_lossless_hz": hertz(performance.upper_ripple),
        "return_loss_db": round(performance.return_loss, 3),
        "return_loss_lossless_db": round(performance.lossless_return_loss, 3),
        "midband_loss_db": round(performance.midband_loss, 3),
        "worst_loss_db": round(performance.worst_loss, 3),
        "lower_edge_loss_db": round(performance.lower_edge_loss, 3),
        "upper_edge_loss_db": round(performance.upper_edge_loss, 3),
        "midband_loss_split_db": {cause: round(loss, 3) for cause, loss in performance.midband_split.items()},
        "worse_edge_loss_split_db": {cause: round(loss, 3) for cause, loss in performance.edge_split.items()},
        "unloaded_q": [round(q, 1) for q in performance.unloaded_q],
        "first_spurious_hz": hertz(spurious.frequency),
        "first_spurious_cause": spurious.cause,
        "spurious_candidates_hz": {cause: hertz(f) for cause, f in spurious.candidates.items()},
        "capacitor_self_resonance_hz": hertz(performance.capacitor_resonance),
    }


def _requirement(spec: Spec) -> dict[str, Any]:
    band, limits = spec.passband, spec.board
    return {
        "passband": {
            "lower_hz": whole(band.lower),
            "upper_hz": whole(band.upper),
            "shape": band.shape,
            "return_loss_db": None if band.return_loss is None else round(band.return_loss, 6),
            "insertion_loss_db": band.insertion_loss,
            "order": band.order,
            "impedance_ohm": band.impedance,
        },
        "stopbands": [
            {"from_hz": whole(s.lower), "to_hz": whole(s.upper), "rejection_db": s.rejection}
            for s in spec.stopbands
        ],
        "sizing_margin": {
            "return_loss_db": spec.margin.return_loss,
            "bandwidth_hz": whole(spec.margin.bandwidth),
        },
        "max_width_mm": None if limits.max_width is None else rounded(limits.max_width, MM),
        "max_height_mm": None if limits.max_height is None else rounded(limits.max_height, MM),
    }


def _synthesis(design: Design) -> dict[str, Any]:
    wanted = design.couplings
    return {
        "order": design.comb.order,
        "g": [round(g, 6) for g in design.sizing.g],
        "coupling_coefficients": [round(k, 6) for k in wanted.k],
        "external_q_in": round(wanted.external_q_in, 4),
        "external_q_out": round(wanted.external_q_out, 4),
        "electrical_length_deg": round(math.degrees(design.sizing.electrical_length), 3),
    }


def _derived(comb: Comb) -> dict[str, Any]:
    """Dimensions that follow from those of the comb, for people."""
    return {
        "gaps_mm": [rounded(gap, MM) for gap in comb.gaps],
        "resonator_lengths_mm": [rounded(resonator.length, MM) for resonator in comb.resonators],
        "line_widths_mm": [rounded(resonator.width, MM) for resonator in comb.resonators],
        "feed_lengths_mm": [rounded(comb.feed_length(feed), MM) for feed in comb.feeds],
    }


def _versions() -> dict[str, str]:
    found = {"layoutgen": __version__, "python": ".".join(str(part) for part in sys.version_info[:3])}
    for library in LIBRARIES:
        try:
            found[library] = version(library)
        except PackageNotFoundError:  # made available in another way than by installing
            found[library] = "unknown"
    return found


def text_of(data: object, indent: str = "") -> str:
    """JSON with short lists and tables on one line each, so that a row of a list is a line of the file."""
    flat = json.dumps(data, ensure_ascii=False, allow_nan=False)
    values: list[object] = []
    if isinstance(data, Mapping):
        values = list(data.values())
    elif isinstance(data, list):
        values = data
    nested = any(isinstance(value, Mapping | list) and value for value in values)
    if not values or (not nested and len(indent) + len(flat) <= _LINE):
        return flat
    inner = indent + "  "
    if isinstance(data, Mapping):
        lines = [
            f"{inner}{json.dumps(key, ensure_ascii=False)}: {text_of(v, inner)}" for key, v in data.items()
        ]
        return "{\n" + ",\n".join(lines) + f"\n{indent}}}"
    return "[\n" + ",\n".join(inner + text_of(value, inner) for value in values) + f"\n{indent}]"
