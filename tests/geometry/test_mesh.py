"""First meshes and their refinement: valid, conforming, on the exact curves."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from samples import coax, square_in_square, touching_pair, two_wires, wire_on_board

from nightcap.geometry import polynomials
from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case
from nightcap.geometry.curving import jacobian_bounds
from nightcap.geometry.grading import Grading, grading_for
from nightcap.geometry.mesh import Mesh
from nightcap.geometry.refine import refine
from nightcap.geometry.valid import first_mesh

CASES = [
    two_wires(),
    two_wires(2.001),
    two_wires(200.0),
    coax(),
    coax(1.0, 4.0, 2.999),
    square_in_square(),
    touching_pair(),
    wire_on_board(),
]


def areas(mesh: Mesh) -> np.ndarray:
    """Exact areas of all triangles, curved ones by quadrature of their Jacobians."""
    a, b, c = mesh.points[mesh.triangles].transpose(1, 2, 0)
    u, v = b - a, c - a
    area = np.abs(u[0] * v[1] - u[1] * v[0]) / 2
    points, weights = polynomials.quadrature(16)
    _, gradients = polynomials.lagrange(8, points)
    dx, dy = np.einsum("anq,tnd->adtq", gradients, mesh.curved.nodes)
    area[mesh.curved.index] = np.abs(dx[0] * dy[1] - dx[1] * dy[0]) @ weights
    return area


def assert_valid(mesh: Mesh) -> None:
    floor, _ = jacobian_bounds(mesh.curved.nodes, mesh.orientation[mesh.curved.index])
    assert (floor > 0).all()
    a, b, c = mesh.points[mesh.triangles].transpose(1, 2, 0)
    u, v = b - a, c - a
    straight = np.ones(len(mesh.triangles), dtype=bool)
    straight[mesh.curved.index] = False
    assert (mesh.orientation * (u[0] * v[1] - u[1] * v[0]))[straight].min() > 0
    assert (np.diff(mesh.triangles, axis=1) > 0).all()
    assert_allclose(mesh.curved.nodes[:, :3], mesh.points[mesh.triangles[mesh.curved.index]], rtol=1e-12, atol=1e-12)


def euler(mesh: Mesh) -> int:
    return len(np.unique(mesh.triangles)) - len(mesh.edges) + len(mesh.triangles)


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
@pytest.mark.parametrize("accuracy", [1e-2, 1e-6])
def test_first_mesh_is_valid(case: Case, accuracy: float) -> None:
    mesh = first_mesh(build_layout(case), grading_for(accuracy))
    assert_valid(mesh)
    boundary = (mesh.edge_triangles < 0).any(axis=1)
    assert (mesh.edge_conductor[boundary] >= 0).all()
    assert (mesh.edge_conductor[~boundary] < 0).all()


@pytest.mark.parametrize(("case", "holes"), [(two_wires(), 2), (coax(), 1), (square_in_square(), 1)])
def test_euler_characteristic(case: Case, holes: int) -> None:
    """Open space is a sphere, 2, the inside of a shield a disc, 1; each conductor takes one away."""
    mesh = first_mesh(build_layout(case), Grading())
    whole = 2 if mesh.layout.rim else 1
    assert euler(mesh) == whole - holes
    assert euler(refine(mesh, np.ones(len(mesh.triangles), dtype=bool))) == whole - holes


def test_area_of_an_annulus() -> None:
    mesh = first_mesh(build_layout(coax()), Grading())
    assert_allclose(areas(mesh).sum(), 3 * np.pi, rtol=1e-9)


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
def test_refined_meshes_stay_valid_and_keep_their_area(case: Case) -> None:
    mesh = first_mesh(build_layout(case), grading_for(1e-3))
    before = areas(mesh).sum()
    random = np.random.default_rng(1618)
    for _ in range(3):
        mesh = refine(mesh, random.random(len(mesh.triangles)) < 0.2)
        assert_valid(mesh)
    assert_allclose(areas(mesh).sum(), before, rtol=1e-12)


def test_refined_triangles_are_those_marked_at_least() -> None:
    mesh = first_mesh(build_layout(square_in_square()), Grading())
    marked = np.zeros(len(mesh.triangles), dtype=bool)
    marked[5] = True
    finer = refine(mesh, marked)
    assert 3 < len(finer.triangles) - len(mesh.triangles) < 40
    assert set(map(tuple, mesh.triangles[marked])).isdisjoint(map(tuple, finer.triangles))


def test_lenses_at_a_contact_widen_the_permittivity_of_their_triangle() -> None:
    mesh = first_mesh(build_layout(touching_pair()), Grading())
    differ = mesh.least_permittivity < mesh.greatest_permittivity
    assert 4 <= np.count_nonzero(differ) <= 12
    assert set(mesh.least_permittivity[differ]) == {1.0}
    assert set(mesh.greatest_permittivity[differ]) == {2.3}


def test_a_wire_that_rests_on_a_board_engulfs_the_cusps() -> None:
    mesh = first_mesh(build_layout(wire_on_board()), Grading())
    assert np.count_nonzero(mesh.engulfed_by == 0) == 2
