"""Where two curves of any kind meet: crossings, and the place where they come closest."""

from __future__ import annotations

import numpy as np

from nightcap.geometry.curves import Curve, Floats
from nightcap.geometry.polynomial_arc import PolynomialArc

FASTEST = 3.0
"""No curve runs faster than so many times its mean speed: a piece that does would have been divided."""
STEPS = 48
"""Chords by which crossings are first found; curves between two points of an outline bend much less than that."""
MOST = 3
"""Meetings that are looked for: two crossings, and one contact."""


def meetings(one: Curve, two: Curve, tolerance: float) -> Floats:
    """(MOST, 2) points where two curves cross or come within the tolerance, m, of each other; the rest is nan."""
    found = np.full((MOST, 2), np.nan)
    t = np.linspace(0.0, 1.0, STEPS + 1)
    x, y = one.at(t), two.at(t)
    starts = _crossing_chords(x, y)
    points = [_refined(one, two, t[i] + 0.5 / STEPS, t[j] + 0.5 / STEPS) for i, j in starts]
    closest = _closest(one, two, x, y, t, tolerance)
    distinct: list[Floats] = []
    for point in [*points, *closest]:
        if all(np.hypot(*(point - other)) > 4 * tolerance for other in distinct):
            distinct.append(point)
    for k, point in enumerate(distinct[:MOST]):
        found[k] = point
    return found


def _crossing_chords(x: Floats, y: Floats) -> list[tuple[int, int]]:
    """Pairs of chords of two polylines that cross."""
    a, b, c, d = x[:-1, None], x[1:, None], y[None, :-1], y[None, 1:]
    cross = (_side(a, b, c) * _side(a, b, d) <= 0) & (_side(c, d, a) * _side(c, d, b) <= 0)
    return [(int(i), int(j)) for i, j in zip(*np.nonzero(cross), strict=True)]


def _side(a: Floats, b: Floats, p: Floats) -> Floats:
    u, v = b - a, p - a
    return np.asarray(u[..., 0] * v[..., 1] - u[..., 1] * v[..., 0])


def _velocity(curve: Curve, t: float) -> Floats:
    at = np.array(t)
    return curve.derivative(at) if isinstance(curve, PolynomialArc) else curve.tangent(at) * curve.length


def _refined(one: Curve, two: Curve, t: float, u: float) -> Floats:
    """The crossing near a pair of parameters, by Newton's method."""
    for _ in range(12):
        gap = two.at(np.array(u)) - one.at(np.array(t))
        matrix = np.stack([_velocity(one, t), -_velocity(two, u)], axis=1)
        if abs(np.linalg.det(matrix)) < 1e-14 * np.abs(matrix).max() ** 2:
            break  # they touch rather than cross
        step = np.linalg.solve(matrix, gap)
        t, u = float(np.clip(t + step[0], 0, 1)), float(np.clip(u + step[1], 0, 1))
    return np.asarray((one.at(np.array(t)) + two.at(np.array(u))) / 2)


def _closest(one: Curve, two: Curve, x: Floats, y: Floats, t: Floats, tolerance: float) -> list[Floats]:
    """The place where the curves come closest, if that is within the tolerance: by Newton's method for both feet."""
    apart = np.hypot(*(x[:, None] - y[None]).transpose(2, 0, 1))
    i, j = np.unravel_index(int(np.argmin(apart)), apart.shape)
    if apart[i, j] <= tolerance / 4:
        return [np.asarray((x[i] + y[j]) / 2)]
    if apart[i, j] > tolerance + FASTEST * (one.length + two.length) / STEPS:
        return []
    s, u, step = float(t[i]), float(t[j]), 1.0 / STEPS
    for _ in range(24):
        near = np.linspace(-step, step, 9)
        ss, us = np.clip(s + near, 0, 1), np.clip(u + near, 0, 1)
        apart = np.hypot(*(one.at(ss)[:, None] - two.at(us)[None]).transpose(2, 0, 1))
        i, j = np.unravel_index(int(np.argmin(apart)), apart.shape)
        s, u, step = float(ss[i]), float(us[j]), step * 0.4
    if apart.min() > tolerance:
        return []
    return [np.asarray((one.at(np.array(s)) + two.at(np.array(u))) / 2)]
