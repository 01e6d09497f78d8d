"""The Lagrange triangle within scikit-fem, and our element matrices against scikit-fem's assembly."""

import numpy as np
import pytest
import skfem
from numpy.testing import assert_allclose
from samples import coax, square_in_square
from skfem.models.poisson import laplace

from nightcap.geometry import polynomials
from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.grading import Grading
from nightcap.geometry.valid import first_mesh
from nightcap.solver.element import ElementTriLagrange
from nightcap.solver.metric import metrics
from nightcap.solver.stiffness import edge_pairing, element_matrices, stiffness


@pytest.mark.parametrize("order", [1, 2, 4, 7])
def test_reproduces_polynomials_of_its_order(order: int) -> None:
    """Patch test: a polynomial of degree p is interpolated exactly, value and gradient."""
    mesh = skfem.MeshTri().refined(1)
    basis = skfem.Basis(mesh, ElementTriLagrange(order), intorder=2 * order)
    u = basis.project(lambda x: (1 + x[0] + 2 * x[1]) ** order)
    field = basis.interpolate(u)
    x, y = basis.global_coordinates()
    assert_allclose(np.asarray(field), (1 + x + 2 * y) ** order, rtol=1e-10)
    assert_allclose(field.grad[1], 2 * order * (1 + x + 2 * y) ** (order - 1), rtol=1e-8)


@pytest.mark.parametrize("order", [1, 3, 6])
def test_batched_matrices_equal_scikit_fems_assembly(order: int) -> None:
    mesh = first_mesh(build_layout(square_in_square()), Grading(corner=0.2))
    basis = skfem.Basis(mesh.topology, ElementTriLagrange(order), intorder=2 * order)
    expected = laplace.assemble(basis)
    (metric,) = metrics(mesh, 1e-9)
    K = element_matrices(metric, order)
    dofs = basis.element_dofs.T
    ours = np.zeros(expected.shape)
    for matrix, numbers in zip(K, dofs, strict=True):
        ours[np.ix_(numbers, numbers)] += matrix
    assert_allclose(ours, expected.toarray(), rtol=1e-9, atol=1e-10)


def test_curved_matrices_equal_quadrature_of_the_map() -> None:
    """Energy of x on each curved triangle is its area, whatever the map: the metric is consistent with it."""
    mesh = first_mesh(build_layout(coax()), Grading())
    order = 8
    assert len(mesh.curved.index) > 10
    for metric in metrics(mesh, 1e-10):
        if metric.degree == 0:
            continue
        rows = np.searchsorted(mesh.curved.index, metric.index)
        x = mesh.curved.nodes[rows, :, 0]  # order 8 as the map: x itself lies in the space
        K = element_matrices(metric, order)
        points, weights = polynomials.quadrature(20)
        _, gradients = polynomials.lagrange(8, points)
        dx, dy = np.einsum("anq,tnd->adtq", gradients, mesh.curved.nodes[rows])
        area = np.abs(dx[0] * dy[1] - dx[1] * dy[0]) @ weights
        assert_allclose(np.einsum("tn,tnm,tm->t", x, K, x), area, rtol=1e-8)


def test_condensed_energy_is_the_least_over_the_interior() -> None:
    mesh = first_mesh(build_layout(coax()), Grading())
    local = stiffness(mesh, 5, 1e-9)
    full = np.empty((len(mesh.triangles), 21, 21))
    for metric in metrics(mesh, 1e-9):
        full[metric.index] = element_matrices(metric, 5)
    edge_values = np.random.default_rng(31415).normal(size=(len(full), 15, 1))
    best = np.concatenate([edge_values, local.interior @ edge_values], axis=1)
    energy = (best.transpose(0, 2, 1) @ full @ best).ravel()
    assert_allclose((edge_values.transpose(0, 2, 1) @ local.skeleton @ edge_values).ravel(), energy, rtol=1e-9)
    best[:, -1] += 0.1
    assert ((best.transpose(0, 2, 1) @ full @ best).ravel() > energy).all()
    assert_allclose(local.skeleton.sum(axis=2), 0.0, rtol=0, atol=1e-10)


def test_edge_pairing_is_greens_theorem() -> None:
    """The integral of x dy around the triangle is its area, 1/2."""
    order = 3
    x, y = polynomials.nodes(order)[:, : 3 * order]
    assert_allclose(x @ edge_pairing(order) @ y, 0.5, rtol=1e-13)
    assert_allclose(y @ edge_pairing(order) @ x, -0.5, rtol=1e-13)
