"""Nodal admittance matrix of a comb over frequency, and what is read from it.

Every element is passive and reciprocal at every frequency, so the network is. The losses of coupled
lines enter mode by mode: the modes are those of the lossless section, the resistance and conductance of
each the diagonal terms of the loss matrices in that basis (first-order perturbation, good while the loss
per radian is small).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import PchipInterpolator

from layoutgen.circuit.ends import (
    chip_row,
    grounded_row,
    open_end,
    overhang_capacitance,
    step_capacitances,
)
from layoutgen.circuit.nodal import NodalMatrix
from layoutgen.circuit.sections import SectionSolver, cut_into_sections
from layoutgen.comb import Comb, Feed
from layoutgen.errors import InputError
from layoutgen.lines import (
    LossMatrices,
    Modes,
    line_admittance,
    line_susceptance,
    surface_resistance,
    tap_capacitance,
    tap_shortening,
)

__all__ = ["ALL_LOSSES", "Circuit", "Mechanism"]

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Mechanism = Literal["conductor", "dielectric", "capacitor", "via"]

ALL_LOSSES: frozenset[Mechanism] = frozenset({"conductor", "dielectric", "capacitor", "via"})
NO_LOSSES: frozenset[Mechanism] = frozenset()


class Circuit:
    """The circuit of a comb as it is drawn, or of some of its resonators alone.

    Parameters
    ----------
    comb : Comb
    solver : SectionSolver, optional
        Keeps what it has solved; give the same one for combs on one stack-up.
    strips : sequence of int, optional
        Resonators that are present; all of them by default.
    """

    def __init__(
        self, comb: Comb, solver: SectionSolver | None = None, strips: Sequence[int] | None = None
    ) -> None:
        self.comb = comb
        self.strips = tuple(range(comb.order) if strips is None else strips)
        self._solver = solver or SectionSolver(comb.stack, comb.width)
        self._sections = cut_into_sections(comb, self.strips)
        solved = self._solver.modes(comb, self._sections)
        self._matrices = [matrices for matrices, _ in solved]
        self._modes = [modes for _, modes in solved]
        self._loss_matrices: list[LossMatrices] | None = None
        self._place_nodes()
        stack = comb.stack
        resonators = [comb.resonators[i] for i in self.strips]
        self._ground = grounded_row(
            stack,
            [r.short for r in resonators],
            [r.x for r in resonators],
            [r.segments[0].width for r in resonators],
        )
        self._chips = chip_row(comb, self.strips) if resonators[0].load is not None else None

    # -- what is asked of it

    def scattering(self, frequency: ArrayLike, losses: frozenset[Mechanism] = ALL_LOSSES) -> Complexes:
        """S-parameters between the two ports at the board edges.

        Parameters
        ----------
        frequency : array_like, shape (n_freq,)
            Greater than 0. [Hz]
        losses : frozenset
            Mechanisms that are counted.

        Returns
        -------
        ndarray, shape (n_freq, 2, 2)
            Each port referred to its own impedance.
        """
        f = _frequencies(frequency)
        seen = self._matrix(f, losses, feeds=True).seen_from([0, 1])
        root = np.array([1 / np.sqrt(feed.impedance) for feed in self.comb.feeds])
        waves = np.linalg.inv(seen + np.diag(root**2)) * np.outer(root, root)
        return np.asarray(2 * waves - np.eye(2), dtype=np.complex128)

    def input_admittance(
        self, frequency: ArrayLike, strip: int, losses: frozenset[Mechanism] = NO_LOSSES
    ) -> Complexes:
        """Admittance at the loaded end of a resonator, the feeds being taken away. [S]"""
        f = _frequencies(frequency)
        node = self._node(strip, self.comb.resonators[strip].load_position)
        return self._matrix(f, losses, feeds=False).seen_from([node])[:, 0, 0]

    def capacitor_resonance(self) -> float | None:
        """Lowest series resonance of the mounted chips; None without chips. [Hz]"""
        return None if self._chips is None else float(np.min(self._chips.self_resonance()))

    def pair_resonances(self, near: float) -> tuple[float, float]:
        """Even and odd resonance of two equal resonators, the feeds being taken away. [Hz]

        Parameters
        ----------
        near : float
            Frequency around which they are looked for, from half to twice it. [Hz]

        Raises
        ------
        InputError
            If there are not two strips or a resonance lies outside.
        """
        if len(self.strips) != 2:
            raise InputError("Circuit", "strips", self.strips, "must be a pair")
        f = near * np.linspace(0.5, 2.0, 121)
        nodes = [self._node(i, self.comb.resonators[i].load_position) for i in self.strips]
        seen = self._matrix(f, NO_LOSSES, feeds=False).seen_from(nodes).imag
        return _first_zero(f, seen[:, 0, 0] + seen[:, 0, 1]), _first_zero(f, seen[:, 0, 0] - seen[:, 0, 1])

    def line_at_ground(self) -> tuple[Modes, float]:
        """Modes of the lowest section, and the length of line as inductive as a grounded end. [m]"""
        modes = self._modes[0]
        stiffness = modes.current @ modes.current.T
        per_metre = np.linalg.inv(stiffness)[0, 0]
        return modes, float(self._ground.inductance[0, 0] / per_metre)

    # -- nodes: the two ports first, then each resonator at each plane from the shorts upward

    def _place_nodes(self) -> None:
        self._planes = [self._sections[0].bottom, *(section.top for section in self._sections)]
        self._index: dict[tuple[int, int], int] = {}
        for plane in range(len(self._planes)):
            present = set(self._sections[plane].strips if plane < len(self._sections) else ())
            if plane:
                present |= set(self._sections[plane - 1].strips)
            for strip in sorted(present):
                self._index[strip, plane] = 2 + len(self._index)
        first = 2 + len(self._index)
        self._taps = [
            _Tap(
                feed=feed,
                port=port,
                plane=self._plane(feed.tap),
                junction=first + 2 * port,
                above=first + 2 * port + 1,
            )
            for port, feed in enumerate(self.comb.feeds)
            if feed.resonator in self.strips
        ]
        self._size = first + 2 * len(self.comb.feeds)

    def _plane(self, height: float) -> int:
        return int(np.argmin([abs(p - height) for p in self._planes]))

    def _node(self, strip: int, height: float) -> int:
        return self._index[strip, self._plane(height)]

    # -- assembly

    def _matrix(self, f: Floats, losses: frozenset[Mechanism], *, feeds: bool) -> NodalMatrix:
        matrix = NodalMatrix(len(f), self._size, lossless=not losses)
        for number in range(len(self._sections)):
            self._add_section(matrix, f, number, losses, feeds=feeds)
        self._add_ends(matrix, f, losses)
        joined = self._taps if feeds else []
        for tap in joined:
            self._add_junction(matrix, f, tap)
            self._add_feed(matrix, f, tap, losses)
        # ports and junctions that nothing is joined to keep the matrix regular and touch nothing else
        used = {node for tap in joined for node in (tap.port, tap.junction, tap.above)}
        for node in {0, 1, *range(2 + len(self._index), self._size)} - used:
            matrix.add_to_ground(node, 1j)
        return matrix

    def _add_section(
        self, matrix: NodalMatrix, f: Floats, number: int, losses: frozenset[Mechanism], *, feeds: bool
    ) -> None:
        section = self._sections[number]
        near: NDArray[Any]
        far: NDArray[Any]
        if losses & {"conductor", "dielectric"}:
            near, far = self._line(f, self._modes[number], self._losses()[number], section.length, losses)
            add = matrix.add_block
        else:
            near, far = line_susceptance(f, self._modes[number], section.length)
            add = matrix.add_susceptances
        above = {(tap.feed.resonator, tap.plane): tap.above for tap in self._taps} if feeds else {}
        bottom = np.array([above.get((i, number), self._index[i, number]) for i in section.strips])
        top = np.array([self._index[i, number + 1] for i in section.strips])
        for a, b, block in ((bottom, bottom, near), (top, top, near), (bottom, top, far), (top, bottom, far)):
            add(a, b, block)

    def _losses(self) -> list[LossMatrices]:
        if self._loss_matrices is None:
            self._loss_matrices = self._solver.losses(self.comb, self._sections)
        return self._loss_matrices

    def _line(
        self, f: Floats, modes: Modes, loss: LossMatrices | None, length: float, losses: frozenset[Mechanism]
    ) -> tuple[Complexes, Complexes]:
        """Admittance of a piece of coupled line: at one end, and between the ends."""
        if loss is None:
            return line_admittance(f, modes, length)
        stack = self.comb.stack
        resistance, slope = (row[None, :] for row in loss.of_modes(modes))
        surface = surface_resistance(f, conductivity=stack.conductivity, roughness=stack.roughness)[:, None]
        omega = 2 * np.pi * f[:, None]
        return line_admittance(
            f,
            modes,
            length,
            resistance=surface * resistance if "conductor" in losses else 0.0,
            conductance=omega * stack.tan_delta * slope if "dielectric" in losses else 0.0,
        )

    def _add_ends(self, matrix: NodalMatrix, f: Floats, losses: frozenset[Mechanism]) -> None:
        omega, stack = 2 * np.pi * f, self.comb.stack
        shorts = np.array([self._index[i, 0] for i in self.strips])
        matrix.add_block(shorts, shorts, np.linalg.inv(self._ground.impedance(f, lossy="via" in losses)))
        if self._chips is not None:
            loads = np.array([self._node(i, self.comb.resonators[i].load_position) for i in self.strips])
            chips = self._chips.admittance(f, lossy_part="capacitor" in losses, lossy_vias="via" in losses)
            matrix.add_block(loads, loads, chips)
        for i in self.strips:
            resonator = self.comb.resonators[i]
            shunts = [
                (0.0, overhang_capacitance(resonator, stack)),
                (resonator.length, open_end(resonator, stack)),
                *step_capacitances(resonator, stack),
            ]
            for height, capacitance in shunts:
                node = self._node(i, height)
                matrix.add_to_ground(node, 1j * omega * capacitance)

    def _add_junction(self, matrix: NodalMatrix, f: Floats, tap: _Tap) -> None:
        """The tap as a node between two short pieces of line that the junction takes away."""
        feed, stack = tap.feed, self.comb.stack
        shape = {
            "line_width": self.comb.resonators[feed.resonator].width_at(feed.tap),
            "feed_width": feed.width,
            "height": stack.height,
            "eps_r": stack.eps_r,
            "thickness": stack.conductor,
        }
        section = self._sections[tap.plane]
        strip = section.strips.index(feed.resonator)
        inductance = -tap_shortening(**shape) * self._matrices[tap.plane].inductance[strip, strip]
        series = 1 / (2j * np.pi * f * inductance)
        for node in (self._index[feed.resonator, tap.plane], tap.above):
            matrix.add_between(node, tap.junction, series)
        matrix.add_to_ground(tap.junction, 2j * np.pi * f * tap_capacitance(**shape))

    def _add_feed(self, matrix: NodalMatrix, f: Floats, tap: _Tap, losses: frozenset[Mechanism]) -> None:
        modes, loss = self._solver.single(tap.feed.width)
        near, far = self._line(f, modes, loss, self.comb.feed_length(tap.feed), losses)
        port, junction = [tap.port], [tap.junction]
        for a, b, block in ((port, port, near), (junction, junction, near), (port, junction, far),
                            (junction, port, far)):  # fmt: skip
            matrix.add_block(a, b, block)


@dataclass(frozen=True, kw_only=True)
class _Tap:
    """A feed with its port, the plane it joins, the nodes of the junction and of the line just above it."""

    feed: Feed
    port: int
    plane: int
    junction: int
    above: int


def _frequencies(frequency: ArrayLike) -> Floats:
    f = np.atleast_1d(np.asarray(frequency, dtype=float))
    if not bool(np.all((f > 0) & np.isfinite(f))):
        raise InputError(
            "Circuit", "frequency", frequency, "every value must be finite and greater than 0 Hz"
        )
    return f


def _first_zero(f: Floats, susceptance: Floats) -> float:
    """First upward zero of a susceptance over frequency, by inverse interpolation."""
    rising = np.flatnonzero((susceptance[:-1] < 0) & (susceptance[1:] >= 0))
    if not len(rising):
        raise InputError(
            "Circuit", "near", f"{f[0]:.4g} to {f[-1]:.4g} Hz", "no resonance lies in this range"
        )
    at = int(rising[0])
    around = slice(max(at - 1, 0), at + 3)
    return float(PchipInterpolator(susceptance[around], f[around])(0.0))
