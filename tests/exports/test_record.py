"""The design record says enough, and says it in units."""

from __future__ import annotations

import json
import re
from collections.abc import Iterator
from typing import Any

import numpy as np
import pytest
import shapely
from built import small_design
from hypothesis import given, settings
from sample_comb import chip_comb, combs, plate_comb

from layoutgen.circuit import Circuit
from layoutgen.comb import Comb
from layoutgen.errors import InputError
from layoutgen.exports import record
from layoutgen.exports.recorded_comb import comb_data, comb_of
from layoutgen.geometry import Circle, Layer

PICOMETRE = 1e-12

UNITS = "mm|um|hz|db|pf|nh|ohm|deg|s_per_m|ppm_per_k"
WITHOUT_UNIT = {
    "version",
    "order",
    "g",
    "coupling_coefficients",
    "external_q_in",
    "external_q_out",
    "unloaded_q",
    "eps_r",
    "eps_r_process",
    "eps_r_tolerance",
    "tan_delta",
    "gds_layer",
    "gds_datatype",
    "number",
    "count",
    "resonator_index",
    "asked",
    "found",
    "margin",  # of a requirement: in the unit beside them
}


@pytest.fixture(scope="module")
def data() -> dict[str, Any]:
    """The record as another program reads it."""
    found = json.loads(record.text_of(record.record(small_design(), {"a.gds": "artwork"})))
    assert isinstance(found, dict)
    return found


def numbers(data: Any, key: str = "") -> Iterator[tuple[str, float]]:
    """Every number with the nearest key above it; that of a table of figures counts for its members."""
    if isinstance(data, dict):
        for name, value in data.items():
            yield from numbers(value, key if re.search(rf"_({UNITS})$", key) else name)
    elif isinstance(data, list):
        for value in data:
            yield from numbers(value, key)
    elif isinstance(data, int | float) and not isinstance(data, bool):
        yield key, data


def assert_same(one: Comb, other: Comb) -> None:
    """Equal to within a picometre, which the record rounds to."""
    mine, theirs = list(numbers(comb_data(one))), list(numbers(comb_data(other)))
    assert [key for key, _ in mine] == [key for key, _ in theirs]
    np.testing.assert_allclose([v for _, v in mine], [v for _, v in theirs], rtol=0, atol=1e-9)
    assert one.order == other.order
    for a, b in zip(one.resonators, other.resonators, strict=True):
        assert abs(a.x - b.x) < PICOMETRE
        assert abs(a.length - b.length) < PICOMETRE


def test_every_number_has_its_unit_in_its_key(data):
    bare = {key for key, _ in numbers(data) if not re.search(rf"_({UNITS})$", key)}

    assert bare <= WITHOUT_UNIT


def test_the_comb_can_be_rebuilt_from_the_record_alone(data):
    comb = record.comb_from_record(data)

    assert_same(comb, small_design().comb)
    f = np.linspace(1.7e9, 2.3e9, 61)
    # a picometre in a dimension moves the response by parts in 1e9 at most; 1e-6 leaves room for the solver
    np.testing.assert_allclose(Circuit(comb).scattering(f), small_design().response(f), rtol=0, atol=1e-6)


@pytest.mark.parametrize("comb", [chip_comb(), plate_comb()], ids=["chip", "plate"])
def test_combs_of_either_load_survive_the_record(comb):
    assert_same(comb_of(json.loads(json.dumps(comb_data(comb)))), comb)


@given(combs())
@settings(max_examples=25, deadline=None)
def test_any_comb_survives_the_record(comb):
    assert_same(comb_of(json.loads(json.dumps(comb_data(comb)))), comb)


def test_a_missing_dimension_is_named():
    broken = comb_data(chip_comb())
    del broken["resonators"][2]["load"]["land_gap_mm"]

    with pytest.raises(InputError) as caught:
        comb_of(broken)

    assert caught.value.key == "chipload.land_gap_mm"


@pytest.mark.parametrize(("change", "key"), [({"format": "notes"}, "format"), ({"version": 99}, "version")])
def test_another_format_or_version_is_refused(data, change, key):
    with pytest.raises(InputError) as caught:
        record.comb_from_record({**data, **change})

    assert caught.value.key == key


def test_vias_are_those_of_the_artwork(data):
    drawn = sorted(
        (item.name, *item.shape.centre, item.shape.diameter)
        for item in small_design().artwork.on_layer(Layer.PLATED_DRILLS)
        if isinstance(item.shape, Circle)
    )

    assert sorted((v["owner"], v["x_mm"], v["y_mm"], v["finished_mm"]) for v in data["vias"]) == drawn
    assert {v["owner"] for v in data["vias"]} == {"R1", "R2", "R3", "C1", "C2", "C3", "ground"}
    assert all(v["tool_mm"] > v["finished_mm"] for v in data["vias"])


def box(rectangle: dict[str, float]) -> shapely.Polygon:
    return shapely.box(
        rectangle["x_from_mm"], rectangle["y_from_mm"], rectangle["x_to_mm"], rectangle["y_to_mm"]
    )


def copper(kind: str, name: str) -> Any:
    return shapely.union_all(
        [
            item.shape.geometry
            for item in small_design().artwork.items
            if item.kind.endswith(kind) and item.name == name
        ]
    )


def test_lands_lie_on_the_drawn_copper_and_under_the_body(data):
    assert [part["reference"] for part in data["parts"]] == ["C1", "C2", "C3"]
    for number, part in enumerate(data["parts"], start=1):
        on_line, on_pad = (box(land) for land in part["lands"])
        body, path = box(part["body"]), part["current_path"]
        assert copper("resonator", f"R{number}").covers(on_line)
        assert copper("ground_pad", f"C{number}").equals(box(part["ground_pad"]))
        assert box(part["ground_pad"]).covers(on_pad)
        assert on_line.covers(shapely.Point(path["start"]["x_mm"], path["start"]["y_mm"]))
        assert on_pad.covers(shapely.Point(path["end"]["x_mm"], path["end"]["y_mm"]))
        assert body.intersects(on_line)
        assert body.intersects(on_pad)
        assert part["body"]["z_from_mm"] < path["start"]["z_mm"] < part["body"]["z_to_mm"]


def test_the_body_is_the_one_of_the_assembly_layer(data):
    for number, part in enumerate(data["parts"], start=1):
        drawn = copper("chip_body", f"C{number}")
        assert (
            drawn.symmetric_difference(box(part["body"])).area < 0.002 * drawn.length
        )  # drawn on a 1 um grid


def test_ports_sit_on_feed_copper_at_the_board_edges(data):
    width = data["board"]["width_mm"]
    top = small_design().artwork.layer_shape(Layer.TOP_COPPER)
    for port, inward in zip(data["ports"], (1, -1), strict=True):
        assert port["x_mm"] == (0.0 if inward > 0 else width)
        assert port["direction_into_board"] == ("+x" if inward > 0 else "-x")
        x, y, half = port["x_mm"] + inward * 1e-4, port["y_mm"], port["width_mm"] / 2
        edge = shapely.LineString([(x, y - half), (x, y + half)])
        beyond = shapely.LineString([(x, y - half - 0.01), (x, y + half + 0.01)])
        assert top.buffer(1e-6).covers(edge)
        assert not top.covers(beyond)
        assert port["impedance_ohm"] == 50.0


def test_the_stack_adds_up(data):
    stack = data["stack_up"]
    below, dielectric, above = stack["layers_from_below"]

    assert below["z_to_mm"] == dielectric["z_from_mm"] == 0
    assert dielectric["z_to_mm"] == above["z_from_mm"] == stack["dielectric_height_mm"] == 0.508
    assert stack["copper_base_foil_mm"] + stack["copper_plating_mm"] == pytest.approx(
        stack["copper_finished_mm"]
    )
    assert above["z_to_mm"] - above["z_from_mm"] == pytest.approx(stack["copper_finished_mm"])
    numbers_of = {(row["gds_layer"], row["gds_datatype"]): row["name"] for row in data["layers"]}
    assert numbers_of[1, 0] == "TOP_COPPER"
    assert len(numbers_of) == len(list(Layer))


def test_requirement_verdict_and_defaults_are_kept(data):
    assert data["requirement"]["passband"]["lower_hz"] == 1_900_000_000
    assert data["requirement"]["sizing_margin"]["return_loss_db"] == 3.0
    assert data["verdict"]["met"] is True
    assert [r["key"] for r in data["verdict"]["requirements"]] == [
        "passband.return_loss",
        "passband.insertion_loss",
        "stopband.1.rejection",
    ]
    assert data["specification"]["file"] == "link.toml"
    assert "board.grid = 1 um" in data["specification"]["defaults"]
    assert data["files"] == [{"name": "a.gds", "purpose": "artwork"}]
    assert data["versions"].keys() >= {"layoutgen", "numpy", "scipy", "gdstk", "ezdxf"}
