"""From a specification to a sized comb: order, choices, first guess, refinement, grid."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from layoutgen.circuit import Circuit, SectionSolver, attenuation_db, meets_stopbands, unloaded_q
from layoutgen.comb import Comb
from layoutgen.errors import LayoutError
from layoutgen.sizing.choices import Candidate, Note, candidates
from layoutgen.sizing.guess import (
    GuessError,
    PairCurve,
    SingleResonator,
    first_guess,
    pair_curve,
    single_resonator,
)
from layoutgen.sizing.limits import check_choices, check_comb, gap_refusal, length_refusal
from layoutgen.sizing.refine import Goal, RefineError, place_on_grid, refine
from layoutgen.sizing.template import Dimensions, Template
from layoutgen.spec import Spec
from layoutgen.synthesis import Couplings, couplings, first_order_estimate, normalised_frequency

__all__ = ["Sizing", "size"]

_HIGHEST_ORDER = 9
_HOPELESS_LOSS, _HEAVY_LOSS = 10.0, 5.0
"""Midband loss at which a filter is refused and warned of. [dB]"""


@dataclass(frozen=True, kw_only=True)
class Sizing:
    """A sized comb and how it came about.

    Attributes
    ----------
    comb : Comb
        On the grid.
    g : tuple of float
        Prototype values g0 to g(n+1).
    couplings : Couplings
        Wanted coupling coefficients and external Q.
    electrical_length : float
        Of one resonator's line, grounded end included, at band centre. [rad]
    notes : tuple of Note
        Automatic choices and their reasons.
    warnings : tuple of str
        What is near a limit.
    solver : SectionSolver
        Matrices solved on the way, for the verdict.
    """

    comb: Comb
    g: tuple[float, ...]
    couplings: Couplings
    electrical_length: float
    notes: tuple[Note, ...]
    warnings: tuple[str, ...]
    solver: SectionSolver


def size(spec: Spec) -> Sizing:
    """Size the comb of a specification.

    With ``order = "auto"`` the order is the smallest whose sized comb rejects every stop band as asked,
    judged on its own lossy response.

    Raises
    ------
    PhysicalRefusal
        If the construction cannot do what is asked; says the figure and what would help.
    """
    asked = spec.passband.order
    if asked is not None:
        return _size_order(spec, asked, [])
    order = _estimated_order(spec)
    tried: dict[int, Sizing] = {}
    while True:
        if order not in tried:
            tried[order] = _size_order(spec, order, [])
        enough = meets_stopbands(spec, tried[order].comb, tried[order].solver)
        if enough and (order == 2 or order - 1 in tried):
            return _with_order_note(
                tried[order], "smallest order whose sized comb rejects every stop band as asked"
            )
        if not enough and order + 1 in tried:
            return _with_order_note(
                tried[order + 1], "smallest order whose sized comb rejects every stop band as asked"
            )
        if not enough and order == _HIGHEST_ORDER:
            return _with_order_note(
                tried[order], f"the highest allowed; even order {order} misses a stop band"
            )
        order += -1 if enough else 1


def _estimated_order(spec: Spec) -> int:
    band = spec.passband
    orders = []
    for stopband in spec.stopbands:
        edge = stopband.upper if stopband.upper <= band.lower else stopband.lower
        x = abs(float(normalised_frequency(edge, lower=band.lower, upper=band.upper)))
        orders.append(
            first_order_estimate(
                rejection_db=stopband.rejection,
                normalised_frequency=max(x, 1.01),
                return_loss_db=band.return_loss,
            )
        )
    return int(min(max(np.ceil(max(orders) - 0.1), 2), _HIGHEST_ORDER))


def _with_order_note(sizing: Sizing, reason: str) -> Sizing:
    note = Note(key="passband.order", value=str(sizing.comb.order), reason=reason)
    return Sizing(
        comb=sizing.comb,
        g=sizing.g,
        couplings=sizing.couplings,
        electrical_length=sizing.electrical_length,
        notes=(note, *sizing.notes),
        warnings=sizing.warnings,
        solver=sizing.solver,
    )


def _size_order(spec: Spec, order: int, refused: list[LayoutError]) -> Sizing:
    """The first candidate that can be sized; the first refusal if none can."""
    for candidate in candidates(spec, order):
        try:
            return _size_candidate(spec, candidate)
        except LayoutError as refusal:
            refused.append(refusal)
    raise refused[0]


def _size_candidate(spec: Spec, candidate: Candidate) -> Sizing:
    band, choices = spec.passband, candidate.choices
    warnings = check_choices(spec, candidate)
    template = Template(choices)
    solver = SectionSolver(choices.stack, _reach(template))
    goal = _goal(spec)
    wanted = couplings(goal.g(choices.order), goal.fractional_bandwidth)
    try:
        resonator = single_resonator(template, solver, band.centre)
    except GuessError as error:
        raise length_refusal(spec, error) from error
    curve: PairCurve | None = None
    try:
        curve = pair_curve(
            template, solver, length=resonator.length, frequency=band.centre, least_gap=candidate.least_gap
        )
        exact = _Refinement(template, solver, resonator, curve)(goal)
    except GuessError as error:
        raise gap_refusal(spec, error, curve, candidate) from error
    except RefineError as error:
        raise spec.refusal(
            "passband.order",
            f"the comb could not be sized: {error}; change the order, the bandwidth or "
            "construction.electrical_length",
            got=choices.order,
        ) from error
    comb = template.comb(place_on_grid(template, solver, exact, goal))
    warnings += check_comb(spec, comb, solver, candidate.least_gap)
    warnings += _loss_warnings(spec, comb, solver)
    return Sizing(
        comb=comb,
        g=tuple(float(v) for v in goal.g(choices.order)),
        couplings=wanted,
        electrical_length=resonator.electrical_length,
        notes=candidate.notes,
        warnings=tuple(warnings),
        solver=solver,
    )


@dataclass(frozen=True)
class _Refinement:
    """Refines a first guess; where that fails, starts from a narrower band and widens it step by step.

    At each step the ratio of solution to guess corrects the next guess.
    """

    template: Template
    solver: SectionSolver
    resonator: SingleResonator
    curve: PairCurve

    def __call__(self, goal: Goal) -> Dimensions:
        share, solution = self._widest_that_succeeds(goal)
        while share < 1:
            learnt = solution.vector() / self._guess(goal.narrowed(share)).vector()
            share = min(1.1 * share, 1.0)
            part = goal.narrowed(share)
            better = Dimensions.of(self._guess(part).vector() * learnt, self.template.choices.order)
            solution = refine(self.template, self.solver, better, part)
        return solution

    def _widest_that_succeeds(self, goal: Goal) -> tuple[float, Dimensions]:
        for share in (1.0, 0.7, 0.5):
            part = goal.narrowed(share)
            try:
                return share, refine(self.template, self.solver, self._guess(part), part)
            except RefineError as error:
                failure = error
        raise failure

    def _guess(self, goal: Goal) -> Dimensions:
        wanted = couplings(goal.g(self.template.choices.order), goal.fractional_bandwidth)
        return first_guess(self.template, self.resonator, self.curve, wanted)


def _goal(spec: Spec) -> Goal:
    """The required band, widened and deepened by the margins."""
    band, margin = spec.passband, spec.margin
    deeper = None if band.return_loss is None else band.return_loss + margin.return_loss
    return Goal(
        lower=band.lower - margin.bandwidth / 2, upper=band.upper + margin.bandwidth / 2, return_loss=deeper
    )


def _loss_warnings(spec: Spec, comb: Comb, solver: SectionSolver) -> list[str]:
    centre = spec.passband.centre
    loss = float(attenuation_db(Circuit(comb, solver), np.array([centre]))[0])
    if loss <= _HEAVY_LOSS:
        return []
    q = min(unloaded_q(comb, solver, centre))
    text = f"the unloaded Q of {q:.0f} costs {loss:.1f} dB at midband"
    if loss > _HOPELESS_LOSS:
        raise spec.refusal(
            "construction.substrate",
            f"{text}: widen the band, lower the order, or take a laminate and capacitors of less loss",
        )
    return [text]


def _reach(template: Template) -> float:
    choices = template.choices
    border = 2 * (choices.clearance + choices.margin)
    return choices.order * (choices.widest + 19 * choices.stack.height) + border
