"""A strip of even thickness along a polyline."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

from nightcap.geometry.curves import Arc, Curve, Point, Segment
from nightcap.geometry.shapes.outline import Outline, Shape
from nightcap.geometry.shapes.parallel import Grown, meets_itself


@dataclass(frozen=True)
class BentStrip:
    """Along points, round on the outside of its joints; ends round or flat."""

    points: tuple[Point, ...]
    thickness: float
    """In metres."""
    round_ends: bool = False

    def outline(self) -> Outline:
        """Up the right side, around the end, down the other side.

        Raises ValueError where joints are too tight, or the strip would meet itself.
        """
        there, back = list(self.points), list(reversed(self.points))
        curves = [*self._side(there), *self._cap(there), *self._side(back), *self._cap(back)]
        outline = tuple(curve for curve in curves if curve.length > 1e-12 * self.thickness)
        if len(self.points) > 2 and meets_itself(outline):
            raise ValueError("would meet itself")
        return outline

    def grown(self, thickness: float) -> Shape:
        return Grown(self, thickness)

    def _side(self, points: list[Point]) -> list[Curve]:
        """The curves to the right of a walk along points. Raises ValueError where a joint is too tight."""
        half = self.thickness / 2
        curves: list[Curve] = []
        headings = [math.atan2(b[1] - a[1], b[0] - a[0]) for a, b in pairwise(points)]
        start = _beside(points[0], headings[0], half)
        for k, at in enumerate(points[1:-1], start=1):
            turn = math.remainder(headings[k] - headings[k - 1], math.tau)
            if turn > 0:  # to the left: this side is outside
                first = headings[k - 1] - math.pi / 2
                curves += [Segment(start, _beside(at, headings[k - 1], half)), Arc(at, half, first, first + turn)]
                start = _beside(at, headings[k], half)
                continue
            back = half * math.tan(-turn / 2)
            if back >= min(math.dist(points[k - 1], at), math.dist(at, points[k + 1])):
                raise ValueError("has a joint too tight for its thickness")
            inner = _beside(_along(at, headings[k - 1], -back), headings[k - 1], half)
            curves.append(Segment(start, inner))
            start = inner
        return [*curves, Segment(start, _beside(points[-1], headings[-1], half))]

    def _cap(self, points: list[Point]) -> list[Curve]:
        """Around the last of some points, from right to left."""
        at, half = points[-1], self.thickness / 2
        heading = math.atan2(at[1] - points[-2][1], at[0] - points[-2][0])
        if self.round_ends:
            return [Arc(at, half, heading - math.pi / 2, heading), Arc(at, half, heading, heading + math.pi / 2)]
        return [Segment(_beside(at, heading, half), _beside(at, heading, -half))]


def _along(at: Point, heading: float, way: float) -> Point:
    return (at[0] + way * math.cos(heading), at[1] + way * math.sin(heading))


def _beside(at: Point, heading: float, way: float) -> Point:
    return _along(at, heading - math.pi / 2, way)
