"""The strip solver against finite elements of a general library, in a closed box that both solve exactly."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from finite_elements import Box, Grid, solve

from layoutgen.lines import solve_strips

SELF = 1e-3  # what the solver promises for self terms
COUPLING = 1e-2  # and for couplings

BOXES = {
    "single": Box(width=9.3, height=1.0, eps_r=3.57, cover=2.9, thickness=0.053, centres=[4.1],
                  widths=[1.37]),
    "unequal pair": Box(width=9.3, height=1.0, eps_r=10.3, cover=1.7, thickness=0.021, centres=[3.1, 4.7],
                        widths=[1.37, 0.91]),
    "unequal three": Box(width=9.3, height=1.0, eps_r=2.23, cover=2.9, thickness=0.087,
                         centres=[2.3, 4.4, 6.1], widths=[1.1, 1.73, 0.62]),
}  # fmt: skip


def strips(box: Box) -> np.ndarray:
    return solve_strips(centres=box.centres, widths=box.widths, thickness=box.thickness, height=box.height,
                        eps_r=box.eps_r, cover=box.cover, walls=(0.0, box.width))  # fmt: skip


@pytest.mark.parametrize("name", BOXES)
def test_the_capacitance_matrix_is_that_of_finite_elements(name):
    box = BOXES[name]
    coarse, fine = solve(box, Grid()).capacitance, solve(box, Grid().finer).capacitance
    # the error falls at least fourfold when every step is halved, which leaves a third of the difference
    left = np.abs(coarse - fine) / 3
    assert (np.diag(fine) < np.diag(coarse)).all(), "energies come down to the exact ones"
    assert (np.diag(left) < 2e-4 * np.diag(fine)).all(), "the reference is finer than what it judges"

    found = strips(box)

    promise = np.where(np.eye(len(found)) == 1, SELF, COUPLING) * np.abs(fine)
    np.testing.assert_array_less(np.abs(found - fine), promise + left)


def test_the_comparison_notices_a_slab_half_a_percent_thicker():
    """A mistake just above the promise shows: the self term moves by three times as much."""
    box = BOXES["single"]
    fine = solve(box, Grid()).capacitance

    found = strips(replace(box, height=1.005 * box.height, cover=box.cover - 0.005 * box.height))

    assert (np.abs(found - fine) > 2 * SELF * np.abs(fine)).all()
