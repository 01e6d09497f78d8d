"""The shapes that a case file knows: word, keys, and the figure they describe."""

from __future__ import annotations

import math
from functools import cache
from itertools import combinations
from typing import Any

from pydantic import Field, model_validator

from nightcap.geometry.case_file.problems import Problems, listed, one_of, under
from nightcap.geometry.case_file.quantities import (
    Degrees,
    Gauge,
    LengthFromZero,
    PointOf,
    Points,
    PositiveLength,
)
from nightcap.geometry.case_file.schema import ConductorKeys, Entry, EntryType, checked
from nightcap.geometry.case_file.shape_keys import ShapeKeys
from nightcap.geometry.case_file.strip import StripKeys
from nightcap.geometry.case_file.yaml_tree import Tree
from nightcap.geometry.curves import Point
from nightcap.geometry.shapes import Circle, Polygon, Rectangle, Shape, signed_area


class CircleKeys(ShapeKeys):
    """A circle by its diameter, radius or wire gauge."""

    diameter: PositiveLength | None = None
    radius: PositiveLength | None = None
    awg: Gauge | None = Field(None, description="American wire gauge, ASTM B258.")
    at: PointOf = Field((0.0, 0.0), description="Centre.")

    @model_validator(mode="after")
    def _one_size(self) -> CircleKeys:
        given = [name for name in ("diameter", "radius", "awg") if getattr(self, name) is not None]
        if len(given) != 1:
            said = "none is given" if not given else f"{listed(given)} are given"
            raise ValueError(f"needs exactly one of diameter, radius, awg; {said}")
        return self

    def figure(self) -> Circle:
        """The circle."""
        if self.radius is not None:
            return Circle(self.at, self.radius)
        return Circle(self.at, (self.diameter or self.awg or 0.0) / 2)


class RectangleKeys(ShapeKeys):
    """A rectangle about its centre."""

    width: PositiveLength
    height: PositiveLength
    at: PointOf = Field((0.0, 0.0), description="Centre.")
    corner_radius: LengthFromZero = 0.0
    rotate: Degrees = Field(0.0, description="Degrees, counter-clockwise.")

    @model_validator(mode="after")
    def _corners_fit(self) -> RectangleKeys:
        if self.corner_radius > min(self.width, self.height) / 2 * (1 + 1e-12):
            raise ValueError("corner_radius must be at most half of the shorter side")
        return self

    def figure(self) -> Rectangle:
        """The rectangle."""
        radius = min(self.corner_radius, min(self.width, self.height) / 2)
        return Rectangle(self.at, self.width, self.height, radius, math.radians(self.rotate))


class PolygonKeys(ShapeKeys):
    """A polygon through points."""

    points: Points

    @model_validator(mode="after")
    def _is_simple(self) -> PolygonKeys:
        points = list(self.points)
        size = max(math.dist(points[0], point) for point in points)
        if any(math.dist(a, b) <= 1e-9 * size for a, b in zip(points, points[1:] + points[:1], strict=True)):
            raise ValueError("points: two points that follow each other are the same")
        if abs(signed_area(points)) <= 1e-9 * size**2:
            raise ValueError("points: the polygon has no area")
        sides = list(zip(points, points[1:] + points[:1], strict=True))
        for (i, one), (k, two) in combinations(enumerate(sides), 2):
            next_to = k - i in (1, len(sides) - 1)
            if _fold_back(one, two) if next_to else _meet(one, two):
                raise ValueError(f"points: side {i + 1} and side {k + 1} of the polygon cross or touch")
        return self

    def figure(self) -> Polygon:
        """The polygon."""
        return Polygon(self.points)


SHAPES: dict[str, type[ShapeKeys]] = {
    "circle": CircleKeys,
    "rectangle": RectangleKeys,
    "polygon": PolygonKeys,
    "strip": StripKeys,
}
"""A new shape is one more class and one more line here."""


def shaped(
    own: type[EntryType], tree: Tree, path: str, problems: Problems, context: dict[str, Any]
) -> tuple[EntryType, Shape] | None:
    """An entry that has a shape besides keys of its own, or None after noting every mistake in it."""
    if not isinstance(tree, dict):
        problems.add(path, f"must be a mapping with the key 'shape' ({listed(SHAPES)}) and the keys of that shape")
        return None
    word = tree.get("shape")
    if not isinstance(word, str) or word not in SHAPES:
        if "shape" in tree:
            problems.add(under(path, "shape"), one_of(word, SHAPES))
        else:
            problems.add(path, f"the key 'shape' is missing; allowed: {listed(SHAPES)}")
        return None
    if SHAPES[word].is_thin and own is not ConductorKeys:
        problems.add(under(path, "shape"), f"a {word} encloses nothing; only a conductor can be one")
        return None
    entry = checked(_combined(own, SHAPES[word]), tree, path, problems, context)
    return None if entry is None else (entry, entry.figure())


@cache
def _combined(own: type[Entry], shape: type[ShapeKeys]) -> Any:
    """One model of both sets of keys."""
    return type(f"{own.__name__}{shape.__name__}", (shape, own), {"__module__": __name__})


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
