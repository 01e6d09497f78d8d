"""Polygons, with sharp corners or rounded ones."""

from __future__ import annotations

import math
from dataclasses import dataclass

from nightcap.geometry.curves import Arc, Curve, Point, Segment
from nightcap.geometry.shapes.outline import Outline, Shape, signed_area, triples
from nightcap.geometry.shapes.parallel import Grown


@dataclass(frozen=True)
class Polygon:
    """A simple polygon; its points in either sense of rotation."""

    points: tuple[Point, ...]
    corner_radius: float = 0.0
    """Of every corner, convex or not, m."""

    def outline(self) -> Outline:
        points = list(self.points)
        if signed_area(points) < 0:
            points.reverse()
        return filleted(points, self.corner_radius)

    def grown(self, thickness: float) -> Shape:
        return Grown(self, thickness)


def filleted(points: list[Point], radius: float) -> Outline:
    """A counter-clockwise polygon whose corners are rounded by arcs, m, that touch both sides.

    Raises ValueError where an arc does not fit between its neighbours.
    """
    if radius == 0.0:
        return tuple(Segment(a, b) for _, a, b in triples(tuple(points)))
    arcs = [_fillet(before, at, after, radius) for before, at, after in triples(tuple(points))]
    curves: list[Curve] = []
    for arc, following, at, after in zip(arcs, arcs[1:] + arcs[:1], points, points[1:] + points[:1], strict=True):
        if math.dist(at, arc.end) + math.dist(after, following.start) > math.dist(at, after) * (1 + 1e-9):
            raise ValueError("is too large for the shortest side between two corners")
        curves += [arc, Segment(arc.end, following.start)]
    size = max(math.dist(points[0], point) for point in points)
    return tuple(curve for curve in curves if curve.length > 1e-12 * size)


def _fillet(before: Point, at: Point, after: Point, radius: float) -> Arc:
    """The arc that rounds one corner."""
    first = math.atan2(at[1] - before[1], at[0] - before[0])
    turn = math.remainder(math.atan2(after[1] - at[1], after[0] - at[0]) - first, math.tau)
    side = math.copysign(1.0, turn)
    back = radius * math.tan(abs(turn) / 2)
    x, y = at[0] - back * math.cos(first), at[1] - back * math.sin(first)
    centre = (x - side * radius * math.sin(first), y + side * radius * math.cos(first))
    start = first - side * math.pi / 2
    return Arc(centre, radius, start, start + turn)
