"""First guess of a comb's dimensions from one resonator, a pair of resonators and closed forms."""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import PchipInterpolator
from scipy.optimize import brentq

from layoutgen.circuit import Circuit, SectionSolver
from layoutgen.errors import LayoutError
from layoutgen.sizing.template import Dimensions, Plate, Template
from layoutgen.synthesis import Couplings

__all__ = ["GuessError", "PairCurve", "first_guess", "pair_curve", "resonant_length", "single_resonator"]

Floats = NDArray[np.float64]


class GuessError(LayoutError):
    """The wanted couplings or external Q lie outside what the chosen construction gives.

    Attributes
    ----------
    limit : str
        What is at its limit: "gap", "tap" or "length".
    figure : float
        The value that would be needed or is reached. [m] for lengths, [1] for couplings
    bound : float
        The limit itself.
    """

    def __init__(self, limit: str, figure: float, bound: float, text: str) -> None:
        self.limit, self.figure, self.bound = limit, figure, bound
        super().__init__(text)


@dataclass(frozen=True, kw_only=True)
class SingleResonator:
    """One resonator alone at its resonance.

    Attributes
    ----------
    length : float
        From the axis of its vias to its open end. [m]
    slope : float
        Susceptance slope ``(w/2) dB/dw`` seen at the load. [S]
    phase_per_metre : float
        Phase constant of the line. [rad/m]
    short_length : float
        Length of line as inductive as the grounded end. [m]
    """

    length: float
    slope: float
    phase_per_metre: float
    short_length: float

    @property
    def electrical_length(self) -> float:
        """Of the line, grounded end included. [rad]"""
        return self.phase_per_metre * (self.length + self.short_length)


@dataclass(frozen=True, kw_only=True)
class PairCurve:
    """Coupling of two equal resonators over their gap.

    Attributes
    ----------
    gaps : ndarray
        Rising. [m]
    k : ndarray
        Coupling coefficients, falling. [1]
    """

    gaps: Floats
    k: Floats

    def gap_for(self, k: float) -> float:
        """Gap at which a pair has this coupling. [m]

        Raises
        ------
        GuessError
            If no gap inside the curve has it.
        """
        if not self.k[-1] <= k <= self.k[0]:
            figure, bound = (k, float(self.k[0])) if k > self.k[0] else (k, float(self.k[-1]))
            raise GuessError(
                "gap",
                figure,
                bound,
                f"coupling {k:.4f} is needed; gaps of {self.gaps[0] * 1e3:.3f} to "
                f"{self.gaps[-1] * 1e3:.2f} mm give {self.k[0]:.4f} to {self.k[-1]:.4f}",
            )
        order = np.argsort(self.k)
        curve = PchipInterpolator(np.log(self.k[order]), self.gaps[order])
        return float(curve(np.log(k)))


def resonant_length(template: Template, solver: SectionSolver, frequency: float) -> float:
    """Length at which a resonator alone resonates at a frequency. [m]

    Raises
    ------
    GuessError
        If none from five slab heights (with its plate or land) to a quarter wavelength does.
    """
    choices = template.choices
    shortest = _shortest(template)
    longest = shortest + 0.25 * 3e8 / frequency

    def susceptance(length: float) -> float:
        circuit = _alone(template, solver, length)
        return float(circuit.input_admittance([frequency], 0)[0].imag)

    if susceptance(shortest) > 0:
        raise GuessError(
            "length",
            shortest,
            5 * choices.stack.height,
            f"a line of {shortest * 1e3:.2f} mm with this load already resonates below "
            f"{frequency / 1e9:.4g} GHz",
        )
    grid = np.linspace(shortest, longest, 24)
    for low, high in pairwise(grid):
        if susceptance(float(high)) > 0:
            return float(brentq(susceptance, low, high, xtol=1e-9))
    raise GuessError("length", longest, longest, "no length up to a quarter wavelength resonates")


def single_resonator(template: Template, solver: SectionSolver, frequency: float) -> SingleResonator:
    """One resonator of the template, cut to resonate at a frequency."""
    length = resonant_length(template, solver, frequency)
    circuit = _alone(template, solver, length)
    step = 1e-4
    low, high = circuit.input_admittance([frequency * (1 - step), frequency * (1 + step)], 0).imag
    modes, inductance = circuit.line_at_ground()
    return SingleResonator(
        length=length,
        slope=float((high - low) / (4 * step)),
        phase_per_metre=2 * np.pi * frequency * float(modes.slowness[0]),
        short_length=inductance,
    )


def pair_curve(
    template: Template, solver: SectionSolver, *, length: float, frequency: float, least_gap: float
) -> PairCurve:
    """Coupling of two equal resonators for gaps from the least allowed one to eighteen slab heights."""
    pair = template.with_order(2)
    stack = template.choices.stack
    widest = (
        18 * stack.height if stack.cover is None else min(18 * stack.height, 6 * (stack.height + stack.cover))
    )
    gaps = np.geomspace(least_gap, max(widest, 4 * least_gap), 10)
    k = []
    for gap in gaps:
        comb = pair.comb(Dimensions(gaps=(float(gap),), lengths=(length,), tap=length / 3))
        even, odd = Circuit(comb, solver).pair_resonances(frequency)
        k.append((odd**2 - even**2) / (odd**2 + even**2))
    values = np.abs(np.array(k))
    falling = np.concatenate([[True], np.diff(values) < 0])
    keep = np.cumprod(falling).astype(bool)
    return PairCurve(gaps=gaps[keep], k=values[keep])


def first_guess(
    template: Template, resonator: SingleResonator, curve: PairCurve, wanted: Couplings
) -> Dimensions:
    """Gaps from the pair curve, equal lengths, tap from the voltage along one resonator.

    Raises
    ------
    GuessError
        If a gap or the tap is out of reach.
    """
    order = template.choices.order
    gaps = tuple(curve.gap_for(k) for k in wanted.k[: order // 2])
    tap = _tap(template, resonator, wanted.external_q_in)
    return Dimensions(gaps=gaps, lengths=(resonator.length,) * ((order + 1) // 2), tap=tap)


def _tap(template: Template, resonator: SingleResonator, external_q: float) -> float:
    """Qe = b R (sin(theta) / sin(theta_tap))^2, the slope b seen at the open end."""
    choices = template.choices
    ratio = np.sqrt(resonator.slope * choices.impedance / external_q)
    full = np.sin(resonator.electrical_length)
    reach = ratio * full
    highest = np.sin(resonator.phase_per_metre * (0.9 * resonator.length + resonator.short_length))
    if not reach <= highest:
        raise GuessError(
            "tap",
            float(reach / full),
            0.9,
            f"external Q {external_q:.3g} would need a tap beyond 0.9 of the line",
        )
    tap = float(np.arcsin(reach) / resonator.phase_per_metre - resonator.short_length)
    lowest = choices.overhang + choices.feed_width / 2
    return max(tap, 0.5 * lowest)


def _alone(template: Template, solver: SectionSolver, length: float) -> Circuit:
    pair = template.with_order(2)
    gap = 20 * template.choices.stack.height
    comb = pair.comb(Dimensions(gaps=(gap,), lengths=(length,), tap=length / 3))
    if comb.side_walls is not None:
        comb = replace(comb, side_walls=None)
    return Circuit(comb, solver, strips=[0])


def _shortest(template: Template) -> float:
    choices = template.choices
    load = choices.load
    fixed = load.length if isinstance(load, Plate) else load.land_length
    return max(choices.overhang + fixed + choices.stack.height, 2.5 * choices.stack.height)
