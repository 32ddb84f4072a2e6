"""Transmission-line physics of cross-sections and of junctions, in SI units."""

from layoutgen.lines.chip import body_capacitance, path_inductance
from layoutgen.lines.junctions import (
    EndCapacitances,
    end_facing_ground,
    open_end_capacitance,
    open_end_extension,
    step_extension,
    tap_capacitance,
    tap_shortening,
)
from layoutgen.lines.loss import roughness_factor, skin_depth, surface_resistance
from layoutgen.lines.microstrip import (
    CoupledModes,
    Line,
    air_impedance,
    coupled_pair,
    effective_permittivity,
    single_line,
    width_for_impedance,
)
from layoutgen.lines.quasistatic import Mesh, StripSystem, solve_strips
from layoutgen.lines.section import (
    LineSolver,
    LossMatrices,
    Modes,
    StripMatrices,
    line_admittance,
    line_susceptance,
)
from layoutgen.lines.via import goldfarb_pucel_inductance, grounded_ends_inductance, via_resistance

__all__ = [
    "CoupledModes",
    "EndCapacitances",
    "Line",
    "LineSolver",
    "LossMatrices",
    "Mesh",
    "Modes",
    "StripMatrices",
    "StripSystem",
    "air_impedance",
    "body_capacitance",
    "coupled_pair",
    "effective_permittivity",
    "end_facing_ground",
    "goldfarb_pucel_inductance",
    "grounded_ends_inductance",
    "line_admittance",
    "line_susceptance",
    "open_end_capacitance",
    "open_end_extension",
    "path_inductance",
    "roughness_factor",
    "single_line",
    "skin_depth",
    "solve_strips",
    "step_extension",
    "surface_resistance",
    "tap_capacitance",
    "tap_shortening",
    "via_resistance",
    "width_for_impedance",
]
