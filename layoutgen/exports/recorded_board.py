"""What stands and lies on the board, as plain data for a rebuild in three dimensions.

x and y are the artwork's, from the lower left corner of the board. z counts upward from the face of the
ground plane that touches the dielectric.
"""

from __future__ import annotations

from typing import Any

from layoutgen.comb import ChipLoad, Comb, Feed, Resonator
from layoutgen.design import Design
from layoutgen.exports.recorded_comb import MM, rounded
from layoutgen.geometry import Artwork, Circle, Layer

__all__ = ["cover", "layers", "parts", "ports", "stack_up", "unplated_holes", "vias"]

Data = dict[str, Any]


def stack_up(design: Design) -> Data:
    """Dielectric and copper, with the figures the model used."""
    construction, stack = design.spec.construction, design.comb.stack
    laminate = construction.laminate
    height, copper = stack.height * MM, stack.conductor * MM
    known = [t for t in laminate.thicknesses if abs(t.nominal - stack.height) < 1e-9]
    return {
        "laminate": laminate.name,
        "laminate_description": laminate.description,
        "laminate_source": " ".join(laminate.source.split()),
        "eps_r": stack.eps_r,
        "eps_r_process": laminate.eps_r_process,
        "eps_r_tolerance": laminate.eps_r_tolerance,
        "tan_delta": stack.tan_delta,
        "reference_frequency_hz": whole(laminate.reference_frequency),
        "eps_r_tempco_ppm_per_k": rounded(laminate.eps_r_tempco, 1e6),
        "expansion_ppm_per_k": rounded(laminate.expansion, 1e6),
        "dielectric_height_mm": rounded(height),
        "dielectric_height_tolerance_mm": rounded(known[0].tolerance, MM) if known else None,
        "copper_base_foil_mm": rounded(construction.copper.base, MM),
        "copper_plating_mm": rounded(construction.plating, MM),
        "copper_finished_mm": rounded(copper),
        "copper_conductivity_s_per_m": rounded(stack.conductivity),
        "copper_roughness_rms_um": rounded(stack.roughness, 1e6),
        "layers_from_below": [
            {
                "name": "bottom copper",
                "layer": Layer.BOTTOM_COPPER.name,
                "z_from_mm": rounded(-copper),
                "z_to_mm": 0.0,
            },
            {
                "name": "dielectric",
                "layer": Layer.BOARD_OUTLINE.name,
                "z_from_mm": 0.0,
                "z_to_mm": rounded(height),
            },
            {
                "name": "top copper",
                "layer": Layer.TOP_COPPER.name,
                "z_from_mm": rounded(height),
                "z_to_mm": rounded(height + copper),
            },
        ],
    }


def layers() -> list[Data]:
    """Every layer of the artwork as the GDS and DXF files call it."""
    return [
        {
            "name": layer.name,
            "gds_layer": layer.gds_layer,
            "gds_datatype": layer.gds_datatype,
            "dxf_layer": layer.dxf_name,
            "holds": layer.holds,
            "purpose": layer.purpose,
        }
        for layer in Layer
    ]


def vias(design: Design) -> list[Data]:
    """Every plated hole: what it belongs to, where it is, finished hole and tool, which copper it joins."""
    stack = design.comb.stack
    found = []
    for item in design.artwork.on_layer(Layer.PLATED_DRILLS):
        circle = item.shape
        assert isinstance(circle, Circle)
        assert item.tool is not None
        found.append(
            {
                "owner": item.name,
                "kind": item.kind,
                "x_mm": circle.centre[0],
                "y_mm": circle.centre[1],
                "finished_mm": circle.diameter,
                "tool_mm": item.tool,
                "from": Layer.BOTTOM_COPPER.name,
                "to": Layer.TOP_COPPER.name,
                "z_from_mm": rounded(-stack.conductor, MM),
                "z_to_mm": rounded(stack.height + stack.conductor, MM),
            }
        )
    return found


def unplated_holes(artwork: Artwork) -> list[Data]:
    """Mounting holes."""
    circles = [(item.kind, item.shape) for item in artwork.on_layer(Layer.UNPLATED_HOLES)]
    return [
        {"kind": kind, "x_mm": shape.centre[0], "y_mm": shape.centre[1], "finished_mm": shape.diameter}
        for kind, shape in circles
        if isinstance(shape, Circle)
    ]


def parts(comb: Comb) -> list[Data]:
    """Loading capacitors, named C1 and so on as the resonators they load."""
    return [
        _part(f"C{number}", comb, resonator, resonator.load)
        for number, resonator in enumerate(comb.resonators, start=1)
        if resonator.load
    ]


def _part(reference: str, comb: Comb, resonator: Resonator, chip: ChipLoad) -> Data:
    x, end = resonator.x, comb.short_line + resonator.length
    second = end + chip.land_gap
    surface = comb.stack.height + comb.stack.conductor
    on_line = min(chip.land_width, resonator.segments[-1].width)
    on_pad = min(chip.land_width, chip.pad_width)
    middle = end + chip.land_gap / 2
    return {
        "reference": reference,
        "kind": "chip capacitor",
        "case": chip.case,
        "value_pf": rounded(chip.capacitance, 1e12),
        "tolerance_pf": rounded(chip.tolerance, 1e12),
        "lands": [
            {"on": "line", **_rectangle(x, on_line, end - chip.land_length, end)},
            {"on": "ground pad", **_rectangle(x, on_pad, second, second + chip.land_length)},
        ],
        "ground_pad": _rectangle(x, chip.pad_width, second, second + chip.pad_length),
        "current_path": {
            "start": _point(x, end - chip.land_length / 2, surface + chip.current_height),
            "end": _point(x, second + chip.land_length / 2, surface + chip.current_height),
            "land_surface_z_mm": rounded(surface, MM),
            "width_mm": rounded(chip.body_width, MM),
        },
        "body": {
            **_rectangle(x, chip.body_width, middle - chip.body_length / 2, middle + chip.body_length / 2),
            "z_from_mm": rounded(surface, MM),
            "z_to_mm": rounded(surface + chip.body_height, MM),
            "height_mm": rounded(chip.body_height, MM),
        },
        "electrical_model": {
            "form": "series resistance, inductance and capacitance along the current path",
            "capacitance_pf": rounded(chip.capacitance, 1e12),
            "resistance_ohm": rounded(chip.resistance),
            "residual_inductance_nh": rounded(chip.inductance, 1e9),
            "residual_beyond": "a plain conductor of the body's width on the current path at its height",
        },
    }


def ports(comb: Comb) -> list[Data]:
    """Where power goes in and out: on the board edges, the strip against the bottom copper."""
    return [_port(number, comb, feed) for number, feed in enumerate(comb.feeds, start=1)]


def _port(number: int, comb: Comb, feed: Feed) -> Data:
    left, launch = feed.side == "left", feed.launch
    return {
        "number": number,
        "x_mm": 0.0 if left else rounded(comb.width, MM),
        "y_mm": rounded(comb.short_line + feed.tap, MM),
        "z_from_mm": 0.0,
        "z_to_mm": rounded(comb.stack.height, MM),
        "direction_into_board": "+x" if left else "-x",
        "width_mm": rounded(feed.width, MM),
        "impedance_ohm": rounded(feed.impedance),
        "signal": Layer.TOP_COPPER.name,
        "reference": Layer.BOTTOM_COPPER.name,
        "coplanar_ground_gap_mm": rounded(launch.ground_gap, MM) if launch else None,
        "coplanar_ground_length_mm": rounded(launch.ground_length, MM) if launch else None,
    }


def cover(comb: Comb) -> Data | None:
    """Metal cover and the walls that carry it; None for an open board."""
    height, walls = comb.stack.cover, comb.side_walls
    if height is None:
        return None
    x_from, x_to = walls or (0.0, comb.width)
    return {
        "height_above_dielectric_mm": rounded(height, MM),
        "z_mm": rounded(comb.stack.height + height, MM),
        "x_from_mm": rounded(x_from, MM),
        "x_to_mm": rounded(x_to, MM),
        "y_from_mm": 0.0,
        "y_to_mm": rounded(comb.height, MM),
        "side_walls_x_mm": [rounded(x, MM) for x in walls] if walls else [],
        "end_walls_y_mm": [0.0, rounded(comb.height, MM)],
    }


def whole(hertz: float) -> float | int:
    """A frequency without the fraction that arithmetic left. [Hz]"""
    return round(hertz) if abs(hertz - round(hertz)) < 1e-3 or hertz > 1e6 else round(hertz, 3)


def _rectangle(x: float, width: float, bottom: float, top: float) -> Data:
    return {
        "x_from_mm": rounded(x - width / 2, MM),
        "x_to_mm": rounded(x + width / 2, MM),
        "y_from_mm": rounded(bottom, MM),
        "y_to_mm": rounded(top, MM),
    }


def _point(x: float, y: float, z: float) -> Data:
    return {"x_mm": rounded(x, MM), "y_mm": rounded(y, MM), "z_mm": rounded(z, MM)}
