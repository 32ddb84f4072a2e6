"""Refinement of a comb on its own lossless response.

What is fitted is the characteristic function S11/S21: imaginary in a lossless symmetric network,
independent of the feed lines, and ideally the ripple factor times a Chebyshev polynomial of the mapped
frequency (a power of it for the maximally flat case). A least-squares fit over the band takes a rough
start to a filter of the right shape; what the comb's own departure from the mapping leaves is then taken
off by making all ripples, band edges included, equal.

Reference for the characteristic function: H. J. Orchard, G. C. Temes, "Filter design using transformed
variables", IEEE Trans. Circuit Theory CT-15, 1968.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.polynomial import chebyshev
from numpy.typing import ArrayLike, NDArray

from layoutgen.circuit import NO_LOSSES, Circuit, SectionSolver
from layoutgen.errors import InputError, LayoutError
from layoutgen.sizing.template import Dimensions, Template
from layoutgen.synthesis import (
    butterworth_g,
    chebyshev_g,
    normalised_frequency,
    ripple_factor,
    ripple_of_return_loss,
)

__all__ = ["Goal", "RefineError", "place_on_grid", "refine"]

Floats = NDArray[np.float64]


class RefineError(LayoutError):
    """The fit did not reach the wanted response."""


@dataclass(frozen=True, kw_only=True)
class Goal:
    """The response a comb is refined towards.

    Attributes
    ----------
    lower, upper : float
        Band edges: ripple level, or 3.01 dB when maximally flat. [Hz]
    return_loss : float or None
        Equal-ripple level; None for maximally flat. [dB]
    """

    lower: float
    upper: float
    return_loss: float | None

    @property
    def level(self) -> float:
        """Characteristic function at the band edges. [1]"""
        return 1.0 if self.return_loss is None else ripple_factor(self.return_loss)

    @property
    def fractional_bandwidth(self) -> float:
        """Over the geometric mean of the edges. [1]"""
        return float((self.upper - self.lower) / np.sqrt(self.lower * self.upper))

    def g(self, order: int) -> Floats:
        """Prototype values g0 to g(n+1)."""
        if self.return_loss is None:
            return butterworth_g(order)
        return chebyshev_g(order, ripple_of_return_loss(self.return_loss))

    def narrowed(self, share: float) -> Goal:
        """The same over a share of the band, about its middle."""
        middle, half = (self.lower + self.upper) / 2, share * (self.upper - self.lower) / 2
        return Goal(lower=middle - half, upper=middle + half, return_loss=self.return_loss)

    @property
    def allowed(self) -> float:
        """Highest in-band characteristic function over its level that is taken for reached. [1]"""
        return 1.05 if self.return_loss is None else 1.02

    def target(self, frequency: Floats, order: int, warp: Floats) -> Floats:
        """Characteristic function over a frequency axis that is warped inside the band.

        The band edges stay where they are. The warp is what distant couplings and the lines' own
        dispersion make of the band-pass mapping; every warped polynomial is equally rippled, or equally
        flat.
        """
        x = normalised_frequency(frequency, lower=self.lower, upper=self.upper)
        x = x + (1 - x * x) * np.polynomial.polynomial.polyval(x, warp)
        if self.return_loss is None:
            return np.asarray(x**order, dtype=float)
        return np.asarray(self.level * chebyshev.chebval(x, [0] * order + [1]), dtype=float)

    def inside(self, count: int) -> Floats:
        """Frequencies over the band, edges included, crowding at the edges. [Hz]"""
        x = np.cos(np.pi * np.arange(count) / (count - 1))[::-1]
        centre, half = (self.lower + self.upper) / 2, (self.upper - self.lower) / 2
        return np.asarray(centre + half * x)


def characteristic(circuit: Circuit, frequency: Floats) -> Floats:
    """Imaginary part of S11/S21 without loss. [1]"""
    s = circuit.scattering(frequency, NO_LOSSES)
    result: Floats = (s[:, 0, 0] / s[:, 1, 0]).imag
    return result


def refine(template: Template, solver: SectionSolver, start: Dimensions, goal: Goal) -> Dimensions:
    """Dimensions whose lossless response meets the goal.

    Parameters
    ----------
    template : Template
    solver : SectionSolver
    start : Dimensions
        A first guess.
    goal : Goal

    Returns
    -------
    Dimensions
        Not yet on the grid.

    Raises
    ------
    RefineError
        If the fit stays away from the goal, with the figure it reached.
    """
    order = template.choices.order
    scale = _scales(start, order, goal)

    def evaluate(vector: Floats, frequency: Floats) -> Floats:
        comb = template.comb(Dimensions.of(vector * scale, order))
        return characteristic(Circuit(comb, solver), frequency)

    fitted = _least_squares(
        _Shape(evaluate, goal, order), np.concatenate([start.vector() / scale, np.zeros(_WARP)])
    )
    # a Newton run that got stuck half-way, as happens to flat responses of high order, is worse than the fit
    polished, left = _polish(_Shortfall(evaluate, goal, order), fitted[:-_WARP])
    vector = polished if goal.return_loss is not None or left < 0.02 else fitted[:-_WARP]
    heights = np.abs(evaluate(vector, goal.inside(16 * order + 1))) / goal.level
    highest, edge = float(np.max(heights)), float(min(heights[0], heights[-1]))
    # at the band edges the function is steep: 0.015 n^2 of its level is 0.75 % of the bandwidth
    if not (highest <= goal.allowed and edge >= 1 - 0.015 * order**2):
        raise RefineError(
            f"the fit stays {20 * np.log10(highest):+.1f} dB off the wanted in-band reflection and "
            f"{20 * np.log10(edge):+.1f} dB at a band edge"
        )
    return Dimensions.of(vector * scale, order)


def place_on_grid(
    template: Template, solver: SectionSolver, dimensions: Dimensions, goal: Goal
) -> Dimensions:
    """The grid point near given dimensions whose in-band response is best.

    Rounding each dimension by itself can cost a decibel of return loss in a narrow band; errors of one
    dimension can be made up by another. The response of the neighbouring grid points is judged on its
    derivatives.

    Parameters are those of `refine`.
    """
    grid, order = template.choices.grid, template.choices.order
    exact = dimensions.vector()
    sample = goal.inside(12 * order + 1)

    def evaluate(vector: Floats) -> Floats:
        return characteristic(Circuit(template.comb(Dimensions.of(vector, order)), solver), sample)

    value = evaluate(exact)
    slopes = np.stack([(evaluate(exact + grid * row) - value) / grid for row in np.eye(len(exact))], axis=1)
    # an equal-ripple response is judged by its highest ripple, a flat one by its distance from the exact one
    base = value if goal.return_loss is not None else np.zeros_like(value)
    nearest = np.floor(exact / grid + 0.5)
    moves = _small_moves(len(exact))
    best, worst = nearest, np.inf
    for _ in range(60):
        candidates = best + moves
        heights = np.max(np.abs(base[None, :] + (candidates * grid - exact) @ slopes.T), axis=1)
        heights[np.max(np.abs(candidates - nearest), axis=1) > _ROOM] = np.inf
        at = int(np.argmin(heights))
        if not heights[at] < worst - 1e-9:
            break
        best, worst = candidates[at], float(heights[at])
    return Dimensions.of(best * grid, order)


def _small_moves(count: int) -> Floats:
    """No move, and all moves of one grid step in one, two or three dimensions (or two steps in one)."""
    single = np.vstack([np.zeros(count), np.eye(count), -np.eye(count)])
    double = (single[:, None, :] + single[None, :, :]).reshape(-1, count)
    triple = (np.unique(double, axis=0)[:, None, :] + single[None, :, :]).reshape(-1, count)
    return np.unique(triple, axis=0)


_ROOM = 6
"""Grid steps that a dimension may move for the sake of the others."""

_STIFFNESS = 0.2
"""Weight of the warp itself in the fit. [ripples]"""

_WARP = 3
"""Terms of the warp that is fitted together with the dimensions."""


class _Shape:
    """Difference between a comb's characteristic function and the warped ideal, in units of the ripple.

    The warp itself is among the differences, with a weight that keeps it as small as the response lets it be.
    """

    def __init__(self, evaluate: Callable[[Floats, Floats], Floats], goal: Goal, order: int) -> None:
        self._evaluate, self._goal, self._order = evaluate, goal, order
        self.enough = 0.05
        self._sample = goal.inside(4 * order + 5)
        self._last: tuple[bytes, Floats] = (b"", np.empty(0))

    def __call__(self, vector: Floats) -> Floats:
        dimensions, warp = vector[:-_WARP], vector[-_WARP:]
        key = dimensions.tobytes()
        if key != self._last[0]:
            self._last = key, self._evaluate(dimensions, self._sample)
        found = self._last[1]
        wanted = self._goal.target(self._sample, self._order, warp)
        sign = 1.0 if float(found @ wanted) >= 0 else -1.0
        difference: Floats = (sign * found - wanted) / self._goal.level
        if self._goal.return_loss is None:
            difference[[0, -1]] *= 10.0
        return np.concatenate([difference, _STIFFNESS * warp])


def _scales(start: Dimensions, order: int, goal: Goal) -> Floats:
    """Steps that change the response about equally, so that the fit is well conditioned. [m]"""
    bandwidth = (goal.upper - goal.lower) / np.sqrt(goal.lower * goal.upper)
    gaps = [0.5 * gap for gap in start.gaps]
    lengths = [bandwidth * length for length in start.lengths]
    return np.array([*gaps, *lengths, 0.5 * start.tap])


def _jacobian(function: _Shape, vector: Floats, value: Floats, step: float = 1e-4) -> Floats:
    columns = []
    # from the last to the first: the warp comes last and needs no new response
    for i in reversed(range(len(vector))):
        moved = vector.copy()
        moved[i] += step
        columns.append((function(moved) - value) / step)
    return np.stack(columns[::-1], axis=1)


def _least_squares(function: _Shape, vector: Floats, rounds: int = 25) -> Floats:
    """Levenberg-Marquardt with steps limited to a fraction of each dimension."""
    value = function(vector)
    jacobian = _jacobian(function, vector, value)
    damping = 1e-2
    for _ in range(rounds):
        normal = jacobian.T @ jacobian
        gradient = jacobian.T @ value
        step = -np.linalg.solve(normal + damping * np.diag(np.diag(normal)), gradient)
        step *= min(1.0, 0.5 / float(np.max(np.abs(step))))
        try:
            trial = function(vector + step)
        except InputError:
            damping *= 10
            continue
        if float(trial @ trial) < float(value @ value):
            gain = 1 - float(trial @ trial) / float(value @ value)
            vector, value = vector + step, trial
            damping = max(damping / 5, 1e-9)
            if gain < 1e-3 or float(np.max(np.abs(value[:-_WARP]))) < function.enough:
                break
            jacobian = _jacobian(function, vector, value)
        else:
            damping *= 8
            if damping > 1e6:
                break
    return vector


class _Shortfall:
    """What a comb lacks of the goal: as many figures as unknowns, all of them zero when it is reached.

    Equal ripple: the logarithms of the heights of all ripples and of both band edges over the wanted level.
    Maximal
    flatness: the Taylor coefficients, up to the order less two, about the point where the next one vanishes,
    and the logarithms of the heights at both band edges.
    """

    def __init__(self, evaluate: Callable[[Floats, Floats], Floats], goal: Goal, order: int) -> None:
        self._evaluate, self._order, self._level = evaluate, order, goal.level
        self._flat = goal.return_loss is None
        self._nodes = goal.inside(4 * order + 9)
        centre, half = (goal.lower + goal.upper) / 2, (goal.upper - goal.lower) / 2
        self._basis = np.linalg.inv(chebyshev.chebvander((self._nodes - centre) / half, len(self._nodes) - 1))

    def __call__(self, vector: Floats) -> Floats | None:
        """The figures; None when ripples have merged."""
        fitted = self._basis @ self._evaluate(vector, self._nodes)
        series = np.asarray(
            chebyshev.chebtrim(fitted, 1e-7 * float(np.max(np.abs(fitted)))), dtype=np.float64
        )
        return self._flatness(series) if self._flat else self._ripples(series)

    def _ripples(self, series: Floats) -> Floats | None:
        inner = _roots(chebyshev.chebder(series))
        if len(inner) != self._order - 1:
            return None
        heights = np.abs(chebyshev.chebval(np.concatenate([[-1.0], inner, [1.0]]), series))
        return np.asarray(np.log(heights / self._level), dtype=np.float64)

    def _flatness(self, series: Floats) -> Floats | None:
        derivatives = [series]
        for number in range(1, self._order):
            derivatives.append(np.asarray(chebyshev.chebder(derivatives[-1]) / number, dtype=np.float64))
        places = _roots(derivatives[-1])
        if not len(places):
            return None
        place = places[int(np.argmin(np.abs(places)))]
        flat = [chebyshev.chebval(place, derivative) for derivative in derivatives[:-1]]
        edges = np.log(np.abs(chebyshev.chebval(np.array([-1.0, 1.0]), series)))
        return np.concatenate([flat, edges])

    def jacobian(self, vector: Floats, value: Floats, step: float = 1e-4) -> Floats | None:
        """Derivatives of the figures; None when ripples merge on the way."""
        columns = []
        for i in range(len(vector)):
            moved = vector.copy()
            moved[i] += step
            after = self(moved)
            if after is None:
                return None
            columns.append((after - value) / step)
        return np.stack(columns, axis=1)


def _roots(series: ArrayLike) -> Floats:
    """Real roots of a Chebyshev series between -1 and 1, rising."""
    roots = chebyshev.chebroots(np.asarray(series))
    inside = roots[(np.abs(roots.imag) < 1e-6) & (np.abs(roots.real) < 1)]
    return np.asarray(np.sort(inside.real), dtype=np.float64)


def _polish(shortfall: _Shortfall, vector: Floats, rounds: int = 12) -> tuple[Floats, float]:
    """Newton's method with shorter steps where a whole one does not help; and what shortfall is left."""
    value = shortfall(vector)
    jacobian: Floats | None = None
    for _ in range(rounds):
        if value is None or float(np.max(np.abs(value))) < 1e-3:
            break
        if jacobian is None:
            jacobian = shortfall.jacobian(vector, value)
        if jacobian is None:
            break
        step = -np.linalg.solve(jacobian, value)
        step *= min(1.0, 0.3 / float(np.max(np.abs(step))))
        trial, halvings = shortfall(vector + step), 0
        while (trial is None or np.max(np.abs(trial)) > np.max(np.abs(value))) and halvings < 6:
            step /= 2
            halvings += 1
            trial = shortfall(vector + step)
        if trial is None:
            break
        # Broyden's rank-one update spares a new Jacobian while whole steps succeed
        change = np.outer(trial - value - jacobian @ step, step) / float(step @ step)
        jacobian = None if halvings else jacobian + change
        vector, value = vector + step, trial
    return vector, np.inf if value is None else float(np.max(np.abs(value)))
