"""Sections of the plan and the summary: each a few lines of plain text about one side of a design."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator

from layoutgen.circuit import Judgement
from layoutgen.comb import ChipLoad, Comb, Resonator
from layoutgen.design import Design
from layoutgen.report.text import bullets, figures, heading, paragraph, table
from layoutgen.units import show

__all__ = [
    "board",
    "choices",
    "defaults",
    "dimensions",
    "filter_values",
    "help_wanted",
    "losses",
    "material",
    "overrides",
    "predicted",
    "requirements",
    "verdict_line",
    "warnings",
]

Show = Callable[[float], str]
"""A length in metres as text in millimetres, to the digits of the grid."""


def verdict_line(design: Design) -> str:
    """The outcome in one sentence."""
    missed = len(design.verdict.missed)
    if not missed:
        return "Every requirement is met by the predicted response."
    return (
        f"{missed} of {len(design.verdict.judgements)} requirements "
        + ("is" if missed == 1 else "are")
        + " MISSED."
    )


def requirements(design: Design) -> list[str]:
    """Every requirement against the prediction."""
    lines = heading("Requirements against the predicted response (with loss)")
    for judgement in design.verdict.judgements:
        lines += _judgement(judgement)
    return lines


def _judgement(judgement: Judgement) -> list[str]:
    margin = f"{'margin' if judgement.met else 'short by'} {_amount(judgement, judgement.margin)}"
    return [
        *paragraph(
            f"{'pass' if judgement.met else 'FAIL'}  {judgement.requirement} "
            f"{judgement.asked:g} {judgement.unit}",
            hanging="      ",
        ),
        f"      predicted {_amount(judgement, judgement.found)}, {margin}",
    ]


def _amount(judgement: Judgement, value: float) -> str:
    """A figure with its unit; one that two decimals would show as nothing keeps more."""
    decimals = 3 if judgement.unit == "mm" else 2
    text = f"{abs(value):.{decimals}f}"
    return f"{f'{abs(value):.1g}' if value and not float(text) else text} {judgement.unit}"


def help_wanted(design: Design) -> list[str]:
    """Of each missed requirement: by how much, what limits it, what would help."""
    if design.verdict.met:
        return []
    lines = heading("What is missed, why, and what would help")
    for judgement in design.verdict.missed:
        lines += paragraph(f"{judgement.key}: missed by {_amount(judgement, judgement.margin)}.")
        lines += paragraph(f"limited by: {judgement.limit}", "  ", "    ")
        lines += paragraph(f"would help: {judgement.remedy}", "  ", "    ")
    return lines


def filter_values(design: Design) -> list[str]:
    """Band, order, prototype, couplings."""
    band, margin, wanted = design.spec.passband, design.spec.margin, design.couplings
    edges = "ripple level" if band.shape == "chebyshev" else "3.01 dB points"
    shape = band.shape.capitalize() + (
        "" if band.return_loss is None else f", return loss {band.return_loss:.4g} dB"
    )
    rows = [
        ("pass band", f"{show(band.lower, 'frequency', 6)} to {show(band.upper, 'frequency', 6)} ({edges})"),
        (
            "centre, bandwidth",
            f"{show(band.centre, 'frequency', 5)}, {show(band.bandwidth, 'frequency')} "
            f"({100 * band.fractional_bandwidth:.2f} %)",
        ),
        ("response", shape),
    ]
    if margin.return_loss or margin.bandwidth:
        rows.append(
            (
                "sized with margin",
                f"{margin.return_loss:g} dB deeper, {show(margin.bandwidth, 'frequency')} wider",
            )
        )
    rows += [
        ("order", str(design.comb.order)),
        ("g0 to g(N+1)", "  ".join(f"{g:.4f}" for g in design.sizing.g)),
        ("coupling k", "  ".join(f"{k:.5f}" for k in wanted.k)),
        ("external Q, in and out", f"{wanted.external_q_in:.3f}  {wanted.external_q_out:.3f}"),
    ]
    return [*heading("Filter"), *figures(rows)]


def dimensions(design: Design) -> list[str]:
    """Every dimension of the resonators, feeds and loads."""
    comb, step = design.comb, _decimals(design)

    def mm(value: float) -> str:
        return f"{value * 1e3:.{step}f}"

    rows = []
    gaps = [*(mm(gap) for gap in comb.gaps), ""]
    for number, (resonator, gap) in enumerate(zip(comb.resonators, gaps, strict=True), start=1):
        rows.append((f"R{number}", mm(resonator.length), mm(resonator.width), mm(resonator.x), gap))
    lines = [
        *heading("Dimensions (finished copper, millimetres)"),
        *table(("", "length", "width", "centre x", "gap to next"), rows),
    ]
    lines += paragraph("Lengths count from the axis of the shorting vias to the open end.")
    lines.append("")
    return lines + figures(
        [
            *_shorts(comb.resonators[0], mm),
            *_feeds(comb, mm),
            *_load(design, comb.resonators[0], mm),
            ("electrical length", show(design.sizing.electrical_length, "angle", 3)),
        ]
    )


def _shorts(resonator: Resonator, mm: Show) -> Iterator[tuple[str, str]]:
    short = resonator.short
    pitch = f", pitch {mm(short.pitch)} mm" if short.count > 1 else ""
    yield (
        "shorting vias",
        (
            f"{short.count} at each line{pitch}, pads {mm(short.pad)} mm; holes {mm(short.finished)} mm "
            f"finished, {mm(short.drill)} mm tool"
        ),
    )
    if len(resonator.segments) > 1:
        pieces = "; ".join(f"{mm(s.length)} mm long, {mm(s.width)} mm wide" for s in resonator.segments)
        yield "pieces of a line, upward", f"R1: {pieces}"


def _feeds(comb: Comb, mm: Show) -> Iterator[tuple[str, str]]:
    feed = comb.feeds[0]
    yield "tap above the vias", f"{mm(feed.tap)} mm"
    yield (
        "feeds",
        f"{mm(feed.width)} mm wide, {show(feed.impedance, 'resistance')}, "
        f"{mm(comb.feed_length(feed))} mm long",
    )


def _load(design: Design, resonator: Resonator, mm: Show) -> Iterator[tuple[str, str]]:
    chip = resonator.load
    if chip is None:
        yield "load", "printed plate: the last piece of each line"
        return
    yield "loading capacitors", _chip(design.comb, chip)
    yield (
        "",
        f"series resistance {chip.resistance:.3g} ohm, residual inductance {chip.inductance * 1e9:.3g} nH",
    )
    yield "lands", f"{mm(chip.land_length)} x {mm(chip.land_width)} mm, {mm(chip.land_gap)} mm apart"
    yield (
        "ground pads",
        (f"{mm(chip.pad_width)} x {mm(chip.pad_length)} mm, each with {chip.vias.count} vias"),
    )


def _chip(comb: Comb, chip: ChipLoad) -> str:
    last = f"C{comb.order}"
    tolerance = f" +/-{show(chip.tolerance, 'capacitance', 3)}" if chip.tolerance else ""
    return f"C1 to {last}: {show(chip.capacitance, 'capacitance', 6)}{tolerance}, case {chip.case}"


def board(design: Design) -> list[str]:
    """Size of the board and what surrounds the comb."""
    comb, art = design.comb, design.artwork
    rows = [
        (
            "size",
            f"{comb.width * 1e3:.3f} x {comb.height * 1e3:.3f} mm, grid {design.spec.board.grid * 1e6:g} um",
        ),
        ("shop", f"{design.spec.board.shop.name} ({design.spec.board.shop.description})"),
        (
            "ports",
            f"left and right edge, {(comb.short_line + comb.feeds[0].tap) * 1e3:.3f} mm above the lower edge",
        ),
        (
            "ground fill kept off",
            f"resonators {comb.ground_clearance * 1e3:.3f} mm, feeds {comb.feed_clearance * 1e3:.3f} mm",
        ),
        (
            "cover",
            "none" if comb.stack.cover is None else f"{comb.stack.cover * 1e3:.3f} mm above the dielectric",
        ),
    ]
    if comb.side_walls:
        rows.append(("side walls at x", " and ".join(f"{x * 1e3:.3f}" for x in comb.side_walls) + " mm"))
    if art.left_out:
        rows.append(("no room on the board for", ", ".join(art.left_out)))
    return [*heading("Board"), *figures(rows)]


def material(design: Design) -> list[str]:
    """The figures of laminate and copper that the model used."""
    construction, stack = design.spec.construction, design.comb.stack
    laminate, copper = construction.laminate, construction.copper
    stocked = [t for t in laminate.thicknesses if abs(t.nominal - stack.height) < 1e-9]
    tolerance = f" +/-{stocked[0].tolerance * 1e3:.3f}" if stocked else ""
    rows = [
        ("laminate", laminate.name),
        (
            "permittivity (design)",
            f"{stack.eps_r:g}, at {show(laminate.reference_frequency, 'frequency')} "
            f"(process value {laminate.eps_r_process:g} +/-{laminate.eps_r_tolerance:g})",
        ),
        ("loss tangent", f"{stack.tan_delta:g}"),
        ("thickness", f"{stack.height * 1e3:.3f}{tolerance} mm"),
        (
            "copper",
            f"base foil {copper.base * 1e6:g} um + plating {construction.plating * 1e6:g} um = "
            f"{stack.conductor * 1e6:g} um finished",
        ),
        ("", f"{stack.conductivity / 1e6:g} MS/m, roughness {stack.roughness * 1e6:g} um rms"),
    ]
    return [*heading("Material, as the model used it"), *figures(rows)]


def predicted(design: Design) -> list[str]:
    """Bands, unloaded Q, spurious response."""
    found, band = design.verdict.performance, design.spec.passband
    rows = [
        (
            "3 dB bandwidth",
            f"{show(found.bandwidth_3db, 'frequency')}: {show(found.lower_3db, 'frequency', 5)} to "
            f"{show(found.upper_3db, 'frequency', 5)}",
        ),
    ]
    if found.lower_ripple is not None and found.upper_ripple is not None:
        width = show(found.upper_ripple - found.lower_ripple, "frequency")
        rows.append(
            (
                "ripple bandwidth, lossless",
                f"{width}: {show(found.lower_ripple, 'frequency', 5)} to "
                f"{show(found.upper_ripple, 'frequency', 5)}",
            )
        )
    rows += [
        (
            "return loss in the band",
            f"{found.return_loss:.2f} dB ({found.lossless_return_loss:.2f} dB lossless)",
        ),
        ("unloaded Q", "  ".join(f"{q:.0f}" for q in found.unloaded_q)),
        (
            "first spurious pass band",
            f"near {show(found.spurious.frequency, 'frequency', 3)}, "
            f"{found.spurious.frequency / band.centre:.2f} times the centre; cause: "
            f"{_CAUSES.get(found.spurious.cause, found.spurious.cause)}",
        ),
    ]
    if found.capacitor_resonance is not None:
        rows.append(
            ("mounted self-resonance", f"{show(found.capacitor_resonance, 'frequency', 3)} (capacitors)")
        )
    return [*heading("Predicted figures"), *figures(rows)]


_CAUSES = {
    "line": "the next resonance of the loaded lines",
    "capacitor": "self-resonance of the mounted capacitors",
    "box": "the lowest mode of the covered box",
}


def losses(design: Design) -> list[str]:
    """Insertion loss and what each mechanism alone adds."""
    found = design.verdict.performance
    worse = "lower" if found.lower_edge_loss > found.upper_edge_loss else "upper"
    rows = [
        (cause, f"{found.midband_split[cause]:.2f}", f"{found.edge_split[cause]:.2f}")
        for cause in found.midband_split
    ]
    rows.append(
        ("total", f"{found.midband_loss:.2f}", f"{max(found.lower_edge_loss, found.upper_edge_loss):.2f}")
    )
    lines = [*heading("Insertion loss (dB)"), *table(("", "midband", f"{worse} edge"), rows)]
    return lines + paragraph(
        f"Lower edge {found.lower_edge_loss:.2f} dB, upper edge {found.upper_edge_loss:.2f} dB, worst "
        f"in the band {found.worst_loss:.2f} dB. Each row is what that cause alone adds; "
        "the total also holds mismatch. Radiation is not in the model."
    )


def choices(design: Design) -> list[str]:
    """Automatic choices with their reasons."""
    if not design.notes:
        return []
    return [*heading("Automatic choices"), *bullets(f"{n.key} = {n.value}: {n.reason}" for n in design.notes)]


def defaults(design: Design) -> list[str]:
    """Keys that the specification leaves out."""
    if not design.spec.defaults:
        return []
    return [
        *heading("Defaults used (keys the specification leaves out)"),
        *(line for text in design.spec.defaults for line in paragraph(text, "  ", "    ")),
    ]


def overrides(design: Design) -> list[str]:
    """Values given for this run."""
    if not design.spec.overrides:
        return []
    return [
        *heading("Overrides for this run (--set)"),
        *(line for text in design.spec.overrides for line in paragraph(text, "  ", "    ")),
    ]


def warnings(design: Design) -> list[str]:
    """What is near a limit."""
    if not design.warnings:
        return []
    return [*heading("Warnings"), *bullets(design.warnings)]


def _decimals(design: Design) -> int:
    """Digits of a length in millimetres that show the grid."""
    return max(3, math.ceil(-math.log10(design.spec.board.grid * 1e3) - 1e-9))
