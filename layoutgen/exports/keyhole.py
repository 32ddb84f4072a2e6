"""Areas with holes as one ring, for formats that know no holes."""

from __future__ import annotations

import shapely

from layoutgen.geometry import Point, Polygon, Ring

__all__ = ["keyhole"]


def keyhole(polygon: Polygon) -> Ring:
    """One ring that runs along the outer boundary and, by seams of no width, around every hole.

    A seam joins a corner of the hole to a corner of what is joined already, so that no new point appears
    and none lies off the grid. Holes are taken from the left; the seam is the shortest that stays inside.
    """
    ring = list(polygon.exterior)
    if not polygon.holes:
        return tuple(ring)
    # Corners may be touched by a seam, edges not: the area is grown by less than any grid step.
    inside = polygon.geometry.buffer(1e-6, join_style="mitre")
    shapely.prepare(inside)
    seams: list[shapely.LineString] = []
    for hole in sorted(polygon.holes):
        at, start = _seam(ring, hole, inside, seams)
        turned = [*hole[start:], *hole[:start]]
        ring[at:at + 1] = [ring[at], *turned, turned[0], ring[at]]
    return tuple(ring)


def _seam(ring: list[Point], hole: Ring, inside: shapely.Polygon,
          seams: list[shapely.LineString]) -> tuple[int, int]:
    """Indices of the corners of ring and hole between which the shortest free seam runs, noted."""
    corners = shapely.points(hole)
    boundary = shapely.points(ring)
    distances = shapely.distance(boundary[:, None], corners[None, :])
    for flat in distances.argsort(axis=None, kind="stable"):
        at, start = divmod(int(flat), len(hole))
        seam = shapely.LineString((ring[at], hole[start]))
        if inside.covers(seam) and not any(seam.crosses(other) for other in seams):
            seams.append(seam)
            return at, start
    raise AssertionError("every hole of a valid polygon sees a corner of it")  # pragma: no cover
