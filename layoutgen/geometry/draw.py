"""From a comb to its artwork."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.comb import Comb
from layoutgen.geometry import copper, ground, legend, mask
from layoutgen.geometry.artwork import Artwork, Item, Layer, Point
from layoutgen.geometry.items import areas, circles, plated_holes
from layoutgen.geometry.sheet import MM, Sheet
from layoutgen.geometry.style import Style

__all__ = ["draw"]


def draw(comb: Comb, style: Style) -> Artwork:
    """Artwork of a comb-line filter: copper, holes, mask, paste, legend and outline.

    Parameters
    ----------
    comb : Comb
        Every dimension that matters at radio frequency, in metres; to be drawn as it stands. Widths, gaps
        and lengths come out exactly when all its edges lie on the grid.
    style : Style
        The choices that do not matter there.

    Returns
    -------
    Artwork
        Shapes in millimetres on the grid.

    Raises
    ------
    InputError
        If parts touch that must not, ground fill comes too near, the mounting holes or the launch vias have
        no room, a mask web does not fit beside a drill, or the legend has a character without a shape.
    """
    sheet = Sheet(comb, style)
    holes = ground.mounting_holes(sheet)
    marks, marks_missing = ground.reference_marks(sheet, holes)
    bare = mask.bare_area(sheet, 1, 1 if any(resonator.load for resonator in comb.resonators) else 0)
    texts, texts_missing = legend.place(sheet, bare, holes, marks)
    fill = ground.fill(sheet, holes, marks, legend.windows(sheet, texts))
    at_launches = ground.launch_holes(sheet)
    fence = ground.fence_holes(sheet, fill, at_launches)
    items = (
        *_top_copper(sheet, fill, (*at_launches, *fence), marks),
        *areas(sheet, "ground_plane", "ground", Layer.BOTTOM_COPPER, ground.plane(sheet, holes)),
        *copper.short_vias(sheet),
        *copper.pad_vias(sheet),
        *plated_holes(sheet, "launch_via", "ground", sheet.ground_vias, at_launches),
        *plated_holes(sheet, "fence_via", "ground", sheet.ground_vias, fence),
        *circles(sheet, "mounting_hole", Layer.UNPLATED_HOLES, holes, style.mounting_hole),
        *_mask(sheet, bare, holes, marks, fence),
        *mask.paste(sheet),
        *legend.items(sheet, texts),
        *copper.bodies(sheet),
        *areas(sheet, "outline", "board", Layer.BOARD_OUTLINE, sheet.board),
    )
    _, _, width, height = sheet.board.bounds
    return Artwork(part_number=style.part_number, revision=style.revision, width=width, height=height,
                   grid=style.grid, items=items, left_out=(*marks_missing, *texts_missing))


def _top_copper(sheet: Sheet, fill: BaseGeometry, vias: Sequence[Point],
                marks: Sequence[Point]) -> tuple[Item, ...]:
    """Copper of the component side; ground fill that no via ties to the plane is not drawn."""
    tied = shapely.MultiPoint(list(vias))
    pieces = [piece for piece in shapely.get_parts(fill) if piece.intersects(tied)]
    items = (
        *copper.resonators(sheet),
        *copper.ground_pads(sheet),
        *areas(sheet, "ground_fill", "ground", Layer.TOP_COPPER, shapely.union_all(pieces)),
        *circles(sheet, "reference_mark", Layer.TOP_COPPER, marks, sheet.style.reference_mark),
    )
    copper.require_apart(sheet, shapely.union_all(pieces), items)
    return items


def _mask(sheet: Sheet, bare: BaseGeometry, holes: Sequence[Point], marks: Sequence[Point],
          fence: Sequence[Point]) -> Iterator[Item]:
    """All openings of both masks."""
    style, top = sheet.style, Layer.TOP_MASK_OPENINGS
    grow = 2 * style.mask_expansion
    yield from mask.openings(sheet, bare)
    yield from mask.land_openings(sheet)
    yield from circles(sheet, "via_opening", top, fence, sheet.ground_vias.drill * MM + grow)
    yield from circles(sheet, "hole_opening", top, holes, style.mounting_hole + grow)
    yield from circles(sheet, "mark_opening", top, marks, style.reference_opening)
