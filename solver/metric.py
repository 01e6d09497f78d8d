"""The metric of each triangle: all that Laplace's equation needs to know of its shape."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np

from nightcap.geometry import curving, polynomials
from nightcap.geometry.curves import Floats, Ints
from nightcap.geometry.mesh import Mesh

DEGREES = (6, 10, 14, 20)
"""Polynomial degrees tried for the metric of a curved triangle."""


@dataclass(frozen=True, eq=False)
class Metric:
    """Triangles whose metric is represented to the same degree.

    G = adj(J) adj(J)' / det J, so that the energy of u is the integral of grad u . G grad u over the reference
    triangle. It does not change with size, and det G = 1.
    """

    degree: int
    """0 for straight triangles."""
    index: Ints
    """(K,) triangle numbers."""
    coefficients: Floats
    """(K, 3, m): G_xx, G_xy, G_yy in the orthonormal basis of that degree."""
    dilatation: Floats
    """(K,) bound on the relative error of the energy of any field, from edges and metric together."""


def metrics(mesh: Mesh, tolerance: float) -> list[Metric]:
    """The metrics of all triangles of a mesh, grouped by degree.

    tolerance : what may be left of a metric, relative, before a higher degree is tried. It widens the bounds.
    """
    straight = np.setdiff1d(np.arange(len(mesh.triangles)), mesh.curved.index)
    rounding = _rounding(mesh)
    groups = [_straight_metric(mesh, straight, rounding[straight])]
    rows = np.arange(len(mesh.curved.index))
    for degree in DEGREES:
        if rows.size == 0:
            break
        coefficients, left = _projected(mesh.curved.nodes[rows], degree)
        good = left <= tolerance if degree < DEGREES[-1] else np.ones(len(rows), dtype=bool)
        dilatation = mesh.curved.dilatation[rows] + 2 * left + rounding[mesh.curved.index[rows]]
        groups.append(Metric(degree, mesh.curved.index[rows[good]], coefficients[good], dilatation[good]))
        rows = rows[~good]
    return [group for group in groups if group.index.size]


def _straight_metric(mesh: Mesh, index: Ints, dilatation: Floats) -> Metric:
    a, b, c = mesh.points[mesh.triangles[index]].transpose(1, 2, 0)
    g = _tensor(b - a, c - a)[:, :, None]
    return Metric(0, index, g / polynomials.orthonormal(0, np.zeros((2, 1)))[0][0, 0], dilatation)


def _rounding(mesh: Mesh) -> Floats:
    """(T,) what double precision may do to a triangle's energy, relative.

    Coordinates are known to a unit in the last place, which counts against the triangle's height; and a product with a
    matrix of condition (trace G)^2 loses as much.
    """
    a, b, c = mesh.points[mesh.triangles].transpose(1, 2, 0)
    g = _tensor(b - a, c - a)
    area = np.abs((b - a)[0] * (c - a)[1] - (b - a)[1] * (c - a)[0])
    longest = np.sqrt(np.max([((q - p) ** 2).sum(0) for p, q in ((a, b), (b, c), (a, c))], axis=0))
    extent = np.abs(mesh.points[mesh.triangles]).max(axis=(1, 2))
    unit = np.finfo(float).eps
    return np.asarray(unit * (4 * extent * longest / area + 4 * (g[:, 0] + g[:, 2]) ** 2))


def _tensor(dx: Floats, dy: Floats) -> Floats:
    """G_xx, G_xy, G_yy (n, 3) of columns dx, dy (2, n) of the Jacobian."""
    determinant = np.abs(dx[0] * dy[1] - dx[1] * dy[0])
    entries = [(dy * dy).sum(0), -(dx * dy).sum(0), (dx * dx).sum(0)]
    return np.asarray(np.stack(entries, axis=1) / determinant[:, None])


@cache
def _tables(degree: int) -> tuple[Floats, Floats, Floats]:
    """Gradients of the maps' basis at projection and check points; the projection; the basis at the check points."""
    points, weights = polynomials.quadrature(2 * degree + 2)
    checks = polynomials.nodes(14)
    basis, _ = polynomials.orthonormal(degree, points)
    _, gradients = polynomials.lagrange(curving.ORDER, np.concatenate([points, checks], axis=1))
    projection = np.asarray((basis * weights).T)
    return gradients, projection, polynomials.orthonormal(degree, checks)[0]


def _projected(nodes: Floats, degree: int) -> tuple[Floats, Floats]:
    """Coefficients (K, 3, m) of the metrics, and how much they leave (K,), relative to the metric itself."""
    gradients, projection, basis = _tables(degree)
    dx, dy = curving.jacobians(nodes, gradients)
    g = _tensor(dx.reshape(2, -1), dy.reshape(2, -1)).reshape(*dx.shape[1:], 3).transpose(0, 2, 1)
    coefficients = g[:, :, : len(projection)] @ projection
    xx, xy, yy = np.moveaxis(g[:, :, len(projection) :], 1, 0)
    exx, exy, eyy = np.moveaxis(coefficients @ basis - g[:, :, len(projection) :], 1, 0)
    half_trace = (yy * exx - 2 * xy * exy + xx * eyy) / 2  # of inverse(G) E, whose eigenvalues are wanted
    spread = np.sqrt(np.maximum(half_trace**2 - (exx * eyy - exy**2), 0.0))
    return coefficients, (np.abs(half_trace) + spread).max(axis=1)
