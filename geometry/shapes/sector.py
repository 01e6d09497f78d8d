"""Sectors of rings and discs, with sharp corners or rounded ones."""

from __future__ import annotations

import math
from dataclasses import dataclass

from nightcap.geometry.curves import Arc, Curve, Point, Segment
from nightcap.geometry.shapes.outline import Outline, Shape, arcs
from nightcap.geometry.shapes.parallel import Grown


@dataclass(frozen=True)
class Sector:
    """The part of a ring, or of a disc where inner is 0, between two polar angles."""

    centre: Point
    inner: float
    outer: float
    """Radii, m."""
    start: float
    end: float
    """Radians; end is greater, by less than a full turn."""
    corner_radius: float = 0.0

    def outline(self) -> Outline:
        """Along the outer arc, then back along the inner one."""
        curves = self._rounded() if self.corner_radius else self._sharp()
        return tuple(curve for curve in curves if curve.length > 1e-12 * self.outer)

    def grown(self, thickness: float) -> Shape:
        return Grown(self, thickness)

    def _at(self, radius: float, angle: float) -> Point:
        return (self.centre[0] + radius * math.cos(angle), self.centre[1] + radius * math.sin(angle))

    def _sharp(self) -> list[Curve]:
        return [
            *arcs(self.centre, self.outer, self.start, self.end),
            Segment(self._at(self.outer, self.end), self._at(self.inner, self.end)),
            *(arcs(self.centre, self.inner, self.end, self.start) if self.inner else []),
            Segment(self._at(self.inner, self.start), self._at(self.outer, self.start)),
        ]

    def _rounded(self) -> list[Curve]:
        """With an arc of the corner's radius that touches both neighbours at each corner."""
        rho, a, b = self.corner_radius, self.start, self.end
        far = self.outer - rho
        turn = math.asin(rho / far)
        reach = math.sqrt(far**2 - rho**2)
        outer = [
            Arc(self._at(far, a + turn), rho, a - math.pi / 2, a + turn),
            *arcs(self.centre, self.outer, a + turn, b - turn),
            Arc(self._at(far, b - turn), rho, b - turn, b + math.pi / 2),
        ]
        if self.inner == 0.0:
            half = (b - a) / 2
            tip = Arc(self._at(rho / math.sin(half), a + half), rho, b + math.pi / 2, a - math.pi / 2 + math.tau)
            low = rho / math.tan(half)
            inner: list[Curve] = [tip]
        else:
            near = self.inner + rho
            turn_in = math.asin(rho / near)
            low = math.sqrt(near**2 - rho**2)
            inner = [
                Arc(self._at(near, b - turn_in), rho, b + math.pi / 2, b - turn_in + math.pi),
                *arcs(self.centre, self.inner, b - turn_in, a + turn_in),
                Arc(self._at(near, a + turn_in), rho, a + turn_in + math.pi, a - math.pi / 2 + math.tau),
            ]
        down = Segment(self._at(reach, b), self._at(low, b))
        return [*outer, down, *inner, Segment(self._at(low, a), self._at(reach, a))]

    @property
    def greatest_corner_radius(self) -> float:
        """More does not fit, m."""
        half = math.sin(min((self.end - self.start) / 2, math.pi / 2))
        by_outer_arc = self.outer * half / (1 + half)
        if self.inner == 0.0:
            return by_outer_arc
        by_inner_arc = self.inner * half / (1 - half) if half < 1 else math.inf
        return min(by_outer_arc, by_inner_arc, (self.outer - self.inner) / 2)
