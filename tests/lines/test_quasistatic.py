"""The strip solver against exact solutions, converged numerical tables and a finite-element library."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from reference_data import rows

from layoutgen.constants import VACUUM_IMPEDANCE, VACUUM_PERMITTIVITY
from layoutgen.errors import InputError
from layoutgen.lines import LineSolver, Mesh, solve_strips

SELF = 1e-3  # what the solver promises for single strips and pairs
COUPLING = 1e-2  # and for the couplings of arrays


def impedance(slab: float, air: float) -> tuple[float, float]:
    return VACUUM_IMPEDANCE * VACUUM_PERMITTIVITY / np.sqrt(slab * air), slab / air


def single(u: float, t: float, eps_r: float, **options) -> float:
    return float(solve_strips(centres=[0], widths=[u], thickness=t, height=1.0, eps_r=eps_r, **options)[0, 0])


def pair(u: float, g: float, t: float, eps_r: float) -> np.ndarray:
    return solve_strips(centres=[0, u + g], widths=[u, u], thickness=t, height=1.0, eps_r=eps_r)


@pytest.mark.parametrize("row", rows("lines.toml", "microstrip_air"), ids=lambda r: f"u {r['u']}")
def test_a_thin_strip_in_air_is_the_conformal_mapping(row):
    found, _ = impedance(single(row["u"], 0, 1.0), single(row["u"], 0, 1.0))

    assert found == pytest.approx(row["Z0_ohm"], rel=SELF, abs=0)


@pytest.mark.parametrize("row", rows("lines.toml", "microstrip"), ids=lambda r: f"{r['eps_r']} {r['u']}")
def test_a_thin_strip_on_a_slab(row):
    z, eps = impedance(single(row["u"], 0, row["eps_r"]), single(row["u"], 0, 1.0))

    assert z == pytest.approx(row["Z0_ohm"], rel=SELF, abs=0)
    assert eps == pytest.approx(row["eps_eff"], rel=SELF, abs=0)


@pytest.mark.parametrize(
    "row", rows("lines.toml", "microstrip_thick"), ids=lambda r: f"{r['eps_r']} {r['u']} {r['t_over_h']}"
)
def test_a_thick_strip_on_a_slab(row):
    u, t = row["u"], row["t_over_h"]
    z, eps = impedance(single(u, t, row["eps_r"]), single(u, t, 1.0))

    assert z == pytest.approx(row["Z0_ohm"], rel=SELF, abs=0)
    assert eps == pytest.approx(row["eps_eff"], rel=SELF, abs=0)


@pytest.mark.parametrize(
    "row",
    [{"t_over_h": 0.0, **r} for r in rows("lines.toml", "coupled")] + rows("lines.toml", "coupled_thick"),
    ids=lambda r: f"{r['eps_r']} {r['u']} {r['g']} {r['t_over_h']}",
)
def test_a_pair_of_strips_on_a_slab(row):
    slab, air = (pair(row["u"], row["g"], row["t_over_h"], e) for e in (row["eps_r"], 1.0))
    even = impedance(slab[0, 0] + slab[0, 1], air[0, 0] + air[0, 1])
    odd = impedance(slab[0, 0] - slab[0, 1], air[0, 0] - air[0, 1])

    np.testing.assert_allclose(even, [row["Z0e_ohm"], row["eps_e"]], rtol=SELF, atol=0)
    np.testing.assert_allclose(odd, [row["Z0o_ohm"], row["eps_o"]], rtol=SELF, atol=0)


@pytest.mark.parametrize(
    "row", rows("lines.toml", "arrays"), ids=lambda r: f"{r['eps_r']} {len(r['widths'])}"
)
def test_every_coupling_of_an_array(row):
    widths, gaps = np.array(row["widths"]), np.array(row["gaps"])
    centres = np.concatenate([[0], np.cumsum((widths[:-1] + widths[1:]) / 2 + gaps)])

    found = solve_strips(centres=centres, widths=widths, thickness=0, height=1.0, eps_r=row["eps_r"])

    expected = np.array(row["C_over_eps0"]) * VACUUM_PERMITTIVITY
    np.testing.assert_allclose(np.diag(found), np.diag(expected), rtol=SELF, atol=0)
    np.testing.assert_allclose(found, expected, rtol=COUPLING, atol=0)


@pytest.mark.parametrize("row", rows("lines.toml", "stripline"), ids=lambda r: f"w/b {r['w_over_b']}")
def test_under_a_cover_at_the_slab_height_and_without_slab_it_is_stripline(row):
    """A strip midway between two planes: the exact zero-thickness formula of Cohn 1954."""
    found = single(2 * row["w_over_b"], 0, 1.0, cover=1.0) / VACUUM_PERMITTIVITY

    assert found == pytest.approx(row["C_over_eps"], rel=SELF, abs=0)


@pytest.mark.parametrize(
    "row",
    [r for r in rows("lines.toml", "bar") if r["t_over_b"] <= 0.1],
    ids=lambda r: f"w/b {r['w_over_b']} t/b {r['t_over_b']}",
)
def test_under_a_cover_a_thick_strip_is_the_exact_bar(row):
    """Exact conformal mapping of a bar midway between two planes."""
    w, t = row["w_over_b"], row["t_over_b"]
    height = (1 - t) / 2

    found = solve_strips(centres=[0], widths=[w], thickness=t, height=height, eps_r=1.0, cover=height + t)

    assert found[0, 0] / VACUUM_PERMITTIVITY == pytest.approx(row["C_over_eps"], rel=SELF, abs=0)


@pytest.mark.parametrize("eps_r", [1.0, 3.57, 10.3])
@pytest.mark.parametrize("cover", [None, 3.9])
@pytest.mark.parametrize("t", [0.0, 0.053])
def test_a_side_wall_is_the_odd_symmetry_plane_of_a_pair(eps_r, cover, t):
    """A strip beside a wall carries the charge of one strip of an oddly driven pair, by reflection."""
    common = {"thickness": t, "height": 1.0, "eps_r": eps_r, "cover": cover}
    mirrored = solve_strips(centres=[-2.1, 2.1], widths=[1.1, 1.1], **common)
    expected = mirrored[0, 0] - mirrored[0, 1]

    left = solve_strips(centres=[2.1], widths=[1.1], walls=(0, 47.0), **common)[0, 0]
    right = solve_strips(centres=[44.9], widths=[1.1], walls=(0, 47.0), **common)[0, 0]

    # the other wall is 45 heights away and adds less than 1e-4
    assert left == pytest.approx(expected, rel=3e-4, abs=0)
    assert right == pytest.approx(left, rel=1e-9, abs=0)


@pytest.mark.parametrize("cover", [None, 4.3])
def test_two_side_walls_reflect_in_each_other(cover):
    """Between walls 9 heights apart: the same as a long row of strips with alternating charges."""
    common = {"thickness": 0.04, "height": 1.0, "eps_r": 3.31, "cover": cover}
    row = solve_strips(centres=4.5 + 9.0 * np.arange(-10, 11), widths=np.full(21, 1.3), **common)
    signs = (-1.0) ** np.arange(-10, 11)
    expected = float(row[10] @ signs)

    found = solve_strips(centres=[4.5], widths=[1.3], walls=(0.0, 9.0), **common)[0, 0]

    assert found == pytest.approx(expected, rel=3e-4, abs=0)


def test_a_far_cover_is_no_cover():
    open_board = pair(1.1, 0.7, 0.05, 3.48)
    covered = solve_strips(
        centres=[0, 1.8], widths=[1.1, 1.1], thickness=0.05, height=1.0, eps_r=3.48, cover=180.0
    )

    np.testing.assert_allclose(covered, open_board, rtol=2e-4, atol=0)


def test_a_subset_is_the_same_as_the_other_strips_taken_away():
    solver = LineSolver(height=0.8e-3, eps_r=3.6, thickness=41e-6, cover=None, reach=30e-3)
    x, w = np.array([0.0, 3.1e-3, 7.7e-3]), np.array([1.1e-3, 1.7e-3, 0.9e-3])

    together = solver.matrices(x, w, [[0, 2], [1]])
    alone = [solver.matrices(x[[0, 2]], w[[0, 2]], [[0, 1]])[0], solver.matrices(x[[1]], w[[1]], [[0]])[0]]

    for found, expected in zip(together, alone, strict=True):
        np.testing.assert_allclose(found.capacitance, expected.capacitance, rtol=1e-9, atol=0)
        np.testing.assert_allclose(found.inductance, expected.inductance, rtol=1e-9, atol=0)


@settings(max_examples=20, deadline=None)
@given(
    widths=st.lists(st.floats(0.2, 4), min_size=1, max_size=5),
    gap=st.floats(0.06, 6),
    t=st.floats(0.005, 0.09),
    eps_r=st.floats(1, 11),
    cover=st.one_of(st.none(), st.floats(0.5, 20)),
)
def test_any_capacitance_matrix_is_symmetric_diagonally_dominant_and_grows_with_the_slab(
    widths, gap, t, eps_r, cover
):
    w = np.array(widths)
    x = np.concatenate([[0], np.cumsum((w[:-1] + w[1:]) / 2 + gap)])
    slab, air = (
        solve_strips(centres=x, widths=w, thickness=t, height=1.0, eps_r=e, cover=cover) for e in (eps_r, 1.0)
    )

    np.testing.assert_allclose(slab, slab.T, rtol=1e-12, atol=0)
    # couplings are negative; far ones under a cover vanish in the interpolation of the tables
    assert (slab - np.diag(np.diag(slab)) <= 1e-5 * slab.max()).all()
    assert (slab.sum(axis=1) > 0).all()
    assert (np.linalg.eigvalsh(slab - air) >= -1e-9 * slab.max()).all()
    assert (np.linalg.eigvalsh(eps_r * air - slab) >= -1e-9 * slab.max()).all()


def test_refinement_converges_from_below():
    """Galerkin's capacitance of a set at given potentials is a lower bound and grows with the mesh."""
    values = [
        float(
            np.sum(
                solve_strips(
                    centres=[0, 1.2], widths=[1.1, 1.1], thickness=0.05, height=1.0, eps_r=3.55, mesh=mesh
                )
            )
        )
        for mesh in (Mesh(across=8, up=2), Mesh(), Mesh().finer, Mesh().finer.finer)
    ]

    assert values == sorted(values)
    assert values[1] == pytest.approx(values[3], rel=SELF, abs=0)


def test_impossible_sections_are_refused():
    with pytest.raises(InputError, match="overlap"):
        solve_strips(centres=[0, 0.5], widths=[1, 1], thickness=0, height=1.0, eps_r=2.0)
    with pytest.raises(InputError, match="side wall"):
        solve_strips(centres=[0.4], widths=[1], thickness=0, height=1.0, eps_r=2.0, walls=(0, 20))
    with pytest.raises(InputError, match="greater than 0"):
        solve_strips(centres=[0], widths=[-1], thickness=0, height=1.0, eps_r=2.0)
