"""Smooth closed figures: ellipses, splines through points, and outlines made elsewhere."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from scipy.interpolate import CubicSpline

from nightcap.geometry.curves import Curve, Point
from nightcap.geometry.polynomial_arc import HIGHEST_DEGREE, PolynomialArc, fitted
from nightcap.geometry.shapes.outline import Outline, Shape
from nightcap.geometry.shapes.parallel import Grown

PIECES = 24
"""Of a full ellipse. Interpolation of degree 8 at Chebyshev's points over an angle h misses a circle of radius a by at
most 2 a (h/4)^9 / 9! = 3e-17 a here; what is left is rounding."""
ELLIPSE_DEVIATION = 1e-13
"""Bound on what a piece misses of an ellipse, relative to the greater half axis, rounding included."""


@dataclass(frozen=True)
class Ellipse:
    """An ellipse, possibly turned about its centre."""

    centre: Point
    width: float
    height: float
    """Full axes, m."""
    angle: float = 0.0
    """Radians, counter-clockwise."""

    def outline(self) -> Outline:
        step = math.tau / PIECES
        return tuple(self.arc(k * step, (k + 1) * step) for k in range(PIECES))

    def arc(self, start: float, end: float) -> PolynomialArc:
        """The part between two eccentric anomalies, radians, that are close to each other."""
        s = (1 - np.cos(np.pi * np.arange(HIGHEST_DEGREE + 1) / HIGHEST_DEGREE)) / 2
        anomaly = start + (end - start) * s
        x, y = self.width / 2 * np.cos(anomaly), self.height / 2 * np.sin(anomaly)
        c, q = math.cos(self.angle), math.sin(self.angle)
        points = np.stack([self.centre[0] + c * x - q * y, self.centre[1] + q * x + c * y], axis=1)
        return fitted(points, s, ELLIPSE_DEVIATION * max(self.width, self.height))

    def grown(self, thickness: float) -> Shape:
        return Grown(self, thickness)


@dataclass(frozen=True)
class Smooth:
    """The closed curve through points whose direction and curvature are continuous: a periodic cubic spline.

    Its parameter goes with the square root of the distances of the points (centripetal; Lee 1989).
    """

    points: tuple[Point, ...]

    def outline(self) -> Outline:
        closed = np.array([*self.points, self.points[0]])
        knots = np.concatenate([[0.0], np.cumsum(np.sqrt(np.hypot(*np.diff(closed, axis=0).T)))])
        spline = CubicSpline(knots, closed, bc_type="periodic")
        slopes = spline(knots, 1)
        thirds = np.diff(knots)[:, None] / 3
        ahead, back = closed[:-1] + slopes[:-1] * thirds, closed[1:] - slopes[1:] * thirds
        control = np.stack([closed[:-1], ahead, back, closed[1:]], axis=1)
        curves = [PolynomialArc(tuple((float(x), float(y)) for x, y in piece)) for piece in control]
        area = sum(a[0] * b[1] - b[0] * a[1] for a, b in pairwise(closed.tolist())) / 2
        area += sum(curve.swept for curve in curves)
        return tuple(curves) if area > 0 else tuple(curve.reversed() for curve in reversed(curves))

    def grown(self, thickness: float) -> Shape:
        return Grown(self, thickness)


@dataclass(frozen=True)
class Traced:
    """A figure whose outline was drawn elsewhere: closed chains, the outer one first and counter-clockwise."""

    curves: tuple[Curve, ...]

    def outline(self) -> Outline:
        return self.curves

    def grown(self, thickness: float) -> Shape:
        return Grown(self, thickness)
