"""The infinitely thin strip, and the coat that an even layer makes around it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import accumulate, combinations, pairwise

from nightcap.geometry.crossing import cut_parameters
from nightcap.geometry.curves import Arc, Curve, Point, Segment
from nightcap.geometry.shapes import Outline

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

    def grown(self, thickness: float) -> Strip | StripCoat:
        return StripCoat(self.points, thickness) if thickness else self

    def takes(self, thicknesses: Sequence[float]) -> bool:
        """Whether layers of these thicknesses, m, from the inside out, fit into its bends."""
        return all(StripCoat(self.points, radius).is_simple for radius in accumulate(thicknesses))

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


@dataclass(frozen=True)
class StripCoat:
    """All that lies within a distance of a strip: round about its ends and the outer sides of its bends."""

    points: tuple[Point, ...]
    radius: float
    """m."""

    def outline(self) -> Outline:
        return _beside(self.points, self.radius) + _beside(self.points[::-1], self.radius)

    def grown(self, thickness: float) -> StripCoat:
        return StripCoat(self.points, self.radius + thickness)

    @property
    def is_simple(self) -> bool:
        """Whether the outline bounds one figure: no inner side of a bend is used up, no part meets another."""
        if any(step <= 0 for side in (self.points, self.points[::-1]) for step in _left_over(side, self.radius)):
            return False
        size = max(math.dist(self.points[0], point) for point in self.points) + self.radius
        return all(len(cuts) == 2 for cuts in cut_parameters(self.outline(), 1e-9 * size))


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


def _trims(points: tuple[Point, ...], radius: float) -> list[float]:
    """By how much the line on the right of a strip is shorter at each of its points, m: at the inside of bends."""
    bends = [_turn(*points[k - 1 : k + 2]) for k in range(1, len(points) - 1)]
    return [0.0, *(radius * math.tan(max(-bend, 0.0) / 2) for bend in bends), 0.0]


def _left_over(points: tuple[Point, ...], radius: float) -> list[float]:
    """Lengths of the straight parts on the right of a strip, m; not positive where bends use them up."""
    trims = _trims(points, radius)
    return [math.dist(points[k], points[k + 1]) - trims[k] - trims[k + 1] for k in range(len(points) - 1)]


def _beside(points: tuple[Point, ...], radius: float) -> tuple[Curve, ...]:
    """The right side of a strip's coat from start to end, with arcs outside its bends, and the cap at its end."""
    curves: list[Curve] = []
    trims = _trims(points, radius)
    angles = [math.atan2(b[1] - a[1], b[0] - a[0]) - math.pi / 2 for a, b in pairwise(points)]
    for k, ((a, b), angle) in enumerate(zip(pairwise(points), angles, strict=True)):
        x, y = math.cos(angle), math.sin(angle)  # the outward normal; (-y, x) points ahead
        start = (a[0] + radius * x - trims[k] * y, a[1] + radius * y + trims[k] * x)
        end = (b[0] + radius * x + trims[k + 1] * y, b[1] + radius * y - trims[k + 1] * x)
        curves.append(Segment(start, end))
        bend = _turn(a, b, points[k + 2]) if k + 2 < len(points) else 0.0
        if bend > STRAIGHT:
            curves.append(Arc(b, radius, angle, angle + bend))
    middle = angles[-1] + math.pi / 2
    cap = [Arc(points[-1], radius, angles[-1], middle), Arc(points[-1], radius, middle, middle + math.pi / 2)]
    return (*curves, *cap)
