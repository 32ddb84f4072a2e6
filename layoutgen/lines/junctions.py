"""Ends and junctions of microstrip lines: open end, gap to a grounded pad, width step, tap."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from layoutgen.constants import VACUUM_IMPEDANCE, VACUUM_PERMITTIVITY
from layoutgen.errors import require_inside
from layoutgen.lines.microstrip import single_line

__all__ = [
    "EndCapacitances",
    "end_facing_ground",
    "open_end_capacitance",
    "open_end_extension",
    "step_extension",
    "tap_capacitance",
    "tap_shortening",
]

_TAP_SHARE = 0.038


@dataclass(frozen=True, kw_only=True)
class EndCapacitances:
    """Of a strip's end that faces another strip across a gap. [F]

    Attributes
    ----------
    shunt : float
        From the end to ground.
    across : float
        From the end to the strip it faces.
    """

    shunt: float
    across: float


def open_end_extension(*, width: float, height: float, eps_r: float, eps_eff: float) -> float:
    """Length by which the fringing field of an open end lengthens a microstrip line. [m]

    Parameters
    ----------
    width, height : float
        Of strip and slab; their ratio 0.01 to 100. [m]
    eps_r, eps_eff : float
        Relative permittivity of the slab, 1 to 128, and of the line. [1]

    Raises
    ------
    InputError
        If the ratio or the permittivity lies outside the fit's range.

    Notes
    -----
    The authors state 2.5 % for eps_r up to 50.

    References
    ----------
    M. Kirschning, R. H. Jansen, N. H. L. Koster, "Accurate model for open end effect of microstrip lines",
    Electronics Letters 17, 1981, pp. 123-125.
    """
    u = width / height
    require_inside("open_end_extension", "width / height", u, 0.01, 100)
    require_inside("open_end_extension", "eps_r", eps_r, 1, 128)
    x1 = (
        0.434907 * (eps_eff**0.81 + 0.26) / (eps_eff**0.81 - 0.189) * (u**0.8544 + 0.236) / (u**0.8544 + 0.87)
    )
    x2 = 1 + u**0.371 / (2.358 * eps_r + 1)
    x3 = 1 + 0.5274 * np.arctan(0.084 * u ** (1.9413 / x2)) / eps_eff**0.9236
    x4 = 1 + 0.0377 * np.arctan(0.067 * u**1.456) * (6 - 5 * np.exp(0.036 * (1 - eps_r)))
    x5 = 1 - 0.218 * np.exp(-7.5 * u)
    return float(height * x1 * x3 * x5 / x4)


def open_end_capacitance(*, width: float, height: float, eps_r: float, thickness: float) -> float:
    """Fringing capacitance of an open end: `open_end_extension` times the line's capacitance. [F]

    Parameters
    ----------
    width, height, thickness : float
        Of strip and slab, within the ranges of `open_end_extension`; of the copper. [m]
    eps_r : float
        Relative permittivity of the slab. [1]
    """
    line = single_line(width=width, height=height, eps_r=eps_r, thickness=thickness)
    extension = open_end_extension(width=width, height=height, eps_r=eps_r, eps_eff=float(line.eps_eff))
    return extension * float(line.capacitance)


def end_facing_ground(
    *, width: float, facing_width: float, gap: float, height: float, eps_r: float, thickness: float
) -> EndCapacitances:
    """Capacitances of a strip's end that faces a strip of another width across a gap.

    Parameters
    ----------
    width, facing_width : float
        Of the strip whose end it is, and of the one it faces; ratios to the height 0.1 to 3,
        to each other 1/3 to 3. [m]
    gap, height, thickness : float
        Between the strips, of the slab, of the copper; gap over height at least 0.1. [m]
    eps_r : float
        Relative permittivity of the slab. [1]

    Notes
    -----
    The constants are from memory. Ratios beyond the stated range are moved to its border: the effect on
    a loaded resonator is of the order of 1 % of its capacitance.

    References
    ----------
    M. Kirschning, R. H. Jansen, N. H. L. Koster, "Measurement and computer-aided modeling of microstrip
    discontinuities by an improved resonator method", IEEE MTT-S Digest, 1983, pp. 495-497.
    """
    open_end = open_end_capacitance(width=width, height=height, eps_r=eps_r, thickness=thickness)
    u = min(max(width / height, 0.1), 3.0)
    ratio = min(max(facing_width / width, 1 / 3), 3.0)
    s = max(gap / height, 0.1)
    q5 = 1.23 / (1 + 0.12 * max(ratio - 1, 0.0) ** 0.9)
    q1 = 0.04598 * (0.03 + u**q5) * (0.272 + 0.07 * eps_r)
    across = (
        500e-12 * height * np.exp(-1.86 * s) * q1 * (1 + 4.19 * (1 - np.exp(-0.785 * np.sqrt(1 / u) * ratio)))
    )
    q2 = 0.107 * (u + 9) * s**3.23 + 2.09 * s**1.05 * (1.5 + 0.3 * u) / (1 + 0.6 * u)
    q3 = np.exp(-0.5978 * ratio**1.35) - 0.55
    shunt = open_end * max(float((q2 + q3) / (q2 + 1)), 0.0)
    return EndCapacitances(shunt=shunt, across=float(across))


def step_extension(*, wide: float, narrow: float, height: float, eps_r: float, thickness: float) -> float:
    """Length by which the wide side of a symmetric width step seems longer. [m]

    Parameters
    ----------
    wide, narrow, height, thickness : float
        Widths on both sides, slab thickness, copper thickness. [m]
    eps_r : float
        Relative permittivity of the slab. [1]

    Notes
    -----
    The open-end extension of the wide line in proportion to the part of its end that is open, a
    first-order estimate (E. Hammerstad, "Computer-aided design of microstrip couplers with accurate
    discontinuity models", IEEE MTT-S Digest, 1981; from memory).
    """
    line = single_line(width=wide, height=height, eps_r=eps_r, thickness=thickness)
    extension = open_end_extension(width=wide, height=height, eps_r=eps_r, eps_eff=float(line.eps_eff))
    return extension * (1 - narrow / wide)


def tap_shortening(
    *, line_width: float, feed_width: float, height: float, eps_r: float, thickness: float
) -> float:
    """Length of line that a tap takes away on either side of its centre line. [m]

    The feed widens the line where it joins, so the current passes the junction with less inductance.

    Parameters
    ----------
    line_width, feed_width, height, thickness : float
        Of the line and of the feed at right angles to it, slab thickness, copper thickness. [m]
    eps_r : float
        Relative permittivity of the slab. [1]

    Notes
    -----
    The published form, a share of the feed's parallel-plate width times the ratio of the impedances, with
    the share brought from 0.05 to 0.038 on finite-element solutions of tapped resonators in three
    dimensions: 1.5 mm lines on 0.813 mm of permittivity 3.55, tapped at a fifth and at a third of their
    length. There the shift of the resonance by the tap agrees within 0.01 %, external Q within 5 %; on 1.4 mm
    lines on 0.508 mm of permittivity 2.2, which were not fitted, within 0.05 % and 2 %.

    References
    ----------
    E. Hammerstad, "Computer-aided design of microstrip couplers with accurate discontinuity models", IEEE
    MTT-S Digest, 1981 (form and 0.05 from memory).
    """
    line, feed = (
        single_line(width=width, height=height, eps_r=eps_r, thickness=thickness)
        for width in (line_width, feed_width)
    )
    plate = VACUUM_IMPEDANCE * height / (float(feed.impedance) * np.sqrt(float(feed.eps_eff)))
    return float(_TAP_SHARE * plate * line.impedance / feed.impedance)


def tap_capacitance(
    *, line_width: float, feed_width: float, height: float, eps_r: float, thickness: float
) -> float:
    """Change of the shunt capacitance at a tap: the feed takes the place of the line's fringing field. [F]

    Parameters
    ----------
    line_width, feed_width : float
        Of the line that is tapped, and of the feed. [m]
    height, thickness : float
        Of slab and copper. [m]
    eps_r : float
        Relative permittivity of the slab. [1]

    Notes
    -----
    The feed's own capacitance is counted from the edge of the line, so the fringe of that edge over the
    feed's width is taken away: half of what the line's capacitance exceeds that of a parallel plate.
    Negative. An estimate from the two-dimensional fields, of the order of 0.1 % of a resonator's
    capacitance.
    """
    line = single_line(width=line_width, height=height, eps_r=eps_r, thickness=thickness)
    plate = VACUUM_PERMITTIVITY * eps_r * line_width / height
    return -feed_width * max(float(line.capacitance) - plate, 0.0) / 2
