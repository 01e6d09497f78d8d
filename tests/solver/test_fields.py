"""The two trial fields: exact where they must be, bounds everywhere else."""

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose
from samples import coax, square_in_square, touching_pair, two_wires, wire_on_board

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case, Material
from nightcap.geometry.constants import VACUUM_PERMITTIVITY
from nightcap.geometry.curves import Segment
from nightcap.geometry.errors import MeshError
from nightcap.geometry.grading import Grading, grading_for
from nightcap.geometry.layout import Layout, Piece, Region, conductor_side
from nightcap.geometry.mesh import Mesh
from nightcap.geometry.refine import refine
from nightcap.geometry.valid import first_mesh
from nightcap.solver.cuts import cut_tree
from nightcap.solver.fields import Fields
from nightcap.solver.solve import solve
from nightcap.solver.stopwatch import Stopwatch
from nightcap.solver.system import solve_fields, solve_potentials


def fields_of(case: Case, order: int, grading: Grading | None = None) -> Fields:
    return solve_fields(first_mesh(build_layout(case), grading or Grading()), order, 1e-12, Stopwatch())


def plates(width: float, gap: float) -> Layout:
    """Two plates face to face between two walls that no flux crosses: the field is even."""
    corners = [(0.0, 0.0), (gap, 0.0), (gap, width), (0.0, width)]
    sides = [(0, 0), (0, conductor_side(1)), (0, 0), (0, conductor_side(0))]
    pieces = tuple(Piece(Segment(corners[k], corners[(k + 1) % 4]), k, (k + 1) % 4, sides[k]) for k in range(4))
    region = Region(((1, 2, 3, 4),), 0)
    return Layout(np.array(corners), pieces, (region,), (Material(2.5),), ("left", "right"), 1, width)


@pytest.mark.parametrize("order", [1, 2, 5])
def test_parallel_plates_are_exact(order: int) -> None:
    """Patch test: C = eps w / g to rounding, on any mesh. Source: textbook, common practice."""
    mesh = first_mesh(plates(3.0, 0.7), Grading())
    mesh = refine(mesh, np.arange(len(mesh.triangles)) % 3 == 0)
    potential, C = solve_potentials(mesh, order, 1e-12, Stopwatch())
    assert_allclose(C, [[2.5 * 3.0 / 0.7]], rtol=1e-12)
    x = mesh.points[mesh.triangles][:, :, 0]
    assert_allclose(potential[:, :3, 0], 1 - x / 0.7, rtol=0, atol=1e-12)


def test_coax_is_the_logarithm() -> None:
    """Both fields in polar form: u = ln(b/r)/ln(b/a), the flux function the angle times 1/ln(b/a)."""
    sample = fields_of(coax(), 8).sample(3)
    radius = np.hypot(*sample.points.T)
    assert_allclose(sample.potential[0], np.log(2 / radius) / np.log(2), rtol=0, atol=1e-8)
    corners = sample.points[sample.triangles]
    angles = np.arctan2(corners[:, :, 1], corners[:, :, 0])
    turn = (angles[:, 1] - angles[:, 0] + np.pi) % (2 * np.pi) - np.pi
    flux = sample.flux[0][sample.triangles]
    slope = (flux[:, 1] - flux[:, 0]) / VACUUM_PERMITTIVITY
    assert_allclose(np.abs(slope), np.abs(turn) / np.log(2), rtol=0, atol=1e-7)


@pytest.mark.parametrize("case", [two_wires(), square_in_square(), touching_pair()], ids=lambda case: case.name)
def test_shares_add_up_to_the_width(case: Case) -> None:
    """Prager and Synge 1947: the bracket's width is the integral of the mismatch of the two fields."""
    fields = fields_of(case, 3)
    rounding = 1e-11 * np.diag(fields.bracket.value).max()
    assert_allclose(fields.share.sum(axis=0), np.diag(fields.bracket.width), rtol=1e-8, atol=rounding)
    assert (fields.share >= 0).all()


@pytest.mark.parametrize("case", [two_wires(), touching_pair(), wire_on_board()], ids=lambda case: case.name)
def test_flux_function_winds_by_the_charge(case: Case) -> None:
    """Around each conductor the flux function grows by the charge of the lower bound's field."""
    fields = fields_of(case, 4)
    mesh = fields.mesh
    wound = np.zeros((len(mesh.layout.conductors), fields.flux.shape[2]))
    for local, (a, b) in enumerate(((0, 1), (1, 2), (0, 2))):
        on = mesh.edge_conductor[mesh.triangle_edges[:, local]]
        rows = np.flatnonzero(on >= 0)
        turn = mesh.orientation[rows] * np.where(mesh.far[rows], -1, 1) * (-1 if local == 2 else 1)
        growth = turn[:, None] * (fields.flux[rows, b] - fields.flux[rows, a])
        np.add.at(wound, on[rows], growth)
    charges = np.delete(wound, mesh.layout.reference, axis=0)
    assert_allclose(np.abs(charges), np.abs(fields.bracket.lower), rtol=1e-9)
    assert_allclose(wound.sum(axis=0), 0.0, rtol=0, atol=1e-9)


def test_cuts_form_a_tree_of_indicators_with_unit_jump() -> None:
    mesh = first_mesh(build_layout(touching_pair()), Grading())
    tree = cut_tree(mesh)
    assert len(tree.cuts) == 2
    assert_allclose(np.abs(np.linalg.det(tree.charges)), 1.0, rtol=1e-15)
    for cut in tree.cuts:
        assert len(cut.triangle) == len(set(zip(cut.triangle.tolist(), cut.corner.tolist(), strict=True)))


def test_a_folded_triangle_is_never_solved() -> None:
    """Whatever folds a triangle, straight or curved, the solver refuses the mesh instead of reporting bounds."""
    mesh = first_mesh(build_layout(coax()), Grading())
    nodes = mesh.curved.nodes.copy()
    nodes[3, 5:20] += 3.0 * (nodes[3, 1] - nodes[3, 0])
    with pytest.raises(MeshError, match="folded"):
        solve_fields(replace(mesh, curved=replace(mesh.curved, nodes=nodes)), 4, 1e-9, Stopwatch())
    flat = first_mesh(build_layout(square_in_square()), Grading())
    points = flat.points.copy()
    points[-1] += 10.0
    with pytest.raises(MeshError, match="folded"):
        solve_fields(replace(flat, points=points), 4, 1e-9, Stopwatch())


def test_close_coatings_never_give_folded_triangles() -> None:
    """Seven coated wires 0.02 radii apart: few chords per circle would cross; the first mesh repairs itself."""
    from nightcap.geometry.case import Coating, Conductor, Shield
    from nightcap.geometry.shapes import Circle

    centres = [(0.0, 0.0), *((1.01 * np.cos(a), 1.01 * np.sin(a)) for a in np.arange(6) * np.pi / 3)]
    wires = tuple(Conductor(f"w{k}", Circle(c, 0.25), (Coating(0.25, Material(2.3)),)) for k, c in enumerate(centres))
    case = Case("close", "", wires, Shield(Circle((0.0, 0.0), 1.6)), "shield")
    coarse = solve(build_layout(case), 1e-3)
    fine = solve(build_layout(case), 1e-6)
    assert fine.status == coarse.status == "met"
    slack = 1e-12 * np.diag(fine.bracket.upper).max()
    assert np.linalg.eigvalsh(fine.bracket.value - coarse.bracket.lower)[0] > -slack
    assert np.linalg.eigvalsh(coarse.bracket.upper - fine.bracket.value)[0] > -slack


def uniform(mesh: Mesh, times: int) -> Mesh:
    for _ in range(times):
        mesh = refine(mesh, np.ones(len(mesh.triangles), dtype=bool))
    return mesh


@pytest.mark.parametrize(("order", "ceiling"), [(1, 3e-3), (2, 5e-6), (3, 1e-8)])
def test_width_converges_in_h_at_twice_the_order(order: int, ceiling: float) -> None:
    """Smooth layout: the energy error falls as h^(2p)."""
    mesh = first_mesh(build_layout(coax(1.0, 2.0, 0.3)), Grading())
    widths = [solve_fields(uniform(mesh, k), order, 1e-13, Stopwatch()).bracket.relative for k in (0, 1, 2)]
    rate = np.polyfit(np.arange(3), np.log2(widths), 1)[0]
    assert -2 * order - 0.5 < rate < -2 * order + 0.5
    assert widths[-1] < ceiling


def test_width_converges_exponentially_in_p() -> None:
    mesh = first_mesh(build_layout(coax(1.0, 2.0, 0.3)), Grading())
    orders = np.array([2, 3, 4, 5, 6])
    widths = [solve_fields(mesh, int(p), 1e-13, Stopwatch()).bracket.relative for p in orders]
    rate = np.polyfit(orders, np.log10(widths), 1)[0]
    assert -2.5 < rate < -1.0
    assert widths[-1] < 1e-7


def test_width_at_a_corner_converges_at_the_rate_of_its_singularity() -> None:
    """A corner of 270 degrees, not graded: r^(2/3), so the energy error falls as h^(4/3). Source: Grisvard 1985."""
    mesh = first_mesh(build_layout(square_in_square()), Grading(corner=0.5))
    widths = [solve_fields(uniform(mesh, k), 2, 1e-13, Stopwatch()).bracket.relative for k in (1, 2, 3, 4)]
    rate = np.polyfit(np.arange(4), np.log2(widths), 1)[0]
    assert -1.6 < rate < -1.2
    assert widths[-1] < 2e-3


def test_grading_follows_the_accuracy() -> None:
    layout = build_layout(square_in_square())
    coarse, fine = (len(first_mesh(layout, grading_for(a)).triangles) for a in (1e-2, 1e-6))
    assert fine > 1.5 * coarse
