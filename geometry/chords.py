"""Cusps: where two curves touch, one edge is solved as its chord, and the lens so misplaced is accounted for."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from nightcap.geometry.curves import SAME_DIRECTION, Curve, Flags, Floats, Ints, direction_and_bend
from nightcap.geometry.layout import Layout, Piece
from nightcap.geometry.mesh import Triangulation
from nightcap.geometry.polynomial_arc import PolynomialArc


def cusp_edges(flat: Triangulation) -> Flags:
    """(B,) True for the curve edges that end in a cusp and are solved as chords: one on each side of it at most.

    No triangle with a positive Jacobian fits between two tangent curves.
    """
    chosen = {(piece, point) for point, pair in _cusps(flat.layout) for piece in [_choice(flat.layout, point, pair)]}
    flags = np.zeros(len(flat.curve_piece), dtype=bool)
    if chosen:
        pieces = np.array([piece for piece, _ in chosen])
        rows = np.flatnonzero(np.isin(flat.curve_piece, pieces))
        for row in rows:
            ends = flat.curve_edges[row]
            flags[row] = any((int(flat.curve_piece[row]), int(end)) in chosen for end in ends)
    return flags


def with_even_cusps(layout: Layout, divisions: list[Floats]) -> list[Floats]:
    """The divisions of the pieces with the first vertices on both sides of each cusp equally far from its point.

    Where they are not, the edge between them cuts through the nearer curve, however short both are.
    """
    even = list(divisions)
    bundles = _bundles(layout)
    for point, pieces in bundles:
        nearest = min(_first_step(layout.pieces[k], point, even[k]) for k in pieces)
        for k in pieces:
            piece = layout.pieces[k]
            if _first_step(piece, point, even[k]) > nearest * (1 + 1e-9):
                t = nearest / piece.curve.length
                even[k] = np.union1d(even[k], [t if piece.start == point else 1 - t])
    return even


def _bundles(layout: Layout) -> list[tuple[int, list[int]]]:
    """Points with all pieces that leave them in one direction."""
    bundles: list[tuple[int, list[int]]] = []
    for point, (one, two) in _cusps(layout):
        mates = next((pieces for at, pieces in bundles if at == point and (one in pieces or two in pieces)), None)
        if mates is None:
            bundles.append((point, [one, two]))
        else:
            mates += [k for k in (one, two) if k not in mates]
    return bundles


def _first_step(piece: Piece, point: int, divisions: Floats) -> float:
    """Length of a piece from one of its ends to the first vertex on it, m."""
    step = divisions[1] if piece.start == point else 1 - divisions[-2]
    return float(step) * piece.curve.length


def _cusps(layout: Layout) -> list[tuple[int, tuple[int, int]]]:
    """Points with pairs of pieces that leave them in the same direction, next to each other."""
    arms: dict[int, list[tuple[float, float, int]]] = {}
    for k, piece in enumerate(layout.pieces):
        for point in (piece.start, piece.end):
            arms.setdefault(point, []).append((*_heading(piece, point), k))
    found = []
    for point, leaving in arms.items():
        leaving.sort()
        following = leaving[1:] + (leaving[:1] if len(leaving) > 2 else [])
        for (angle, _, one), (other_angle, _, two) in zip(leaving, following, strict=False):
            if abs(math.remainder(other_angle - angle, math.tau)) < SAME_DIRECTION:
                found.append((point, (one, two)))
    return found


def _heading(piece: Piece, point: int) -> tuple[float, float]:
    return direction_and_bend(piece.curve, piece.start == point)


def _choice(layout: Layout, point: int, pair: tuple[int, int]) -> int:
    """Of two pieces that form a cusp, the one whose chord leaves room for the other.

    Bent apart: either; a dielectric's, as it costs less. Bent the same way: the one bent more.
    """
    bends = [_heading(layout.pieces[k], point)[1] for k in pair]
    if bends[0] * bends[1] < 0:
        dielectric = [k for k in pair if layout.pieces[k].surface is None]
        return dielectric[0] if dielectric else pair[0]
    return pair[int(abs(bends[1]) > abs(bends[0]))]


@dataclass(frozen=True, eq=False)
class Lenses:
    """The lenses between chords and arcs, each inside the triangle that it bulges into."""

    edge: Ints
    """(n,) edge numbers."""
    owner: Ints
    """(n,) the triangle that holds the lens."""
    half_turn: Floats
    """(n,) angle between chord and arc at either end, radians."""

    @classmethod
    def beside(cls, flat: Triangulation, spans: Floats, straight: Flags) -> Lenses:
        """The lenses of the curve edges (B,) that are solved as chords."""
        edge, owner, half_turn = [], [], []
        for number in np.flatnonzero((flat.edge_rank >= 0) & np.append(straight, False)[flat.edge_rank]):
            rank = flat.edge_rank[number]
            curve = flat.layout.pieces[flat.curve_piece[rank]].curve
            top = curve.at(np.array(spans[rank].mean()))
            start, end = flat.points[flat.edges[number]]
            for triangle in flat.edge_triangles[number]:
                inner = flat.points[flat.triangles[triangle]].mean(axis=0)
                if triangle >= 0 and _side(start, end, top) * _side(start, end, inner) > 0:
                    edge.append(number)
                    owner.append(triangle)
                    half_turn.append(_turn(curve, *sorted(spans[rank].tolist())) / 2)
        return cls(np.array(edge, dtype=np.int64), np.array(owner, dtype=np.int64), np.array(half_turn))

    def sticking_out(self, flat: Triangulation) -> Ints:
        """Owners whose lens may reach beyond them.

        A lens lies inside its triangle if, at both ends of the chord, the triangle opens at least as wide. Where the
        triangle's other edge lies on a curve too, the two do not cross: the layout was cut there.
        """
        out = []
        for edge, owner, half in zip(self.edge, self.owner, self.half_turn, strict=True):
            own = flat.triangle_edges[owner]
            for vertex in flat.edges[edge]:
                other = next(e for e in own if e != edge and vertex in flat.edges[e])
                if flat.edge_rank[other] < 0 and _angle_at(flat, vertex, edge, other) < half:
                    out.append(owner)
        return np.array(out, dtype=np.int64)

    def permittivity_range(self, flat: Triangulation) -> tuple[Floats, Floats]:
        """Least and greatest relative permittivity (T,), (T,) present in each triangle, lenses included."""
        low, high = flat.permittivity.copy(), flat.permittivity.copy()
        for edge, owner in zip(self.edge, self.owner, strict=True):
            beside = [flat.permittivity[t] for t in flat.edge_triangles[edge] if t >= 0]
            low[owner], high[owner] = min(low[owner], *beside), max(high[owner], *beside)
        return low, high

    def conductor(self, flat: Triangulation) -> Ints:
        """(T,) the conductor of which a triangle holds a lens, or -1."""
        conductor = np.full(len(flat.triangles), -1, dtype=np.int64)
        for edge, owner in zip(self.edge, self.owner, strict=True):
            conductor[owner] = max(conductor[owner], flat.edge_conductor[edge])
        return conductor


def _turn(curve: Curve, low: float, high: float) -> float:
    """A bound on the angle by which a curve turns between two parameters, radians; twice it where that is uneven."""
    if isinstance(curve, PolynomialArc):
        return 2 * curve.part(low, high).turn
    return abs(curve.curvature) * (high - low) * curve.length


def _side(start: Floats, end: Floats, point: Floats) -> float:
    u, v = end - start, point - start
    return float(u[0] * v[1] - u[1] * v[0])


def _angle_at(flat: Triangulation, vertex: int, edge: int, other: int) -> float:
    at = flat.points[vertex]
    u, v = (flat.points[flat.edges[e].sum() - vertex] - at for e in (edge, other))
    return float(abs(np.arctan2(u[0] * v[1] - u[1] * v[0], u @ v)))
