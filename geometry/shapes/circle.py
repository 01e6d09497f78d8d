"""Circles and rings."""

from __future__ import annotations

import math
from dataclasses import dataclass

from nightcap.geometry.curves import Arc, Point
from nightcap.geometry.shapes.outline import Outline


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
class Ring:
    """The space between two circles about one centre; what lies in its hole is no part of it."""

    centre: Point
    outer: float
    inner: float
    """Radii, m."""

    def outline(self) -> Outline:
        hole = Circle(self.centre, self.inner).outline()
        return (*Circle(self.centre, self.outer).outline(), *(curve.reversed() for curve in reversed(hole)))

    def grown(self, thickness: float) -> Ring:
        return Ring(self.centre, self.outer + thickness, self.inner)
