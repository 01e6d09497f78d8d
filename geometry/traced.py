"""Outlines written down in open standards: SVG path data and OGC well-known text, read by libraries."""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence
from typing import Any

from nightcap.geometry.curves import Arc, Curve, Point, Segment
from nightcap.geometry.polynomial_arc import PolynomialArc
from nightcap.geometry.shapes import Ellipse, Outline, chains
from nightcap.geometry.shapes.outline import arcs

LONGEST_ARC = math.tau / 24
"""Eccentric anomaly of one piece of an ellipse, radians."""
SMALLEST = 1e-9
"""Curves shorter than this, relative to the figure, are dropped; ends closer than it are one."""


def from_path_data(text: str) -> Outline:
    """The outline that SVG path data draws, in its own unit. Raises ValueError where it draws no closed figure.

    Source: W3C, Scalable Vector Graphics 2, chapter 9.
    """
    svgpathtools = _library("svgpathtools")
    try:
        path = svgpathtools.parse_path(text)
    except Exception as error:  # whatever a foreign text does to a parser
        raise ValueError(f"is no SVG path data: {str(error) or type(error).__name__}") from error
    return closed([curve for segment in path for curve in _curves(segment)])


def from_well_known_text(text: str) -> Outline:
    """The outline of a polygon in well-known text, in its own unit. Raises ValueError where it is none.

    Source: OGC 06-103r4, Simple Feature Access, part 1.
    """
    shapely = _library("shapely")
    try:
        geometry = shapely.from_wkt(text)
    except Exception as error:
        raise ValueError(f"is no well-known text: {error}") from error
    if geometry.geom_type != "Polygon" or geometry.is_empty:
        raise ValueError(f"must be one POLYGON; it is {geometry.geom_type.upper()}{' EMPTY' * geometry.is_empty}")
    rings = [list(ring.coords) for ring in (geometry.exterior, *geometry.interiors)]
    sides = [(a[:2], b[:2]) for ring in rings for a, b in itertools.pairwise(ring)]
    return closed([Segment(a, b) for a, b in sides])


def _library(name: str) -> Any:
    """A library of the extra 'outlines'."""
    from importlib import import_module

    try:
        return import_module(name)
    except ImportError as error:
        raise ValueError(f"needs the library {name}: install nightcap[outlines]") from error


def _curves(segment: Any) -> Sequence[Curve]:
    """The curves that one segment of a path is."""
    kind = type(segment).__name__
    if kind == "Line":
        return [Segment(_point(segment.start), _point(segment.end))]
    if kind in ("QuadraticBezier", "CubicBezier"):
        return [PolynomialArc(tuple(_point(z) for z in segment.bpoints()))]
    centre, start = _point(segment.center), math.radians(segment.theta)
    end = start + math.radians(segment.delta)
    rx, ry, turn = segment.radius.real, segment.radius.imag, math.radians(segment.rotation)
    if math.isclose(rx, ry, rel_tol=1e-12):
        return arcs(centre, rx, start + turn, end + turn)
    ellipse = Ellipse(centre, 2 * rx, 2 * ry, turn)
    count = max(1, math.ceil(abs(end - start) / LONGEST_ARC))
    steps = [start + (end - start) * k / count for k in range(count + 1)]
    return [ellipse.arc(a, b) for a, b in itertools.pairwise(steps)]


def _point(z: complex) -> Point:
    return (float(z.real), float(z.imag))


def closed(curves: Sequence[Curve]) -> Outline:
    """The chains of some curves, the outer one first and counter-clockwise, holes clockwise.

    Raises ValueError where a chain is not closed, or there is more than one outer one.
    """
    size = sum(curve.length for curve in curves)
    kept = tuple(curve for curve in curves if curve.length > SMALLEST * size)
    if not kept:
        raise ValueError("draws nothing")
    if any(isinstance(curve, PolynomialArc) and _stops(curve) for curve in kept):
        raise ValueError("has a point where it has no direction: two points of a Bezier curve are one")
    loops = []
    for chain in chains(kept):
        if math.dist(chain[-1].end, chain[0].start) > SMALLEST * size:
            raise ValueError("is not closed: it must end where it began")
        loops.append((_area(chain), chain))
    loops.sort(key=lambda item: -abs(item[0]))
    turned = [_turned(chain, reverse=(area > 0) == (k > 0)) for k, (area, chain) in enumerate(loops)]
    return tuple(curve for chain in turned for curve in chain)


def _stops(curve: PolynomialArc) -> bool:
    import numpy as np

    speed = np.hypot(*curve.derivative(np.linspace(0.0, 1.0, 33)).T)
    return bool(speed.min() < 1e-3 * curve.length)


def _turned(chain: Outline, *, reverse: bool) -> Outline:
    return tuple(curve.reversed() for curve in reversed(chain)) if reverse else chain


def _area(chain: Outline) -> float:
    """Area inside a closed chain, positive where it runs counter-clockwise."""
    total = 0.0
    for curve in chain:
        (x0, y0), (x1, y1) = curve.start, curve.end
        total += (x0 * y1 - x1 * y0) / 2
        if isinstance(curve, Arc):
            total += curve.radius**2 * (curve.sweep - math.sin(curve.sweep)) / 2
        elif isinstance(curve, PolynomialArc):
            total += curve.swept
    return total
