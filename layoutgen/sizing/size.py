"""From a specification to a sized comb: order, choices, first guess, refinement, grid."""

from __future__ import annotations

from dataclasses import dataclass, replace

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
    goal : Goal
        Response that it was sized for: the asked one with the margins.
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
    goal: Goal
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
    return _size_order(spec, asked) if asked is not None else _smallest_order(spec)


def _smallest_order(spec: Spec) -> Sizing:
    """The smallest order that meets every stop band, from the prototype's estimate; else the highest."""
    attempts = _Attempts(spec)
    order = _estimated_order(spec)
    if attempts.meet(order):
        while order > 2 and attempts.meet(order - 1):
            order -= 1
    else:
        while order < _HIGHEST_ORDER and not attempts.meet(order + 1):
            order += 1
            if attempts.refused(order) and attempts.refused(order + 1):
                break
        order = min(order + 1, _HIGHEST_ORDER)
    reason = "smallest order whose sized comb rejects every stop band as asked"
    if not attempts.meet(order):
        reason = "the highest that can be built; it misses a stop band"
    return attempts.sizing(order, reason)


class _Attempts:
    """Combs of one specification by their order."""

    def __init__(self, spec: Spec) -> None:
        self._spec = spec
        self._sized: dict[int, Sizing | LayoutError] = {}

    def meet(self, order: int) -> bool:
        """True when the comb of this order can be built and rejects every stop band."""
        sizing = self._attempt(order)
        return isinstance(sizing, Sizing) and meets_stopbands(self._spec, sizing.comb, sizing.solver)

    def refused(self, order: int) -> bool:
        """True when the comb of this order cannot be built."""
        return isinstance(self._attempt(order), LayoutError)

    def sizing(self, order: int, reason: str) -> Sizing:
        """The comb of this order or the next lower one that can be built; the first refusal if none can."""
        for number in range(order, 1, -1):
            found = self._sized.get(number)
            if isinstance(found, Sizing):
                note = Note(key="passband.order", value=str(number), reason=reason)
                return replace(found, notes=(note, *found.notes))
        raise next(error for error in self._sized.values() if isinstance(error, LayoutError))

    def _attempt(self, order: int) -> Sizing | LayoutError:
        if order not in self._sized:
            try:
                self._sized[order] = _size_order(self._spec, order)
            except LayoutError as refusal:
                self._sized[order] = refusal
        return self._sized[order]


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


def _size_order(spec: Spec, order: int) -> Sizing:
    """The first candidate that can be sized; the first refusal if none can."""
    refusals: list[LayoutError] = []
    for candidate in candidates(spec, order):
        try:
            return _size_candidate(spec, candidate)
        except LayoutError as refusal:
            refusals.append(refusal)
    raise refusals[0]


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
        goal=goal,
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
