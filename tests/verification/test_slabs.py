"""Slabs and half spaces that run to infinity: the exact answer of the unbounded problem lies inside the bracket."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from judging import check_against, relative, solved
from multipoles import OverGroundedSlab, OverHalfSpace, OverPlane, OverSlab, Wire, capacitance
from numpy.testing import assert_allclose
from references import two_wires
from round_wires import as_case

from nightcap.geometry import domain
from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Boundary, Case, Dielectric, GroundPlane, Material, OpenSpace
from nightcap.geometry.grading import grading_for
from nightcap.geometry.slab import Slab
from nightcap.geometry.valid import first_mesh
from nightcap.solver.bracket import Bracket
from nightcap.solver.stopwatch import Stopwatch
from nightcap.solver.system import solve_fields

ACCURACY = 1e-5
BARE = (Wire(-0.7 + 1.1j, 0.5), Wire(0.9 + 1.4j, 0.4))
COATED = (
    Wire(-1.2 + 0.8j, 0.5, ((0.3, 2.3),)),
    Wire(0.1 + 1.2j, 0.25, ((0.15, 4.0), (0.1, 2.0))),
    Wire(1.3 + 0.9j, 0.3),
)
RESTING = (Wire(-0.8 + 0.5j, 0.3, ((0.2, 3.0),)), Wire(0.6 + 0.4j, 0.4))  # coat and wire touch y = 0 exactly


def over(wires: tuple[Wire, ...], boundary: Boundary, low: float, high: float, permittivity: float) -> Case:
    """Wires as a case, with one slab."""
    slab = Dielectric("slab", Slab(low, high), Material(permittivity))
    return replace(as_case(wires, boundary), dielectrics=(slab,), accuracy=ACCURACY)


@pytest.mark.parametrize(
    ("wires", "permittivity"),
    [(BARE, 2.3), (BARE, 81.0), (COATED, 81.0), (RESTING, 2.3)],
    ids=["bare", "over water", "coated", "resting"],
)
def test_wires_over_a_half_space(wires: tuple[Wire, ...], permittivity: float) -> None:
    """Source: multipoles with image multipoles; the interface by the method of images."""
    case = over(wires, OpenSpace(), -math.inf, 0.0, permittivity)
    check_against(case, capacitance(wires, OverHalfSpace(permittivity)), ACCURACY)


@pytest.mark.parametrize(("thickness", "permittivity"), [(0.7, 4.4), (0.05, 9.8), (3.0, 2.3)])
def test_wires_over_a_slab(thickness: float, permittivity: float) -> None:
    """Source: multipoles with the series of images of a slab."""
    case = over(BARE, OpenSpace(), -thickness, 0.0, permittivity)
    check_against(case, capacitance(BARE, OverSlab(thickness, permittivity)), ACCURACY)


@pytest.mark.parametrize("wires", [BARE[:1], BARE, COATED], ids=["one", "bare", "coated"])
@pytest.mark.parametrize("low", [-0.7, -math.inf], ids=["to the plane", "and below it"])
def test_wires_over_a_grounded_slab(wires: tuple[Wire, ...], low: float) -> None:
    """Source: multipoles with the series of images of a grounded slab."""
    case = over(wires, GroundPlane(-0.7), low, 0.0, 4.4)
    check_against(case, capacitance(wires, OverGroundedSlab(0.7, 4.4)), ACCURACY)


@pytest.mark.parametrize("accuracy", [1e-4, 1e-6, 1e-8])
def test_pair_half_immersed(accuracy: float) -> None:
    """(1 + 4) / 2 times the pair. Source: symmetry about the plane of the centres; Smythe."""
    case = over((Wire(-1.5 + 0j, 1.0), Wire(1.5 + 0j, 1.0)), OpenSpace(), -math.inf, 0.0, 4.0)
    check_against(replace(case, accuracy=accuracy), 2.5 * two_wires(3.0, 1.0), accuracy)


@pytest.mark.parametrize("boundary", [OpenSpace(), GroundPlane(-3.0)])
def test_a_far_wall_equals_the_inverted_rim(boundary: Boundary) -> None:
    """A slab of the background's permittivity: the same problem, once with a far wall and once inverted."""
    by_wall = over(BARE, boundary, -0.4, 2.0, 1.0)
    inverted = replace(by_wall, dielectrics=())
    one, other = (relative(solved(case, ACCURACY)) for case in (by_wall, inverted))
    root = np.sqrt(np.diag(one.value))
    assert (np.abs(one.value - other.value) <= one.half_width + other.half_width).all()
    assert (np.abs(one.value - other.value) <= 1e-6 * np.outer(root, root)).all()


def test_several_slabs_and_a_background() -> None:
    """Three slabs of one permittivity, side by side, are one; all permittivities doubled double the matrix."""
    case = over(BARE, OpenSpace(), -0.7, 0.0, 8.8)
    slabs = tuple(
        Dielectric(f"slab{k}", Slab(low, high), Material(8.8, name=f"layer {k}"))
        for k, (low, high) in enumerate([(-0.7, -0.5), (-0.5, -0.1), (-0.2, 0.0)])
    )
    case = replace(case, dielectrics=slabs, background=Material(2.0))
    check_against(case, 2 * capacitance(BARE, OverSlab(0.7, 4.4)), ACCURACY)


@pytest.mark.parametrize("height", [30.0, 1000.0])
def test_a_wire_high_above_the_earth(height: float) -> None:
    """A pair of thin wires far above a half space. Source: multipoles with images."""
    pair = (Wire(-0.5 + 1j * height, 0.01), Wire(0.5 + 1j * height, 0.01))
    case = over(pair, OpenSpace(), -math.inf, 0.0, 10.0)
    check_against(case, capacitance(pair, OverHalfSpace(10.0)), ACCURACY)


def test_a_slab_over_a_plane_that_is_not_the_reference() -> None:
    """The plane keeps its own potential out to infinity, whichever conductor is the reference."""
    case = replace(over(BARE, GroundPlane(-0.7), -0.7, 0.0, 1.0), reference="w1")
    C = capacitance(tuple(replace(w, centre=w.centre + 0.7j) for w in BARE), OverPlane())
    full = np.block([[C, -C.sum(1)[:, None]], [-C.sum(0), C.sum()]])
    solution = check_against(case, full[np.ix_([0, 2], [0, 2])], ACCURACY)
    assert solution.conductors == ("w0", "plane")


def test_shifted_slabs() -> None:
    """The same far from the origin. Source: as above; the matrix does not depend on where the origin is."""
    moved = tuple(replace(w, centre=w.centre + 300 - 200j) for w in BARE)
    case = over(moved, OpenSpace(), -math.inf, -200.0, 4.0)
    check_against(case, capacitance(BARE, OverHalfSpace(4.0)), ACCURACY)


def width_and_bracket(case: Case) -> tuple[float, Bracket]:
    fields = solve_fields(first_mesh(build_layout(case), grading_for(1e-8)), 8, 1e-12, Stopwatch())
    return fields.bracket.width[0, 0], fields.bracket


@pytest.mark.parametrize("permittivity", [1.0, 4.0])
def test_bounds_hold_for_unbounded_space_however_near_the_wall(
    permittivity: float, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Walls at 2 to 200 times the reach: the unbounded answer stays inside, and the width goes as wall^-2."""
    case = over((Wire(-1.5 + 0j, 1.0), Wire(1.5 + 0j, 1.0)), OpenSpace(), -math.inf, 0.0, permittivity)
    exact = (1 + permittivity) / 2 * two_wires(3.0, 1.0)
    walls, widths = np.array([2.0, 6.0, 20.0, 60.0, 200.0]), []
    for wall in walls:
        monkeypatch.setattr(domain, "_wall_distance", lambda _, wall=wall: wall)
        width, bracket = width_and_bracket(case)
        assert bracket.lower[0, 0] < exact < bracket.upper[0, 0]
        assert_allclose(bracket.upper[0, 0] - exact, width / 2, rtol=0.2)  # both bounds feel the wall alike
        widths.append(width)
    rates = np.diff(np.log(widths)) / np.diff(np.log(walls))
    assert_allclose(rates, -2.0, rtol=0, atol=0.15)
    assert widths[-1] < 1e-4 * exact


def test_bounds_hold_over_a_plane_however_near_the_wall(monkeypatch: pytest.MonkeyPatch) -> None:
    """The same over a grounded slab. Source: as above."""
    case = over(BARE[:1], GroundPlane(-0.7), -0.7, 0.0, 4.4)
    exact = capacitance(BARE[:1], OverGroundedSlab(0.7, 4.4))[0, 0]
    for wall in (2.0, 8.0, 40.0):
        monkeypatch.setattr(domain, "_wall_distance", lambda _, wall=wall: wall)
        width, bracket = width_and_bracket(case)
        assert bracket.lower[0, 0] < exact < bracket.upper[0, 0]
        assert width > 0.01 * exact / wall**2


def test_the_loss_at_the_wall_is_what_the_distance_is_chosen_for() -> None:
    """With the wall's distance for 1e-8 nothing but a tenth of that is left at order 8. Source: as above."""
    case = over((Wire(-1.5 + 0j, 1.0), Wire(1.5 + 0j, 1.0)), OpenSpace(), -math.inf, 0.0, 4.0)
    _, bracket = width_and_bracket(replace(case, accuracy=1e-8))
    assert bracket.relative < 2e-9
