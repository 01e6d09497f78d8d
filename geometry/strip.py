"""The infinitely thin strip, and the coat that an even layer makes around it."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import combinations, pairwise

from nightcap.geometry.curves import Point, Segment
from nightcap.geometry.shapes import BentStrip, Outline, Shape

STRAIGHT = 1e-9
"""A line that turns by less is straight, radians."""


@dataclass(frozen=True)
class Strip:
    """A conductor of no thickness along straight lines from point to point."""

    points: tuple[Point, ...]
    """At least two."""

    @property
    def length(self) -> float:
        """From end to end along the strip, m."""
        return sum(math.dist(a, b) for a, b in pairwise(self.points))

    def outline(self) -> Outline:
        """There and back: closed, with nothing inside."""
        return _lines(self.points) + _lines(self.points[::-1])

    def grown(self, thickness: float) -> Shape:
        return BentStrip(self.points, 2 * thickness, round_ends=True)

    @property
    def nearest(self) -> tuple[float, int, int]:
        """The least distance, m, between parts that do not follow each other, and their numbers from 1."""
        parts = list(enumerate(pairwise(self.points), start=1))
        pairs = ((one, two) for one, two in combinations(parts, 2) if two[0] - one[0] > 1)
        return min(((_apart(a, b), i, k) for (i, a), (k, b) in pairs), default=(math.inf, 0, 0))

    @property
    def sharpest(self) -> tuple[float, int]:
        """The least angle between two parts at a point, radians, and the number of that point from 1."""
        bends = (math.pi - abs(_turn(*self.points[k - 1 : k + 2])) for k in range(1, len(self.points) - 1))
        return min(((angle, k) for k, angle in enumerate(bends, start=2)), default=(math.pi, 0))


def _lines(points: tuple[Point, ...]) -> tuple[Segment, ...]:
    return tuple(Segment(a, b) for a, b in pairwise(points))


def _apart(one: tuple[Point, Point], two: tuple[Point, Point]) -> float:
    """Distance between two straight lines, m; 0 where they cross."""
    (a, b), (c, d) = one, two
    if _side(a, b, c) * _side(a, b, d) < 0 and _side(c, d, a) * _side(c, d, b) < 0:
        return 0.0
    return min(_off(a, two), _off(b, two), _off(c, one), _off(d, one))


def _side(a: Point, b: Point, c: Point) -> float:
    return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])


def _off(point: Point, line: tuple[Point, Point]) -> float:
    """Distance of a point from a straight line between two others, m."""
    (x0, y0), (x1, y1) = line
    ux, uy, length = x1 - x0, y1 - y0, math.dist(*line)
    t = min(max(((point[0] - x0) * ux + (point[1] - y0) * uy) / length**2, 0.0), 1.0)
    return math.dist(point, (x0 + t * ux, y0 + t * uy))


def _turn(before: Point, corner: Point, after: Point) -> float:
    """The angle by which a line turns left at a point, radians, from -pi to pi."""
    u, v = (corner[0] - before[0], corner[1] - before[1]), (after[0] - corner[0], after[1] - corner[1])
    return math.atan2(u[0] * v[1] - u[1] * v[0], u[0] * v[0] + u[1] * v[1])
