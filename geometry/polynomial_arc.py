"""Curves beyond lines and circles: polynomial arcs of degree at most 8, which curved triangles follow exactly."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from nightcap.geometry.curves import Floats, Point

HIGHEST_DEGREE = 8
"""That of the edges of curved triangles, curving.ORDER: a part of such a curve is such an edge without any error."""


@dataclass(frozen=True)
class PolynomialArc:
    """A Bezier curve, run through by its own parameter t from 0 to 1: not at constant speed."""

    control: tuple[Point, ...]
    """Bernstein coefficients, m; the first and last are the ends."""
    deviation: float = 0.0
    """Bound on the distance from the curve that it stands for, m: 0 where it is that curve itself."""

    @property
    def start(self) -> Point:
        return self.control[0]

    @property
    def end(self) -> Point:
        return self.control[-1]

    @property
    def degree(self) -> int:
        return len(self.control) - 1

    @cached_property
    def _points(self) -> Floats:
        return np.array(self.control)

    @cached_property
    def _hodograph(self) -> Floats:
        """(degree, 2) Bernstein coefficients of the derivative."""
        return self.degree * np.diff(self._points, axis=0)

    @cached_property
    def length(self) -> float:
        t, weights = np.polynomial.legendre.leggauss(32)
        return float(weights @ np.hypot(*self.derivative((t + 1) / 2).T) / 2)

    @cached_property
    def curvature(self) -> float:
        """The greatest in size of many along the curve, with its sign, 1/m."""
        bends = self.bend(np.linspace(0.0, 1.0, 65))
        return float(bends[np.argmax(np.abs(bends))])

    def bend(self, t: Floats) -> Floats:
        """Signed curvatures at the parameters t, 1/m."""
        (u, v), (p, q) = self.derivative(t).T, self._second(t).T
        return np.asarray((u * q - v * p) / np.hypot(u, v) ** 3)

    def at(self, t: Floats) -> Floats:
        return _bernstein(self.degree, t) @ self._points

    def derivative(self, t: Floats) -> Floats:
        """(..., 2) by the parameter, m."""
        return _bernstein(self.degree - 1, t) @ self._hodograph

    def _second(self, t: Floats) -> Floats:
        if self.degree < 2:
            return np.zeros((*np.shape(t), 2))
        return _bernstein(self.degree - 2, t) @ ((self.degree - 1) * np.diff(self._hodograph, axis=0))

    def tangent(self, t: Floats) -> Floats:
        velocity = self.derivative(t)
        return np.asarray(velocity / np.hypot(velocity[..., 0], velocity[..., 1])[..., None])

    def heading(self, from_start: bool) -> tuple[float, float]:
        """Polar angle, in [0, 2 pi), and signed curvature, 1/m, with which it leaves its start, or its end."""
        u, v = self._hodograph[0] if from_start else -self._hodograph[-1]
        bend = float(self.bend(np.array([0.0 if from_start else 1.0]))[0])
        return math.atan2(v, u) % math.tau % math.tau, bend if from_start else -bend

    def reversed(self) -> PolynomialArc:
        return PolynomialArc(self.control[::-1], self.deviation)

    def part(self, t0: float, t1: float) -> PolynomialArc:
        """By de Casteljau's rule, twice."""
        left = _cut(self._points, t1)[0]
        control = _cut(left, t0 / t1)[1] if t0 > 0 else left
        return PolynomialArc(tuple((float(x), float(y)) for x, y in control), self.deviation)

    @cached_property
    def box(self) -> tuple[float, float, float, float]:
        """Low x, low y, high x, high y of a box that holds the curve: that of its control points, m."""
        (x0, y0), (x1, y1) = self._points.min(axis=0), self._points.max(axis=0)
        return (float(x0), float(y0), float(x1), float(y1))

    @cached_property
    def turn(self) -> float:
        """A bound on the angle between any two of its directions, radians: that of its derivative's coefficients."""
        angles = np.arctan2(self._hodograph[:, 1], self._hodograph[:, 0])
        turned = np.concatenate([[0.0], np.cumsum([math.remainder(a, math.tau) for a in np.diff(angles)])])
        return float(np.ptp(turned))

    @cached_property
    def swept(self) -> float:
        """Area between the curve and its chord, positive where the curve lies to the right of the chord, m^2."""
        t, weights = np.polynomial.legendre.leggauss(HIGHEST_DEGREE)
        t = (t + 1) / 2
        away = self.at(t) - self._points[0]
        velocity = self.derivative(t)
        return float(weights @ (away[:, 0] * velocity[:, 1] - away[:, 1] * velocity[:, 0])) / 4

    def winding(self, point: Point | Floats) -> float:
        """Angle, radians, by which the direction from a point to the curve turns along it."""
        px, py = float(point[0]), float(point[1])
        low_x, low_y, high_x, high_y = self.box
        flat = max(high_x - low_x, high_y - low_y) < 1e-13 * (abs(px) + abs(py) + high_x - low_x)
        if flat or not (low_x <= px <= high_x and low_y <= py <= high_y):
            (ax, ay), (bx, by) = self.start, self.end
            ux, uy, vx, vy = ax - px, ay - py, bx - px, by - py
            return math.atan2(ux * vy - uy * vx, ux * vx + uy * vy)
        return self.part(0.0, 0.5).winding(point) + self.part(0.5, 1.0).winding(point)

    def nearest(self, x: Floats) -> Floats:
        """(n,) the parameter of the nearest point of the curve to each of some points x (n, 2)."""
        grid = np.linspace(0.0, 1.0, 65)
        points = self.at(grid)
        t = grid[np.argmin(np.hypot(*(x[:, None] - points).transpose(2, 0, 1)), axis=1)]
        for _ in range(12):  # Newton for the foot of the perpendicular
            away, velocity, second = self.at(t) - x, self.derivative(t), self._second(t)
            slope = (velocity**2).sum(1) + (away * second).sum(1)
            safe = np.where(slope > 0.1 * (velocity**2).sum(1), slope, (velocity**2).sum(1))
            t = np.clip(t - (away * velocity).sum(1) / safe, 0.0, 1.0)
        return np.asarray(t)


def _bernstein(degree: int, t: Floats) -> Floats:
    """(..., degree + 1) the Bernstein polynomials at t."""
    t = np.asarray(t, dtype=float)[..., None]
    k = np.arange(degree + 1)
    return np.asarray([math.comb(degree, j) for j in k] * t**k * (1 - t) ** (degree - k))


def _cut(points: Floats, t: float) -> tuple[Floats, Floats]:
    """The control points of the two parts of a curve cut at a parameter."""
    left, right, rest = [points[0]], [points[-1]], points
    while len(rest) > 1:
        rest = (1 - t) * rest[:-1] + t * rest[1:]
        left.append(rest[0])
        right.append(rest[-1])
    return np.array(left), np.array(right[::-1])


def fitted(points: Floats, parameters: Floats, deviation: float) -> PolynomialArc:
    """The polynomial arc through points (n, 2) at parameters (n,) from 0 to 1, the first and last at its ends."""
    control = np.linalg.solve(_bernstein(len(points) - 1, parameters), points)
    control[0], control[-1] = points[0], points[-1]
    return PolynomialArc(tuple((float(x), float(y)) for x, y in control), deviation)
