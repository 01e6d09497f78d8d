"""Bases on the reference triangle."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from nightcap.geometry import polynomials


@pytest.mark.parametrize("degree", [1, 4, 9, 20])
def test_quadrature_integrates_monomials(degree: int) -> None:
    """The integral of x^a y^b over the triangle is a! b! / (a + b + 2)! (Dirichlet's integral)."""
    from math import factorial

    (x, y), weights = polynomials.quadrature(degree)
    for a in range(degree + 1):
        b = degree - a
        exact = factorial(a) * factorial(b) / factorial(a + b + 2)
        assert_allclose(weights @ (x**a * y**b), exact, rtol=1e-12)


@pytest.mark.parametrize("order", [1, 3, 8, 14])
def test_dubiner_basis_is_orthonormal(order: int) -> None:
    points, weights = polynomials.quadrature(2 * order)
    values, _ = polynomials.orthonormal(order, points)
    assert_allclose((values * weights) @ values.T, np.eye(polynomials.count(order)), rtol=0, atol=1e-13)


def test_gradients_agree_with_differences() -> None:
    points, _ = polynomials.quadrature(6)
    _, gradients = polynomials.orthonormal(7, points)
    h = 1e-6
    for axis, step in enumerate(np.eye(2)[:, :, None] * h):
        above, below = (polynomials.orthonormal(7, points + s * step)[0] for s in (1, -1))
        assert_allclose((above - below) / (2 * h), gradients[axis], rtol=1e-6, atol=1e-6)


@pytest.mark.parametrize("order", [1, 2, 5, 8])
def test_lagrange_polynomials_are_one_at_their_node(order: int) -> None:
    values, _ = polynomials.lagrange(order, polynomials.nodes(order))
    assert_allclose(values, np.eye(polynomials.count(order)), rtol=0, atol=1e-12)


def test_edge_nodes_run_from_low_to_high_vertex() -> None:
    order = 5
    nodes = polynomials.nodes(order)
    for local, (a, b) in enumerate(polynomials.EDGES):
        first = 3 + local * (order - 1)
        own = nodes[:, first : first + order - 1]
        distance = np.hypot(*(own - nodes[:, [a]]))
        assert (np.diff(distance) > 0).all()
        assert_allclose(distance / np.hypot(*(nodes[:, b] - nodes[:, a])), polynomials.lobatto(order)[1:-1], rtol=1e-12)


def test_least_bernstein_coefficient_bounds_a_polynomial_from_below() -> None:
    order = 6
    random = np.random.default_rng(271828)
    samples = random.dirichlet(np.ones(3), size=4000).T[:2]
    values = random.normal(size=(50, polynomials.count(order)))
    bounds = (values @ polynomials.bernstein_from_nodal(order).T).min(axis=1)
    sampled = (values @ polynomials.lagrange(order, samples)[0]).min(axis=1)
    assert (bounds <= sampled + 1e-12).all()
    positive = polynomials.bernstein_from_nodal(order) @ np.ones(polynomials.count(order))
    assert_allclose(positive, 1.0, rtol=1e-10)
