"""Gaps between conductors: how wide the narrowest are, and where."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from scipy.spatial import cKDTree

from nightcap.geometry.case import Case
from nightcap.geometry.crossing import CurveTable
from nightcap.geometry.curves import Arc, Curve, Floats, Ints, Point, Segment
from nightcap.geometry.painting import Drawing
from nightcap.geometry.polynomial_arc import PolynomialArc


@dataclass(frozen=True)
class Gap:
    """The narrowest place between two conductors that do not meet."""

    conductors: tuple[int, int]
    """Their numbers, ascending; the boundary's is the highest."""
    ends: tuple[Point, Point]
    """The two nearest points, m."""

    @property
    def width(self) -> float:
        """In metres."""
        return float(np.hypot(*np.subtract(*self.ends)))

    @property
    def middle(self) -> Point:
        """In metres."""
        x, y = np.mean(self.ends, axis=0).tolist()
        return (x, y)


@dataclass(frozen=True, eq=False)
class Surfaces:
    """The surfaces of all conductors, curve by curve."""

    curves: tuple[Curve, ...]
    owner: Ints
    """(n,) the conductor of each curve."""


def surfaces(case: Case, drawing: Drawing) -> Surfaces:
    """What the conductors of a case, its shield or plane included, show to each other."""
    outlines = [(d.conductor, d.outline) for d in drawing.drawn if d.material is None and d.conductor is not None]
    outlines += [(len(case.conductors), surface) for surface in drawing.domain.grounded]
    owner = np.array([conductor for conductor, outline in outlines for _ in outline], dtype=np.int64)
    return Surfaces(tuple(curve for _, outline in outlines for curve in outline), owner)


def gaps_below(surface: Surfaces, width: float) -> list[Gap]:
    """The narrowest gap of each pair of conductors that come closer than a width, m; by their numbers."""
    found: dict[tuple[int, int], Gap] = {}
    for one, two in _near_pairs(surface, width):
        gap = _gap(surface, one, two)
        if gap.width < width and (gap.conductors not in found or gap.width < found[gap.conductors].width):
            found[gap.conductors] = gap
    return [found[pair] for pair in sorted(found)]


def smallest_gap(surface: Surfaces) -> Gap | None:
    """The narrowest gap of all; None if there is only one conductor."""
    bound = min((width for width in _sampled_widths(surface)), default=None)
    if bound is None:
        return None
    return min(gaps_below(surface, bound * (1 + 1e-9)), key=lambda gap: gap.width, default=None)


def _sampled_widths(surface: Surfaces) -> Iterator[float]:
    """For each conductor the distance of its sampled surface to those of the others, m: no less than the true one."""
    samples, owner = _samples(surface.curves, 65), surface.owner
    for conductor in np.unique(owner):
        own = owner == conductor
        if not own.all():
            distances, _ = cKDTree(samples[~own].reshape(-1, 2)).query(samples[own].reshape(-1, 2))
            yield float(distances.min())


def _samples(curves: tuple[Curve, ...], count: int) -> Floats:
    """(n, count, 2) points evenly along each curve."""
    t = np.linspace(0.0, 1.0, count)
    return np.array([curve.at(t) for curve in curves])


def _near_pairs(surface: Surfaces, margin: float) -> list[tuple[int, int]]:
    """Pairs of curves of two conductors that may come within a margin: none does whose samples are farther apart."""
    table, owner = CurveTable(surface.curves), surface.owner
    boxes = table.boxes(margin)
    reaches = (boxes[:, None, :2] <= boxes[None, :, 2:]).all(axis=2)
    one, two = np.nonzero(reaches & reaches.T & (owner[:, None] < owner))
    samples = _samples(surface.curves, 17)
    apart = np.hypot(*(samples[one, :, None] - samples[two, None]).transpose(3, 0, 1, 2)).min(axis=(1, 2))
    near = apart - (table.length[one] + table.length[two]) / 32 <= margin
    return [(int(i), int(j)) for i, j in zip(one[near], two[near], strict=True)]


def _gap(surface: Surfaces, one: int, two: int) -> Gap:
    """Nearest points of two curves that do not meet: the best of samples on one, then closer and closer around it."""
    first, second = surface.curves[one], surface.curves[two]
    t, step = np.linspace(0.0, 1.0, 257), 1 / 256
    for _ in range(12):
        here, there = first.at(t), nearest_on(second, first.at(t))
        k = int(np.argmin(np.hypot(*(here - there).T)))
        t, step = np.clip(t[k] + step * np.linspace(-1.0, 1.0, 17), 0.0, 1.0), step / 8
    ends = np.array([here[k], there[k]]).tolist()
    return Gap((int(surface.owner[one]), int(surface.owner[two])), (tuple(ends[0]), tuple(ends[1])))


def nearest_on(curve: Curve, x: Floats) -> Floats:
    """(n, 2) the nearest point of a curve to each of some points x (n, 2)."""
    start, end = np.array(curve.start), np.array(curve.end)
    if isinstance(curve, Segment):
        along = np.clip((x - start) @ (end - start) / curve.length**2, 0.0, 1.0)
        return np.asarray(start + along[:, None] * (end - start))
    if isinstance(curve, PolynomialArc):
        return curve.at(curve.nearest(x))
    assert isinstance(curve, Arc)  # noqa: S101 - outlines are made of nothing else
    away = x - np.array(curve.centre)
    turned = np.sign(curve.sweep) * (np.arctan2(away[:, 1], away[:, 0]) - curve.start_angle)
    beside = np.mod(turned, 2 * np.pi) <= abs(curve.sweep)
    distance = np.hypot(*away.T)[:, None]
    outward = np.where(distance > 0, away / np.maximum(distance, 1e-300), curve.tangent(np.array(0.5)))
    on_circle = np.array(curve.centre) + curve.radius * outward
    nearer_end = np.where((np.hypot(*(x - start).T) < np.hypot(*(x - end).T))[:, None], start, end)
    return np.asarray(np.where(beside[:, None], on_circle, nearer_end))
