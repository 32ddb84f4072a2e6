"""Picture of the layout: the artwork to scale as SVG, in millimetres, with title, scale bar, names and a key.

Written straight from the polygons: a shape with holes is one path filled by the even-odd rule.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path
from xml.sax.saxutils import escape

from layoutgen.comb import Comb
from layoutgen.design import Design
from layoutgen.geometry import Circle, Item, Layer, Polygon
from layoutgen.units import show

__all__ = ["layout_svg", "write"]

INK, QUIET, PAPER = "#1d2733", "#5b6673", "#ffffff"
BOARD, COPPER, COPPER_EDGE = "#e9e4d6", "#c98a4b", "#8f5a26"
HOLE, UNPLATED, MASK, BODY = "#22303f", "#ffffff", "#1f6f78", "#3b3f8f"

FONT = "font-family=\"'DejaVu Sans', Verdana, Helvetica, Arial, sans-serif\""
WIDEST = 250.0
"""Printed width that the picture keeps below, where a whole scale from 1 : 1 up allows it. [mm]"""

SCALES = (10, 8, 5, 4, 3, 2, 1)
BARS = (50.0, 20.0, 10.0, 5.0, 2.0, 1.0)


@dataclass(frozen=True, slots=True)
class _Look:
    """How the shapes of a layer appear."""

    layer: Layer
    about: str
    style: str


def _looks(pen: float) -> tuple[_Look, ...]:
    line = f'stroke-width="{pen:.3f}"'
    return (
        _Look(Layer.TOP_COPPER, "top copper", f'fill="{COPPER}" stroke="{COPPER_EDGE}" {line}'),
        _Look(Layer.TOP_PASTE, "solder paste", f'fill="#8d98a3" fill-opacity="0.85" stroke="none" {line}'),
        _Look(Layer.PLATED_DRILLS, "plated hole", f'fill="{HOLE}" stroke="#f6efe2" {line}'),
        _Look(Layer.UNPLATED_HOLES, "unplated hole", f'fill="{UNPLATED}" stroke="{INK}" {line}'),
        _Look(
            Layer.TOP_MASK_OPENINGS,
            "solder mask opening",
            f'fill="none" stroke="{MASK}" {line} stroke-dasharray="{4 * pen:.3f} {2.5 * pen:.3f}"',
        ),
        _Look(Layer.TOP_ASSEMBLY, "chip body", f'fill="none" stroke="{BODY}" stroke-width="{1.6 * pen:.3f}"'),
        _Look(Layer.TOP_LEGEND, "legend", f'fill="{INK}" stroke="none"'),
    )


def write(design: Design, path: Path) -> None:
    """Write the picture of a layout as SVG.

    Parameters
    ----------
    design : Design
        Its artwork is drawn.
    path : Path
        File to be made or replaced.
    """
    path.write_bytes(layout_svg(design).encode("utf-8"))


def layout_svg(design: Design) -> str:
    """SVG text of the picture; the user unit is a millimetre of the board."""
    return "\n".join(_Picture(design).lines()) + "\n"


class _Picture:
    """One picture being laid out: the board in the middle, words around it."""

    def __init__(self, design: Design) -> None:
        self.design = design
        art = design.artwork
        self.width, self.height = art.width, art.height
        self.side, self.unit = self._measure()
        self.top, self.bottom = 4.6 * self.unit, 7.2 * self.unit
        self.pen = 0.07 * self.unit

    def _measure(self) -> tuple[float, float]:
        """Margin at the sides and size of the letters, in millimetres of the board."""
        scale = next((s for s in SCALES if s * (self.width + 14.0 * 3.4 / s) <= WIDEST), 1)
        self.scale = scale
        letters = 3.4 / scale  # 3.4 mm high on paper
        words = 46 * 0.55 * letters  # the head may be wider than the board
        return max(5.4 * letters, (words - self.width) / 2), letters

    def lines(self) -> Iterator[str]:
        """The whole file."""
        part = self.design.spec.part
        across, down = self.width + 2 * self.side, self.height + self.top + self.bottom
        yield '<?xml version="1.0" encoding="UTF-8"?>'
        yield (
            f'<svg xmlns="http://www.w3.org/2000/svg" role="img" aria-labelledby="title desc" '
            f'width="{across * self.scale:.2f}mm" height="{down * self.scale:.2f}mm" '
            f'viewBox="{-self.side:.3f} {-self.top:.3f} {across:.3f} {down:.3f}">'
        )
        yield f'<title id="title">{escape(f"{part.number}, layout")}</title>'
        yield f'<desc id="desc">{escape(self._description())}</desc>'
        yield _rectangle(-self.side, -self.top, across, down, f'fill="{PAPER}"')
        yield from self._head()
        yield from self._board()
        yield from self._names()
        yield from self._foot()
        yield "</svg>"

    def _description(self) -> str:
        comb = self.design.comb
        return (
            f"Top view of the board, {self.width:.2f} by {self.height:.2f} mm: {comb.order} resonators side "
            "by side, grounded at their lower ends through plated holes, loaded at their upper ends, tapped "
            "by feed lines from the left and the right edge, surrounded by ground copper."
        )

    def _head(self) -> Iterator[str]:
        part, x = self.design.spec.part, min(0.0, self.width / 2 - 23 * 0.55 * self.unit)
        room = int((self.width + self.side - x) / (0.62 * self.unit))
        name = f"{part.number} rev {part.revision} - {part.title}"
        name = name if len(name) <= room else name[: room - 3].rstrip() + "..."
        yield self._text(x, -3.0 * self.unit, name, bold=True)
        comb = self.design.comb
        yield self._text(
            x,
            -1.5 * self.unit,
            f"{self.width:.2f} x {self.height:.2f} mm, on {comb.stack.height * 1e3:.3f} mm, component side",
            small=True,
        )

    def _board(self) -> Iterator[str]:
        yield f'<g transform="matrix(1 0 0 -1 0 {self.height:.6g})">'  # y upward, as on the board
        yield from self._layer(
            Layer.BOARD_OUTLINE, f'fill="{BOARD}" stroke="{INK}" stroke-width="{1.5 * self.pen:.3f}"'
        )
        for look in _looks(self.pen):
            yield from self._layer(look.layer, look.style)
        yield "</g>"

    def _layer(self, layer: Layer, style: str) -> Iterator[str]:
        items = self.design.artwork.on_layer(layer)
        if items:
            yield f'<g id="{layer.name.lower().replace("_", "-")}" fill-rule="evenodd" {style}>'
            yield from (_shape(item) for item in items)
            yield "</g>"

    def _names(self) -> Iterator[str]:
        comb = self.design.comb
        for number, resonator in enumerate(comb.resonators, start=1):
            size = min(self.unit, 0.5 * resonator.width * 1e3)
            y = self.height - (comb.short_line + 0.62 * resonator.length) * 1e3
            yield (
                f'<text x="{resonator.x * 1e3:.3f}" y="{y:.3f}" {FONT} font-size="{size:.3f}" '
                f'font-weight="bold" fill="{PAPER}" text-anchor="middle">R{number}</text>'
            )
        yield from self._ports(comb)

    def _ports(self, comb: Comb) -> Iterator[str]:
        u = self.unit
        for number, feed in enumerate(comb.feeds, start=1):
            y = self.height - (comb.short_line + feed.tap) * 1e3
            edge, out = (0.0, -1) if feed.side == "left" else (self.width, 1)
            tip, tail = edge + out * 0.3 * u, edge + out * 1.5 * u
            yield (
                f'<path d="M{tip:.3f} {y:.3f}l{out * 0.75 * u:.3f} {-0.42 * u:.3f}v{0.84 * u:.3f}z'
                f"M{tail - out * 0.5 * u:.3f} {y - 0.11 * u:.3f}h{out * 0.9 * u:.3f}v{0.22 * u:.3f}"
                f'h{-out * 0.9 * u:.3f}z" fill="{INK}"/>'
            )
            anchor = "end" if out < 0 else "start"
            yield self._text(edge + out * 0.4 * u, y - 1.9 * u, f"port {number}", small=True, anchor=anchor)
            yield self._text(
                edge + out * 0.4 * u,
                y - 0.8 * u,
                show(feed.impedance, "resistance"),
                small=True,
                anchor=anchor,
            )

    def _foot(self) -> Iterator[str]:
        u, bar = self.unit, next((b for b in BARS if b <= 0.3 * self.width), BARS[-1])
        x = min(0.0, self.width / 2 - 23 * 0.55 * u)
        y = self.height + 1.6 * u
        yield (f'<path d="M{x:.3f} {y:.3f}h{bar / 2:.3f}v{0.4 * u:.3f}h{-bar / 2:.3f}z" fill="{INK}"/>')
        yield _rectangle(x, y, bar, 0.4 * u, f'fill="none" stroke="{INK}" stroke-width="{self.pen:.3f}"')
        yield self._text(
            x + bar + 0.5 * u,
            y + 0.55 * u,
            f"{bar:g} mm (drawn {self.scale} : 1); ground plane below, not shown",
            small=True,
        )
        yield from self._key(x, self.height + 3.6 * u)

    def _key(self, x: float, y: float) -> Iterator[str]:
        """One swatch for each layer that is there, in two rows."""
        u = self.unit
        looks = [look for look in _looks(self.pen) if self.design.artwork.on_layer(look.layer)]
        columns = (len(looks) + 1) // 2
        step = min(12.0 * u, (self.width + self.side - x) / columns)
        for number, look in enumerate(looks):
            row, column = divmod(number, columns)
            at, height = x + column * step, y + row * 1.5 * u
            if look.layer.holds == "hole":
                centre = f'cx="{at + 0.55 * u:.3f}" cy="{height + 0.4 * u:.3f}"'
                yield f'<circle {centre} r="{0.42 * u:.3f}" {look.style}/>'
            else:
                yield _rectangle(at, height, 1.1 * u, 0.8 * u, look.style)
            yield self._text(at + 1.5 * u, height + 0.72 * u, look.about, small=True)

    def _text(
        self,
        x: float,
        y: float,
        words: str,
        *,
        bold: bool = False,
        small: bool = False,
        anchor: str = "start",
    ) -> str:
        size, colour = (0.85 * self.unit, QUIET) if small else (self.unit, INK)
        weight = ' font-weight="bold"' if bold else ""
        return (
            f'<text x="{x:.3f}" y="{y:.3f}" {FONT} font-size="{size:.3f}"{weight} fill="{colour}" '
            f'text-anchor="{anchor}">{escape(words)}</text>'
        )


def _rectangle(x: float, y: float, width: float, height: float, style: str) -> str:
    return f'<rect x="{x:.3f}" y="{y:.3f}" width="{width:.3f}" height="{height:.3f}" {style}/>'


def _shape(item: Item) -> str:
    if isinstance(item.shape, Circle):
        x, y = item.shape.centre
        return f'<circle cx="{x:.12g}" cy="{y:.12g}" r="{item.shape.diameter / 2:.12g}"/>'
    return f'<path d="{"".join(_rings(item.shape))}"/>'


def _rings(polygon: Polygon) -> Iterable[str]:
    for ring in (polygon.exterior, *polygon.holes):
        yield "M" + "L".join(f"{x:.12g} {y:.12g}" for x, y in ring) + "z"
