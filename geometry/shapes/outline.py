"""Outlines of figures, and what all figures can do."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import Protocol

from nightcap.geometry.curves import Arc, Curve, Point

Outline = tuple[Curve, ...]
"""Curves joined end to start, closed, counter-clockwise, so that the inside is on the left. Those around holes follow,
clockwise."""


class Shape(Protocol):
    """A closed figure."""

    def outline(self) -> Outline:
        """The exact boundary."""

    def grown(self, thickness: float) -> Shape:
        """The figure with a layer of even thickness (m) laid around it, not into its holes."""


def chains(outline: Outline) -> list[Outline]:
    """The closed chains of an outline: one, and one more for each hole."""
    slack = 1e-9 * sum(curve.length for curve in outline)
    breaks = [k for k in range(1, len(outline)) if math.dist(outline[k - 1].end, outline[k].start) > slack]
    return [outline[a:b] for a, b in pairwise([0, *breaks, len(outline)])]


def signed_area(points: list[Point]) -> float:
    """Area of a polygon, positive where its points run counter-clockwise, m^2."""
    return sum(a[0] * b[1] - b[0] * a[1] for a, b in zip(points, points[1:] + points[:1], strict=True)) / 2


def triples(points: tuple[Point, ...]) -> list[tuple[Point, Point, Point]]:
    """Each point of a closed walk with its neighbours: before, itself, after."""
    n = len(points)
    return [(points[k - 1], points[k], points[(k + 1) % n]) for k in range(n)]


def arcs(centre: Point, radius: float, start: float, end: float) -> list[Arc]:
    """An arc of any length, m and radians, in parts of at most a quarter turn."""
    count = max(1, math.ceil(abs(end - start) / (math.pi / 2) - 1e-9))
    angles = [start + (end - start) * k / count for k in range(count + 1)]
    return [Arc(centre, radius, a, b) for a, b in pairwise(angles)]
