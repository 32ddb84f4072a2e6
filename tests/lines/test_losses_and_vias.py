"""Loss matrices and via models against incremental-inductance solutions and published formulas."""

from __future__ import annotations

import numpy as np
import pytest
from reference_data import rows

from layoutgen.errors import InputError
from layoutgen.lines import (
    LineSolver,
    body_capacitance,
    end_facing_ground,
    goldfarb_pucel_inductance,
    grounded_ends_inductance,
    open_end_capacitance,
    path_inductance,
    roughness_factor,
    skin_depth,
    surface_resistance,
    via_resistance,
)
from layoutgen.lines.via import _TAPE_MEAN_DISTANCE


@pytest.mark.parametrize("row", rows("losses.toml", "skin_depth"), ids=str)
def test_skin_depth_and_surface_resistance(row):
    f = row["f_GHz"] * 1e9

    assert float(skin_depth(f, 5.8e7)) == pytest.approx(row["delta_um"] * 1e-6, rel=1e-6, abs=0)
    smooth = surface_resistance(f, conductivity=5.8e7, roughness=0.0)
    assert float(smooth) == pytest.approx(row["Rs_mohm"] * 1e-3, rel=1e-6, abs=0)


@pytest.mark.parametrize("row", rows("losses.toml", "roughness"), ids=str)
def test_roughness(row):
    depth = float(skin_depth(2.1e9, 5.8e7))

    found = roughness_factor(2.1e9, roughness=row["Delta_over_delta"] * depth, conductivity=5.8e7)

    assert float(found) == pytest.approx(row["K"], rel=1e-7, abs=0)


@pytest.mark.parametrize("row", rows("losses.toml", "microstrip_conductor"), ids=str)
def test_conductor_loss_is_the_incremental_inductance(row):
    """0.2 %: the derivative of inductances that are good to 0.1 % and err alike."""
    solver = LineSolver(
        height=row["h_mm"] * 1e-3, eps_r=row["eps_r"], thickness=row["t_mm"] * 1e-3, cover=None, reach=10e-3
    )
    centre, width = np.zeros(1), np.array([row["w_mm"] * 1e-3])

    loss = solver.losses(centre, width, [[0]])[0]

    surface = surface_resistance(row["f_GHz"] * 1e9, conductivity=5.8e7, roughness=0.0)
    assert float(loss.resistance[0, 0] * surface) == pytest.approx(row["R_ohm_per_m"], rel=2e-3, abs=0)


@pytest.mark.parametrize("row", rows("losses.toml", "dielectric"), ids=str)
def test_dielectric_loss_is_the_derivative_in_permittivity(row):
    """The table is for zero thickness; a strip of 0.0005 h changes the loss by less than 0.1 %."""
    solver = LineSolver(height=1e-3, eps_r=row["eps_r"], thickness=5e-7, cover=None, reach=10e-3)
    centre, width = np.zeros(1), np.array([row["u"] * 1e-3])
    matrices = solver.matrices(centre, width, [[0]])[0]
    loss = solver.losses(centre, width, [[0]])[0]
    omega = 2 * np.pi * row["f_GHz"] * 1e9
    conductance = omega * row["tan_delta"] * loss.capacitance_slope[0, 0]
    impedance = np.sqrt(matrices.inductance[0, 0] / matrices.capacitance[0, 0])

    found = 20 / np.log(10) * conductance * impedance / 2

    assert found == pytest.approx(row["alpha_d_exact_dB_per_m"], rel=1.5e-3, abs=0)


def test_resistance_of_a_pair_is_positive_and_its_odd_mode_loses_more():
    """Facing walls crowd the current: known from Wheeler's rule, and it keeps the network passive."""
    solver = LineSolver(height=0.8e-3, eps_r=3.5, thickness=40e-6, cover=None, reach=20e-3)

    loss = solver.losses(np.array([0.0, 1.95e-3]), np.array([1.6e-3, 1.6e-3]), [[0, 1]])[0].resistance

    assert (np.linalg.eigvalsh(loss) > 0).all()
    assert loss[0, 0] - loss[0, 1] > loss[0, 0] + loss[0, 1]


@pytest.mark.parametrize(
    "row", [r for r in rows("losses.toml", "via_inductance") if r["h_mm"] <= 0.631], ids=str
)
def test_the_published_via_formula(row):
    found = goldfarb_pucel_inductance(height=row["h_mm"] * 1e-3, radius=row["diameter_mm"] / 2 * 1e-3)

    assert float(found) == pytest.approx(row["L_nH"] * 1e-9, rel=1e-6, abs=0)


@pytest.mark.parametrize("height", [0.254e-3, 0.37e-3, 0.508e-3, 0.63e-3])
@pytest.mark.parametrize("diameter", [0.2e-3, 0.25e-3])
def test_one_via_agrees_with_the_published_fit(height, diameter):
    """12 %, as the model states: for one via as wide as its strip, while the hole is not wider than deep."""
    tape = diameter / 2 / _TAPE_MEAN_DISTANCE

    found = grounded_ends_inductance(
        positions=[[0.0]], radii=[diameter / 2], strip_centres=[0.0], strip_widths=[tape], height=height
    )

    published = goldfarb_pucel_inductance(height=height, radius=diameter / 2)
    assert found[0, 0] == pytest.approx(float(published), rel=0.12, abs=0)


def test_vias_in_parallel_have_less_inductance_but_more_than_a_fair_share():
    # a very wide strip, so that what the strip's own end takes off is nothing
    common = {"strip_centres": [0.0], "strip_widths": [10.0], "height": 0.813e-3, "radii": [0.2e-3]}
    one, three = (
        grounded_ends_inductance(positions=[p], **common)[0, 0] for p in ([0.0], [-0.7e-3, 0.0, 0.7e-3])
    )

    assert one / 3 < three < one


def test_neumanns_integral_of_two_vias_over_the_plane():
    """The vertical part against brute-force integration of the filament and its image."""
    h, d = 0.79e-3, 2.3e-3
    z = np.linspace(0, h, 4001)
    image = np.linspace(-h, h, 8001)
    inner = np.trapezoid(1 / np.hypot(d, z[:, None] - image[None, :]), image, axis=1)
    expected = 1e-7 * np.trapezoid(inner, z)
    missing = 1e-7 * (np.hypot(2 * h, d) - d)

    found = grounded_ends_inductance(
        positions=[[0.0], [d]], radii=[0.15e-3] * 2, strip_centres=[0.0, d], strip_widths=[1e-3] * 2, height=h
    )

    # one via a strip: the group's mutual term is that of the two filaments
    assert found[0, 1] == pytest.approx(expected - missing, rel=2e-4, abs=0)


def test_the_mutual_inductance_of_far_ends_falls_with_the_cube_of_the_distance():
    def mutual(d: float) -> float:
        return float(
            grounded_ends_inductance(
                positions=[[0.0], [d]],
                radii=[0.15e-3] * 2,
                strip_centres=[0.0, d],
                strip_widths=[1e-3] * 2,
                height=0.8e-3,
            )[0, 1]
        )

    assert mutual(12e-3) / mutual(24e-3) == pytest.approx(8, rel=0.05, abs=0)


@pytest.mark.parametrize("row", rows("losses.toml", "via_resistance"), ids=str)
def test_via_resistance(row):
    found = via_resistance(
        row["f_GHz"] * 1e9,
        height=row["h_mm"] * 1e-3,
        radius=row["diameter_mm"] / 2 * 1e-3,
        plating=row["plating_um"] * 1e-6,
        conductivity=5.8e7,
    )

    assert float(found) == pytest.approx(row["R_mohm"] * 1e-3, rel=1e-5, abs=0)


def test_the_path_of_a_mounted_chip_has_half_a_nanohenry_per_millimetre():
    """Common practice for a 0.5 mm wide path about 1 mm above ground."""
    found = path_inductance(centres=[0.0], widths=0.5e-3, heights=1.06e-3, lengths=1e-3)

    assert found[0, 0] == pytest.approx(0.5e-9, rel=0.2, abs=0)


def test_parallel_paths_couple_like_filaments_over_a_plane():
    """mu0/4pi ln(1 + (2h/d)^2), Grover 1946."""
    found = path_inductance(centres=[0.0, 4.2e-3], widths=0.5e-3, heights=1.06e-3, lengths=1.3e-3)

    assert found[0, 1] == pytest.approx(1e-7 * np.log(1 + (2.12 / 4.2) ** 2) * 1.3e-3, rel=1e-6, abs=0)


def test_a_body_over_a_slab_has_between_its_capacitance_in_air_and_in_the_slab():
    air = body_capacitance(width=0.5e-3, height=1.1e-3, slab=0.8e-3, eps_r=1.0, length=1e-3)
    slab = body_capacitance(width=0.5e-3, height=1.1e-3, slab=0.8e-3, eps_r=3.6, length=1e-3)

    assert air < slab < 3.6 * air


def test_a_wide_gap_leaves_an_open_end():
    common = {"height": 0.8e-3, "eps_r": 3.55, "thickness": 43e-6}
    ends = end_facing_ground(width=1.6e-3, facing_width=1.3e-3, gap=4e-3, **common)

    assert ends.shunt == pytest.approx(open_end_capacitance(width=1.6e-3, **common), rel=0.02, abs=0)
    assert ends.across < 0.01 * ends.shunt


def test_overlapping_vias_are_refused():
    with pytest.raises(InputError, match="overlap"):
        grounded_ends_inductance(
            positions=[[0.0, 0.3e-3]], radii=[0.2e-3], strip_centres=[0.0], strip_widths=[1e-3], height=0.8e-3
        )
