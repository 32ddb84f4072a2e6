"""What a construction cannot do (refused) and what is near a limit (warned of), each with the figure."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from layoutgen.circuit import Circuit, SectionSolver
from layoutgen.comb import ChipLoad, Comb
from layoutgen.constants import SPEED_OF_LIGHT
from layoutgen.errors import PhysicalRefusal
from layoutgen.sizing.choices import Candidate
from layoutgen.sizing.guess import GuessError, PairCurve
from layoutgen.sizing.template import Choices
from layoutgen.spec import Spec

__all__ = ["check_choices", "check_comb", "gap_refusal", "length_refusal"]


_MORE_COUPLING = (
    "narrow the band, take a thicker laminate, a shorter construction.electrical_length, "
    "chips instead of plates or a shop with finer gaps"
)


@dataclass(frozen=True, slots=True)
class _Limit:
    """A figure against a limit that refuses and one that warns."""

    key: str
    figure: float
    refuse: float
    warn: float
    text: str
    remedy: str


def check_choices(spec: Spec, candidate: Candidate) -> list[str]:
    """Warnings about a set of choices.

    Raises
    ------
    PhysicalRefusal
        If the construction cannot be built so.
    """
    choices = candidate.choices
    _shop_limits(spec, choices)
    warnings = []
    stack = choices.stack
    if stack.cover is None:
        ratio = stack.height * spec.passband.upper / SPEED_OF_LIGHT
        warnings += _apply(
            spec,
            _Limit(
                "construction.cover",
                ratio,
                0.01,
                0.008,
                f"an open board of {stack.height * 1e3:.3g} mm is {ratio:.4f} free-space wavelengths thick; "
                "above 0.01 it radiates too much",
                "give a cover height, or a thinner laminate",
            ),
        )
    if not choices.clearance >= 5 * stack.height - 1e-9:
        raise spec.refusal(
            "board.clearance",
            f"must be at least 5 laminate thicknesses, {5e3 * stack.height:.3g} mm: "
            "closer ground copper is not in the model",
        )
    fraction = spec.passband.fractional_bandwidth
    if not 0.008 <= fraction <= 0.25:
        raise spec.refusal(
            "passband.upper",
            f"a bandwidth of {fraction:.1%} is outside what this construction and its "
            "model are good for, 0.8 to 25 %",
        )
    if fraction < 0.03:
        warnings.append(
            f"the bandwidth of {fraction:.1%} is narrow for this construction (3 to 20 % is usual): "
            "loss and tolerances will show"
        )
    if fraction > 0.20:
        warnings.append(f"the bandwidth of {fraction:.1%} is wide for this construction (3 to 20 % is usual)")
    return warnings


def _shop_limits(spec: Spec, choices: Choices) -> None:
    shop, stack = spec.board.shop, choices.stack
    least = shop.min_line(stack.conductor)
    for key, width in (
        ("construction.line_width", choices.line_width),
        ("passband.impedance", choices.feed_width),
    ):
        if not width >= least - 1e-9:
            raise spec.refusal(
                key,
                f"gives a line of {width * 1e3:.3f} mm; the shop ({shop.name}) etches no line below "
                f"{least * 1e3:.3g} mm in copper of {stack.conductor * 1e6:.0f} um",
            )
    if isinstance(choices.load, ChipLoad) and not choices.line_width >= choices.load.land_width - 1e-9:
        raise spec.refusal(
            "construction.line_width",
            f"must be at least the chip's land, "
            f"{choices.load.land_width * 1e3:.3g} mm; or choose a smaller load.case",
        )
    if not choices.short.finished >= shop.min_drill - 1e-9:
        raise spec.refusal(
            "short.drill", f"the shop ({shop.name}) makes no plated hole below {shop.min_drill * 1e3:.3g} mm"
        )
    aspect = stack.height / choices.short.drill
    if not aspect <= shop.aspect_ratio:
        raise spec.refusal(
            "short.drill",
            f"gives an aspect ratio of {aspect:.1f}; the shop ({shop.name}) plates up to "
            f"{shop.aspect_ratio:g}; use a larger drill or a thinner laminate",
        )


def check_comb(spec: Spec, comb: Comb, solver: SectionSolver, least_gap: float) -> list[str]:
    """Warnings about a sized comb.

    Raises
    ------
    PhysicalRefusal
        If a dimension is one the construction or its model cannot have.
    """
    stack, warnings = comb.stack, []
    shortest = min(resonator.length for resonator in comb.resonators)
    if not shortest >= 5 * stack.height:
        raise spec.refusal(
            "construction.electrical_length",
            f"gives lines of {shortest * 1e3:.2f} mm, shorter than 5 laminate thicknesses "
            f"({5e3 * stack.height:.2f} mm), where the line model ends; ask for a longer line, "
            "a smaller load.value or a thinner laminate",
            got=spec.text("construction.electrical_length") or "auto",
        )
    gap = min(comb.gaps)
    if not gap >= least_gap - 1e-9:
        raise _small_gap(spec, gap, least_gap)
    warnings += _capacitor_warnings(spec, comb, solver)
    warnings += _tap_warnings(spec, comb)
    return warnings


def _capacitor_warnings(spec: Spec, comb: Comb, solver: SectionSolver) -> list[str]:
    resonance = Circuit(comb, solver).capacitor_resonance()
    if resonance is None:
        return []
    ratio = spec.passband.upper / resonance
    return _apply(
        spec,
        _Limit(
            "load.value",
            ratio,
            0.65,
            0.5,
            f"the pass band reaches {ratio:.2f} of the mounted capacitor's self-resonance, "
            f"{resonance / 1e9:.2f} GHz",
            "choose a smaller value, a smaller load.case or a longer construction.electrical_length",
        ),
    )


def _tap_warnings(spec: Spec, comb: Comb) -> list[str]:
    feed = comb.feeds[0]
    resonator = comb.resonators[feed.resonator]
    beyond_pad = feed.tap - feed.width / 2 - resonator.overhang
    where = f"the tap sits {feed.tap * 1e3:.2f} mm above the vias of a {resonator.length * 1e3:.2f} mm line"
    if not beyond_pad >= 0:
        raise spec.refusal(
            "passband.upper",
            f"{where}: its {feed.width * 1e3:.2f} mm feed runs into the via pad; the bandwidth is too "
            "narrow for a tap here: widen it, thin the laminate (narrower feed) or lower the line's "
            "impedance",
        )
    top = resonator.load_position - (resonator.load.land_length / 2 if resonator.load else 0.0)
    if not feed.tap + feed.width / 2 <= top:
        raise spec.refusal(
            "passband.upper",
            f"{where}: the feed runs into the load; the bandwidth is too wide for a tap here: use "
            "a narrower line (construction.line_width) or a longer one (construction.electrical_length)",
        )
    share = feed.tap / resonator.length
    if beyond_pad < feed.width / 2:
        return [f"{where}, within half a feed width of the via pad: the tap model is at its limit"]
    if share > 0.6:
        return [f"{where}, beyond 0.6 of the line, where external Q hardly changes with the tap"]
    return []


def gap_refusal(
    spec: Spec, error: GuessError, curve: PairCurve | None, candidate: Candidate
) -> PhysicalRefusal:
    """Refusal of a coupling or tap that the construction does not reach."""
    if error.limit == "gap" and curve is not None and error.figure > error.bound:
        return spec.refusal(
            "passband.upper",
            f"the first resonators need a coupling of {error.figure:.3f}; the least gap "
            f"({candidate.least_gap * 1e3:.3g} mm: shop and pads) gives {error.bound:.3f}: {_MORE_COUPLING}",
        )
    return spec.refusal(
        "passband.upper",
        f"{error}; change the bandwidth, construction.line_width or construction.electrical_length",
    )


def length_refusal(spec: Spec, error: GuessError) -> PhysicalRefusal:
    """Refusal of a load that the line cannot be cut for."""
    key = "load.value" if spec.load.value is not None else "construction.electrical_length"
    return spec.refusal(
        key,
        f"{error}; take a smaller load.value, a thinner laminate or a longer construction.electrical_length",
        got=spec.text(key) or "auto",
    )


def _small_gap(spec: Spec, gap: float, least: float) -> PhysicalRefusal:
    return spec.refusal(
        "passband.upper",
        f"needs a gap of {gap * 1e3:.3f} mm; the least is {least * 1e3:.3g} mm (shop and pads): "
        f"{_MORE_COUPLING}",
    )


def _apply(spec: Spec, limit: _Limit) -> list[str]:
    if not np.isfinite(limit.figure) or limit.figure > limit.refuse:
        raise spec.refusal(limit.key, f"{limit.text}: {limit.remedy}", got=spec.text(limit.key) or "auto")
    return [f"{limit.text}; {limit.remedy}"] if limit.figure > limit.warn else []
