"""Automatic choices: thickness, chip case, line width, loading, vias, each with the reason it fell as it did.

Starting values are common practice for chip-loaded microstrip combs: 45 degrees of line between short
and load (30 to 60), 50 to 60 ohm, laminate of 1.5 mm below 1 GHz, 0.8 mm to 2 GHz and 0.5 mm above.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from layoutgen.comb import ChipLoad, Launch, Stack, ViaRow
from layoutgen.constants import SPEED_OF_LIGHT
from layoutgen.library import ChipCase, Thickness
from layoutgen.lines import open_end_extension, path_inductance, single_line, width_for_impedance
from layoutgen.sizing.template import Choices, Plate, snap
from layoutgen.spec import Spec

__all__ = ["Candidate", "Note", "candidates", "stack_of"]

_TARGET_CHIP, _TARGET_PLATE = np.radians(45), np.radians(60)
_LINE_CHIP, _LINE_PLATE = 55.0, 65.0
_PLATE_RATIO = 0.42
_LEAST_CAPACITANCE = 0.5e-12
_BARE = 0.3e-3
"""Bare laminate between the ground pads of neighbouring resonators. [m]"""


@dataclass(frozen=True, kw_only=True, slots=True)
class Note:
    """An automatic choice: key, value as text, reason."""

    key: str
    value: str
    reason: str


@dataclass(frozen=True, kw_only=True, slots=True)
class Candidate:
    """A set of choices that may work.

    Attributes
    ----------
    choices : Choices
    electrical_length : float
        Estimated, between short and load. [rad]
    least_gap : float
        Between resonators, by the shop and by the pads. [m]
    notes : tuple of Note
    """

    choices: Choices
    electrical_length: float
    least_gap: float
    notes: tuple[Note, ...]


def candidates(spec: Spec, order: int, limit: int = 4) -> list[Candidate]:
    """The most promising choices for a specification, best first.

    Parameters
    ----------
    spec : Spec
    order : int
        Number of resonators.
    limit : int
        How many at most.
    """
    found: list[tuple[float, Candidate]] = []
    for rank, thickness in enumerate(_thicknesses(spec)):
        stack = stack_of(spec, thickness)
        notes = list(_thickness_notes(spec, thickness))
        feed = snap(
            width_for_impedance(
                spec.passband.impedance, height=stack.height, eps_r=stack.eps_r, thickness=stack.conductor
            ),
            2 * spec.board.grid,
        )
        width, width_note = _line_width(spec, stack)
        notes += width_note
        if spec.load.kind == "plate":
            plate, length, text = _plate(spec, stack, width)
            found.append(
                (float(rank), _candidate(spec, order, stack, (width, feed), plate, length, [*notes, *text]))
            )
            continue
        case, case_note = _case(spec)
        for capacitance in _capacitances(spec):
            load = _chip(spec, case, capacitance)
            length = _electrical_length(spec, stack, width, load)
            score = abs(length - _target(spec)) / np.radians(15) + rank
            notes_here = [*notes, *case_note, *_capacitor_notes(spec, capacitance, length)]
            found.append((score, _candidate(spec, order, stack, (width, feed), load, length, notes_here)))
    found.sort(key=lambda item: item[0])
    return [candidate for _, candidate in found[:limit]]


def stack_of(spec: Spec, thickness: Thickness) -> Stack:
    """Stack-up of a specification at a stocked thickness."""
    construction = spec.construction
    return Stack(
        height=thickness.nominal,
        eps_r=construction.laminate.eps_r,
        tan_delta=construction.laminate.tan_delta,
        conductor=construction.conductor,
        conductivity=construction.copper.conductivity,
        roughness=construction.copper.roughness,
        cover=construction.cover,
    )


def _target(spec: Spec) -> float:
    asked = spec.construction.electrical_length
    if asked is not None:
        return asked
    return float(_TARGET_CHIP if spec.load.kind == "chip" else _TARGET_PLATE)


def _thicknesses(spec: Spec) -> list[Thickness]:
    """Stocked thicknesses, the most usual for the frequency first; the open board's limit orders them too."""
    construction, centre = spec.construction, spec.passband.centre
    if construction.thickness is not None:
        return [construction.thickness]
    usual = 1.5e-3 if centre < 1e9 else 0.8e-3 if centre < 2e9 else 0.5e-3
    stocked = construction.laminate.thicknesses
    if construction.cover is None:
        thin = [t for t in stocked if t.nominal <= 0.0095 * SPEED_OF_LIGHT / spec.passband.upper]
        stocked = tuple(thin) or stocked[:1]
    return sorted(stocked, key=lambda t: abs(np.log(t.nominal / usual)))[:2]


def _thickness_notes(spec: Spec, thickness: Thickness) -> list[Note]:
    if spec.construction.thickness is not None:
        return []
    return [
        Note(
            key="construction.thickness",
            value=f"{thickness.nominal * 1e3:.3g} mm",
            reason=f"stocked thickness nearest to common practice at {spec.passband.centre / 1e9:.3g} GHz",
        )
    ]


def _line_width(spec: Spec, stack: Stack) -> tuple[float, list[Note]]:
    asked = spec.construction.line_width
    if asked is not None:
        return asked, []
    impedance = _LINE_CHIP if spec.load.kind == "chip" else _LINE_PLATE
    width = width_for_impedance(impedance, height=stack.height, eps_r=stack.eps_r, thickness=stack.conductor)
    reason = f"{impedance:.0f} ohm line: the flat optimum of unloaded Q between 50 and 70 ohm"
    least = max(
        spec.board.shop.min_line(stack.conductor),
        _case(spec)[0].land_width if spec.load.kind == "chip" else 0,
    )
    if width < least:
        width, reason = least, "as narrow as the shop etches and the chip's land allows"
    width = snap(width, 2 * spec.board.grid)
    return width, [Note(key="construction.line_width", value=f"{width * 1e3:.3f} mm", reason=reason)]


def _case(spec: Spec) -> tuple[ChipCase, list[Note]]:
    if spec.load.case is not None:
        return spec.load.case, []
    name = "0402" if spec.passband.centre >= 1.2e9 else "0603"
    note = Note(key="load.case", value=name, reason="0402 from 1.2 GHz up for its short path, 0603 below")
    return spec.library.chip_case(name), [note]


def _capacitances(spec: Spec) -> list[float]:
    if spec.load.value is not None:
        return [spec.load.value]
    usable = [c for c in spec.load.series if _LEAST_CAPACITANCE <= c <= 40e-12]
    return usable or list(spec.load.series)


def _capacitor_notes(spec: Spec, capacitance: float, length: float) -> list[Note]:
    if spec.load.value is not None:
        return []
    target = np.degrees(_target(spec))
    return [
        Note(
            key="load.value",
            value=f"{capacitance * 1e12:.3g} pF",
            reason=f"stocked value ({spec.load.series_name}) with a line of {np.degrees(length):.0f} deg, "
            f"nearest to {target:.0f} deg: longer lines gain unloaded Q, shorter ones spurious distance",
        )
    ]


def _electrical_length(spec: Spec, stack: Stack, width: float, load: ChipLoad) -> float:
    """Of a uniform line that resonates with the mounted capacitor at band centre. [rad]"""
    omega = 2 * np.pi * spec.passband.centre
    line = single_line(width=width, height=stack.height, eps_r=stack.eps_r, thickness=stack.conductor)
    body = path_inductance(
        centres=[0.0],
        widths=load.body_width,
        lengths=load.span,
        heights=stack.height + stack.conductor + load.current_height,
    )[0, 0]
    pad = path_inductance(centres=[0.0], widths=load.pad_width, heights=stack.height, lengths=load.pad_path)[
        0, 0
    ]
    series = float(body + pad) + 0.06e-9 + load.inductance
    reactance = 1 / (omega * load.capacitance) - omega * series
    if reactance <= 0:
        return 0.0
    return float(np.arctan2(reactance, float(line.impedance)))


def _chip(spec: Spec, case: ChipCase, capacitance: float) -> ChipLoad:
    shop, grid = spec.board.shop, spec.board.grid
    vias = _via_row(spec, count=2)
    dam = max(shop.mask_web, 0.1e-3)
    offset = snap(case.land_length + dam + vias.pad / 2, grid)
    width = max(snap(case.land_width, 2 * grid), vias.width)
    return ChipLoad(
        case=case.name,
        capacitance=capacitance,
        tolerance=spec.load.tolerance,
        resistance=spec.load.resistance(capacitance),
        inductance=spec.load.inductance,
        body_length=case.body_length,
        body_width=case.body_width,
        body_height=case.body_height,
        current_height=case.current_height,
        land_length=snap(case.land_length, 2 * grid),
        land_width=snap(case.land_width, 2 * grid),
        land_gap=snap(case.land_gap, grid),
        pad_length=offset + vias.pad / 2,
        pad_width=width,
        via_offset=offset,
        vias=vias,
    )


def _via_row(spec: Spec, count: int) -> ViaRow:
    short, grid = spec.short, spec.board.grid
    pad = snap(max(short.drill + 2 * spec.board.shop.annular_ring, short.tool + 4 * grid), 2 * grid)
    return ViaRow(
        count=count,
        pitch=snap(short.pitch, 2 * grid),
        drill=short.tool,
        finished=short.drill,
        pad=pad,
    )


def _short(spec: Spec, line_width: float) -> tuple[ViaRow, list[Note]]:
    if spec.short.count is not None:
        return _via_row(spec, spec.short.count), []
    one = _via_row(spec, 1)
    fitting = 1 + int((line_width - one.pad) / one.pitch) if line_width > one.pad else 1
    count = min(max(fitting, 2), 6)
    reason = (
        "as many as fit across the line" if count == fitting else "at least two, the pad widened to hold them"
    )
    return _via_row(spec, count), [Note(key="short.count", value=str(count), reason=reason)]


def _plate(spec: Spec, stack: Stack, line_width: float) -> tuple[Plate, float, list[Note]]:
    """Plate of 0.42 of the line's impedance, and the total electrical length."""
    grid, target = spec.board.grid, _target(spec)
    line = single_line(width=line_width, height=stack.height, eps_r=stack.eps_r, thickness=stack.conductor)
    impedance = _PLATE_RATIO * float(line.impedance)
    width = snap(
        width_for_impedance(impedance, height=stack.height, eps_r=stack.eps_r, thickness=stack.conductor),
        2 * grid,
    )
    # Z_line tan(a) tan(b) = Z_plate with a + b = target: the shorter root gives the shorter plate
    line_share = np.linspace(0.02, 0.98, 481) * target
    balance = np.tan(line_share) * np.tan(target - line_share) / _PLATE_RATIO - 1
    rising = np.flatnonzero(np.diff(np.sign(balance)) != 0)
    split = float(line_share[rising[-1]]) if len(rising) else float(line_share[int(np.argmax(balance))])
    wide = single_line(width=width, height=stack.height, eps_r=stack.eps_r, thickness=stack.conductor)
    phase = 2 * np.pi * spec.passband.centre / SPEED_OF_LIGHT * np.sqrt(float(wide.eps_eff))
    end = open_end_extension(width=width, height=stack.height, eps_r=stack.eps_r, eps_eff=float(wide.eps_eff))
    length = snap(max((target - split) / phase - end, 2 * stack.height), grid)
    note = Note(
        key="load",
        value=f"plate {width * 1e3:.3f} mm wide, {length * 1e3:.3f} mm long",
        reason=f"{_PLATE_RATIO} of the line's impedance; {np.degrees(target):.0f} deg with the line",
    )
    return Plate(length=length, width=width), target, [note]


def _candidate(
    spec: Spec,
    order: int,
    stack: Stack,
    widths: tuple[float, float],
    load: ChipLoad | Plate,
    length: float,
    notes: list[Note],
) -> Candidate:
    grid, (width, feed) = spec.board.grid, widths
    short, short_note = _short(spec, width)
    clearance = spec.board.clearance if spec.board.clearance is not None else 8 * stack.height
    choices = Choices(
        order=order,
        stack=stack,
        line_width=width,
        short=short,
        load=load,
        feed_width=feed,
        impedance=spec.passband.impedance,
        launch=_launch(spec, stack),
        clearance=snap(clearance, grid),
        feed_clearance=snap(3 * stack.height, grid),
        margin=snap(spec.board.margin, grid),
        grid=grid,
    )
    least = spec.board.shop.min_gap(stack.conductor)
    for pads in (short.width, load.pad_width if isinstance(load, ChipLoad) else 0.0):
        least = max(least, pads + _BARE - choices.widest if pads > choices.widest else 0.0)
    least = float(np.ceil(least / grid - 1e-6) * grid)
    return Candidate(choices=choices, electrical_length=length, least_gap=least, notes=(*notes, *short_note))


def _launch(spec: Spec, stack: Stack) -> Launch | None:
    """Ground pads for an edge connector: coplanar to the feed over the last millimetres."""
    if spec.board.connector == "none":
        return None
    grid = spec.board.grid
    gap = max(spec.board.shop.min_gap(stack.conductor), 0.75 * stack.height)
    length = min(spec.board.margin * 0.9, 3.5e-3)
    return Launch(ground_gap=snap(gap, grid), ground_width=2.5e-3, ground_length=snap(length, grid))
