"""Symmetry lines: the part that is solved against what is known of the whole."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from judging import check_against, relative, solved
from multipoles import (
    InOpenSpace,
    InShield,
    OverGroundedSlab,
    OverHalfSpace,
    OverPlane,
    Surroundings,
    Wire,
    capacitance,
)
from numpy.testing import assert_allclose
from references import layered_coax, square_in_square, two_wires
from round_wires import as_case

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
from nightcap.geometry.curves import Floats
from nightcap.geometry.shapes import Circle, Polygon, Rectangle
from nightcap.geometry.slab import Slab
from nightcap.geometry.symmetry import ELECTRIC_WALL, SymmetryLine

ACCURACY = 1e-5
ELECTRIC_X, MAGNETIC_X = SymmetryLine(0, 0.0, True), SymmetryLine(0, 0.0, False)
ELECTRIC_Y, MAGNETIC_Y = SymmetryLine(1, 0.0, True), SymmetryLine(1, 0.0, False)
RIGHT = (Wire(1.2 + 1.1j, 0.5, ((0.2, 4.0),)), Wire(2.6 + 1.3j, 0.4))
"""Two unlike wires right of x = 0; with their mirror images, four."""


def cut(case: Case, *lines: SymmetryLine, slabs: tuple[Dielectric, ...] = ()) -> Case:
    """The case with symmetry lines; in open space an electric wall is the reference."""
    case = replace(case, symmetry=lines, dielectrics=(*case.dielectrics, *slabs), accuracy=ACCURACY)
    is_odd = isinstance(case.boundary, OpenSpace) and any(line.is_electric for line in lines)
    return replace(case, reference=ELECTRIC_WALL) if is_odd else case


def combined(around: Surroundings, sign: int) -> Floats:
    """T' C T / 2 of all four wires, T driving mirror images equally (+1) or oppositely (-1)."""
    left = tuple(replace(w, centre=-w.centre.conjugate()) for w in RIGHT)
    C = capacitance((*RIGHT, *left), around)
    if len(C) == 3:  # in open space: relative to the last, at last with a row for it
        C = np.block([[C, -C.sum(1)[:, None]], [-C.sum(0), C.sum()]])
    T = np.vstack([np.eye(2), sign * np.eye(2)])
    return np.asarray(T.T @ C @ T / 2)


def slab(low: float, high: float, permittivity: float) -> tuple[Dielectric, ...]:
    return (Dielectric("slab", Slab(low, high), Material(permittivity)),)


SHIELD = Shield(Circle((0.0, 0.0), 4.0))
AROUND: list[tuple[str, Boundary, Surroundings, tuple[Dielectric, ...]]] = [
    ("shield", SHIELD, InShield(4.0), ()),
    ("plane", GroundPlane(), OverPlane(), ()),
    ("grounded slab", GroundPlane(-0.5), OverGroundedSlab(0.5, 4.4), slab(-0.5, 0.0, 4.4)),
    ("open", OpenSpace(), InOpenSpace(), ()),
    ("half space", OpenSpace(), OverHalfSpace(3.0), slab(-math.inf, 0.0, 3.0)),
]


@pytest.mark.parametrize(("boundary", "around", "slabs"), [a[1:] for a in AROUND], ids=[a[0] for a in AROUND])
def test_mirrored_wires_driven_oppositely(
    boundary: Boundary, around: Surroundings, slabs: tuple[Dielectric, ...]
) -> None:
    """Electric wall: own minus mirrored entries of the whole. Source: multipoles of all four wires."""
    check_against(cut(as_case(RIGHT, boundary), ELECTRIC_X, slabs=slabs), combined(around, -1), ACCURACY)


@pytest.mark.parametrize(("boundary", "around", "slabs"), [a[1:] for a in AROUND], ids=[a[0] for a in AROUND])
def test_mirrored_wires_driven_equally(boundary: Boundary, around: Surroundings, slabs: tuple[Dielectric, ...]) -> None:
    """Magnetic wall: own plus mirrored entries of the whole; in open space relative to the last wire."""
    exact = combined(around, +1)
    exact = exact[:1, :1] if isinstance(boundary, OpenSpace) else exact
    check_against(cut(as_case(RIGHT, boundary), MAGNETIC_X, slabs=slabs), exact, ACCURACY)


ON_LINE = (Wire(-1.5 + 0j, 1.0), Wire(0.6 + 0j, 0.5, ((0.2, 3.0),)), Wire(2.4 + 0j, 0.7))


@pytest.mark.parametrize(
    ("boundary", "around"), [(SHIELD, InShield(4.0)), (OpenSpace(), InOpenSpace())], ids=["shield", "open"]
)
def test_wires_on_a_magnetic_line(boundary: Boundary, around: Surroundings) -> None:
    """Half of each wire: half of the whole matrix, with a stretch of wall between each two of them."""
    check_against(cut(as_case(ON_LINE, boundary), MAGNETIC_Y), capacitance(ON_LINE, around) / 2, ACCURACY)


@pytest.mark.parametrize("permittivity", [1.0, 4.0])
def test_half_immersed_pair_by_lines(permittivity: float) -> None:
    """An electric line across a pair whose centres lie on the surface. Source: symmetry, Smythe."""
    wire = as_case((Wire(1.5 + 0j, 1.0),), GroundPlane())
    case = cut(replace(wire, boundary=OpenSpace()), ELECTRIC_X, slabs=slab(-math.inf, 0.0, permittivity))
    check_against(case, (1 + permittivity) * two_wires(3.0, 1.0), ACCURACY)  # a wire to the plane between: twice a pair


def test_pair_by_lines_in_both_directions() -> None:
    """A quarter of space, with and without a far wall: half of twice the pair. Source: Smythe."""
    wire = replace(as_case((Wire(1.5 + 0j, 1.0),), GroundPlane()), boundary=OpenSpace())
    for slabs in ((), slab(-5.0, 5.0, 1.0)):
        check_against(cut(wire, ELECTRIC_X, MAGNETIC_Y, slabs=slabs), two_wires(3.0, 1.0), ACCURACY)
        solution = check_against(cut(wire, MAGNETIC_Y, ELECTRIC_X, slabs=slabs), two_wires(3.0, 1.0), ACCURACY)
        assert solution.conductors == ("w0",)


def squares(*lines: SymmetryLine) -> Case:
    core = Conductor("core", Rectangle((0.0, 0.0), 1.0, 1.0))
    return cut(Case("squares", "", (core,), Shield(Rectangle((0.0, 0.0), 2.0, 2.0), "box"), "box"), *lines)


def test_square_in_square_by_halves_and_quarters() -> None:
    """Source: Bowman 1935 (from memory); no flux passes either middle line."""
    check_against(squares(MAGNETIC_X), square_in_square(0.5) / 2, ACCURACY)
    check_against(squares(MAGNETIC_Y), square_in_square(0.5) / 2, ACCURACY)
    check_against(squares(MAGNETIC_X, MAGNETIC_Y), square_in_square(0.5) / 4, ACCURACY)


def test_a_square_on_its_corner_is_graded_where_the_line_cuts_it() -> None:
    """Both squares turned by 45 degrees, so that corners lie on both lines. Source: Bowman 1935 (from memory)."""
    corners = ((1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0))
    inner, outer = Polygon(corners), Polygon(tuple((2 * x, 2 * y) for x, y in corners))
    case = Case("turned", "", (Conductor("core", inner),), Shield(outer), "shield")
    check_against(cut(case, MAGNETIC_Y), square_in_square(0.5) / 2, ACCURACY)
    check_against(cut(case, MAGNETIC_X, MAGNETIC_Y), square_in_square(0.5) / 4, ACCURACY)


def test_quarter_of_a_layered_coax() -> None:
    """Source: capacitors in series."""
    core = Conductor("core", Circle((0.0, 0.0), 1.0), (Coating(1.0, Material(2.25)),))
    case = Case("coax", "", (core,), SHIELD, "shield")
    check_against(cut(case, MAGNETIC_Y, MAGNETIC_X), layered_coax((1.0, 2.0, 4.0), (2.25, 1.0)) / 4, ACCURACY)


def test_coatings_that_touch_on_the_line() -> None:
    """Two coated wires in exact contact with each other, one of them solved. Source: multipoles."""
    pair = (Wire(1 + 0j, 0.5, ((0.5, 2.3),)), Wire(-1 + 0j, 0.5, ((0.5, 2.3),)))
    C = capacitance(pair, InShield(4.0))
    for line, sign in ((MAGNETIC_X, 1), (ELECTRIC_X, -1)):
        check_against(cut(as_case(pair[:1], SHIELD), line), C[0, 0] + sign * C[0, 1], ACCURACY)


def fork(*lines: SymmetryLine) -> Case:
    """A fork around a wire, both with y = 0 as their middle line."""
    prongs = [(0.2, 1.5), (-1.0, 1.5), (-1.0, -1.5), (0.2, -1.5), (0.2, -1.0), (-0.6, -1.0), (-0.6, 1.0), (0.2, 1.0)]
    bodies = (Conductor("fork", Polygon(tuple(prongs))), Conductor("wire", Circle((0.3, 0.0), 0.3)))
    return cut(Case("fork", "", bodies, Shield(Rectangle((0.0, 0.0), 5.0, 5.0)), "shield"), *lines)


def test_half_of_a_fork_is_half_of_the_whole() -> None:
    """Twice the half against the whole: their brackets meet."""
    whole, half = (relative(solved(case, ACCURACY)) for case in (fork(), fork(MAGNETIC_Y)))
    assert (np.abs(whole.value - 2 * half.value) <= whole.half_width + 2 * half.half_width).all()
    assert_allclose(2 * half.value, whole.value, rtol=0, atol=1e-5 * np.diag(whole.value).max())


def test_pieces_of_one_conductor_keep_their_own_charges() -> None:
    """The line x = 0 leaves two bars of a fork, joined beyond it only: the same as two conductors tied together."""
    prongs = [(-3.0, 2.0), (-3.0, -2.0), (1.5, -2.0), (1.5, -1.0), (-2.0, -1.0), (-2.0, 1.0), (1.5, 1.0), (1.5, 2.0)]
    fork = (Conductor("fork", Polygon(tuple(prongs))),)
    bars = tuple(Conductor(name, Rectangle((0.75, y), 1.5, 1.0)) for name, y in (("upper", 1.5), ("lower", -1.5)))
    wire = Conductor("wire", Circle((1.0, 0.0), 0.2))
    shield = Shield(Rectangle((0.0, 0.0), 8.0, 8.0))
    joined, apart = (
        relative(solved(cut(Case("bars", "", (*bodies, wire), shield, "shield"), MAGNETIC_X), ACCURACY))
        for bodies in (fork, bars)
    )
    tied = apart.congruent(np.array([[1.0, 0.0], [1.0, 0.0], [0.0, 1.0]]))
    assert (np.abs(joined.value - tied.value) <= joined.half_width + tied.half_width).all()
    assert_allclose(joined.value, tied.value, rtol=0, atol=1e-5 * np.diag(tied.value).max())
