"""What the matrix must not depend on, and which way it must move. Source: the field equations themselves."""

from __future__ import annotations

import cmath
from dataclasses import replace

import numpy as np
import pytest
from judging import ENTRY_SLACK, assert_ordered, relative, solved
from numpy.testing import assert_allclose

from nightcap.geometry.case import (
    Boundary,
    Case,
    Coating,
    Conductor,
    Dielectric,
    GroundPlane,
    Material,
    OpenSpace,
    Shield,
)
from nightcap.geometry.curves import Floats, Point
from nightcap.geometry.shapes import Circle, Polygon, Rectangle, Shape
from nightcap.solver.bracket import Bracket

ACCURACY = 1e-5
SHIELDED, UNBOUNDED, GROUNDED = "shield", "open", "plane"
KINDS = [SHIELDED, UNBOUNDED, GROUNDED]


def sample(kind: str, coat: float = 2.3, radius: float = 0.25, filler: float = 1.6) -> Case:
    """Round, square and triangular conductors, one coated, with a painted filler; no symmetry anywhere."""
    conductors = (
        Conductor("round", Circle((-0.7, 1.1), radius), (Coating(0.5 - radius, Material(coat)),)),
        Conductor("square", Rectangle((0.55, 1.25), 0.6, 0.4, angle=0.2)),
        Conductor("triangle", Polygon(((-0.1, 0.2), (0.5, 0.3), (0.2, 0.7)))),
    )
    boundary: Boundary = {
        SHIELDED: Shield(Circle((0.0, 0.9), 1.7)),
        UNBOUNDED: OpenSpace(),
        GROUNDED: GroundPlane(),
    }[kind]
    reference = "triangle" if isinstance(boundary, OpenSpace) else boundary.name
    fill = Dielectric("filler", Rectangle((-0.2, 0.8), 1.2, 1.2, corner_radius=0.2), Material(filler))
    return Case("sample", "", conductors, boundary, reference, (fill,))


def moved_shape(shape: Shape, shift: complex, turn: float, factor: float) -> Shape:
    """The shape scaled and turned about the origin, then shifted."""

    def placed(point: Point) -> Point:
        z = complex(*point) * cmath.rect(factor, turn) + shift
        return (z.real, z.imag)

    if isinstance(shape, Circle):
        return Circle(placed(shape.centre), shape.radius * factor)
    if isinstance(shape, Polygon):
        return Polygon(tuple(placed(p) for p in shape.points))
    assert isinstance(shape, Rectangle)
    sides = (shape.width * factor, shape.height * factor, shape.corner_radius * factor)
    return Rectangle(placed(shape.centre), *sides, angle=shape.angle + turn)


def moved(case: Case, shift: complex = 0j, turn: float = 0.0, factor: float = 1.0) -> Case:
    """The whole case scaled, turned and shifted."""

    def move(shape: Shape) -> Shape:
        return moved_shape(shape, shift, turn, factor)

    conductors = tuple(
        replace(c, shape=move(c.shape), coatings=tuple(replace(k, thickness=k.thickness * factor) for k in c.coatings))
        for c in case.conductors
    )
    boundary = case.boundary
    if isinstance(boundary, Shield):
        boundary = replace(boundary, shape=move(boundary.shape))
    if isinstance(boundary, GroundPlane):
        boundary = replace(boundary, at=boundary.at * factor + shift.imag)
    fillers = tuple(replace(d, shape=move(d.shape)) for d in case.dielectrics)
    return replace(case, conductors=conductors, boundary=boundary, dielectrics=fillers)


def bracket(case: Case) -> Bracket:
    return relative(solved(case, ACCURACY))


def assert_same(one: Bracket, other: Bracket) -> None:
    """Two brackets of one exact matrix: each bound of one is on the right side of the other's."""
    assert_ordered(one.lower, other.upper)
    assert_ordered(other.lower, one.upper)
    root = np.sqrt(np.diag(one.value))
    apart = np.abs(one.value - other.value) / np.outer(root, root)
    assert (apart <= (one.half_width + other.half_width) / np.outer(root, root) + ENTRY_SLACK).all()
    assert apart.max() <= ACCURACY


@pytest.fixture(scope="module", params=KINDS)
def kind(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.fixture(scope="module")
def plain(kind: str) -> Bracket:
    return bracket(sample(kind))


def test_symmetric_and_positive_definite(plain: Bracket) -> None:
    for bound in (plain.lower, plain.value, plain.upper):
        assert_allclose(bound, bound.T, rtol=1e-14)
        assert np.linalg.eigvalsh(bound)[0] > 0


def test_signs_of_a_maxwell_matrix(plain: Bracket) -> None:
    """Off-diagonal entries and, negated, row sums are charges induced by a positive potential: never positive."""
    C, within = plain.value, plain.half_width
    off = ~np.eye(len(C), dtype=bool)
    assert (C - within)[off].max() <= 0
    assert ((C + within).sum(axis=1) >= 0).all()
    assert (C[off] < 0).all()
    assert (C.sum(axis=1) > 0).all()


@pytest.mark.parametrize("shift", [0.31 - 2.7j, 1500 + 900j, -3e3j])
def test_translation(kind: str, plain: Bracket, shift: complex) -> None:
    assert_same(bracket(moved(sample(kind), shift=shift)), plain)


@pytest.mark.parametrize("turn", [0.1, 1.0, 2.9])
@pytest.mark.parametrize("turned", [SHIELDED, UNBOUNDED])
def test_rotation(turned: str, turn: float) -> None:
    assert_same(bracket(moved(sample(turned), turn=turn)), bracket(sample(turned)))


@pytest.mark.parametrize("factor", [1e-6, 0.0254, 1e6])
def test_scaling(kind: str, plain: Bracket, factor: float) -> None:
    assert_same(bracket(moved(sample(kind), factor=factor)), plain)


def mirrored(case: Case) -> Case:
    """Left and right exchanged, x -> -x, by negating the points and turning rectangles the other way."""

    def flip(shape: Shape) -> Shape:
        if isinstance(shape, Polygon):
            return Polygon(tuple((-x, y) for x, y in shape.points))
        assert isinstance(shape, Circle | Rectangle)
        flipped = replace(shape, centre=(-shape.centre[0], shape.centre[1]))
        return replace(flipped, angle=-flipped.angle) if isinstance(flipped, Rectangle) else flipped

    conductors = tuple(replace(c, shape=flip(c.shape)) for c in case.conductors)
    boundary = case.boundary
    if isinstance(boundary, Shield):
        boundary = replace(boundary, shape=flip(boundary.shape))
    fillers = tuple(replace(d, shape=flip(d.shape)) for d in case.dielectrics)
    return replace(case, conductors=conductors, boundary=boundary, dielectrics=fillers)


def test_reflection(kind: str, plain: Bracket) -> None:
    assert_same(bracket(mirrored(sample(kind))), plain)


@pytest.mark.parametrize("order", [(2, 0, 1), (1, 0, 2), (2, 1, 0)])
def test_order_of_conductors(kind: str, plain: Bracket, order: tuple[int, ...]) -> None:
    case = sample(kind)
    solution = solved(replace(case, conductors=tuple(case.conductors[k] for k in order)), ACCURACY)
    names = [c.name for c in case.conductors if c.name != case.reference]
    back = [solution.conductors.index(name) for name in names]
    assert_same(relative(solution).keep(back), plain)


def test_change_of_reference() -> None:
    """Open space: the matrix for another reference follows from the first by algebra alone."""
    case = sample(UNBOUNDED)
    other = solved(replace(case, reference="round"), ACCURACY)
    assert other.conductors == ("square", "triangle")
    assert_same(relative(solved(case, ACCURACY)).with_reference(0), relative(other))


def test_reference_other_than_the_shield() -> None:
    case = sample(SHIELDED)
    other = solved(replace(case, reference="square"), ACCURACY)
    assert other.conductors == ("round", "triangle", "shield")
    assert_same(relative(solved(case, ACCURACY)).with_reference(1), relative(other))


def test_permittivity_is_a_common_factor(kind: str, plain: Bracket) -> None:
    """All permittivities times 3.7: the matrix times 3.7."""
    case = sample(kind, coat=2.3 * 3.7, filler=1.6 * 3.7)
    assert_same(bracket(replace(case, background=Material(3.7))).scaled(1 / 3.7), plain)


def assert_grows(smaller: Bracket, larger: Bracket) -> None:
    """Not contradicted within the brackets, and truly larger in the middle."""
    assert_ordered(smaller.lower, larger.upper)
    growth: Floats = larger.value - smaller.value
    assert np.linalg.eigvalsh(growth)[-1] > 1e-3 * np.linalg.norm(smaller.value, 2)


@pytest.mark.parametrize("change", [{"coat": 3.0}, {"filler": 2.0}, {"radius": 0.3}, {"coat": 9.0, "filler": 4.0}])
def test_more_permittivity_or_metal_raises_the_matrix(kind: str, plain: Bracket, change: dict[str, float]) -> None:
    """Loewner order, by Dirichlet's principle: the energy of every choice of potentials rises."""
    assert_grows(plain, bracket(sample(kind, **change)))


def test_a_larger_shield_lowers_the_matrix() -> None:
    shields = [replace(sample(SHIELDED), boundary=Shield(Circle((0.0, 0.9), r))) for r in (1.9, 1.7)]
    assert_grows(*(bracket(case) for case in shields))
