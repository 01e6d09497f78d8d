"""Stiffness of every triangle, reduced to the unknowns on its edges."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np

from nightcap.geometry import polynomials
from nightcap.geometry.curves import Floats
from nightcap.geometry.mesh import Mesh
from nightcap.solver.element import skeleton_size
from nightcap.solver.metric import Metric, metrics

BATCH = 4096
"""Triangles per batch; bounds the memory of the full element matrices."""


@dataclass(frozen=True, eq=False)
class Stiffness:
    """Element matrices for unit permittivity, interior unknowns eliminated."""

    order: int
    skeleton: Floats
    """(T, b, b) S = K_bb - K_bi inverse(K_ii) K_ib, b = 3 order."""
    interior: Floats
    """(T, i, b): carries edge values to the values at the interior nodes."""
    dilatation: Floats
    """(T,) relative bound on what the approximations of a triangle's shape can change of its energy."""


def stiffness(mesh: Mesh, order: int, tolerance: float) -> Stiffness:
    """Assembles and condenses the element matrices of all triangles.

    tolerance : what approximating the metric of curved triangles may leave, relative.
    """
    b = skeleton_size(order)
    n = polynomials.count(order)
    skeleton = np.empty((len(mesh.triangles), b, b))
    interior = np.empty((len(mesh.triangles), n - b, b))
    dilatation = np.zeros(len(mesh.triangles))
    for metric in metrics(mesh, tolerance):
        dilatation[metric.index] = metric.dilatation
        for start in range(0, len(metric.index), BATCH):
            rows = slice(start, start + BATCH)
            K = element_matrices(metric, order, rows)
            lift = np.asarray(-np.linalg.solve(K[:, b:, b:], K[:, b:, :b]), dtype=np.float64)
            skeleton[metric.index[rows]] = _condensed(K, lift)
            interior[metric.index[rows]] = lift
    return Stiffness(order, skeleton, interior, dilatation)


def _condensed(K: Floats, lift: Floats) -> Floats:
    """The energy of edge values lifted into the interior, exactly zero for constants.

    Written out in full, so that an error of the lift counts in second order only and the bounds stay bounds.
    """
    b = lift.shape[2]
    mixed = K[:, :b, b:] @ lift
    S = K[:, :b, :b] + mixed + mixed.transpose(0, 2, 1) + lift.transpose(0, 2, 1) @ (K[:, b:, b:] @ lift)
    S[:, :, 0] = -S[:, :, 1:].sum(axis=2)
    S[:, 0, :] = -S[:, 1:, :].sum(axis=1)
    return S


def bytes_needed(triangles: int, order: int, fields: int) -> float:
    """About the memory, bytes, that both problems take at once for so many fields.

    MEASURED on squares and 37 wires, orders 4 to 8, 4000 to 30 000 triangles: within a fifth. Edge matrices and their
    indices count six times, a factor and its indices 0.25 log2(unknowns) times one and a half, fields four times.
    """
    b, n = skeleton_size(order), polynomials.count(order)
    unknowns = triangles * (0.5 + 1.5 * (order - 1)) + 2
    matrices = b * b * (6 + 0.375 * float(np.log2(unknowns)))
    return 8.0 * triangles * (matrices + (n - b) * b + 4 * b * fields)


def element_matrices(metric: Metric, order: int, rows: slice = slice(None)) -> Floats:
    """(K, n, n) the integrals of grad phi_i . G grad phi_j, one product for all triangles of a metric."""
    n = polynomials.count(order)
    coefficients = metric.coefficients[rows]
    return (coefficients.reshape(len(coefficients), -1) @ _moments(order, metric.degree)).reshape(-1, n, n)


@cache
def _moments(order: int, degree: int) -> Floats:
    """(3 m, n n) integrals of psi_k d_a phi_i d_b phi_j over the reference triangle, for ab = xx, xy + yx, yy."""
    points, weights = polynomials.quadrature(degree + 2 * (order - 1))
    psi, _ = polynomials.orthonormal(degree, points)
    _, (gx, gy) = polynomials.lagrange(order, points)
    products = [
        gx[:, None] * gx[None],
        gx[:, None] * gy[None] + gy[:, None] * gx[None],
        gy[:, None] * gy[None],
    ]
    weighted = (psi * weights).T
    return np.concatenate([(p.reshape(-1, len(weights)) @ weighted).T for p in products])


@cache
def edge_pairing(order: int) -> Floats:
    """(b, b) the integrals of u dv along the boundary of the reference triangle, counter-clockwise."""
    b = skeleton_size(order)
    t, weights = np.polynomial.legendre.leggauss(order + 1)
    t, weights = (t + 1) / 2, weights / 2
    corners = np.array([[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]])
    total = np.zeros((b, b))
    for start, end in ((0, 1), (1, 2), (2, 0)):
        direction = corners[end] - corners[start]
        values, gradients = polynomials.lagrange(order, corners[start][:, None] + direction[:, None] * t)
        along = np.einsum("a,anq->nq", direction, gradients)
        total += ((values * weights) @ along.T)[:b, :b]
    return total
