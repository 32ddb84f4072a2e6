"""The frequencies a response is shown and filed at, and the responses there."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from layoutgen.design import Design

__all__ = ["Sweep", "frequencies", "sweep"]

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

BAND_POINTS = 401
SKIRT_POINTS = 200
WIDE_STEP = 0.004
"""Of the wide sweep, over the centre of the band."""


@dataclass(frozen=True, kw_only=True)
class Sweep:
    """Responses of a design over frequency.

    Attributes
    ----------
    frequency : ndarray, shape (n,)
        Rising. [Hz]
    predicted, lossless, ideal : ndarray, shape (n, 2, 2)
        S-parameters: of the comb, of the comb without loss, of the lumped ladder of the prototype. [1]
    """

    frequency: Floats
    predicted: Complexes
    lossless: Complexes
    ideal: Complexes


def sweep(design: Design) -> Sweep:
    """Responses of a design at `frequencies`."""
    f = frequencies(design)
    return Sweep(
        frequency=f,
        predicted=design.response(f),
        lossless=design.lossless_response(f),
        ideal=design.ideal_response(f),
    )


def frequencies(design: Design) -> Floats:
    """From half to two and a half times the centre, all stop bands and the first spurious response included.

    The pass band has 401 points, its edges exactly among them; a bandwidth on either side is nearly as fine.
    """
    spec = design.spec
    band, spurious = spec.passband, design.verdict.performance.spurious.frequency
    start = min([0.5 * band.centre, *(0.98 * s.lower for s in spec.stopbands)])
    stop = max([2.5 * band.centre, *(1.02 * s.upper for s in spec.stopbands)])
    if stop < 1.05 * spurious < 4 * band.centre:
        stop = 1.05 * spurious
    below, above = max(band.lower - band.bandwidth, start), band.upper + band.bandwidth
    step = WIDE_STEP * band.centre
    pieces = [
        np.round(np.linspace(start, below, 2 + int((below - start) / step))),
        np.linspace(below, band.lower, SKIRT_POINTS),
        np.linspace(band.lower, band.upper, BAND_POINTS),
        np.linspace(band.upper, above, SKIRT_POINTS),
        np.round(np.linspace(above, stop, 2 + int((stop - above) / step))),
    ]
    ends = [(below, pieces[0]), (above, pieces[-1])]
    for end, piece in ends:  # rounding must not put a point beside the one it means
        piece[np.abs(piece - end) < 1] = end
    result: Floats = np.unique(np.concatenate(pieces))
    return result
