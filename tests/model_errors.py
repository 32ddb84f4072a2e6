"""Largest error of each model against outside values; run it to print them: ``python tests/model_errors.py``.

The names are those of the rows in DEVELOPERS.md, where the figures stand rounded up. Each function returns a
relative error.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from typing import Any

import numpy as np
from numpy.typing import ArrayLike
from reference_data import rows, table
from scipy.optimize import brentq

from layoutgen.constants import VACUUM_IMPEDANCE, VACUUM_PERMITTIVITY
from layoutgen.lines import (
    CoupledModes,
    Line,
    LineSolver,
    coupled_pair,
    effective_permittivity,
    goldfarb_pucel_inductance,
    grounded_ends_inductance,
    open_end_extension,
    path_inductance,
    single_line,
    solve_strips,
    surface_resistance,
)

Row = dict[str, Any]


def off(found: ArrayLike, true: ArrayLike) -> float:
    """Largest relative error."""
    return float(np.max(np.abs(np.asarray(found, float) / np.asarray(true, float) - 1)))


def worst(of_row: Callable[[Row], float], chosen: Iterable[Row]) -> float:
    return max(of_row(row) for row in chosen)


# -- closed forms


def line_of(row: Row) -> Line:
    return single_line(width=row["u"], height=1.0, eps_r=row["eps_r"], thickness=row.get("t_over_h", 0.0))


def pair_of(row: Row) -> CoupledModes:
    return coupled_pair(width=row["u"], gap=row["g"], height=1.0, eps_r=row["eps_r"])


def line_impedance(name: str) -> float:
    return worst(lambda r: off(line_of(r).impedance, r["Z0_ohm"]), rows("lines.toml", name))


def line_permittivity(name: str) -> float:
    return worst(lambda r: off(line_of(r).eps_eff, r["eps_eff"]), rows("lines.toml", name))


def pair_impedance() -> float:
    def error(row: Row) -> float:
        modes = pair_of(row)
        return off([modes.even.impedance, modes.odd.impedance], [row["Z0e_ohm"], row["Z0o_ohm"]])

    return worst(error, rows("lines.toml", "coupled"))


def pair_permittivity() -> float:
    def error(row: Row) -> float:
        modes = pair_of(row)
        return off([modes.even.eps_eff, modes.odd.eps_eff], [row["eps_e"], row["eps_o"]])

    return worst(error, rows("lines.toml", "coupled"))


def open_end() -> float:
    """From Hammerstad's earlier fit, 0.412 h (e + 0.3)(u + 0.264) / ((e - 0.258)(u + 0.8))."""

    def error(u: float, eps_r: float) -> float:
        e = float(effective_permittivity(width=u, height=1.0, eps_r=eps_r))
        earlier = 0.412 * (e + 0.3) * (u + 0.264) / ((e - 0.258) * (u + 0.8))
        return off(open_end_extension(width=u, height=1.0, eps_r=eps_r, eps_eff=e), earlier)

    return max(error(u, eps_r) for u in (0.5, 1.0, 1.9, 3.0) for eps_r in (2.2, 3.55, 6.3, 10.7))


# -- the strip solver


def strips(row: Row, eps_r: float) -> np.ndarray:
    """Capacitance matrix of the strip of a row, or of its pair."""
    u, count = row["u"], 2 if "g" in row else 1
    centres = np.arange(count) * (u + row.get("g", 0.0))
    return solve_strips(
        centres=centres, widths=[u] * count, thickness=row.get("t_over_h", 0.0), height=1.0, eps_r=eps_r
    )


def impedance(slab: float, air: float) -> tuple[float, float]:
    return VACUUM_IMPEDANCE * VACUUM_PERMITTIVITY / float(np.sqrt(slab * air)), slab / air


def strip_in_air() -> float:
    def error(row: Row) -> float:
        alone = float(strips(row, 1.0)[0, 0])
        return off(impedance(alone, alone)[0], row["Z0_ohm"])

    return worst(error, rows("lines.toml", "microstrip_air"))


def strip_on_slab(name: str) -> float:
    def error(row: Row) -> float:
        slab, air = (float(strips(row, e)[0, 0]) for e in (row["eps_r"], 1.0))
        return off(impedance(slab, air), (row["Z0_ohm"], row["eps_eff"]))

    return worst(error, rows("lines.toml", name))


def pair_on_slab(name: str) -> float:
    def error(row: Row) -> float:
        slab, air = (strips(row, e) for e in (row["eps_r"], 1.0))
        even, odd = (impedance(slab[0, 0] + s * slab[0, 1], air[0, 0] + s * air[0, 1]) for s in (1, -1))
        return off([*even, *odd], [row[key] for key in ("Z0e_ohm", "eps_e", "Z0o_ohm", "eps_o")])

    return worst(error, rows("lines.toml", name))


def array_terms(*, own: bool) -> float:
    def error(row: Row) -> float:
        widths, gaps = np.array(row["widths"]), np.array(row["gaps"])
        centres = np.concatenate([[0], np.cumsum((widths[:-1] + widths[1:]) / 2 + gaps)])
        found = solve_strips(centres=centres, widths=widths, thickness=0, height=1.0, eps_r=row["eps_r"])
        chosen = np.eye(len(widths), dtype=bool) == own
        return off(found[chosen] / VACUUM_PERMITTIVITY, np.array(row["C_over_eps0"])[chosen])

    return worst(error, rows("lines.toml", "arrays"))


def between_planes(name: str) -> float:
    """Strips and bars midway between two planes, up to a thickness of a tenth of their distance."""

    def error(row: Row) -> float:
        thin = "t_over_b" not in row
        w, t = row["w_over_b"], row.get("t_over_b", 0.0)
        height = (1 - t) / 2
        found = solve_strips(
            centres=[0], widths=[w], thickness=t, height=height, eps_r=1.0, cover=height + (0 if thin else t)
        )
        return off(found[0, 0] / VACUUM_PERMITTIVITY, row["C_over_eps"])

    return worst(error, [row for row in rows("lines.toml", name) if row.get("t_over_b", 0.0) <= 0.1])


# -- losses


def conductor_loss() -> float:
    def error(row: Row) -> float:
        solver = LineSolver(
            height=row["h_mm"] / 1e3, eps_r=row["eps_r"], thickness=row["t_mm"] / 1e3, cover=None, reach=0.01
        )
        ratio = solver.losses([0.0], [row["w_mm"] / 1e3], [[0]])[0].resistance[0, 0]
        surface = surface_resistance(row["f_GHz"] * 1e9, conductivity=5.8e7, roughness=0.0)
        return off(ratio * surface, row["R_ohm_per_m"])

    return worst(error, rows("losses.toml", "microstrip_conductor"))


def dielectric_loss() -> float:
    def error(row: Row) -> float:
        solver = LineSolver(height=1e-3, eps_r=row["eps_r"], thickness=5e-7, cover=None, reach=0.01)
        place = ([0.0], [row["u"] / 1e3], [[0]])
        line, slope = solver.matrices(*place)[0], solver.losses(*place)[0].capacitance_slope[0, 0]
        conductance = 2 * np.pi * row["f_GHz"] * 1e9 * row["tan_delta"] * slope
        z = np.sqrt(line.inductance[0, 0] / line.capacitance[0, 0])
        return off(10 / np.log(10) * conductance * z, row["alpha_d_exact_dB_per_m"])

    return worst(error, rows("losses.toml", "dielectric"))


# -- a via, a chip, two resonators


def one_via() -> float:
    """A via as wide as its strip, in a hole at most as wide as it is deep."""

    def error(height: float, diameter: float) -> float:
        # the tape whose mean distance from itself is that of the round via
        tape = diameter / 2 * float(np.exp(1.5))
        found = grounded_ends_inductance(
            positions=[[0.0]], radii=[diameter / 2], strip_centres=[0.0], strip_widths=[tape], height=height
        )
        return off(found[0, 0], goldfarb_pucel_inductance(height=height, radius=diameter / 2))

    heights, diameters = (np.arange(*span) * 1e-6 for span in ((200, 632, 30), (200, 401, 50)))
    return max(error(h, d) for h in heights for d in diameters if d <= h)


def chip_path() -> float:
    """From 0.5 nH for a millimetre of path 0.5 mm wide, about 1 mm above ground: common practice."""
    return off(path_inductance(centres=[0.0], widths=0.5e-3, heights=1.06e-3, lengths=1e-3)[0, 0], 0.5e-9)


def resonator_coupling() -> float:
    """Two loaded resonators against a finite-difference solution, where it is printed to three digits."""
    data = table("combline.toml", "reference_resonator")
    width, omega = data["width_mm"] / 1e3, 2 * np.pi * 1e9
    solver = LineSolver(
        height=data["height_mm"] / 1e3, eps_r=data["eps_r"], thickness=data["copper_mm"] / 1e3, cover=None,
        reach=0.02,
    )  # fmt: skip

    def susceptance(f_ghz: float, length: float, inductance: float, capacitance: float) -> float:
        w = omega * f_ghz
        z, tangent = np.sqrt(inductance / capacitance), np.tan(w * np.sqrt(inductance * capacitance) * length)
        via, chip = w * data["via_nH"] / 1e9, w * data["load_nH"] / 1e9 - 1e12 / (w * data["load_pF"])
        return float(-(z - via * tangent) / (z * (via + z * tangent)) - 1 / chip)

    alone = solver.matrices([0.0], [width], [[0]])[0]
    own = float(alone.inductance[0, 0]), float(alone.capacitance[0, 0])
    length = brentq(lambda x: susceptance(data["f_GHz"], x, *own), 2e-3, 20e-3)

    def error(gap_mm: float, expected: float) -> float:
        m = solver.matrices([0.0, width + gap_mm / 1e3], [width] * 2, [[0, 1]])[0]
        pair = m.inductance, m.capacitance
        even, odd = (
            brentq(susceptance, 0.8, 3.0, (length, *(x[0, 0] + s * x[0, 1] for x in pair)))
            for s in (1, -1)
        )
        return off(abs(odd**2 - even**2) / (odd**2 + even**2), expected)

    return max(error(gap, expected) for gap, expected in data["rows"] if expected >= 0.1)


MEASURED: dict[str, Callable[[], float]] = {
    "thin line, impedance": lambda: line_impedance("microstrip"),
    "thin line, permittivity": lambda: line_permittivity("microstrip"),
    "thick line, impedance": lambda: line_impedance("microstrip_thick"),
    "thick line, permittivity": lambda: line_permittivity("microstrip_thick"),
    "thin pair, impedance": pair_impedance,
    "thin pair, permittivity": pair_permittivity,
    "open end": open_end,
    "strip solver, strip in air": strip_in_air,
    "strip solver, thin strip": lambda: strip_on_slab("microstrip"),
    "strip solver, thick strip": lambda: strip_on_slab("microstrip_thick"),
    "strip solver, thin pair": lambda: pair_on_slab("coupled"),
    "strip solver, thick pair": lambda: pair_on_slab("coupled_thick"),
    "strip solver, arrays, self terms": lambda: array_terms(own=True),
    "strip solver, arrays, couplings": lambda: array_terms(own=False),
    "strip solver, covered strip": lambda: between_planes("stripline"),
    "strip solver, covered bar": lambda: between_planes("bar"),
    "conductor loss": conductor_loss,
    "dielectric loss": dielectric_loss,
    "one via": one_via,
    "path of a chip": chip_path,
    "coupling of two resonators": resonator_coupling,
}

if __name__ == "__main__":
    for name, measure in MEASURED.items():
        print(f"{name:34} {100 * measure():.3g} %")
