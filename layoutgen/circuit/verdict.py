"""Every requirement of a specification against the predicted response."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from layoutgen.circuit.network import Circuit
from layoutgen.circuit.performance import Performance, attenuation_db, measure
from layoutgen.circuit.sections import SectionSolver
from layoutgen.comb import Comb
from layoutgen.spec import Spec, Stopband

__all__ = ["Judgement", "Verdict", "judge", "meets_stopbands"]


@dataclass(frozen=True, kw_only=True, slots=True)
class Judgement:
    """One requirement and what came of it.

    Attributes
    ----------
    requirement : str
        In words.
    key : str
        Where the specification asks it.
    unit : str
        Of the three figures.
    asked, found : float
        In that unit.
    margin : float
        Positive when met.
    limit, remedy : str
        When not met: what limits it, and what would help.
    """

    requirement: str
    key: str
    unit: str
    asked: float
    found: float
    margin: float
    limit: str = ""
    remedy: str = ""

    @property
    def met(self) -> bool:
        """True when there is no negative margin."""
        return self.margin >= 0


@dataclass(frozen=True, kw_only=True, slots=True)
class Verdict:
    """All requirements, and the figures they were judged on."""

    performance: Performance
    judgements: tuple[Judgement, ...]

    @property
    def met(self) -> bool:
        """True when every requirement is met."""
        return all(judgement.met for judgement in self.judgements)

    @property
    def missed(self) -> tuple[Judgement, ...]:
        """Requirements that are not met."""
        return tuple(judgement for judgement in self.judgements if not judgement.met)


def judge(spec: Spec, comb: Comb, solver: SectionSolver) -> Verdict:
    """Measure the comb's predicted response and hold it against every requirement.

    Parameters
    ----------
    spec : Spec
        What is required.
    comb : Comb
    solver : SectionSolver
    """
    band = spec.passband
    performance = measure(comb, solver, lower=band.lower, upper=band.upper, return_loss=band.return_loss)
    judgements = [
        _return_loss(spec, performance) if band.return_loss is not None else _edges(spec, comb, solver)
    ]
    if band.insertion_loss is not None:
        judgements.append(_insertion_loss(spec, performance, band.insertion_loss))
    circuit = Circuit(comb, solver)
    for number, stopband in enumerate(spec.stopbands, 1):
        judgements.append(_rejection(spec, circuit, number, stopband, performance))
    for key, limit, size in (
        ("max_width", spec.board.max_width, comb.width),
        ("max_height", spec.board.max_height, comb.height),
    ):
        if limit is not None:
            judgements.append(_size(key, limit, size))
    return Verdict(performance=performance, judgements=tuple(judgements))


def meets_stopbands(spec: Spec, comb: Comb, solver: SectionSolver) -> bool:
    """True when the lossy response rejects every stop band as asked.

    Parameters
    ----------
    spec : Spec
        What is required.
    comb : Comb
    solver : SectionSolver
    """
    circuit = Circuit(comb, solver)
    return all(_least_attenuation(circuit, s) >= s.rejection for s in spec.stopbands)


def _least_attenuation(circuit: Circuit, stopband: Stopband) -> float:
    """Least attenuation in a stop band; fine steps close to its edges, where it is usually found. [dB]"""
    width = stopband.upper - stopband.lower
    even = np.linspace(stopband.lower, stopband.upper, 301)
    close = width * np.geomspace(1e-5, 3e-3, 12)
    f = np.concatenate([even, stopband.lower + close, stopband.upper - close])
    return float(np.min(attenuation_db(circuit, np.sort(f))))


def _return_loss(spec: Spec, performance: Performance) -> Judgement:
    asked = spec.passband.return_loss
    assert asked is not None
    found = performance.return_loss
    return Judgement(
        requirement="return loss in the pass band, at least",
        key="passband.return_loss",
        unit="dB",
        asked=asked,
        found=found,
        margin=found - asked,
        limit=f"without loss the comb has {performance.lossless_return_loss:.2f} dB; dissipation and the "
        "drawing grid make the difference",
        remedy="size with a deeper margin.return_loss or a wider margin.bandwidth, "
        "or take a laminate of less loss",
    )


def _edges(spec: Spec, comb: Comb, solver: SectionSolver) -> Judgement:
    """A maximally flat filter is asked for by its 3.01 dB points, which belong to the lossless response."""
    band = spec.passband
    circuit = Circuit(comb, solver)
    f = np.linspace(band.lower - 0.2 * band.bandwidth, band.upper + 0.2 * band.bandwidth, 2001)
    passing = f[attenuation_db(circuit, f, frozenset()) <= 10 * np.log10(2)]
    wider = spec.margin.bandwidth / 2
    off = (abs(float(passing[0]) - band.lower + wider), abs(float(passing[-1]) - band.upper - wider))
    error = max(off) / band.bandwidth * 100
    return Judgement(
        requirement="3.01 dB points (lossless) off the asked edges, at most",
        key="passband.lower",
        unit="% of bandwidth",
        asked=1.0,
        found=error,
        margin=1.0 - error,
        limit="the sizing loop or the drawing grid",
        remedy="choose a finer board.grid",
    )


_HELP = {
    "conductor": ("copper loss", "a thicker laminate, a cover further away, smoother copper or a wider line"),
    "dielectric": ("loss of the laminate", "a laminate with a lower loss tangent"),
    "capacitor": (
        "loss of the loading capacitors",
        "chips of higher Q, or a longer line with smaller capacitors",
    ),
    "via": ("resistance of the vias", "more vias at each short"),
}


def _insertion_loss(spec: Spec, performance: Performance, asked: float) -> Judgement:
    flat = spec.passband.shape == "butterworth"
    found = performance.midband_loss if flat else performance.worst_loss
    split = performance.midband_split if flat else performance.edge_split
    cause = max(split, key=lambda name: split[name])
    what, remedy = _HELP[cause]
    shares = ", ".join(f"{name} {value:.2f} dB" for name, value in split.items())
    return Judgement(
        requirement=f"insertion loss {'at midband' if flat else 'in the pass band'}, at most",
        key="passband.insertion_loss",
        unit="dB",
        asked=asked,
        found=found,
        margin=asked - found,
        limit=f"{what} most of all ({shares}; unloaded Q {min(performance.unloaded_q):.0f})",
        remedy=f"{remedy}; a wider pass band or a lower order also lose less",
    )


def _rejection(
    spec: Spec, circuit: Circuit, number: int, stopband: Stopband, performance: Performance
) -> Judgement:
    found = _least_attenuation(circuit, stopband)
    spurious = performance.spurious
    if stopband.upper > 0.9 * spurious.frequency > stopband.lower:
        limit = f"the first spurious response, near {spurious.frequency / 1e9:.3g} GHz ({spurious.cause})"
        remedy = "a shorter construction.electrical_length moves it up; or end the stop band below it"
    else:
        limit = f"the selectivity of order {circuit.comb.order}"
        higher = "" if circuit.comb.order >= 9 else 'a higher passband.order (or "auto"), or '
        remedy = f"{higher}a stop band further away or a narrower pass band"
    return Judgement(
        requirement=f"rejection from {stopband.lower / 1e9:.4g} to {stopband.upper / 1e9:.4g} GHz, at least",
        key=f"stopband.{number}.rejection",
        unit="dB",
        asked=stopband.rejection,
        found=found,
        margin=found - stopband.rejection,
        limit=limit,
        remedy=remedy,
    )


def _size(key: str, limit: float, size: float) -> Judgement:
    across = key == "max_width"
    return Judgement(
        requirement=f"board {'width' if across else 'height'}, at most",
        key=f"board.{key}",
        unit="mm",
        asked=limit * 1e3,
        found=size * 1e3,
        margin=(limit - size) * 1e3,
        limit="resonators, clearances and margins together",
        remedy="a smaller board.clearance or board.margin, a laminate of higher permittivity"
        + (", a lower order" if across else ", a shorter construction.electrical_length"),
    )
