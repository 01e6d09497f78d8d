"""Curves of which outlines are made: straight segments and circular arcs, exact in both."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Protocol, runtime_checkable

import numpy as np
from numpy.typing import NDArray

Point = tuple[float, float]
"""x, y in metres."""
Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Flags = NDArray[np.bool_]


class Curve(Protocol):
    """A smooth piece of an outline, run through by a parameter t from 0 to 1; lines and arcs at constant speed."""

    @property
    def start(self) -> Point: ...

    @property
    def end(self) -> Point: ...

    @property
    def length(self) -> float: ...

    @property
    def curvature(self) -> float:
        """Signed, 1/m: positive where the curve turns left; the greatest in size where it changes."""

    def at(self, t: Floats) -> Floats:
        """Points, shape (..., 2), at the parameters t, shape (...)."""

    def tangent(self, t: Floats) -> Floats:
        """Unit tangents, shape (..., 2), at the parameters t, shape (...)."""

    def reversed(self) -> Curve: ...

    def part(self, t0: float, t1: float) -> Curve:
        """The piece between two parameters, t0 < t1."""


@runtime_checkable
class Bending(Protocol):
    """A curve whose curvature is not even."""

    def heading(self, from_start: bool) -> tuple[float, float]:
        """Polar angle, in [0, 2 pi), and signed curvature, 1/m, with which it leaves its start, or its end."""


SAME_DIRECTION = 1e-6
"""Two curves that leave a point at less than this angle form a cusp, radians."""


def direction_and_bend(curve: Curve, from_start: bool) -> tuple[float, float]:
    """Polar angle, in [0, 2 pi), and signed curvature, 1/m, with which a curve leaves its start, or its end."""
    if isinstance(curve, Bending):
        return curve.heading(from_start)
    if isinstance(curve, Arc):
        quarter = math.copysign(math.pi / 2, curve.sweep)
        angle = curve.start_angle + quarter if from_start else curve.end_angle - quarter
    else:
        (x0, y0), (x1, y1) = (curve.start, curve.end) if from_start else (curve.end, curve.start)
        angle = math.atan2(y1 - y0, x1 - x0)
    return angle % math.tau % math.tau, curve.curvature if from_start else -curve.curvature


@dataclass(frozen=True)
class Segment:
    """A straight line from start to end."""

    start: Point
    end: Point

    @property
    def length(self) -> float:
        return math.dist(self.start, self.end)

    @property
    def curvature(self) -> float:
        return 0.0

    def at(self, t: Floats) -> Floats:
        t = np.asarray(t, dtype=float)[..., None]
        return np.asarray((1.0 - t) * np.asarray(self.start) + t * np.asarray(self.end))

    def tangent(self, t: Floats) -> Floats:
        direction = (np.asarray(self.end) - np.asarray(self.start)) / self.length
        return np.broadcast_to(direction, (*np.shape(t), 2))

    def reversed(self) -> Segment:
        return Segment(self.end, self.start)

    def part(self, t0: float, t1: float) -> Segment:
        ends = self.at(np.array([t0, t1])).tolist()
        return Segment(tuple(ends[0]), tuple(ends[1]))


@dataclass(frozen=True)
class Arc:
    """A piece of a circle, from one polar angle to another; end_angle > start_angle runs counter-clockwise."""

    centre: Point
    radius: float
    start_angle: float
    """Radians."""
    end_angle: float
    """Radians; differs from start_angle by at most a full turn."""

    @property
    def start(self) -> Point:
        return self._on_circle(self.start_angle)

    @property
    def end(self) -> Point:
        return self._on_circle(self.end_angle)

    @property
    def sweep(self) -> float:
        """Signed angle run through, radians."""
        return self.end_angle - self.start_angle

    @property
    def length(self) -> float:
        return self.radius * abs(self.sweep)

    @property
    def curvature(self) -> float:
        return math.copysign(1.0 / self.radius, self.sweep)

    def _on_circle(self, angle: float) -> Point:
        return (self.centre[0] + self.radius * math.cos(angle), self.centre[1] + self.radius * math.sin(angle))

    def at(self, t: Floats) -> Floats:
        angle = self.start_angle + np.asarray(t, dtype=float) * self.sweep
        return np.asarray(self.centre) + self.radius * np.stack([np.cos(angle), np.sin(angle)], axis=-1)

    def tangent(self, t: Floats) -> Floats:
        angle = self.start_angle + np.asarray(t, dtype=float) * self.sweep
        return math.copysign(1.0, self.sweep) * np.stack([-np.sin(angle), np.cos(angle)], axis=-1)

    def reversed(self) -> Arc:
        return Arc(self.centre, self.radius, self.end_angle, self.start_angle)

    def part(self, t0: float, t1: float) -> Arc:
        return Arc(self.centre, self.radius, self.start_angle + t0 * self.sweep, self.start_angle + t1 * self.sweep)
