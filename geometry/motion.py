"""Rigid motions of the plane, and figures moved by them."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

from nightcap.geometry.curves import Arc, Curve, Point, Segment
from nightcap.geometry.polynomial_arc import PolynomialArc
from nightcap.geometry.shapes import Circle, Outline, Polygon, Rectangle, Ring, Shape, Union


@dataclass(frozen=True)
class Motion:
    """x -> shift + turn(x), after a mirror image in the x axis where so asked."""

    shift: Point = (0.0, 0.0)
    """m."""
    angle: float = 0.0
    """Radians, counter-clockwise."""
    mirrored: bool = False

    @classmethod
    def turn(cls, angle: float, about: Point) -> Motion:
        """A turn by an angle, radians, about a point."""
        moved = cls((0.0, 0.0), angle).point(about)
        return cls((about[0] - moved[0], about[1] - moved[1]), angle)

    @classmethod
    def mirror(cls, angle: float, through: Point) -> Motion:
        """The mirror image in a line that runs at an angle, radians, through a point."""
        moved = cls((0.0, 0.0), 2 * angle, mirrored=True).point(through)
        return cls((through[0] - moved[0], through[1] - moved[1]), 2 * angle, mirrored=True)

    def point(self, at: Point) -> Point:
        """Where a point goes."""
        x, y = at[0], -at[1] if self.mirrored else at[1]
        c, s = math.cos(self.angle), math.sin(self.angle)
        return (self.shift[0] + c * x - s * y, self.shift[1] + s * x + c * y)

    def curve(self, curve: Curve) -> Curve:
        """Where a curve goes, run through in the same sense."""
        if isinstance(curve, Segment):
            return Segment(self.point(curve.start), self.point(curve.end))
        if isinstance(curve, PolynomialArc):
            return PolynomialArc(tuple(self.point(at) for at in curve.control), curve.deviation)
        assert isinstance(curve, Arc)  # noqa: S101 - outlines are made of nothing else
        sign = -1.0 if self.mirrored else 1.0
        angles = (self.angle + sign * angle for angle in (curve.start_angle, curve.end_angle))
        return Arc(self.point(curve.centre), curve.radius, *angles)

    def shape(self, shape: Shape) -> Shape:
        """Where a figure goes."""
        if self == Motion():
            return shape
        if isinstance(shape, Circle | Ring):
            return replace(shape, centre=self.point(shape.centre))
        if isinstance(shape, Rectangle):
            angle = self.angle + (-shape.angle if self.mirrored else shape.angle)
            return replace(shape, centre=self.point(shape.centre), angle=angle)
        if isinstance(shape, Polygon):
            return replace(shape, points=tuple(self.point(at) for at in shape.points))
        if isinstance(shape, Union):
            return replace(shape, parts=tuple(self.shape(part) for part in shape.parts))
        return Moved(shape, self)


@dataclass(frozen=True)
class Moved:
    """A figure in another place."""

    figure: Shape
    motion: Motion

    def outline(self) -> Outline:
        curves = [self.motion.curve(curve) for curve in self.figure.outline()]
        return tuple(curve.reversed() for curve in reversed(curves)) if self.motion.mirrored else tuple(curves)

    def grown(self, thickness: float) -> Shape:
        return self.motion.shape(self.figure.grown(thickness))
