"""Polynomials on the reference triangle (0,0), (1,0), (0,1): bases, nodes and the matrices between them."""

from __future__ import annotations

from functools import cache

import numpy as np
from numpy.polynomial import legendre
from scipy.special import gammaln, roots_jacobi

from nightcap.geometry.curves import Floats

EDGES = ((0, 1), (1, 2), (0, 2))
"""Local edges of a triangle, each from its lower to its higher vertex."""


def count(order: int) -> int:
    """Dimension of the polynomials of a total degree in two variables."""
    return (order + 1) * (order + 2) // 2


@cache
def lobatto(order: int) -> Floats:
    """Gauss-Lobatto points on [0, 1], shape (order + 1,), ends included."""
    inner = legendre.Legendre.basis(order).deriv().roots().real if order > 1 else np.empty(0)
    return (np.concatenate([[-1.0], np.sort(inner), [1.0]]) + 1.0) / 2.0


@cache
def nodes(order: int) -> Floats:
    """Interpolation nodes, shape (2, n): vertices, the edges' inner nodes, then the interior.

    Source: Blyth and Pozrikidis 2006 (interior nodes from the Lobatto grid).
    """
    v = lobatto(order)
    corners = np.array([[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]])
    on_edges = [np.outer(1 - v[1:-1], corners[a]) + np.outer(v[1:-1], corners[b]) for a, b in EDGES]
    i, j = (index.ravel() for index in np.meshgrid(np.arange(1, order), np.arange(1, order), indexing="ij"))
    i, j = i[i + j < order], j[i + j < order]
    k = order - i - j
    inner = np.stack([1 + 2 * v[i] - v[j] - v[k], 1 + 2 * v[j] - v[i] - v[k]], axis=1) / 3
    return np.concatenate([corners, *on_edges, inner]).T


def orthonormal(order: int, x: Floats) -> tuple[Floats, Floats]:
    """The basis of Dubiner, orthonormal on the triangle, by rising degree.

    x : (2, q) points. Returns values (n, q) and gradients (2, n, q). Source: Dubiner 1991.
    """
    (x1, y1), one, zero = x, np.ones_like(x[0]), np.zeros_like(x[0])
    s, t = 2 * x1 + y1 - 1, 1 - y1
    q, qx, qy = [one], [zero], [zero]  # Legendre polynomials of s/t, times t^m
    for m in range(order):
        a, b = (2 * m + 1) / (m + 1), m / (m + 1)
        before, before_x, before_y = (q[m - 1], qx[m - 1], qy[m - 1]) if m else (zero, zero, zero)
        q.append(a * s * q[m] - b * t**2 * before)
        qx.append(a * (2 * q[m] + s * qx[m]) - b * t**2 * before_x)
        qy.append(a * (q[m] + s * qy[m]) - b * (t**2 * before_y - 2 * t * before))
    jacobi = [_jacobi(order - m, 2 * m + 1, 2 * y1 - 1) for m in range(order + 1)]
    values, slopes_x, slopes_y = [], [], []
    for degree in range(order + 1):
        for m in range(degree + 1):
            n = degree - m
            p, slope = (row[n] for row in jacobi[m])
            norm = np.sqrt((2 * m + 1) * (2 * m + 2 * n + 2))
            values.append(norm * q[m] * p)
            slopes_x.append(norm * qx[m] * p)
            slopes_y.append(norm * (qy[m] * p + q[m] * 2 * slope))
    return np.array(values), np.array([slopes_x, slopes_y])


def _jacobi(highest: int, a: int, z: Floats) -> tuple[list[Floats], list[Floats]]:
    """Jacobi polynomials P_n^(a,0) for n = 0 .. highest and their derivatives, by the three-term recurrence."""
    p, d = [np.ones_like(z), (a + (a + 2) * z) / 2], [np.zeros_like(z), np.full_like(z, (a + 2) / 2)]
    for k in range(2, highest + 1):
        c = 2 * k + a
        a1, a2 = 2 * k * (k + a) * (c - 2), (c - 1) * a * a
        a3, a4 = (c - 2) * (c - 1) * c, 2 * (k + a - 1) * (k - 1) * c
        p.append(((a2 + a3 * z) * p[k - 1] - a4 * p[k - 2]) / a1)
        d.append((a3 * p[k - 1] + (a2 + a3 * z) * d[k - 1] - a4 * d[k - 2]) / a1)
    return p, d


@cache
def quadrature(degree: int) -> tuple[Floats, Floats]:
    """Points (2, q) and weights (q,) exact for polynomials up to a degree: Gauss-Jacobi products, collapsed."""
    n = degree // 2 + 1
    a, weight_a = roots_jacobi(n, 0, 0)
    b, weight_b = roots_jacobi(n, 1, 0)
    y = (1 + b)[:, None] / 2 * np.ones(n)
    x = np.asarray((1 + a) / 2 * (1 - y), dtype=np.float64)
    weights = np.outer(weight_b, weight_a).ravel() / 8
    return np.array([x.ravel(), y.ravel()], dtype=np.float64), np.asarray(weights, dtype=np.float64)


@cache
def nodal_coefficients(order: int) -> Floats:
    """(n, n): row i holds the orthonormal coefficients of the Lagrange polynomial of node i."""
    vandermonde, _ = orthonormal(order, nodes(order))
    return np.asarray(np.linalg.inv(vandermonde), dtype=np.float64)


def lagrange(order: int, x: Floats) -> tuple[Floats, Floats]:
    """Lagrange polynomials of ``nodes(order)`` at points x (2, q): values (n, q), gradients (2, n, q)."""
    values, gradients = orthonormal(order, x)
    coefficients = nodal_coefficients(order)
    return coefficients @ values, coefficients @ gradients


@cache
def bernstein_from_nodal(order: int) -> Floats:
    """(n, n): takes values at ``nodes(order)`` to Bernstein coefficients, whose least one bounds the polynomial."""
    x, y = nodes(order)
    barycentric = np.stack([1 - x - y, x, y])
    powers = [(order - i - j, i, j) for i in range(order + 1) for j in range(order + 1 - i)]
    columns = [
        np.exp(gammaln(order + 1) - sum(gammaln(e + 1) for e in exponents))
        * np.prod([barycentric[k] ** e for k, e in enumerate(exponents)], axis=0)
        for exponents in powers
    ]
    return np.linalg.inv(np.stack(columns, axis=1))
