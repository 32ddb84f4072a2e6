"""The comb's network against exact comb-line tables, a second network library and physical laws."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from independent_network import responses
from reference_data import rows, table
from sample_comb import chip_comb, combs, plate_comb

from layoutgen.circuit import ALL_LOSSES, NO_LOSSES, Circuit, SectionSolver, unloaded_q
from layoutgen.constants import SPEED_OF_LIGHT, VACUUM_PERMITTIVITY
from layoutgen.errors import InputError
from layoutgen.lines import LineSolver, StripMatrices, line_admittance

DESIGNS = {row["case"]: row for row in rows("combline.toml", "designs")}


def ideal_combline(case: str, f_over_f0: np.ndarray) -> np.ndarray:
    """S-parameters of a design of the table, from coupled lines of its capacitances. [f0 = 1 GHz]"""
    design = DESIGNS[case]
    words = case.split(", ")
    theta = np.radians(next(float(w.split()[1]) for w in words if w.startswith("th0")))
    line_admittance_ratio = next(float(w.split()[1]) for w in words if w.startswith("Ya/YA"))
    eps_r = next(float(w.split()[1]) for w in words if w.startswith("er"))
    ground, mutual = np.array(design["C_over_eps"]), np.array(design["M_over_eps"])
    matrix = np.diag(ground) - np.diag(mutual, 1) - np.diag(mutual, -1)
    matrix += np.diag(np.append(mutual, 0)) + np.diag(np.append(0, mutual))
    capacitance = matrix * VACUUM_PERMITTIVITY * eps_r
    inductance = np.linalg.inv(matrix) / (SPEED_OF_LIGHT**2 * VACUUM_PERMITTIVITY)
    modes = StripMatrices(capacitance=capacitance, inductance=inductance).modes()
    length = theta / (2 * np.pi * 1e9) * SPEED_OF_LIGHT / np.sqrt(eps_r)
    near, far = line_admittance(f_over_f0 * 1e9, modes, length)
    n = len(ground)
    resonators = np.arange(1, n - 1)
    # ports at end A of the outer lines, capacitors at end B of the resonators, all else grounded
    ends_b = np.zeros((len(f_over_f0), n, n), dtype=complex)
    ends_b[:] = near
    load = f_over_f0 * 0.02 * line_admittance_ratio / np.tan(theta)
    ends_b[:, resonators, resonators] += 1j * load[:, None]
    inner = ends_b[:, resonators[:, None], resonators[None, :]]
    ports = [0, n - 1]
    across = far[:, ports][:, :, resonators]
    reduced = near[:, ports][:, :, ports] - across @ np.linalg.inv(inner) @ across.transpose(0, 2, 1)
    return 2 * np.linalg.inv(np.eye(2) + 50 * reduced) - np.eye(2)


@pytest.mark.parametrize("case", DESIGNS)
def test_coupled_lines_have_the_exact_combline_response(case):
    points = [row for row in rows("combline.toml", "response") if row["case"] == case]
    s = ideal_combline(case, np.array([row["f_over_f0"] for row in points]))

    for row, found in zip(points, s, strict=True):
        # eight digits; very small values of one of the two are limited by the rounding of the capacitances
        for value, key in ((found[0, 0], "S11_dB"), (found[1, 0], "S21_dB")):
            expected = 10 ** (row[key] / 20)
            assert abs(value) == pytest.approx(expected, rel=2e-6, abs=3e-7)


@pytest.mark.parametrize("row", rows("combline.toml", "edges"), ids=lambda r: r["case"])
def test_coupled_lines_have_the_exact_combline_band_edges(row):
    f = np.linspace(row["f_low"] - 2e-3, row["f_high"] + 2e-3, 20001)
    passing = f[np.abs(ideal_combline(row["case"], f)[:, 1, 0]) ** 2 >= 0.5]

    step = 1.5e-4  # the resolution that the table states
    assert passing[0] == pytest.approx(row["f_low"], rel=0, abs=step)
    assert passing[-1] == pytest.approx(row["f_high"], rel=0, abs=step)


def test_the_same_network_assembled_by_a_general_library():
    frequency = np.linspace(0.9e9, 3.7e9, 60)

    ours, theirs = responses(chip_comb(), frequency)

    np.testing.assert_allclose(ours, theirs, rtol=0, atol=1e-9)


@pytest.mark.parametrize("make", [chip_comb, plate_comb])
def test_without_loss_no_power_is_lost(make):
    f = np.linspace(0.7e9, 6e9, 300)

    s = Circuit(make()).scattering(f, NO_LOSSES)

    power = s.conj().transpose(0, 2, 1) @ s
    np.testing.assert_allclose(power, np.broadcast_to(np.eye(2), power.shape), rtol=0, atol=1e-8)


@settings(max_examples=15, deadline=None)
@given(comb=combs(), start=st.floats(0.2e9, 2e9))
def test_any_comb_is_passive_and_reciprocal(comb, start):
    f = start * np.linspace(1, 4.1, 41)

    s = Circuit(comb).scattering(f)

    np.testing.assert_allclose(s, s.transpose(0, 2, 1), rtol=0, atol=1e-9)
    lost = np.eye(2) - s.conj().transpose(0, 2, 1) @ s
    assert np.linalg.eigvalsh(lost).min() > -1e-9


def test_each_mechanism_adds_loss_and_together_they_nearly_add_up():
    """Small losses add, to first order; all are a tenth of a real board's here, the second order is 5 %."""
    comb = chip_comb()
    stack = replace(
        comb.stack, tan_delta=comb.stack.tan_delta / 10, conductivity=100 * comb.stack.conductivity
    )
    loads = [replace(r.load, resistance=r.load.resistance / 10) for r in comb.resonators]
    resonators = tuple(replace(r, load=load) for r, load in zip(comb.resonators, loads, strict=True))
    comb = replace(comb, stack=stack, resonators=resonators)
    solver = SectionSolver(comb.stack, comb.width)
    circuit = Circuit(comb, solver)
    f = np.linspace(1.0e9, 2.2e9, 400)
    peak = f[np.argmax(np.abs(circuit.scattering(f, NO_LOSSES)[:, 1, 0]))]

    def loss(mechanisms):
        return float(-20 * np.log10(np.abs(circuit.scattering([peak], mechanisms)[0, 1, 0])))

    base = loss(NO_LOSSES)
    single = [loss(frozenset({m})) - base for m in sorted(ALL_LOSSES)]
    assert min(single) > 0
    assert loss(ALL_LOSSES) - base == pytest.approx(sum(single), rel=0.05, abs=0)


def test_dielectric_q_of_a_resonator_is_the_reciprocal_of_filled_energy_times_loss_tangent():
    """With no other loss, Q doubles when the loss tangent halves, and is above 1 / tan delta."""
    comb = chip_comb()
    q = []
    for tan_delta in (0.004, 0.002):
        stack = replace(comb.stack, tan_delta=tan_delta, conductivity=1e18, roughness=0.0)
        loads = [replace(r, load=replace(r.load, resistance=0.0)) for r in comb.resonators]
        changed = replace(comb, stack=stack, resonators=tuple(loads))
        q.append(unloaded_q(changed, SectionSolver(stack, comb.width), 1.4e9)[2])

    assert q[1] == pytest.approx(2 * q[0], rel=0.01, abs=0)
    assert q[1] > 1 / 0.002


def test_the_coupling_of_the_reference_resonator():
    """A pair of loaded lines against a finite-difference solution of the section, two or three digits."""
    data = table("combline.toml", "reference_resonator")
    solver = LineSolver(
        height=data["height_mm"] * 1e-3,
        eps_r=data["eps_r"],
        cover=None,
        reach=20e-3,
        thickness=data["copper_mm"] * 1e-3,
    )
    width = data["width_mm"] * 1e-3
    one = solver.matrices(np.zeros(1), np.array([width]), [[0]])[0]
    length = _resonant(one.inductance[0, 0], one.capacitance[0, 0], data, length=None, f=data["f_GHz"] * 1e9)
    for gap, expected in data["rows"]:
        x = np.array([0, width + gap * 1e-3])
        m = solver.matrices(x, np.array([width, width]), [[0, 1]])[0]
        even, odd = (
            _resonant(
                m.inductance[0, 0] + sign * m.inductance[0, 1],
                m.capacitance[0, 0] + sign * m.capacitance[0, 1],
                data,
                length=length,
                f=None,
            )
            for sign in (1, -1)
        )
        k = abs(odd**2 - even**2) / (odd**2 + even**2)
        # half a step of the printed digits, and 1 % for the finite differences
        assert k == pytest.approx(expected, rel=0.01, abs=5e-4)


def _resonant(inductance, capacitance, data, *, length, f):
    from scipy.optimize import brentq

    def susceptance(f, length):
        omega = 2 * np.pi * f
        z, phase = np.sqrt(inductance / capacitance), omega * np.sqrt(inductance * capacitance) * length
        via = 1j * omega * data["via_nH"] * 1e-9
        line = z * (via + 1j * z * np.tan(phase)) / (z + 1j * via * np.tan(phase))
        chip = 1 / (1j * omega * data["load_pF"] * 1e-12) + 1j * omega * data["load_nH"] * 1e-9
        return (1 / line + 1 / chip).imag

    if length is None:
        return brentq(lambda x: susceptance(f, x), 2e-3, 20e-3)
    return brentq(lambda x: susceptance(x, length), 0.8e9, 3e9)


def test_a_frequency_of_zero_is_refused():
    with pytest.raises(InputError, match="frequency") as caught:
        Circuit(chip_comb()).scattering([0.0, 1e9])
    assert "greater than 0" in caught.value.remedy
