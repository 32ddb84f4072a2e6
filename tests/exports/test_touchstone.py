"""Touchstone files, read by scikit-rf."""

from __future__ import annotations

import numpy as np
import pytest
import skrf

from layoutgen.errors import InputError
from layoutgen.exports import touchstone

FREQUENCY = np.array([1.6412e9, 1.69e9, 1.7388123456e9])
S = np.array([
    [[0.1 - 0.2j, 0.83 + 0.11j], [0.83 + 0.12j, -0.3 + 0.07j]],
    [[1e-9 + 2e-7j, 0.97 - 0.01j], [0.961 - 0.02j, 0.031j]],
    [[-0.99 + 0.001j, 0.05 - 0.04j], [0.051 - 0.04j, -0.98 - 0.1j]],
])  # not reciprocal, so that S21 and S12 cannot be mistaken


def test_another_library_reads_the_same_network(tmp_path):
    touchstone.write(FREQUENCY, S, tmp_path / "a.s2p", impedance=75.0, comments=["part 7", "no loss"])

    network = skrf.Network(str(tmp_path / "a.s2p"))

    np.testing.assert_allclose(network.f, FREQUENCY, rtol=1e-14, atol=0)
    np.testing.assert_allclose(network.s, S, rtol=1e-12, atol=0)  # thirteen digits are written
    np.testing.assert_array_equal(network.z0, np.full((3, 2), 75.0))
    assert "no loss" in network.comments


def test_the_option_line_says_everything(tmp_path):
    touchstone.write(FREQUENCY, S, tmp_path / "a.s2p", impedance=50.0)

    assert (tmp_path / "a.s2p").read_text(encoding="ascii").splitlines()[0] == "# Hz S RI R 50"


def test_the_same_bytes_twice(tmp_path):
    for name in ("a.s2p", "b.s2p"):
        touchstone.write(FREQUENCY, S, tmp_path / name, impedance=50.0)

    assert (tmp_path / "a.s2p").read_bytes() == (tmp_path / "b.s2p").read_bytes()


@pytest.mark.parametrize(("frequency", "s", "impedance", "comments", "key"), [
    (FREQUENCY[::-1], S, 50.0, (), "frequency_hz"),
    (FREQUENCY * np.nan, S, 50.0, (), "frequency_hz"),
    (FREQUENCY[0], S, 50.0, (), "frequency_hz"),
    (FREQUENCY, S[:2], 50.0, (), "s"),
    (FREQUENCY, S + np.nan, 50.0, (), "s"),
    (FREQUENCY, S, 0.0, (), "impedance"),
    (FREQUENCY, S, 50.0, ("two\nlines",), "comments"),
    (FREQUENCY, S, 50.0, ("50 \N{OHM SIGN}",), "comments"),
])
def test_what_cannot_be_written_is_refused(tmp_path, frequency, s, impedance, comments, key):
    with pytest.raises(InputError) as refusal:
        touchstone.write(frequency, s, tmp_path / "a.s2p", impedance=impedance, comments=comments)

    assert refusal.value.key == key
    assert not (tmp_path / "a.s2p").exists()
