"""Picture of the response: the wide view with what is required, and the pass band close up, as SVG."""

from __future__ import annotations

import io
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any
from xml.sax.saxutils import escape

import numpy as np
from numpy.typing import NDArray

from layoutgen.design import Design
from layoutgen.report.sweep import Sweep

__all__ = ["response_svg", "write"]

Floats = NDArray[np.float64]

# Blue, vermilion and grey stay apart for every common kind of colour vision.
TRANSMISSION, REFLECTION, IDEAL, FORBIDDEN = "#0b5fa5", "#d1490c", "#6d7783", "#8a94a0"
INK, GRID = "#1d2733", "#d9dee4"
SIZE_IN = (9.6, 8.6)
GHZ = 1e9


def write(design: Design, sweep: Sweep, path: Path) -> None:
    """Write the picture of a response as SVG.

    Parameters
    ----------
    design : Design
        What was asked and what came of it.
    sweep : Sweep
        Its responses.
    path : Path
        File to be made or replaced.
    """
    path.write_bytes(response_svg(design, sweep).encode("utf-8"))


def response_svg(design: Design, sweep: Sweep) -> str:
    """SVG text of the picture; the same for the same responses, whatever the machine's settings."""
    with _fixed_settings():
        from matplotlib.backends.backend_svg import FigureCanvasSVG
        from matplotlib.figure import Figure

        figure = Figure(figsize=SIZE_IN, facecolor="white")
        FigureCanvasSVG(figure)
        part = design.spec.part
        figure.text(
            0.075,
            0.972,
            _plain(f"{part.number} rev {part.revision} - {part.title}"),
            fontsize=13,
            fontweight="bold",
            color=INK,
            va="center",
        )
        figure.text(0.075, 0.946, _subtitle(design), fontsize=9, color=IDEAL, va="center")
        wide, close, match = (
            figure.add_axes(box)
            for box in ((0.075, 0.52, 0.90, 0.40), (0.075, 0.07, 0.41, 0.34), (0.565, 0.07, 0.41, 0.34))
        )
        _wide(wide, design, sweep)
        _transmission(close, design, sweep)
        _reflection(match, design, sweep)
        buffer = io.BytesIO()
        figure.savefig(buffer, format="svg", metadata={"Date": None, "Creator": None})
    return _titled(buffer.getvalue().decode("utf-8"), design)


@contextmanager
def _fixed_settings() -> Iterator[None]:
    """The plotting library's own settings, put back afterwards, and identifiers that do not change."""
    import matplotlib

    with matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update(
            {
                "svg.hashsalt": "layoutgen",
                "svg.fonttype": "none",
                "font.size": 9,
                "axes.edgecolor": INK,
                "axes.labelcolor": INK,
                "xtick.color": INK,
                "ytick.color": INK,
                "text.parse_math": False,
                "font.sans-serif": ["DejaVu Sans", "Verdana", "Helvetica", "Arial"],
                "path.simplify_threshold": 0.2,
            }
        )
        yield


def _subtitle(design: Design) -> str:
    found, verdict = design.verdict.performance, design.verdict
    outcome = (
        "all requirements met"
        if verdict.met
        else (f"{len(verdict.missed)} of {len(verdict.judgements)} requirements missed")
    )
    return (
        f"predicted: {found.midband_loss:.2f} dB at midband, {found.return_loss:.1f} dB return loss, "
        f"3 dB bandwidth {found.bandwidth_3db / 1e6:.1f} MHz; {outcome}"
    )


def _wide(axes: Any, design: Design, sweep: Sweep) -> None:
    f, spec = sweep.frequency / GHZ, design.spec
    floor = -10 * np.ceil((max([60.0, *(s.rejection for s in spec.stopbands)]) + 15) / 10)
    for number, stopband in enumerate(spec.stopbands):
        _forbid(
            axes,
            stopband.lower,
            stopband.upper,
            -stopband.rejection,
            5.0,
            "required" if number == 0 else None,
        )
    if spec.passband.insertion_loss is not None and spec.passband.shape == "chebyshev":
        _forbid(
            axes,
            spec.passband.lower,
            spec.passband.upper,
            floor,
            -spec.passband.insertion_loss,
            None if spec.stopbands else "required",
        )
    axes.plot(
        f,
        _level(sweep.ideal[:, 1, 0]),
        color=IDEAL,
        linewidth=0.8,
        linestyle=(0, (5, 2)),
        label="|S21|, ideal lossless ladder",
    )
    axes.plot(f, _level(sweep.predicted[:, 0, 0]), color=REFLECTION, linewidth=0.9, label="|S11|, predicted")
    axes.plot(
        f, _level(sweep.predicted[:, 1, 0]), color=TRANSMISSION, linewidth=1.8, label="|S21|, predicted"
    )
    spurious = design.verdict.performance.spurious
    if f[0] < spurious.frequency / GHZ < f[-1]:
        axes.annotate(
            f"first spurious\n({spurious.cause})",
            (spurious.frequency / GHZ, 0),
            (0, -14),
            textcoords="offset points",
            ha="center",
            va="top",
            color=INK,
            fontsize=8,
        )
        axes.axvline(spurious.frequency / GHZ, ymin=0.93, color=INK, linewidth=0.8)
    _dress(axes, f[0], f[-1], floor, 5.0)
    axes.set_ylabel("magnitude (dB)")
    axes.set_xlabel("frequency (GHz)")
    _legend(axes, loc="lower right")


def _transmission(axes: Any, design: Design, sweep: Sweep) -> None:
    band, found = design.spec.passband, design.verdict.performance
    low, high = band.lower - 0.5 * band.bandwidth, band.upper + 0.5 * band.bandwidth
    near = (sweep.frequency >= low) & (sweep.frequency <= high)
    f = sweep.frequency[near] / GHZ
    depth = max(3.0, 1.6 * found.worst_loss, 1.4 * (band.insertion_loss or 0.0))
    floor = -float(np.ceil(depth))
    if band.insertion_loss is not None:
        where = (
            (band.lower, band.upper)
            if band.shape == "chebyshev"
            else (band.centre - 0.02 * band.bandwidth, band.centre + 0.02 * band.bandwidth)
        )
        _forbid(axes, *where, floor, -band.insertion_loss, f"more than {band.insertion_loss:g} dB loss")
    _edges(axes, design)
    axes.plot(
        f,
        _level(sweep.ideal[near, 1, 0]),
        color=IDEAL,
        linewidth=0.8,
        linestyle=(0, (5, 2)),
        label="ideal lossless ladder",
    )
    axes.plot(
        f, _level(sweep.lossless[near, 1, 0]), color=TRANSMISSION, linewidth=0.8, label="comb without loss"
    )
    axes.plot(f, _level(sweep.predicted[near, 1, 0]), color=TRANSMISSION, linewidth=1.8, label="predicted")
    _dress(axes, low / GHZ, high / GHZ, floor, 0.04 * -floor)
    axes.set_title("pass band: |S21| (dB)", loc="left", fontsize=10, color=INK)
    axes.set_xlabel("frequency (GHz)")
    _legend(axes, loc="lower center")


def _reflection(axes: Any, design: Design, sweep: Sweep) -> None:
    band = design.spec.passband
    low, high = band.lower - 0.5 * band.bandwidth, band.upper + 0.5 * band.bandwidth
    near = (sweep.frequency >= low) & (sweep.frequency <= high)
    f = sweep.frequency[near] / GHZ
    floor = -float(10 * np.ceil((max(20.0, band.return_loss or 0.0) + 15) / 10))
    if band.return_loss is not None:
        _forbid(axes, band.lower, band.upper, -band.return_loss, 0.1 * -floor, None)
        axes.text(
            band.centre / GHZ,
            -0.5 * band.return_loss,
            f"less than {band.return_loss:.4g} dB\nreturn loss",
            ha="center",
            va="center",
            fontsize=8,
            color=INK,
        )
    _edges(axes, design)
    axes.plot(f, _level(sweep.ideal[near, 0, 0]), color=IDEAL, linewidth=0.8, linestyle=(0, (5, 2)))
    axes.plot(f, _level(sweep.lossless[near, 0, 0]), color=REFLECTION, linewidth=0.8)
    axes.plot(f, _level(sweep.predicted[near, 0, 0]), color=REFLECTION, linewidth=1.8)
    _dress(axes, low / GHZ, high / GHZ, floor, 0.04 * -floor)
    axes.set_title("pass band: |S11| (dB)", loc="left", fontsize=10, color=INK)
    axes.set_xlabel("frequency (GHz)")


def _forbid(axes: Any, lower: float, upper: float, bottom: float, top: float, label: str | None) -> None:
    """Shade where the trace must not be, with a firm line on the limit."""
    axes.fill_between(
        [lower / GHZ, upper / GHZ],
        bottom,
        top,
        facecolor=FORBIDDEN,
        alpha=0.28,
        edgecolor="none",
        label="not allowed" if label == "required" else label,
        zorder=1,
    )
    limit = bottom if top > 0 else top
    axes.plot(
        [lower / GHZ, upper / GHZ],
        [limit, limit],
        color=INK,
        linewidth=1.1,
        solid_capstyle="butt",
        zorder=1.5,
    )


def _edges(axes: Any, design: Design) -> None:
    for edge in (design.spec.passband.lower, design.spec.passband.upper):
        axes.axvline(edge / GHZ, color=INK, linewidth=0.6, linestyle=(0, (1, 2)), zorder=1.2)


def _dress(axes: Any, left: float, right: float, bottom: float, top: float) -> None:
    axes.set_xlim(left, right)
    axes.set_ylim(bottom, top)
    axes.grid(color=GRID, linewidth=0.6)
    axes.set_axisbelow(True)
    axes.tick_params(length=3)
    axes.locator_params(axis="x", nbins=7)
    axes.ticklabel_format(useOffset=False)
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)


def _legend(axes: Any, *, loc: str) -> None:
    axes.legend(
        loc=loc, fontsize=8, frameon=True, framealpha=0.92, edgecolor=GRID, labelcolor=INK, borderpad=0.5
    )


def _level(amplitude: NDArray[np.complex128]) -> Floats:
    """Magnitude, no lower than 160 dB down. [dB]"""
    result: Floats = 20 * np.log10(np.maximum(np.abs(amplitude), 1e-8))
    return result


def _plain(text: str, most: int = 80) -> str:
    return text if len(text) <= most else text[: most - 3].rstrip() + "..."


def _titled(svg: str, design: Design) -> str:
    """Title and description for readers that cannot see the picture, as the first children of the root."""
    band, found = design.spec.passband, design.verdict.performance
    words = (
        "Magnitude of S21 and S11 over frequency. "
        f"Pass band {band.lower / GHZ:.6g} to {band.upper / GHZ:.6g} GHz, "
        f"predicted loss {found.midband_loss:.2f} dB at midband and {found.worst_loss:.2f} dB at worst, "
        f"return loss {found.return_loss:.2f} dB, "
        f"first spurious response near {found.spurious.frequency / GHZ:.3g} GHz."
    )
    start = svg.index("<svg")
    end = svg.index(">", start)
    return (
        f'{svg[:end]} role="img" aria-labelledby="title desc">\n'
        f'<title id="title">{escape(f"{design.spec.part.number}, predicted response")}</title>\n'
        f'<desc id="desc">{escape(words)}</desc>{svg[end + 1 :]}'
    )
