"""Polygons: of any points, regular ones, trapezoids."""

from __future__ import annotations

import math
from itertools import combinations
from typing import Annotated

from pydantic import BeforeValidator, Field, ValidationInfo, model_validator

from nightcap.geometry.case_file.quantities import (
    Degrees,
    LengthFromZero,
    PlainNumber,
    PointOf,
    Points,
    PositiveLength,
    whole,
)
from nightcap.geometry.case_file.schema import COUNT
from nightcap.geometry.case_file.shapes.keys import ShapeKeys, TurnedKeys, exactly_one
from nightcap.geometry.curves import Point
from nightcap.geometry.motion import Motion
from nightcap.geometry.shapes import Polygon, signed_area


class PolygonKeys(ShapeKeys):
    """A polygon through points."""

    points: Points = Field(description="Corners, in either sense of rotation.")
    corner_radius: LengthFromZero = Field(0.0, description="Radius of all corners.")

    @model_validator(mode="after")
    def _is_simple(self) -> PolygonKeys:
        points = list(self.points)
        size = max(math.dist(points[0], point) for point in points)
        if any(math.dist(a, b) <= 1e-9 * size for a, b in zip(points, points[1:] + points[:1], strict=True)):
            raise ValueError("points: two points that follow each other are the same")
        farthest = max(points, key=lambda point: math.dist(points[0], point))
        if all(abs(_side(points[0], farthest, point)) <= 1e-9 * size**2 for point in points):
            raise ValueError("points: the polygon has no area")
        sides = list(zip(points, points[1:] + points[:1], strict=True))
        for (i, one), (k, two) in combinations(enumerate(sides), 2):
            next_to = k - i in (1, len(sides) - 1)
            if _fold_back(one, two) if next_to else _meet(one, two):
                raise ValueError(f"points: side {i + 1} and side {k + 1} of the polygon cross or touch")
        if abs(signed_area(points)) <= 1e-9 * size**2:
            raise ValueError("points: the polygon has no area")
        return self

    def figure(self) -> Polygon:
        """The polygon."""
        return Polygon(self.points, self.corner_radius)


def _sides(value: object, info: ValidationInfo) -> int:
    return whole(value, 3, 100, info)


class RegularPolygonKeys(TurnedKeys):
    """A polygon of equal sides; before it is turned its lowest side lies along x."""

    sides: Annotated[int, BeforeValidator(_sides), COUNT] = Field(description="Number of sides.")
    across_flats: PositiveLength | None = Field(None, description="Twice the distance of a side from the centre.")
    across_corners: PositiveLength | None = Field(None, description="Twice the distance of a corner from the centre.")
    corner_radius: LengthFromZero = Field(0.0, description="Radius of the corners.")

    @model_validator(mode="after")
    def _one_size(self) -> RegularPolygonKeys:
        exactly_one(self, "across_flats", "across_corners")
        return self

    def figure(self) -> Polygon:
        """The polygon."""
        half = math.pi / self.sides
        reach = self.across_corners / 2 if self.across_corners else (self.across_flats or 0.0) / 2 / math.cos(half)
        angles = [math.radians(self.rotate) - math.pi / 2 + half + 2 * half * k for k in range(self.sides)]
        x, y = self.at
        return Polygon(tuple((x + reach * math.cos(a), y + reach * math.sin(a)) for a in angles), self.corner_radius)


class TrapezoidKeys(TurnedKeys):
    """An etched trace: a foot along x, a narrower or wider top; ``at`` is the middle of the foot."""

    at: PointOf = Field((0.0, 0.0), description="Middle of the foot.")
    rotate: Degrees = Field(0.0, description="Degrees, counter-clockwise about the middle of the foot.")
    foot: PositiveLength = Field(description="Width below.")
    height: PositiveLength = Field(description="Height.")
    top: PositiveLength | None = Field(None, description="Width above.")
    etch_angle: PlainNumber | None = Field(None, description="Degrees between foot and flank: 90 is upright.")
    corner_radius: LengthFromZero = Field(0.0, description="Radius of the corners.")

    @model_validator(mode="after")
    def _one_top(self) -> TrapezoidKeys:
        exactly_one(self, "top", "etch_angle")
        if self.etch_angle is not None and not 10 <= self.etch_angle <= 170:
            raise ValueError("etch_angle must lie between 10 and 170 degrees")
        if self._top() <= 1e-6 * self.foot:
            raise ValueError("the flanks meet below the top: make the etch_angle steeper or the height less")
        return self

    def _top(self) -> float:
        if self.top is not None:
            return self.top
        return self.foot - 2 * self.height / math.tan(math.radians(self.etch_angle or 90.0))

    def figure(self) -> Polygon:
        """The trapezoid."""
        foot, top = self.foot / 2, self._top() / 2
        corners = ((-foot, 0.0), (foot, 0.0), (top, self.height), (-top, self.height))
        motion = Motion(self.at, math.radians(self.rotate))
        return Polygon(tuple(motion.point(corner) for corner in corners), self.corner_radius)


def _side(a: Point, b: Point, c: Point) -> float:
    return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])


def _meet(one: tuple[Point, Point], two: tuple[Point, Point]) -> bool:
    """Whether two segments share a point."""
    (a, b), (c, d) = one, two
    if max(a[0], b[0]) < min(c[0], d[0]) or max(c[0], d[0]) < min(a[0], b[0]):
        return False
    if max(a[1], b[1]) < min(c[1], d[1]) or max(c[1], d[1]) < min(a[1], b[1]):
        return False
    return _side(a, b, c) * _side(a, b, d) <= 0 and _side(c, d, a) * _side(c, d, b) <= 0


def _fold_back(one: tuple[Point, Point], two: tuple[Point, Point]) -> bool:
    """Whether two sides with a common end run back along each other."""
    shared = one[1] if one[1] == two[0] else one[0]
    tips = [next(p for p in side if p != shared) for side in (one, two)]
    u, v = ((tip[0] - shared[0], tip[1] - shared[1]) for tip in tips)
    return abs(u[0] * v[1] - u[1] * v[0]) <= 1e-9 * math.hypot(*u) * math.hypot(*v) and u[0] * v[0] + u[1] * v[1] > 0
