"""Figures of a comb read from its response: bands, losses and their causes, spurious, unloaded Q."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from layoutgen.circuit.network import ALL_LOSSES, NO_LOSSES, Circuit, Mechanism
from layoutgen.circuit.sections import SectionSolver
from layoutgen.comb import Comb
from layoutgen.constants import SPEED_OF_LIGHT

__all__ = ["Performance", "Spurious", "attenuation_db", "measure", "unloaded_q"]

Floats = NDArray[np.float64]
MECHANISMS: tuple[Mechanism, ...] = ("conductor", "dielectric", "capacitor", "via")


@dataclass(frozen=True, kw_only=True, slots=True)
class Spurious:
    """The lowest unwanted pass band above the wanted one.

    Attributes
    ----------
    frequency : float
        [Hz]
    cause : str
        "line", "capacitor" or "box".
    candidates : mapping
        Frequency of every cause that exists. [Hz]
    """

    frequency: float
    cause: str
    candidates: Mapping[str, float]


@dataclass(frozen=True, kw_only=True, slots=True)
class Performance:
    """Predicted figures, with loss unless they say lossless. Frequencies in hertz, levels in decibels.

    Attributes
    ----------
    centre : float
        Geometric mean of the asked band edges.
    lower_3db, upper_3db : float
        Where the transmission is 3.01 dB below its greatest in-band value.
    lower_ripple, upper_ripple : float or None
        Edges of the lossless band at the asked return loss; None for a maximally flat filter.
    return_loss, lossless_return_loss : float
        Worst in the asked band.
    worst_loss, midband_loss, lower_edge_loss, upper_edge_loss : float
        Greatest in the asked band; at its centre; at its edges.
    midband_split, edge_split : mapping
        Loss that each mechanism alone adds, at the centre and at the worse edge.
    unloaded_q : tuple of float
        Of each resonator.
    spurious : Spurious
    capacitor_resonance : float or None
        Lowest mounted self-resonance of the chips.
    """

    centre: float
    lower_3db: float
    upper_3db: float
    lower_ripple: float | None
    upper_ripple: float | None
    return_loss: float
    lossless_return_loss: float
    worst_loss: float
    midband_loss: float
    lower_edge_loss: float
    upper_edge_loss: float
    midband_split: Mapping[str, float]
    edge_split: Mapping[str, float]
    unloaded_q: tuple[float, ...]
    spurious: Spurious
    capacitor_resonance: float | None

    @property
    def bandwidth_3db(self) -> float:
        """Between the 3.01 dB points. [Hz]"""
        return self.upper_3db - self.lower_3db


def attenuation_db(circuit: Circuit, frequency: Floats, losses: frozenset[Mechanism] = ALL_LOSSES) -> Floats:
    """Attenuation from port 1 to port 2 over frequency. [dB]

    Parameters
    ----------
    circuit : Circuit
    frequency : ndarray, shape (n_freq,)
        Greater than 0. [Hz]
    losses : frozenset
        Mechanisms that are counted.
    """
    result: Floats = _db(circuit.scattering(frequency, losses)[:, 1, 0])
    return result


def measure(
    comb: Comb, solver: SectionSolver, *, lower: float, upper: float, return_loss: float | None
) -> Performance:
    """Predicted figures of a comb for an asked band.

    Parameters
    ----------
    comb : Comb
    solver : SectionSolver
    lower, upper : float
        Asked band edges. [Hz]
    return_loss : float or None
        Asked level of an equal-ripple filter. [dB]
    """
    circuit = Circuit(comb, solver)
    centre = float(np.sqrt(lower * upper))
    inside = np.linspace(lower, upper, 401)
    lossy = circuit.scattering(inside)
    lossless = circuit.scattering(inside, NO_LOSSES)
    loss = _db(lossy[:, 1, 0])
    lower_3db, upper_3db = _band_3db(circuit, lower, upper)
    ripple = (None, None) if return_loss is None else _ripple_band(circuit, lower, upper, return_loss)
    marks = np.array([lower, centre, upper])
    edge_losses = attenuation_db(circuit, marks)
    split = _split(circuit, marks)
    edge = 0 if edge_losses[0] > edge_losses[2] else 2
    return Performance(
        centre=centre,
        lower_3db=lower_3db,
        upper_3db=upper_3db,
        lower_ripple=ripple[0],
        upper_ripple=ripple[1],
        return_loss=float(np.min(_db(lossy[:, 0, 0]))),
        lossless_return_loss=float(np.min(_db(lossless[:, 0, 0]))),
        worst_loss=float(np.max(loss)),
        midband_loss=float(edge_losses[1]),
        lower_edge_loss=float(edge_losses[0]),
        upper_edge_loss=float(edge_losses[2]),
        midband_split={m: float(v[1]) for m, v in split.items()},
        edge_split={m: float(v[edge]) for m, v in split.items()},
        unloaded_q=unloaded_q(comb, solver, centre),
        spurious=_spurious(comb, solver, 1.3 * upper),
        capacitor_resonance=circuit.capacitor_resonance(),
    )


def unloaded_q(comb: Comb, solver: SectionSolver, near: float) -> tuple[float, ...]:
    """Unloaded Q of each resonator alone, at its own resonance near a frequency. [1]

    Parameters
    ----------
    comb : Comb
    solver : SectionSolver
    near : float
        Resonances are looked for from 0.8 to 1.25 times this. [Hz]
    """
    found: dict[object, float] = {}
    values = []
    for i, resonator in enumerate(comb.resonators):
        # resonators that differ by their place only have one Q, unless walls make it matter
        key = (
            resonator.segments,
            resonator.load,
            resonator.x if comb.side_walls else 0.0,
            tuple(feed.tap for feed in comb.feeds if feed.resonator == i),
        )
        if key not in found:
            found[key] = _q_of(Circuit(comb, solver, strips=[i]), i, near)
        values.append(found[key])
    return tuple(values)


def _q_of(circuit: Circuit, strip: int, near: float) -> float:
    f = near * np.linspace(0.8, 1.25, 181)
    susceptance = circuit.input_admittance(f, strip).imag
    resonance = float(f[int(np.argmin(np.abs(susceptance)))])
    around = resonance * np.array([1 - 1e-4, 1.0, 1 + 1e-4])
    admittance = circuit.input_admittance(around, strip, ALL_LOSSES)
    slope = float(admittance[2].imag - admittance[0].imag) / 2e-4
    return slope / (2 * float(admittance[1].real))


def _spurious(comb: Comb, solver: SectionSolver, above: float) -> Spurious:
    candidates: dict[str, float] = {}
    circuit = Circuit(comb, solver, strips=[comb.order // 2])
    f = np.linspace(above, 10 * above, 1200)
    susceptance = circuit.input_admittance(f, comb.order // 2).imag
    rising = np.flatnonzero((susceptance[:-1] < 0) & (susceptance[1:] >= 0))
    # a pole of the susceptance falls from plus to minus infinity, a resonance rises through zero
    if len(rising):
        candidates["line"] = float(f[rising[0]])
    resonance = circuit.capacitor_resonance()
    if resonance is not None:
        candidates["capacitor"] = resonance
    if comb.stack.cover is not None:
        candidates["box"] = box_mode(comb)
    if not candidates:
        candidates["line"] = float(f[-1])
    cause = min(candidates, key=lambda name: candidates[name])
    return Spurious(frequency=candidates[cause], cause=cause, candidates=candidates)


def box_mode(comb: Comb) -> float:
    """Lowest cavity mode of a covered board with walls at its edges. [Hz]

    The mode has no variation with height; the layers between ground and cover fill it in series (R. E.
    Collin, "Field Theory of Guided Waves", 2nd ed., IEEE Press, 1991, ch. 6, in the limit of a low
    cavity).
    """
    stack = comb.stack
    assert stack.cover is not None
    total = stack.height + stack.cover
    filling = total / (stack.height / stack.eps_r + stack.cover)
    return float(SPEED_OF_LIGHT / 2 / np.sqrt(filling) * np.hypot(1 / comb.width, 1 / comb.height))


def _split(circuit: Circuit, frequency: Floats) -> dict[str, Floats]:
    base = attenuation_db(circuit, frequency, NO_LOSSES)
    return {m: attenuation_db(circuit, frequency, frozenset({m})) - base for m in MECHANISMS}


def _band_3db(circuit: Circuit, lower: float, upper: float) -> tuple[float, float]:
    band = upper - lower
    f = np.linspace(lower - 1.5 * band, upper + 1.5 * band, 1601)
    f = f[f > 0]
    loss = attenuation_db(circuit, f)
    inside = (f >= lower) & (f <= upper)
    peak = int(np.flatnonzero(inside)[np.argmin(loss[inside])])
    return _crossings(f, loss - loss[peak] - 10 * np.log10(2), peak)


def _ripple_band(circuit: Circuit, lower: float, upper: float, return_loss: float) -> tuple[float, float]:
    """Outermost frequencies near the asked edges at which the lossless return loss is as asked."""
    band = upper - lower
    f = np.linspace(lower - 0.3 * band, upper + 0.3 * band, 1601)
    excess = return_loss - _db(circuit.scattering(f, NO_LOSSES)[:, 0, 0])
    good = np.flatnonzero(excess <= 0)
    if not len(good):
        return float(np.sqrt(lower * upper)), float(np.sqrt(lower * upper))
    return _interpolate(f, excess, int(good[0]), -1), _interpolate(f, excess, int(good[-1]), 1)


def _crossings(f: Floats, excess: Floats, start: int) -> tuple[float, float]:
    """Nearest frequencies below and above a place where a function of frequency rises through zero."""
    below = np.flatnonzero(excess[:start] > 0)
    above = np.flatnonzero(excess[start:] > 0)
    low = _interpolate(f, excess, int(below[-1]) + 1, -1) if len(below) else float(f[0])
    high = _interpolate(f, excess, start + int(above[0]) - 1, 1) if len(above) else float(f[-1])
    return low, high


def _interpolate(f: Floats, excess: Floats, inner: int, step: int) -> float:
    outer = inner + step
    if not 0 <= outer < len(f):
        return float(f[inner])
    fraction = -excess[inner] / (excess[outer] - excess[inner])
    return float(f[inner] + fraction * (f[outer] - f[inner]))


def _db(amplitude: NDArray[np.complex128]) -> Floats:
    """Attenuation of a complex amplitude, at most 300 dB. [dB]"""
    result: Floats = -20 * np.log10(np.maximum(np.abs(amplitude), 1e-15))
    return result
