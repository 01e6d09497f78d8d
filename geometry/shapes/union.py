"""Figures made of several, which may touch or overlap."""

from __future__ import annotations

import math
from dataclasses import dataclass

from nightcap.geometry.shapes.circle import Circle
from nightcap.geometry.shapes.outline import Outline, Shape


@dataclass(frozen=True)
class Union:
    """All that lies in any of its parts, and what they enclose between them."""

    parts: tuple[Shape, ...]

    def outline(self) -> Outline:
        """The outlines of all parts, which may meet; for the extent, not for what is inside."""
        return tuple(curve for part in self.parts for curve in part.outline())

    def grown(self, thickness: float) -> Shape:
        return Union(tuple(part.grown(thickness) for part in self.parts))


@dataclass(frozen=True)
class Strands(Union):
    """Round wires laid into one conductor about the first of them; a layer around them is round."""

    def grown(self, thickness: float) -> Shape:
        if thickness == 0.0:
            return self
        return Circle(self.circles[0].centre, self.overall_radius + thickness)

    @property
    def circles(self) -> tuple[Circle, ...]:
        return tuple(part for part in self.parts if isinstance(part, Circle))

    @property
    def overall_radius(self) -> float:
        """Of the circle about the first wire that holds all of them, m."""
        return max(math.dist(wire.centre, self.circles[0].centre) + wire.radius for wire in self.circles)


def parts_of(shape: Shape) -> tuple[Shape, ...]:
    """The figures of which a shape is made: itself, unless it is a union."""
    if isinstance(shape, Union):
        return tuple(figure for part in shape.parts for figure in parts_of(part))
    return (shape,)
