"""Gaps between conductors: how wide the narrowest are, and where."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from scipy.spatial import cKDTree

from nightcap.geometry.case import Case, OpenSpace
from nightcap.geometry.crossing import CurveTable
from nightcap.geometry.curves import Curve, Floats, Ints, Point
from nightcap.geometry.painting import Drawing


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
    if not isinstance(case.boundary, OpenSpace):
        floor = drawing.domain[:1] if drawing.rim else drawing.domain
        outlines.append((len(case.conductors), floor))
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
    """Nearest points of two curves that do not meet: the nearest of samples, then closer and closer around them."""
    first, second = surface.curves[one], surface.curves[two]
    samples = np.linspace(0.0, 1.0, 257)
    distances, nearest = cKDTree(second.at(samples)).query(first.at(samples))
    k = int(np.argmin(distances))
    t, u, step = float(samples[k]), float(samples[nearest[k]]), 1 / 256
    for _ in range(12):
        around = np.linspace(-step, step, 9)
        ts, us = np.clip(t + around, 0.0, 1.0), np.clip(u + around, 0.0, 1.0)
        apart = np.hypot(*(first.at(ts)[:, None] - second.at(us)[None]).transpose(2, 0, 1))
        i, j = np.unravel_index(int(np.argmin(apart)), apart.shape)
        t, u, step = float(ts[i]), float(us[j]), step / 4
    ends = np.array([first.at(np.array(t)), second.at(np.array(u))]).tolist()
    return Gap((int(surface.owner[one]), int(surface.owner[two])), (tuple(ends[0]), tuple(ends[1])))
