"""Rectangles, with sharp corners or rounded ones; the roundest are ovals."""

from __future__ import annotations

import math
from dataclasses import dataclass

from nightcap.geometry.curves import Curve, Point, Segment
from nightcap.geometry.shapes.circle import Circle
from nightcap.geometry.shapes.outline import Outline, arcs, triples


@dataclass(frozen=True)
class Rectangle:
    """A rectangle, possibly with rounded corners, turned about its centre."""

    centre: Point
    width: float
    height: float
    corner_radius: float = 0.0
    angle: float = 0.0
    """Radians, counter-clockwise."""

    def outline(self) -> Outline:
        x, y = self.width / 2 - self.corner_radius, self.height / 2 - self.corner_radius
        if x <= 0.0 and y <= 0.0:
            return Circle(self.centre, self.corner_radius).outline()
        corners = [self._placed(sx * x, sy * y) for sx, sy in ((1, -1), (1, 1), (-1, 1), (-1, -1))]
        return rounded_hull(corners, self.corner_radius)

    def grown(self, thickness: float) -> Rectangle:
        return Rectangle(
            self.centre,
            self.width + 2 * thickness,
            self.height + 2 * thickness,
            self.corner_radius + thickness,
            self.angle,
        )

    def _placed(self, x: float, y: float) -> Point:
        c, s = math.cos(self.angle), math.sin(self.angle)
        return (self.centre[0] + c * x - s * y, self.centre[1] + s * x + c * y)


def rounded_hull(points: list[Point], radius: float) -> Outline:
    """The outline at distance ``radius`` around a counter-clockwise polygon (convex where radius > 0).

    The polygon may have shrunk to a line.
    """
    if radius == 0.0:
        return tuple(Segment(a, b) for _, a, b in triples(tuple(points)))
    points = [at for before, at, _ in triples(tuple(points)) if math.dist(before, at) > 1e-12 * radius]
    curves: list[Curve] = []
    for before, corner, after in triples(tuple(points)):
        angle_in = math.atan2(corner[1] - before[1], corner[0] - before[0]) - math.pi / 2
        angle_out = math.atan2(after[1] - corner[1], after[0] - corner[0]) - math.pi / 2
        sweep = math.pi if len(points) == 2 else (angle_out - angle_in) % math.tau
        n = (math.cos(angle_out) * radius, math.sin(angle_out) * radius)
        side = Segment((corner[0] + n[0], corner[1] + n[1]), (after[0] + n[0], after[1] + n[1]))
        curves += [*arcs(corner, radius, angle_in, angle_in + sweep), side]
    return tuple(c for c in curves if c.length > 0.0)
