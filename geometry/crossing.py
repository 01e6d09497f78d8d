"""Where segments and arcs meet: crossings, touching points, and ends that lie on another curve."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

import numpy as np

from nightcap.geometry.curves import Arc, Curve, Floats, Ints
from nightcap.geometry.meetings import MOST, meetings
from nightcap.geometry.polynomial_arc import PolynomialArc

OUTWARD = np.array([-1.0, -1.0, 1.0, 1.0])


class CurveTable:
    """Many segments and arcs as arrays, so that pairs of them are worked on all at once."""

    def __init__(self, curves: Sequence[Curve]) -> None:
        self.start = np.array([curve.start for curve in curves])
        self.end = np.array([curve.end for curve in curves])
        self.length = np.array([curve.length for curve in curves])
        arcs = [c if isinstance(c, Arc) else Arc((0.0, 0.0), 0.0, 0.0, 1.0) for c in curves]
        self.centre = np.array([arc.centre for arc in arcs])
        self.radius = np.array([arc.radius for arc in arcs])
        """(n,) 0 for segments."""
        self.angle = np.array([arc.start_angle for arc in arcs])
        self.sweep = np.array([arc.sweep for arc in arcs])
        self.curves = curves
        self.smooth = {k: curve for k, curve in enumerate(curves) if isinstance(curve, PolynomialArc)}
        self.is_smooth = np.isin(np.arange(len(curves)), list(self.smooth))
        """(n,) True for those that are neither segment nor arc."""

    def boxes(self, margin: float) -> Floats:
        """(n, 4) low x, low y, high x, high y of boxes that hold the curves."""
        half = np.abs(self.sweep) / 2
        bulge = self.radius * (1 - np.cos(np.minimum(half, np.pi)))
        low, high = np.minimum(self.start, self.end), np.maximum(self.start, self.end)
        reach = (margin + bulge)[:, None]
        boxes = np.concatenate([low - reach, high + reach], axis=1)
        for k, curve in self.smooth.items():
            boxes[k] = np.array(curve.box) + margin * OUTWARD
        return boxes

    def parameter(self, index: Ints, x: Floats, tolerance: float) -> Floats:
        """(n,) parameter of each point x (n, 2) on the curve of that index, or nan if it is not on it (or is nan)."""
        start, chord = self.start[index], self.end[index] - self.start[index]
        length = self.length[index]
        t = ((x - start) * chord).sum(axis=1) / length**2
        off = np.hypot(*(x - start - t[:, None] * chord).T)
        away = x - self.centre[index]
        bent = self.radius[index] > 0
        turned = np.sign(self.sweep[index]) * (np.arctan2(away[:, 1], away[:, 0]) - self.angle[index])
        turned = np.mod(turned, 2 * np.pi)
        slack = tolerance / np.where(bent, self.radius[index], 1.0)
        turned = np.where(turned > 2 * np.pi - slack, 0.0, turned)
        t = np.where(bent, turned / np.abs(self.sweep[index]), t)
        off = np.where(bent, np.abs(np.hypot(*away.T) - self.radius[index]), off)
        for k in np.unique(index[self.is_smooth[index]]).tolist():
            rows = np.flatnonzero((index == k) & ~np.isnan(x).any(axis=1))
            t[rows] = self.smooth[k].nearest(x[rows])
            off[rows] = np.hypot(*(self.smooth[k].at(t[rows]) - x[rows]).T)
        on = (off <= tolerance) & (t * length >= -tolerance) & ((t - 1) * length <= tolerance)
        return np.where(on, np.clip(t, 0.0, 1.0), np.nan)


def cut_parameters(curves: Sequence[Curve], tolerance: float) -> list[Floats]:
    """For each curve the parameters, 0 and 1 included, at which it meets any other; none closer than the tolerance.

    Curves that come within the tolerance of each other without crossing touch in one point.
    """
    table = CurveTable(curves)
    one, two = _close_pairs(table, tolerance)
    points = _candidates(table, one, two, tolerance)
    first, second = np.repeat(one, points.shape[1]), np.repeat(two, points.shape[1])
    flat = points.reshape(-1, 2)
    with np.errstate(invalid="ignore"):
        t, u = table.parameter(first, flat, 2 * tolerance), table.parameter(second, flat, 2 * tolerance)
    both = ~np.isnan(t) & ~np.isnan(u)
    owner = np.concatenate([np.arange(len(curves)).repeat(2), first[both], second[both]])
    where = np.concatenate([np.tile([0.0, 1.0], len(curves)), t[both], u[both]])
    order = np.lexsort((where, owner))
    bounds = np.searchsorted(owner[order], np.arange(len(curves) + 1))
    slack = 4 * tolerance / table.length
    return [_distinct(where[order[a:b]], slack[k]) for k, (a, b) in enumerate(pairwise(bounds))]


def _distinct(t: Floats, slack: float) -> Floats:
    """Ascending parameters without those that nearly repeat; the ends stay 0 and 1."""
    kept = [0.0, *t[(t > slack) & (t < 1 - slack)].tolist(), 1.0]
    return np.array([x for k, x in enumerate(kept) if k == 0 or x - kept[k - 1] > slack])


def _close_pairs(table: CurveTable, tolerance: float) -> tuple[Ints, Ints]:
    """Pairs of curves, each once, whose boxes overlap."""
    boxes = table.boxes(2 * tolerance)
    order = np.argsort(boxes[:, 0])
    last = np.searchsorted(boxes[order, 0], boxes[order, 2], side="right")
    counts = last - np.arange(len(order)) - 1
    one = np.repeat(np.arange(len(order)), counts)
    two = one + 1 + np.arange(len(one)) - np.repeat(np.cumsum(counts) - counts, counts)
    one, two = order[one], order[two]
    meet = (boxes[one, 1] <= boxes[two, 3]) & (boxes[two, 1] <= boxes[one, 3])
    return one[meet], two[meet]


def _candidates(table: CurveTable, one: Ints, two: Ints, tolerance: float) -> Floats:
    """(n, MOST + 4, 2) points where pairs may meet: crossings of the full lines and circles, and the four ends."""
    swap = (table.radius[one] > 0) & (table.radius[two] == 0)
    one, two = np.where(swap, two, one), np.where(swap, one, two)
    crossings = np.full((len(one), MOST, 2), np.nan)
    smooth = table.is_smooth[one] | table.is_smooth[two]
    for row in np.flatnonzero(smooth):
        crossings[row] = meetings(table.curves[one[row]], table.curves[two[row]], tolerance)
    bent = (table.radius[one] > 0).astype(int) + (table.radius[two] > 0)
    for kind, rule in enumerate((_line_line, _line_circle, _circle_circle)):
        rows = np.flatnonzero((bent == kind) & ~smooth)
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            crossings[rows, :2] = rule(table, one[rows], two[rows], tolerance)
    ends = np.stack([table.start[one], table.end[one], table.start[two], table.end[two]], axis=1)
    return np.concatenate([crossings, ends], axis=1)


def _line_line(table: CurveTable, one: Ints, two: Ints, _: float) -> Floats:
    u, v = table.end[one] - table.start[one], table.end[two] - table.start[two]
    apart = table.start[two] - table.start[one]
    cross = _cross(u, v)
    parallel = np.abs(cross) <= 1e-14 * table.length[one] * table.length[two]
    t = np.where(parallel, np.nan, _cross(apart, v) / cross)
    point = table.start[one] + t[:, None] * u
    return np.stack([point, point], axis=1)


def _line_circle(table: CurveTable, line: Ints, arc: Ints, tolerance: float) -> Floats:
    along = (table.end[line] - table.start[line]) / table.length[line][:, None]
    away = table.centre[arc] - table.start[line]
    foot = table.start[line] + (away * along).sum(axis=1)[:, None] * along
    distance = np.abs(_cross(along, away))
    return _around(foot, along, distance - table.radius[arc], table.radius[arc] ** 2 - distance**2, tolerance)


def _circle_circle(table: CurveTable, one: Ints, two: Ints, tolerance: float) -> Floats:
    apart = table.centre[two] - table.centre[one]
    d = np.hypot(*apart.T)
    r, s = table.radius[one], table.radius[two]
    along = np.where(d > tolerance, apart.T / np.maximum(d, 1e-300), np.nan).T
    outside, inside = d - (r + s), np.abs(r - s) - d
    touching = np.where(np.abs(outside) < np.abs(inside), outside, inside)
    x = np.where(touching == outside, r + outside / 2, np.where(r > s, r, -r))
    exact = (d**2 + r**2 - s**2) / (2 * np.maximum(d, 1e-300))
    x = np.where(np.abs(touching) <= tolerance, x, exact)
    foot = table.centre[one] + x[:, None] * along
    across = np.stack([-along[:, 1], along[:, 0]], axis=1)
    return _around(foot, across, touching, r**2 - exact**2, tolerance)


def _around(foot: Floats, along: Floats, gap: Floats, square: Floats, tolerance: float) -> Floats:
    """The two points beside a foot, at the root of ``square``; the foot itself where the gap says that they touch."""
    root = np.where(square >= 0, np.sqrt(np.maximum(square, 0.0)), np.nan)
    root = np.where(np.abs(gap) <= tolerance, 0.0, np.where(gap > 0, np.nan, root))
    return np.stack([foot + root[:, None] * along, foot - root[:, None] * along], axis=1)


def _cross(u: Floats, v: Floats) -> Floats:
    return np.asarray(u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0])
