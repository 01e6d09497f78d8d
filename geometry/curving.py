"""Curved triangles: polynomial maps whose edges follow the exact curves, proved invertible."""

from __future__ import annotations

import math
from functools import cache

import numpy as np

from nightcap.geometry import polynomials
from nightcap.geometry.curves import Flags, Floats
from nightcap.geometry.errors import MeshError
from nightcap.geometry.mesh import CurvedTriangles, Mesh, Triangulation
from nightcap.geometry.polynomial_arc import PolynomialArc
from nightcap.geometry.polynomials import EDGES

ORDER = 8
"""Order of the polynomial edges. A chord of a twelfth of a circle leaves the circle by 1e-13 of its radius."""
DEVIATION_GRADIENT = 200.0
"""Gradient in a triangle, over the distance from the curve meant: polynomials of degree 8 are steeper than 2 * 8^2
times their size nowhere (Markov 1889), and a blend of them into the triangle not by more than sqrt 2."""
EVENNESS = 0.03
"""A first mesh is repaired until each Jacobian is proved to vary within a triangle by no more than this factor."""


def curved_triangles(mesh: Triangulation, spans: Floats, bent: Flags) -> tuple[CurvedTriangles, Flags]:
    """Builds the maps of all triangles with bent edges, and tells which (K,) are proved valid.

    X = affine + sum over bent edges of l_a l_b d(t) / (t (1 - t)), d the interpolated distance of the curve from
    its chord. spans : (B, 2) curve parameters at the ends of each curve edge; bent : (B,) True for those that follow
    their curve. Source: blending functions, Gordon and Hall 1973; for triangles Szabo and Babuska 1991.
    """
    is_bent = np.append(bent, False)[mesh.edge_rank][mesh.triangle_edges]
    index = np.flatnonzero(is_bent.any(axis=1))
    x, y = polynomials.nodes(ORDER)
    nodes = np.einsum("nk,tkd->tnd", np.stack([1 - x - y, x, y], axis=1), mesh.points[mesh.triangles[index]])
    offsets, defects = _edge_offsets(mesh, spans)
    defect = np.zeros(len(index))
    for local in range(3):
        rank = np.where(is_bent[index, local], mesh.edge_rank[mesh.triangle_edges[index, local]], -1)
        nodes += np.einsum("nk,tkd->tnd", _blending(local), offsets[rank])
        defect += defects[rank]
    floor, stretch = jacobian_bounds(nodes, mesh.orientation[index])
    displacement = defect / stretch
    dilatation = 2 * displacement / np.maximum(1 - displacement, 1e-3)
    return CurvedTriangles(index, nodes, dilatation), floor > EVENNESS


def _edge_offsets(mesh: Triangulation, spans: Floats) -> tuple[Floats, Floats]:
    """Distance of curve from chord at the inner Lobatto points (B + 1, ORDER - 1, 2), and what is left out of it.

    That is a bound (B + 1,) on the gradient, m, of the errors of interpolation and of snapping the ends to the layout's
    points. The last rows, of zeros, serve edges that lie on no curve.
    """
    t = polynomials.lobatto(ORDER)[1:-1]
    offsets = np.zeros((len(spans) + 1, ORDER - 1, 2))
    defects = np.zeros(len(spans) + 1)
    by_piece = np.argsort(mesh.curve_piece, kind="stable")
    for rows in np.split(by_piece, np.flatnonzero(np.diff(mesh.curve_piece[by_piece])) + 1):
        curve = mesh.layout.pieces[mesh.curve_piece[rows[0]]].curve
        if curve.curvature == 0.0:
            continue
        first, last = spans[rows].T
        ends = curve.at(spans[rows])
        chord = (1 - t)[:, None] * ends[:, :1] + t[:, None] * ends[:, 1:]
        offsets[rows] = curve.at(first[:, None] + (last - first)[:, None] * t) - chord
        snapped = np.hypot(*(mesh.points[mesh.curve_edges[rows]] - ends).transpose(2, 0, 1)).max(axis=1)
        turn = curve.length * abs(curve.curvature) * np.abs(last - first)
        defects[rows] = 2 * snapped
        if isinstance(curve, PolynomialArc):  # whose parts are such edges themselves
            defects[rows] += DEVIATION_GRADIENT * curve.deviation
        else:
            defects[rows] += _interpolation_defect(turn) / abs(curve.curvature)
    return offsets, defects


@cache
def _blending(local: int) -> Floats:
    """(n, ORDER - 1): carries the inner offsets of a local edge to all nodes of the triangle."""
    x, y = polynomials.nodes(ORDER)
    barycentric = np.stack([1 - x - y, x, y])
    a, b = EDGES[local]
    t = (1 + barycentric[b] - barycentric[a]) / 2
    inner = polynomials.lobatto(ORDER)[1:-1]
    lagrange = [
        np.prod([(t - other) / (own - other) for other in inner if other != own], axis=0) / (own * (1 - own))
        for own in inner
    ]
    return np.asarray((barycentric[a] * barycentric[b])[:, None] * np.stack(lagrange, axis=1))


@cache
def _defect_constants() -> tuple[float, float]:
    """Factors of theta^(q+1) and theta^(q+2) in the gradient of the blended interpolation error.

    The error is e(t) = t (t - 1) w(t) f[t_0 .. t_q, t] with w over the inner nodes; divided differences of order k of
    a curve of unit radius are at most theta^k / k!. |grad(l_a l_b)| <= sqrt 2, l_a l_b <= 1/4, |grad t| <= sqrt 5 / 2.
    """
    w = np.polynomial.Polynomial.fromroots(polynomials.lobatto(ORDER)[1:-1])
    t = np.linspace(0.0, 1.0, 2001)
    value, slope = 1.01 * np.abs(w(t)).max(), 1.01 * np.abs(w.deriv()(t)).max()
    low, high = math.factorial(ORDER + 1), math.factorial(ORDER + 2)
    factor = math.sqrt(5.0) / 8
    return (math.sqrt(2.0) * value + factor * slope) / low, factor * value / high


def _interpolation_defect(turn: Floats) -> Floats:
    """Bound on the gradient, per unit radius, of what is left of an arc that turns by so many radians."""
    first, second = _defect_constants()
    return first * turn ** (ORDER + 1) + second * turn ** (ORDER + 2)


@cache
def _gradients(degree: int) -> Floats:
    """(2, n, q) gradients of the map's basis at ``polynomials.nodes(degree)``."""
    return polynomials.lagrange(ORDER, polynomials.nodes(degree))[1]


def jacobians(nodes: Floats, gradients: Floats) -> Floats:
    """(2, 2, K, q) derivative a of coordinate d of each map (K, n, 2), from the basis' gradients (2, n, q).

    Affine part and bend apart: triangles much thinner than their distance from the origin keep their digits.
    """
    x, y = polynomials.nodes(ORDER)
    corners = nodes[:, :3] - nodes[:, :1]
    bends = nodes - nodes[:, :1] - np.einsum("kn,tkd->tnd", np.stack([1 - x - y, x, y]), corners)
    slopes = np.einsum("anq,tnd->adtq", gradients, bends, optimize=True)
    return np.asarray(slopes + corners[:, 1:].transpose(1, 2, 0)[..., None])


def jacobian_bounds(nodes: Floats, orientation: Floats) -> tuple[Floats, Floats]:
    """A lower bound of each map's Jacobian determinant (K,), relative to its greatest value, and a low estimate of
    the map's least stretch (K,), m.

    The bound is the least Bernstein coefficient of the determinant, a polynomial of degree 2 (ORDER - 1).
    """
    degree = 2 * (ORDER - 1)
    dx, dy = jacobians(nodes, _gradients(degree))
    determinant = orientation[:, None] * (dx[0] * dy[1] - dx[1] * dy[0])
    floor = (determinant @ polynomials.bernstein_from_nodal(degree).T).min(axis=1, initial=np.inf)
    greatest = np.abs(determinant).max(axis=1, initial=1e-300)
    norm = np.sqrt((dx**2).sum(0) + (dy**2).sum(0))  # at least the greatest singular value
    stretch = (np.maximum(determinant, 0.0) / norm).min(axis=1, initial=np.inf) / 2
    return floor / greatest - 1e-10, np.maximum(stretch, 1e-300)


def require_valid(mesh: Mesh) -> None:
    """Raises MeshError unless every Jacobian is proved positive: on an invalid mesh the bounds would not hold."""
    floor, _ = jacobian_bounds(mesh.curved.nodes, mesh.orientation[mesh.curved.index])
    a, b, c = mesh.points[mesh.triangles].transpose(1, 2, 0)
    u, v = b - a, c - a
    straight = mesh.orientation * (u[0] * v[1] - u[1] * v[0])
    straight[mesh.curved.index] = floor
    if not (straight > 0).all():
        raise MeshError(f"{np.count_nonzero(~(straight > 0))} triangles of the mesh are folded over")
