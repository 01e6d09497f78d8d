"""Shapes that conductors, dielectrics and boundaries take, each giving its exact closed outline."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Protocol

from nightcap.geometry.curves import Arc, Curve, Point, Segment

Outline = tuple[Curve, ...]
"""Curves joined end to start, closed, counter-clockwise: the inside is on the left."""


class Shape(Protocol):
    """A closed figure without holes."""

    def outline(self) -> Outline:
        """The exact boundary, counter-clockwise."""

    def grown(self, thickness: float) -> Shape:
        """The figure with a layer of even thickness (m) laid around it."""


@dataclass(frozen=True)
class Circle:
    """A full circle."""

    centre: Point
    radius: float

    def outline(self) -> Outline:
        return tuple(Arc(self.centre, self.radius, k * math.pi / 2, (k + 1) * math.pi / 2) for k in range(4))

    def grown(self, thickness: float) -> Circle:
        return Circle(self.centre, self.radius + thickness)


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


@dataclass(frozen=True)
class Polygon:
    """A simple polygon; its points in either sense of rotation."""

    points: tuple[Point, ...]
    layer: float = 0.0
    """Thickness of a layer laid around a convex polygon, rounded about its corners, m."""

    def outline(self) -> Outline:
        points = list(self.points)
        if signed_area(points) < 0:
            points.reverse()
        return rounded_hull(points, self.layer)

    def grown(self, thickness: float) -> Polygon:
        return Polygon(self.points, self.layer + thickness)

    @property
    def is_convex(self) -> bool:
        turns = [_cross(a, b, c) for a, b, c in _triples(self.points)]
        return all(t >= 0 for t in turns) or all(t <= 0 for t in turns)


def rounded_hull(points: list[Point], radius: float) -> Outline:
    """The outline at distance ``radius`` around a counter-clockwise polygon (convex where radius > 0)."""
    if radius == 0.0:
        return tuple(Segment(a, b) for _, a, b in _triples(tuple(points)))
    curves: list[Curve] = []
    for before, corner, after in _triples(tuple(points)):
        angle_in = math.atan2(corner[1] - before[1], corner[0] - before[0]) - math.pi / 2
        angle_out = math.atan2(after[1] - corner[1], after[0] - corner[0]) - math.pi / 2
        arc = Arc(corner, radius, angle_in, angle_in + (angle_out - angle_in) % math.tau)
        n = (math.cos(angle_out) * radius, math.sin(angle_out) * radius)
        curves += [arc, Segment((corner[0] + n[0], corner[1] + n[1]), (after[0] + n[0], after[1] + n[1]))]
    return tuple(c for c in curves if c.length > 0.0)


def signed_area(points: list[Point]) -> float:
    """Area of a polygon, positive where its points run counter-clockwise, m^2."""
    return sum(a[0] * b[1] - b[0] * a[1] for a, b in zip(points, points[1:] + points[:1], strict=True)) / 2


def _triples(points: tuple[Point, ...]) -> list[tuple[Point, Point, Point]]:
    n = len(points)
    return [(points[k - 1], points[k], points[(k + 1) % n]) for k in range(n)]


def _cross(a: Point, b: Point, c: Point) -> float:
    return (b[0] - a[0]) * (c[1] - b[1]) - (b[1] - a[1]) * (c[0] - b[0])
