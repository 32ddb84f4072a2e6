"""The comb's network assembled a second time, from parts of scikit-rf, for comparison and for timing.

The sections of coupled line are given as admittance blocks; everything else (feeds, chips, vias, shunt
capacitances, the way it is all connected) is scikit-rf's.
"""

from __future__ import annotations

import numpy as np
import skrf
from skrf.circuit import Circuit as SkrfCircuit
from skrf.media import DefinedGammaZ0

from layoutgen.circuit import Circuit, SectionSolver, cut_into_sections
from layoutgen.circuit.ends import chip_row, grounded_row, open_end, overhang_capacitance, step_capacitances
from layoutgen.comb import Comb
from layoutgen.lines import line_admittance, tap_capacitance, tap_shortening

Z0 = 50.0


def assemble(comb: Comb, solver: SectionSolver, frequency: np.ndarray) -> SkrfCircuit:
    """A scikit-rf circuit of the lossless comb between two ports."""
    return _Assembly(comb, solver, frequency).circuit()


class _Assembly:
    def __init__(self, comb: Comb, solver: SectionSolver, frequency: np.ndarray) -> None:
        self.comb, self.solver = comb, solver
        self.band = skrf.Frequency.from_f(frequency, unit="Hz")
        self.omega = 2 * np.pi * frequency
        self.strips = tuple(range(comb.order))
        self.nodes: dict[tuple[object, int], list[tuple[skrf.Network, int]]] = {}
        self.planes: list[float] = []

    def circuit(self) -> SkrfCircuit:
        self._lines()
        self._ends()
        connections = []
        for port, feed in enumerate(self.comb.feeds):
            outer = SkrfCircuit.Port(self.band, f"port{port}", z0=feed.impedance)
            line = self._feed(port)
            connections.append([(outer, 0), (line, 0)])
            self.nodes["junction", port].append((line, 1))
        for number, ends in enumerate(self.nodes.values()):
            if len(ends) == 1:
                ends.append((SkrfCircuit.Open(self.band, f"open{number}", z0=Z0), 0))
            connections.append(ends)
        return SkrfCircuit(connections)

    def _attach(self, strip: int, height: float, network: skrf.Network, port: int) -> None:
        plane = int(np.argmin([abs(p - height) for p in self.planes]))
        self.nodes.setdefault((strip, plane), []).append((network, port))

    def _of_admittance(self, y: np.ndarray, name: str) -> skrf.Network:
        network = skrf.Network(frequency=self.band, s=skrf.network.y2s(y, z0=Z0), z0=Z0)
        network.name = name
        return network

    def _lines(self) -> None:
        sections = cut_into_sections(self.comb, self.strips)
        self.planes = [0.0, *(section.top for section in sections)]
        for number, (section, (matrices, modes)) in enumerate(
            zip(sections, self.solver.modes(self.comb, sections), strict=True)
        ):
            near, far = line_admittance(self.band.f, modes, section.length)
            network = self._of_admittance(np.block([[near, far], [far, near]]), f"section{number}")
            for i, strip in enumerate(section.strips):
                tapped = [
                    p
                    for p, feed in enumerate(self.comb.feeds)
                    if feed.resonator == strip and feed.tap == section.bottom
                ]
                if tapped:
                    self._junction(tapped[0], network, i, float(matrices.inductance[i, i]))
                else:
                    self._attach(strip, section.bottom, network, i)
                self._attach(strip, section.top, network, i + len(section.strips))

    def _junction(self, port: int, section: skrf.Network, index: int, inductance: float) -> None:
        """The tap between what is below it and the section above: two negative pieces of line."""
        feed = self.comb.feeds[port]
        shortening = tap_shortening(**self._tap_shape(port))
        y = 1 / (-1j * self.omega * inductance * shortening)
        pieces = [
            self._of_admittance(np.moveaxis(np.array([[y, -y], [-y, y]]), 2, 0), f"{name}{port}")
            for name in ("below", "above")
        ]
        self._attach(feed.resonator, feed.tap, pieces[0], 0)
        self.nodes["above", port] = [(pieces[1], 0), (section, index)]
        fringe = self._capacitor(tap_capacitance(**self._tap_shape(port)), f"fringe{port}")
        self.nodes["junction", port] = [(pieces[0], 1), (pieces[1], 1), (fringe, 0)]

    def _tap_shape(self, port: int) -> dict[str, float]:
        feed, stack = self.comb.feeds[port], self.comb.stack
        return {
            "line_width": self.comb.resonators[feed.resonator].width,
            "feed_width": feed.width,
            "height": stack.height,
            "eps_r": stack.eps_r,
            "thickness": stack.conductor,
        }

    def _ends(self) -> None:
        comb, stack = self.comb, self.comb.stack
        resonators = comb.resonators
        ground = grounded_row(
            stack,
            [r.short for r in resonators],
            [r.x for r in resonators],
            [r.segments[0].width for r in resonators],
        )
        shorts = skrf.Network(
            frequency=self.band,
            z0=Z0,
            s=skrf.network.z2s(1j * self.omega[:, None, None] * ground.inductance, z0=Z0),
        )
        shorts.name = "vias"
        for i in self.strips:
            self._attach(i, 0.0, shorts, i)
        self._chips()
        for i, resonator in enumerate(resonators):
            shunts = [
                (0.0, overhang_capacitance(resonator, stack)),
                (resonator.length, open_end(resonator, stack)),
                *step_capacitances(resonator, stack),
            ]
            for number, (height, capacitance) in enumerate(shunts):
                self._attach(i, height, self._capacitor(capacitance, f"shunt{i}_{number}"), 0)

    def _capacitor(self, capacitance: float, name: str) -> skrf.Network:
        return self._of_admittance((1j * self.omega * capacitance)[:, None, None], name)

    def _chips(self) -> None:
        """Path inductances as one network, each chip a series capacitor before it, pads and vias behind."""
        row = chip_row(self.comb, self.strips)
        below = np.linalg.inv(1j * self.omega[:, None, None] * row.ground.inductance)
        below = below + 1j * self.omega[:, None, None] * np.diag(row.pad_capacitance)
        path = skrf.Network(
            frequency=self.band,
            z0=Z0,
            s=skrf.network.z2s(np.linalg.inv(below) + 1j * self.omega[:, None, None] * row.path, z0=Z0),
        )
        path.name = "paths"
        media = DefinedGammaZ0(self.band, z0=Z0)
        for i in self.strips:
            series = media.capacitor(row.capacitance[i], name=f"chip{i}")
            resonator = self.comb.resonators[i]
            self._attach(i, resonator.load_position, series, 0)
            self.nodes[i, -1] = [(series, 1), (path, i)]

    def _feed(self, port: int) -> skrf.Network:
        feed = self.comb.feeds[port]
        modes, _ = self.solver.single(feed.width)
        slowness = float(modes.slowness[0])
        impedance = slowness / float(modes.current[0, 0] ** 2 * slowness**2)
        media = DefinedGammaZ0(self.band, gamma=1j * self.omega * slowness, z0=impedance, z0_port=Z0)
        return media.line(self.comb.feed_length(feed), "m", name=f"feed{port}")


def responses(comb: Comb, frequency: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Lossless S-parameters by layoutgen and by scikit-rf."""
    solver = SectionSolver(comb.stack, comb.width)
    ours = Circuit(comb, solver).scattering(frequency, frozenset())
    return ours, assemble(comb, solver, frequency).s_external
