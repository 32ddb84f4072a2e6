"""What terminates the lines of a comb: grounded ends, chip loads, open ends."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from layoutgen.comb import ChipLoad, Comb, Resonator, Stack, ViaRow
from layoutgen.errors import InputError
from layoutgen.lines import (
    body_capacitance,
    end_facing_ground,
    grounded_ends_inductance,
    open_end_capacitance,
    path_inductance,
    single_line,
    step_extension,
    via_resistance,
)

__all__ = [
    "ChipRow",
    "GroundedRow",
    "chip_row",
    "grounded_row",
    "open_end",
    "overhang_capacitance",
    "step_capacitances",
]

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]


@dataclass(frozen=True, kw_only=True)
class GroundedRow:
    """Grounded ends of n strips side by side.

    Attributes
    ----------
    inductance : ndarray, shape (n, n)
        [H]
    rows : tuple of ViaRow
        Vias of each strip, for their resistance.
    stack : Stack
    """

    inductance: Floats
    rows: tuple[ViaRow, ...]
    stack: Stack

    def resistance(self, frequency: Floats) -> Floats:
        """Resistance of each strip's vias in parallel, shape (n_freq, n). [ohm]"""
        columns = [
            via_resistance(
                frequency,
                height=self.stack.height,
                radius=row.drill / 2,
                plating=row.plating,
                conductivity=self.stack.conductivity,
            )
            / row.count
            for row in self.rows
        ]
        return np.stack(columns, axis=-1)

    def impedance(self, frequency: Floats, *, lossy: bool) -> Complexes:
        """Impedance matrix to ground, shape (n_freq, n, n). [ohm]"""
        omega = 2 * np.pi * frequency
        result = np.asarray(1j * omega[:, None, None] * self.inductance, dtype=np.complex128)
        if lossy:
            index = np.arange(len(self.rows))
            result[:, index, index] += self.resistance(frequency)
        return result


def grounded_row(
    stack: Stack, rows: Sequence[ViaRow], centres: Sequence[float], widths: Sequence[float]
) -> GroundedRow:
    """Grounded ends of strips of given widths on given centre lines, each with its row of vias. [m]"""
    inductance = grounded_ends_inductance(
        positions=[[x + offset for offset in row.offsets] for x, row in zip(centres, rows, strict=True)],
        radii=[row.drill / 2 for row in rows],
        strip_centres=list(centres),
        strip_widths=list(widths),
        height=stack.height,
    )
    return GroundedRow(inductance=inductance, rows=tuple(rows), stack=stack)


@dataclass(frozen=True, kw_only=True)
class ChipRow:
    """Chip capacitors at the open ends of n strips, from the strips to ground.

    Attributes
    ----------
    capacitance, resistance : ndarray, shape (n,)
        Of the parts. [F], [ohm]
    path : ndarray, shape (n, n)
        Inductance of bodies, second lands and residuals. [H]
    ground : GroundedRow
        Vias of the ground pads.
    pad_capacitance : ndarray, shape (n,)
        Of the ground pads. [F]
    """

    capacitance: Floats
    resistance: Floats
    path: Floats
    ground: GroundedRow
    pad_capacitance: Floats

    def admittance(self, frequency: Floats, *, lossy_part: bool, lossy_vias: bool) -> Complexes:
        """Admittance matrix between the strips' ends and ground, shape (n_freq, n, n). [S]"""
        omega = 2 * np.pi * frequency
        index = np.arange(len(self.capacitance))
        below = np.linalg.inv(self.ground.impedance(frequency, lossy=lossy_vias))
        below[:, index, index] += 1j * omega[:, None] * self.pad_capacitance
        total = np.asarray(np.linalg.inv(below) + 1j * omega[:, None, None] * self.path)
        total[:, index, index] += 1 / (1j * omega[:, None] * self.capacitance)
        if lossy_part:
            total[:, index, index] += self.resistance
        result: Complexes = np.linalg.inv(total)
        return result

    def self_resonance(self) -> Floats:
        """Series resonance of each mounted part alone. [Hz]"""
        inductance = np.diag(self.path) + np.diag(self.ground.inductance)
        result: Floats = 1 / (2 * np.pi * np.sqrt(inductance * self.capacitance))
        return result


def chip_row(comb: Comb, strips: Sequence[int]) -> ChipRow:
    """The chips of the named resonators, which must all have one."""
    stack = comb.stack
    loads = [_load(comb.resonators[i]) for i in strips]
    centres = [comb.resonators[i].x for i in strips]
    body = path_inductance(
        centres=centres,
        widths=[load.body_width for load in loads],
        heights=[stack.height + stack.conductor + load.current_height for load in loads],
        lengths=[load.span for load in loads],
    )
    pad = path_inductance(
        centres=centres,
        widths=[load.pad_width for load in loads],
        heights=stack.height,
        lengths=[load.pad_path for load in loads],
    )
    residual = np.diag([load.inductance for load in loads])
    pads = []
    for load in loads:
        pads.append(_per_metre(load.pad_width, stack) * load.pad_length)
    return ChipRow(
        capacitance=np.array([load.capacitance for load in loads]),
        resistance=np.array([load.resistance for load in loads]),
        path=body + pad + residual,
        ground=grounded_row(
            stack, [load.vias for load in loads], centres, [load.pad_width for load in loads]
        ),
        pad_capacitance=np.array(pads),
    )


def _load(resonator: Resonator) -> ChipLoad:
    if resonator.load is None:
        raise InputError("chip_row", "resonators", "plate", "chips and plates cannot be mixed in one comb")
    return resonator.load


def open_end(resonator: Resonator, stack: Stack) -> float:
    """Capacitance that the open end of a line adds, to ground and to the grounded pad that it faces. [F]"""
    return _open_end(resonator.segments[-1].width, resonator.load, stack)


@lru_cache(maxsize=1024)
def _open_end(width: float, load: ChipLoad | None, stack: Stack) -> float:
    if load is None:
        return open_end_capacitance(
            width=width, height=stack.height, eps_r=stack.eps_r, thickness=stack.conductor
        )
    ends = end_facing_ground(
        width=width,
        facing_width=load.pad_width,
        gap=load.land_gap,
        height=stack.height,
        eps_r=stack.eps_r,
        thickness=stack.conductor,
    )
    body = body_capacitance(
        width=load.body_width,
        height=stack.height + stack.conductor + load.current_height,
        slab=stack.height,
        eps_r=stack.eps_r,
        length=load.span,
    )
    return ends.shunt + ends.across + body / 2


def overhang_capacitance(resonator: Resonator, stack: Stack) -> float:
    """Capacitance of the copper beyond the axis of the shorting vias. [F]"""
    width = resonator.segments[0].width
    return _per_metre(width, stack) * resonator.overhang + _open_end(width, None, stack)


def step_capacitances(resonator: Resonator, stack: Stack) -> list[tuple[float, float]]:
    """Height [m] and capacitance [F] of each width step along a resonator."""
    steps, height = [], 0.0
    for lower, upper in pairwise(resonator.segments):
        height += lower.length
        if lower.width != upper.width:
            steps.append((height, _step(max(lower.width, upper.width), min(lower.width, upper.width), stack)))
    return steps


@lru_cache(maxsize=1024)
def _step(wide: float, narrow: float, stack: Stack) -> float:
    extension = step_extension(
        wide=wide, narrow=narrow, height=stack.height, eps_r=stack.eps_r, thickness=stack.conductor
    )
    return _per_metre(wide, stack) * extension


@lru_cache(maxsize=1024)
def _per_metre(width: float, stack: Stack) -> float:
    line = single_line(width=width, height=stack.height, eps_r=stack.eps_r, thickness=stack.conductor)
    return float(line.capacitance)
