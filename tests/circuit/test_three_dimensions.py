"""Resonators of the circuit against solutions of the same copper in three dimensions.

Tolerances: what the models state, 0.5 % in frequency, 3 % in coupling, 0.1 % in the shift by a tap and 5 %
in external Q; the solutions' own mesh errors stand beside them.
"""

from __future__ import annotations

import numpy as np
import pytest
from reference_data import rows, table
from scipy.optimize import brentq

from layoutgen.circuit import NO_LOSSES, Circuit, SectionSolver
from layoutgen.comb import ChipLoad, Comb, Feed, Resonator, Segment, Stack, ViaRow

MM = 1e-3
VIAS = ViaRow(count=2, pitch=0.7 * MM, drill=0.4 * MM, finished=0.3 * MM, pad=0.6 * MM)


def comb_of(
    case: dict, *, places: list[float], cover: float, box: float, tap: float, feed_width: float
) -> Comb:
    """Equal resonators at given places across a box; copper so thin that its thickness does not count."""
    stack = Stack(
        height=case["height"] * MM,
        eps_r=case["eps_r"],
        tan_delta=0.0,
        conductor=1e-6,
        conductivity=5.8e7,
        roughness=0.0,
        cover=cover * MM,
    )
    load = ChipLoad(
        case="0402",
        capacitance=case["load_pf"] * 1e-12,
        tolerance=0.0,
        resistance=0.0,
        inductance=0.0,
        body_length=1 * MM,
        body_width=0.5 * MM,
        body_height=0.5 * MM,
        current_height=0.25 * MM,
        land_length=0.5 * MM,
        land_width=0.6 * MM,
        land_gap=0.5 * MM,
        pad_length=1.2 * MM,
        pad_width=1.3 * MM,
        via_offset=0.9 * MM,
        vias=VIAS,
    )
    line = Segment(length=case["length"] * MM, width=case["width"] * MM)
    resonators = tuple(
        Resonator(x=x * MM, segments=(line,), short=VIAS, overhang=0.3 * MM, load=load) for x in places
    )
    first, last = (
        Feed(resonator=i, side=side, tap=tap * MM, width=feed_width * MM, impedance=50.0, launch=None)
        for i, side in ((0, "left"), (len(places) - 1, "right"))
    )
    return Comb(
        stack=stack,
        resonators=resonators,
        feeds=(first, last),
        width=max(places[-1] + 12, box) * MM,
        height=30 * MM,
        short_line=8 * MM,
        ground_clearance=6 * MM,
        feed_clearance=2 * MM,
        side_walls=(0.0, box * MM),
    )


def test_one_resonator_alone():
    case = table("three-dimensional.toml", "alone")
    comb = comb_of(case, places=[12.0, 60.0], cover=8.0, box=24.0, tap=4.0, feed_width=1.77)
    circuit = Circuit(comb, SectionSolver(comb.stack, comb.width), strips=[0])

    found = brentq(lambda f: circuit.input_admittance([f], 0)[0].imag, 1.5e9, 1.9e9)

    assert found == pytest.approx(case["frequency"] * 1e9, rel=0.005, abs=0)


def test_two_resonators_coupled():
    case = table("three-dimensional.toml", "pair")
    half = case["width"] + case["gap"]
    places = [12 + case["width"] / 2, 12 + case["width"] / 2 + half]
    comb = comb_of(case, places=places, cover=8.0, box=sum(places), tap=4.0, feed_width=1.77)

    even, odd = Circuit(comb, SectionSolver(comb.stack, comb.width)).pair_resonances(1.7e9)

    k = (odd**2 - even**2) / (odd**2 + even**2)
    assert k == pytest.approx(case["k"], rel=0.03, abs=0)


@pytest.mark.parametrize(
    "case", rows("three-dimensional.toml", "tapped"), ids=lambda c: f"{c['eps_r']} {c['tap']}"
)
def test_a_tapped_resonator(case):
    """The tap raises the resonance by 1 to 2 %, which in a filter of 5 % is a third of the band."""
    comb = comb_of(
        case, places=[8.0, 60.0], cover=6.0, box=15.0, tap=case["tap"], feed_width=case["feed_width"]
    )
    circuit = Circuit(comb, SectionSolver(comb.stack, comb.width), strips=[0])
    free = brentq(lambda f: circuit.input_admittance([f], 0)[0].imag, 1.2e9, 3.5e9)

    pole = _pole(circuit, free)

    external_q = abs(pole.real / (2 * pole.imag))
    assert pole.real / free == pytest.approx(case["ratio"], rel=1e-3, abs=0)
    assert external_q == pytest.approx(case["external_q"], rel=0.05, abs=0)


def _pole(circuit: Circuit, near: float) -> complex:
    """Complex resonance with the feed in its own impedance, the pole of S11."""
    f = near * np.linspace(0.9, 1.12, 89)
    # a rational function of low order through S11 over frequency, by a linear fit (Levy 1959)
    x = (f - near) / near
    s = circuit.scattering(f, NO_LOSSES)[:, 0, 0]
    numerator, denominator = np.vander(x, 5), np.vander(x, 5)[:, :-1]
    fitted = np.linalg.lstsq(np.hstack([numerator, -s[:, None] * denominator]), s, rcond=None)[0]
    roots = np.roots(np.append(fitted[5:], 1.0))
    return complex(near * (1 + roots[np.argmin(np.abs(roots))]))
