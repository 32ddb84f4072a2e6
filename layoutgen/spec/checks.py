"""What holds between the keys of a specification; each fault goes to the source it was found in.

Values that were faulty by themselves are absent here, and a relation they take part in is not judged.
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

from layoutgen.library import Source
from layoutgen.spec.keys import CHIP_KEYS, PART
from layoutgen.spec.series import stocked
from layoutgen.units import show

__all__ = [
    "check_board",
    "check_construction",
    "check_load",
    "check_part",
    "check_passband",
    "check_short",
    "check_stopbands",
]

Values = dict[str, Any]

DEFAULT_RETURN_LOSS = 20.0  # dB
DEFAULT_ESR = 0.15  # ohm
NARROWEST, WIDEST = 0.005, 0.30  # fractional bandwidth


def check_part(source: Source, part: Values, path: Path) -> None:
    """Take the part number from the file's name where there is none."""
    if part.get("number", "") is None:
        number = next(key for key in PART.keys if key.name == "number")
        try:
            part["number"] = number.parse(path.stem)
        except ValueError as error:
            remedy = f'is missing, and the file\'s name "{path.stem}" cannot stand for it: {error}'
            source.fault("part.number", remedy)
        else:
            source.defaults.insert(0, f"part.number = {path.stem}")


def check_passband(source: Source, band: Values, stopbands: int) -> None:
    """Edges, bandwidth, ripple and order; sets ``return_loss`` and drops ``ripple``."""
    lower, upper = band.get("lower"), band.get("upper")
    edges = ("passband.lower",)
    if lower is not None and upper is not None:
        fraction = (upper - lower) / math.sqrt(lower * upper)
        if not upper > lower:
            source.fault(
                "passband.upper",
                f"must be above passband.lower, {show(lower, 'frequency')}; were the two swapped?",
                blame=edges,
            )
        elif not NARROWEST <= fraction <= WIDEST:
            source.fault(
                "passband.upper",
                f"makes the band {100 * fraction:.3g} % wide; a comb-line filter "
                f"takes {100 * NARROWEST:g} to {100 * WIDEST:g} %",
                blame=edges,
            )
    _check_ripple(source, band)
    if band.get("order", 0) is None and not stopbands:
        source.fault(
            "passband.order",
            "an automatic order needs a stop band to meet; give an order of 2 to 9 or add a [[stopband]]",
        )


def _check_ripple(source: Source, band: Values) -> None:
    asked = [key for key in ("return_loss", "ripple") if source.written(f"passband.{key}") is not None]
    if band.get("shape") == "butterworth":
        for key in asked:
            source.fault(
                f"passband.{key}",
                'does not belong to a Butterworth response; remove it, or write shape = "chebyshev"',
                blame=("passband.shape",),
            )
    elif len(asked) == 2:
        source.fault(
            "passband.ripple",
            "is given as well as return_loss, which says the same; remove one of them",
            blame=("passband.return_loss",),
        )
    elif not asked and band.get("shape"):
        band["return_loss"] = DEFAULT_RETURN_LOSS
        source.defaults.append(f"passband.return_loss = {DEFAULT_RETURN_LOSS:g} dB")
    ripple = band.pop("ripple", None)
    if ripple is not None:
        band["return_loss"] = -10 * math.log10(-math.expm1(-ripple * math.log(10) / 10))


def check_margin(source: Source, margin: Values, band: Values) -> None:
    """No deeper return loss for a flat response, and a widened band that still has a lower edge."""
    if band.get("shape") == "butterworth" and margin.get("return_loss"):
        source.fault("margin.return_loss", "does not belong to a Butterworth response; remove it",
                     blame=("passband.shape",))
    lower, widening = band.get("lower"), margin.get("bandwidth")
    if lower is not None and widening is not None and widening > lower / 2:
        source.fault("margin.bandwidth", f"is more than half of passband.lower, {show(lower, 'frequency')}",
                     blame=("passband.lower",))


def check_stopbands(source: Source, stopbands: list[Values], band: Values) -> None:
    """Ends in order, and clear of the pass band."""
    edges = ("passband.lower", "passband.upper")
    lower, upper = band.get("lower"), band.get("upper")
    for number, stop in enumerate(stopbands, start=1):
        at = f"stopband.{number}"
        ends = (f"{at}.from", f"{at}.to")
        start, end = stop.get("lower"), stop.get("upper")
        if start is None or end is None:
            continue
        if not end > start:
            source.fault(
                ends[1],
                f"must be above {ends[0]}, {show(start, 'frequency')}; were the two swapped?",
                blame=ends[:1],
            )
        elif lower is not None and upper is not None and lower < upper and not (end < lower or start > upper):
            key = ends[0] if start >= lower else ends[1]
            remedy = (
                "overlaps the pass band; the stop band must end below "
                f"{show(lower, 'frequency')} or begin above {show(upper, 'frequency')}"
            )
            source.fault(key, remedy, blame=(*ends, *edges))


def check_construction(source: Source, construction: Values) -> None:
    """Thickness and copper that the laminate is stocked in; sets the stocked items in their place."""
    laminate = construction.get("laminate")
    if laminate is not None:
        _pick(source, construction, "thickness", "nominal", laminate.thicknesses)
        _pick(source, construction, "copper", "base", laminate.coppers)


def _pick(source: Source, construction: Values, key: str, size: str, stock: tuple[Any, ...]) -> None:
    """Replace a length by the stocked item of that length, to within 1 um."""
    wanted, name = construction.get(key), construction["laminate"].name
    if wanted is None:
        return
    item = min(stock, key=lambda item: abs(float(getattr(item, size)) - wanted))
    if abs(getattr(item, size) - wanted) <= 1.001e-6:
        construction[key] = item
    else:
        unit, factor = ("mm", 1e3) if key == "thickness" else ("um", 1e6)
        listed = ", ".join(f"{getattr(item, size) * factor:.4g}" for item in stock)
        source.fault(
            f"construction.{key}",
            f"is not stocked; {name} comes in {listed} {unit}",
            blame=("construction.substrate",),
        )


def check_load(source: Source, load: Values) -> None:
    """Keys that belong to the kind of load, and one statement of loss; sets series and its name."""
    if load.get("kind") == "plate":
        _check_plate(source, load)
        return
    given = {key: source.written(f"load.{key}") is not None for key in ("esr", "q", "q_frequency")}
    if given["esr"] and given["q"]:
        source.fault(
            "load.q", "is given as well as esr, which says the same; remove one of them", blame=("load.esr",)
        )
    if given["q"] and not given["q_frequency"]:
        source.fault("load.q_frequency", "is missing; say at which frequency q was taken", blame=("load.q",))
    if given["q_frequency"] and not given["q"]:
        source.fault("load.q_frequency", "belongs to q, which is not given; remove it or give q")
    if not any(given.values()):
        load["esr"] = DEFAULT_ESR
        source.defaults.append(f"load.esr = {DEFAULT_ESR:g} ohm")
    series = load.get("series")
    if isinstance(series, str):
        load["series_name"], load["series"] = series, stocked(series)
    elif series is not None:
        load["series_name"] = "list"


def _check_plate(source: Source, load: Values) -> None:
    for key in CHIP_KEYS:
        if source.written(f"load.{key}") is not None:
            source.fault(
                f"load.{key}",
                'belongs to chip loads; remove it, or write kind = "chip"',
                blame=("load.kind",),
            )
    chip = tuple(f"load.{key} =" for key in CHIP_KEYS)
    source.defaults = [line for line in source.defaults if not line.startswith(chip)]
    load |= dict.fromkeys(("case", "value", "esr", "q", "q_frequency"))
    load |= {"series": (), "series_name": "", "tolerance": 0.0, "inductance": 0.0}


def check_short(source: Source, short: Values) -> None:
    """Holes that do not run into each other."""
    if {"drill", "plating", "pitch"} <= short.keys() and not short["pitch"] > short["drill"] + short[
        "plating"
    ]:
        tool = show(short["drill"] + short["plating"], "length")
        source.fault(
            "short.pitch",
            f"must be above the diameter of the tool, {tool}: drill and plating together",
            blame=("short.drill", "short.plating"),
        )


def check_board(source: Source, board: Values, construction: Values) -> None:
    """Room between the margins, and a grid and a copper thickness that the shop keeps."""
    for key in ("max_width", "max_height"):
        if board.get(key) is not None and "margin" in board and not board[key] > 2 * board["margin"]:
            source.fault(
                f"board.{key}",
                f"must be above twice the margin, {show(2 * board['margin'], 'length')}",
                blame=("board.margin",),
            )
    shop = board.get("shop")
    if shop is None:
        return
    if "grid" in board and not board["grid"] >= shop.grid * (1 - 1e-9):
        source.fault(
            "board.grid",
            f"must be at least {shop.grid * 1e6:.4g} um, the finest that {shop.name} keeps",
            blame=("board.shop",),
        )
    copper, plating = construction.get("copper"), construction.get("plating")
    base = getattr(copper, "base", None)
    if base is not None and plating is not None and base + plating > shop.etching[-1].copper * (1 + 1e-9):
        limit = shop.etching[-1].copper * 1e6
        source.fault(
            "construction.copper",
            f"finishes at {(base + plating) * 1e6:.4g} um with its plating; "
            f"{shop.name} etches at most {limit:.4g} um",
            blame=("construction.plating", "board.shop"),
        )
