"""A finished design: one object that holds the requirement, the comb, what it does and what is drawn."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from layoutgen.circuit import ALL_LOSSES, NO_LOSSES, Circuit, SectionSolver, Verdict, judge
from layoutgen.comb import Comb
from layoutgen.constants import SPEED_OF_LIGHT
from layoutgen.geometry import Artwork, Style, draw
from layoutgen.sizing import Note, Sizing, size
from layoutgen.spec import Spec
from layoutgen.synthesis import Couplings, ladder_response

__all__ = ["Design", "design"]


@dataclass(frozen=True, kw_only=True)
class Design:
    """A comb-line filter, designed.

    Attributes
    ----------
    spec : Spec
        What was asked.
    sizing : Sizing
        The sized comb and how it came about.
    verdict : Verdict
        Every requirement against the predicted response.
    artwork : Artwork
        What is drawn, in millimetres.
    """

    spec: Spec
    sizing: Sizing
    verdict: Verdict
    artwork: Artwork

    @property
    def comb(self) -> Comb:
        """Every dimension of the filter."""
        return self.sizing.comb

    @property
    def notes(self) -> tuple[Note, ...]:
        """Automatic choices and their reasons."""
        return self.sizing.notes

    @property
    def warnings(self) -> tuple[str, ...]:
        """What is near a limit."""
        return self.sizing.warnings

    @property
    def couplings(self) -> Couplings:
        """Wanted coupling coefficients and external Q."""
        return self.sizing.couplings

    def response(self, frequency: ArrayLike) -> NDArray[np.complex128]:
        """Predicted S-parameters at the board edges.

        Parameters
        ----------
        frequency : array_like, shape (n_freq,)
            Greater than 0. [Hz]

        Returns
        -------
        ndarray, shape (n_freq, 2, 2)
        """
        return self._circuit().scattering(frequency, ALL_LOSSES)

    def lossless_response(self, frequency: ArrayLike) -> NDArray[np.complex128]:
        """The same circuit without loss; shapes as in `response`."""
        return self._circuit().scattering(frequency, NO_LOSSES)

    def ideal_response(self, frequency: ArrayLike) -> NDArray[np.complex128]:
        """The lumped ladder that the comb was sized after, as a reference; shapes as in `response`."""
        goal = self.sizing.goal
        return ladder_response(frequency, self.sizing.g, lower=goal.lower, upper=goal.upper)

    @property
    def solver(self) -> SectionSolver:
        """Matrices solved so far on this stack-up."""
        return self.sizing.solver

    def _circuit(self) -> Circuit:
        return Circuit(self.comb, self.solver)


def design(spec: Spec) -> Design:
    """Size, judge and draw the filter of a specification.

    Raises
    ------
    PhysicalRefusal
        If the construction cannot do what is asked.
    """
    sizing = size(spec)
    verdict = judge(spec, sizing.comb, sizing.solver)
    return Design(spec=spec, sizing=sizing, verdict=verdict, artwork=draw(sizing.comb, _style(spec)))


def _style(spec: Spec) -> Style:
    """The shop's capability and the part's name, as drawing choices in millimetres."""
    shop = spec.board.shop
    highest = max([2 * spec.passband.upper, *(stopband.upper for stopband in spec.stopbands)])
    wavelength = SPEED_OF_LIGHT / (highest * math.sqrt(spec.construction.laminate.eps_r))
    return Style(
        part_number=spec.part.number,
        revision=spec.part.revision,
        grid=spec.board.grid * 1e3,
        mask_expansion=shop.mask_expansion * 1e3,
        mask_dam=shop.mask_web * 1e3,
        edge_pullback=shop.conductor_to_edge * 1e3,
        # common practice: a twentieth of the wavelength in the laminate at the top of the stop band
        fence_pitch=min(max(wavelength / 20 * 1e3, 1.0), 2.0),
    )
