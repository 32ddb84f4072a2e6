"""The summary of a package: the plan, the files, what the prediction covers, and what to beware of."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from layoutgen import __version__
from layoutgen.design import Design
from layoutgen.report import plan
from layoutgen.report.text import bullets, figures, heading

__all__ = ["summary_text", "write"]

COVERS = (
    "The response is that of the drawn copper: all couplings of all lines in the quasi-static limit, "
    "finished copper thickness, shorting vias and their mutual inductance, mounted capacitors with pads "
    "and vias, open ends, width steps, taps, feeds up to the board edge; losses of conductor (with "
    "roughness), dielectric, capacitors and vias.",
    "Not in it: radiation, surface waves, connectors, solder mask and finish, tolerances, temperature.",
    "The artwork is at finished size: the shop adds its own etch compensation.",
)

CAUTIONS = (
    "Transmitting needs a licence in most bands and places, and people near an antenna are exposed to its "
    "field: keep to the limits that hold where you are. A filter does not make a transmitter lawful.",
    "At power, the open ends of the resonators carry a voltage many times that of the ports. Keep "
    "fingers, tools and loose metal away, and check the rating of the capacitors before applying more "
    "than a fraction of a watt.",
    "Solder and flux give off fumes, and drilling or milling laminate makes dust that must not be "
    "breathed: use extraction and eye protection.",
    "Where codes or licensed practice govern the equipment this goes into, they prevail over this sheet. "
    "The figures are predictions: measure a first article before relying on it.",
)


def summary_text(design: Design, files: Mapping[str, str]) -> str:
    """Summary of a design and of its package.

    Parameters
    ----------
    design : Design
    files : mapping of str to str
        Name and purpose of each file.

    Returns
    -------
    str
        In lines of at most 80 columns.
    """
    lines = [*plan.title(design), *plan.body(design)]
    lines += [*heading("What the prediction covers"), *bullets(COVERS)]
    lines += [*heading("Files"), *(figures(list(files.items())) if files else [])]
    lines += [*heading("Cautions"), *bullets(CAUTIONS), "", f"Made by layoutgen {__version__}."]
    return "\n".join(lines) + "\n"


def write(design: Design, path: Path, files: Mapping[str, str]) -> None:
    """Write the summary as UTF-8 text.

    Parameters
    ----------
    design : Design
    path : Path
        File to be made or replaced.
    files : mapping of str to str
        As for `summary_text`.
    """
    path.write_bytes(summary_text(design, files).encode("utf-8"))
