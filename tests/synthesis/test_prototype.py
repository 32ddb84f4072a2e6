"""Prototypes, couplings and the ladder against published tables and closed forms."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from reference_data import rows

from layoutgen.errors import InputError
from layoutgen.synthesis import (
    butterworth_g,
    chebyshev_g,
    couplings,
    first_order_estimate,
    ladder_response,
    normalised_frequency,
    return_loss_of_ripple,
    ripple_of_return_loss,
)

PRINTED = 1e-9  # ten digits are given


@pytest.mark.parametrize("row", rows("prototypes.toml", "butterworth"), ids=lambda r: f"order {r[0]}")
def test_butterworth_elements(row):
    np.testing.assert_allclose(butterworth_g(int(row[0])), [1.0, *row[1:]], rtol=PRINTED, atol=0)


@pytest.mark.parametrize(
    "row", rows("prototypes.toml", "chebyshev"), ids=lambda r: f"{r[0]} dB, order {r[1]}"
)
def test_chebyshev_elements(row):
    np.testing.assert_allclose(chebyshev_g(int(row[1]), row[0]), [1.0, *row[2:]], rtol=PRINTED, atol=0)


@pytest.mark.parametrize("row", rows("prototypes.toml", "ripple_to_return_loss"), ids=str)
def test_return_loss_of_ripple(row):
    assert return_loss_of_ripple(row["ripple_dB"]) == pytest.approx(row["return_loss_dB"], rel=PRINTED, abs=0)


@pytest.mark.parametrize("row", rows("prototypes.toml", "return_loss_to_ripple"), ids=str)
def test_ripple_of_return_loss(row):
    assert ripple_of_return_loss(row["return_loss_dB"]) == pytest.approx(row["ripple_dB"], rel=PRINTED, abs=0)


@pytest.mark.parametrize("row", rows("prototypes.toml", "couplings"), ids=lambda r: r["prototype"])
def test_couplings_and_external_q(row):
    kind, order = row["prototype"].split(" n=")
    g = (
        butterworth_g(int(order))
        if kind == "Butterworth"
        else chebyshev_g(int(order), float(kind.split()[0]))
    )

    found = couplings(g, row["fbw"])

    np.testing.assert_allclose(found.k, row["k"], rtol=1e-7, atol=0)  # eight digits are given
    assert found.external_q_in == pytest.approx(row["Qe_in"], rel=1e-7, abs=0)
    assert found.external_q_out == pytest.approx(row["Qe_out"], rel=1e-7, abs=0)


@given(order=st.integers(2, 9), return_loss=st.floats(8, 35))
def test_even_orders_use_the_last_element_for_the_external_q(order, return_loss):
    """A Chebyshev ladder is symmetric or antimetric: both ends load their resonators alike."""
    found = couplings(chebyshev_g(order, ripple_of_return_loss(return_loss)), 0.061)

    assert found.external_q_in == pytest.approx(found.external_q_out, rel=1e-9, abs=0)


@pytest.mark.parametrize(
    "row", rows("prototypes.toml", "midband_loss"), ids=lambda r: f"{r['prototype']} {r['Qu']}"
)
def test_midband_loss_of_the_lossy_ladder(row):
    kind, order = row["prototype"].split(" n=")
    g = (
        butterworth_g(int(order))
        if kind == "Butterworth"
        else chebyshev_g(int(order), float(kind.split()[0]))
    )
    fbw = row["fbw"]
    lower, upper = 1.7e9 * (np.sqrt(1 + fbw**2 / 4) - fbw / 2), 1.7e9 * (np.sqrt(1 + fbw**2 / 4) + fbw / 2)

    lossy, lossless = (
        -20 * np.log10(abs(ladder_response([1.7e9], g, lower=lower, upper=upper, unloaded_q=q)[0, 1, 0]))
        for q in (row["Qu"], np.inf)
    )

    assert lossy - lossless == pytest.approx(row["dL_exact_dB"], rel=1e-6, abs=0)


@given(order=st.integers(2, 9), ripple=st.floats(0.005, 1.2), place=st.floats(-3, 3))
def test_the_ladder_has_the_chebyshev_response(order, ripple, place):
    """Loss 10 log(1 + eps^2 T_n^2), the definition; and the power adds up."""
    lower, upper = 1.63e9, 1.81e9
    f = (place * (upper - lower) + np.sqrt((place * (upper - lower)) ** 2 + 4 * lower * upper)) / 2
    s = ladder_response([f], chebyshev_g(order, ripple), lower=lower, upper=upper)[0]
    x = float(normalised_frequency(f, lower=lower, upper=upper))
    polynomial = np.polynomial.chebyshev.chebval(x, [0] * order + [1])
    expected = 1 / (1 + (10 ** (ripple / 10) - 1) * polynomial**2)

    assert abs(s[1, 0]) ** 2 == pytest.approx(expected, rel=1e-8, abs=0)
    assert abs(s[0, 0]) ** 2 + abs(s[1, 0]) ** 2 == pytest.approx(1, rel=1e-10, abs=0)


@given(order=st.integers(2, 9), x=st.floats(1.2, 4))
def test_the_order_estimate_inverts_the_response(order, x):
    ripple = 0.0712
    loss = 10 * np.log10(1 + (10 ** (ripple / 10) - 1) * np.cosh(order * np.arccosh(x)) ** 2)

    found = first_order_estimate(
        rejection_db=float(loss), normalised_frequency=x, return_loss_db=return_loss_of_ripple(ripple)
    )

    assert found == pytest.approx(order, rel=1e-6, abs=0)


def test_impossible_requests_name_the_value():
    with pytest.raises(InputError, match="ripple_db") as caught:
        chebyshev_g(3, float("nan"))
    assert caught.value.key == "ripple_db"
    with pytest.raises(InputError, match="order"):
        butterworth_g(0)
    with pytest.raises(InputError, match="fractional_bandwidth"):
        couplings(butterworth_g(3), 1.3)
