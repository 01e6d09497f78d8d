"""How long the edges of the first mesh may be: short at corners and in narrow gaps, long elsewhere."""

from __future__ import annotations

import math

import numpy as np

from nightcap.geometry.corners import corner_sizes
from nightcap.geometry.curves import SAME_DIRECTION, Arc, Floats, Ints, direction_and_bend
from nightcap.geometry.grading import Grading
from nightcap.geometry.layout import Layout, Piece
from nightcap.geometry.polynomial_arc import PolynomialArc
from nightcap.geometry.tips import tips

COARSE = 0.25
"""Edge length at a corner, as a fraction of the shortest piece there; finer layers are cut out of such triangles."""
GROWTH = 0.5
"""How fast edges may grow with the distance from a corner."""
GAP = 1.3
"""An edge beside a gap g along a curve of radius r is at most GAP sqrt((r + g) g)."""
SPREAD = 0.5
"""And, where walls let fields spread far along straight edges, at most SPREAD (r + g)."""

TIP_GAP = 0.5
"""An edge at the end of a strip, as a fraction of the distance to the next piece."""


def divide_pieces(layout: Layout, grading: Grading) -> list[Floats]:
    """For each piece the parameters, from 0 to 1, of the mesh vertices along it."""
    sizes = _Sizes(layout, grading)
    owner, t0, t1 = sizes.cells()
    middle = (t0 + t1) / 2
    cell_load = (t1 - t0) * sizes.lengths[owner] / sizes.at(owner, middle)
    twins = _pieces_with_twin(layout)
    order = np.lexsort((t0, owner))
    bounds = np.searchsorted(owner[order], np.arange(len(layout.pieces) + 1))
    divisions = []
    for k in range(len(layout.pieces)):
        cells = order[bounds[k] : bounds[k + 1]]
        load = np.concatenate([[0.0], np.cumsum(cell_load[cells])])
        ends = np.concatenate([t0[cells], [1.0]])
        n = max(math.ceil(load[-1] - 0.2), 2 if k in twins or layout.pieces[k].conductor is not None else 1)
        divisions.append(np.interp(np.linspace(0.0, load[-1], n + 1), load, ends))
    return divisions


def _pieces_with_twin(layout: Layout) -> set[int]:
    """Pieces that share both ends with another: a single edge each would make them one."""
    seen: dict[tuple[int, int], list[int]] = {}
    for k, piece in enumerate(layout.pieces):
        seen.setdefault((min(piece.start, piece.end), max(piece.start, piece.end)), []).append(k)
    return {k for group in seen.values() if len(group) > 1 for k in group}


class _Sizes:
    """Edge lengths asked for, evaluated for many points of many pieces at once."""

    def __init__(self, layout: Layout, grading: Grading) -> None:
        pieces = layout.pieces
        self.pieces = pieces
        self.lengths = np.array([piece.curve.length for piece in pieces])
        curvature = np.abs([piece.curve.curvature for piece in pieces])
        self.radius = np.where(curvature > 0, 1 / np.maximum(curvature, 1e-300), np.inf)
        self.coarsest = np.where(np.isinf(self.radius), self.lengths / 2, grading.turn * self.radius)
        at_corners = corner_sizes(layout, Grading(corner=COARSE, tip=1.0, bend=COARSE))
        self.sources = layout.points[list(at_corners)]
        self.source_size = np.array(list(at_corners.values()))
        self.arcs = np.array([_arc_row(piece) for piece in pieces])
        self.is_smooth = np.array([isinstance(piece.curve, PolynomialArc) for piece in pieces])
        self.spread = SPREAD if any(piece.wall for piece in pieces) else np.inf
        self.ends = np.array([(piece.curve.start, piece.curve.end) for piece in pieces])
        self._shrink_at_tips(layout, list(at_corners))
        self.near = _close_pairs(layout, self.coarsest)
        self.floor = grading.contact * np.where(np.isinf(self.radius), layout.size, self.radius)

    def _shrink_at_tips(self, layout: Layout, corners: list[int]) -> None:
        """At the end of a strip edges are short also against the distance to the next piece."""
        for point, incident in tips(layout).items():
            if point in corners:
                others = np.array([k for k in range(len(self.pieces)) if k not in incident], dtype=np.int64)
                gaps = self._distance(np.broadcast_to(layout.points[point], (len(others), 2)), others)
                least = COARSE * self.lengths[list(incident)].min()
                self.source_size[corners.index(point)] = min(least, TIP_GAP * gaps.min(initial=np.inf))

    def points(self, owner: Ints, t: Floats) -> Floats:
        """(n, 2) points at parameters t (n,) of pieces owner (n,)."""
        centre, (radius, angle, sweep) = self.arcs[owner, :2], self.arcs[owner, 2:].T
        start, end = self.ends[owner].transpose(1, 0, 2)
        phi = angle + t * sweep
        on_arc = centre + radius[:, None] * np.stack([np.cos(phi), np.sin(phi)], axis=1)
        x = np.where((radius > 0)[:, None], on_arc, start + t[:, None] * (end - start))
        for k in np.unique(owner[self.is_smooth[owner]]):
            rows = np.flatnonzero(owner == k)
            x[rows] = self.pieces[k].curve.at(t[rows])
        return np.asarray(x)

    def at(self, owner: Ints, t: Floats) -> Floats:
        """(n,) edge lengths, m."""
        x = self.points(owner, t)
        size = self.coarsest[owner].copy()
        for source, least in zip(self.sources, self.source_size, strict=True):
            np.minimum(size, least + GROWTH * np.hypot(*(x - source).T), out=size)
        row, other = _expand(self.near, owner)
        gap = self._distance(x[row], other)
        r = np.minimum(self.radius[owner[row]], self.radius[other])
        law = np.full(len(row), np.inf)
        bent = np.isfinite(r)
        law[bent] = np.minimum(GAP * np.sqrt((r[bent] + gap[bent]) * gap[bent]), self.spread * (r[bent] + gap[bent]))
        np.minimum.at(size, row, np.maximum(law, np.minimum(self.floor[owner[row]], self.floor[other])))
        return size

    def _distance(self, x: Floats, other: Ints) -> Floats:
        """(n,) distances from points x (n, 2) to pieces other (n,)."""
        start, end = self.ends[other].transpose(1, 0, 2)
        chord = end - start
        along = np.clip(((x - start) * chord).sum(1) / np.maximum((chord**2).sum(1), 1e-300), 0.0, 1.0)
        to_line = np.hypot(*(x - start - along[:, None] * chord).T)
        to_ends = np.minimum(np.hypot(*(x - start).T), np.hypot(*(x - end).T))
        centre, (radius, angle, sweep) = self.arcs[other, :2], self.arcs[other, 2:].T
        away = x - centre
        turned = np.sign(sweep) * (np.arctan2(away[:, 1], away[:, 0]) - angle)
        within = np.mod(turned, math.tau) <= np.abs(sweep)
        to_arc = np.where(within, np.abs(np.hypot(*away.T) - radius), to_ends)
        distance = np.where(radius > 0, to_arc, to_line)
        for k in np.unique(other[self.is_smooth[other]]):
            rows, curve = np.flatnonzero(other == k), self.pieces[k].curve
            assert isinstance(curve, PolynomialArc)  # noqa: S101 - the others are not smooth in this sense
            distance[rows] = np.hypot(*(curve.at(curve.nearest(x[rows])) - x[rows]).T)
        return np.asarray(distance)

    def cells(self) -> tuple[Ints, Floats, Floats]:
        """Intervals of the pieces, halved until each is no longer than the edges asked for in its middle."""
        owner = np.repeat(np.arange(len(self.pieces)), 2)
        t0 = np.tile([0.0, 0.5], len(self.pieces))
        t1 = t0 + 0.5
        done: list[tuple[Ints, Floats, Floats]] = []
        for _ in range(60):
            long = (t1 - t0) * self.lengths[owner] > self.at(owner, (t0 + t1) / 2)
            done.append((owner[~long], t0[~long], t1[~long]))
            owner, t0, t1 = owner[long], t0[long], t1[long]
            if owner.size == 0:
                break
            middle = (t0 + t1) / 2
            owner, t0, t1 = np.tile(owner, 2), np.concatenate([t0, middle]), np.concatenate([middle, t1])
        done.append((owner, t0, t1))
        return tuple(np.concatenate(part) for part in zip(*done, strict=True))  # type: ignore[return-value]


def _arc_row(piece: Piece) -> tuple[float, float, float, float, float]:
    curve = piece.curve
    if not isinstance(curve, Arc):
        return (0.0, 0.0, 0.0, 0.0, 0.0)
    return (*curve.centre, curve.radius, curve.start_angle, curve.sweep)


def _expand(lists: list[Ints], owner: Ints) -> tuple[Ints, Ints]:
    """Rows of ``owner`` repeated for each entry of their list, and those entries."""
    counts = np.array([len(entries) for entries in lists])
    starts = np.concatenate([[0], np.cumsum(counts)])
    flat = np.concatenate([*lists, np.empty(0, dtype=np.int64)]).astype(np.int64)
    per_row = counts[owner]
    row = np.repeat(np.arange(len(owner)), per_row)
    within = np.arange(len(row)) - np.repeat(np.cumsum(per_row) - per_row, per_row)
    return row, flat[starts[owner[row]] + within]


def _close_pairs(layout: Layout, coarsest: Floats) -> list[Ints]:
    """For each piece the others whose gap to it may matter; neighbours at a shared point only if they form a cusp."""
    boxes = np.array([_box(piece) for piece in layout.pieces])
    pairs = []
    for k, piece in enumerate(layout.pieces):
        reach = coarsest[k]
        apart = np.maximum(boxes[:, :2] - boxes[k, 2:], boxes[k, :2] - boxes[:, 2:]).max(axis=1)
        candidates = [j for j in np.flatnonzero(apart < reach) if j != k and _counts(piece, layout.pieces[j])]
        pairs.append(np.array(candidates, dtype=np.int64))
    return pairs


def _box(piece: Piece) -> Floats:
    points = piece.curve.at(np.linspace(0, 1, 9))
    sag = 0.02 * piece.curve.length if piece.curve.curvature else 0.0
    return np.concatenate([points.min(axis=0) - sag, points.max(axis=0) + sag])


def _counts(piece: Piece, other: Piece) -> bool:
    if piece.curve.curvature == 0.0 and other.curve.curvature == 0.0:
        return False
    shared = {piece.start, piece.end} & {other.start, other.end}
    return all(_forms_cusp(piece, other, point) for point in shared)


def _forms_cusp(piece: Piece, other: Piece, point: int) -> bool:
    one, two = (direction_and_bend(p.curve, p.start == point)[0] for p in (piece, other))
    return abs(math.remainder(one - two, math.tau)) < SAME_DIRECTION
