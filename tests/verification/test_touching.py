"""Insulation that touches, exactly: no gap is left to mesh. The multipole expansion still converges, if slower."""

from __future__ import annotations

import cmath
import math
from dataclasses import replace

import numpy as np
import pytest
from judging import assert_encloses, check_against, relative, solved
from multipoles import InOpenSpace, InShield, OverPlane, Wire, capacitance
from numpy.testing import assert_allclose
from round_wires import as_case
from samples import wire_on_board

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case, GroundPlane, Limits, Material, OpenSpace, Shield
from nightcap.geometry.case_file import read_text
from nightcap.geometry.constants import VACUUM_PERMITTIVITY
from nightcap.geometry.curves import Floats
from nightcap.geometry.shapes import Circle
from nightcap.solver.solve import solve

MEMORY = 2e9
"""bytes."""
TOUCHING_SEEDS = [5_101, 5_102, 5_103, 5_104, 5_105, 5_106]


def hexagon(rings: int) -> list[complex]:
    """Centres at pitch 1 within a hexagon: 1, 7, 19, 37 for 0, 1, 2, 3 rings."""
    step = cmath.rect(1.0, math.pi / 3)
    span = range(-rings, rings + 1)
    return [a + b * step for a in span for b in span if abs(a + b) <= rings]


def bundle(rings: int) -> list[Wire]:
    """Insulated wires that touch exactly: pitch = outer diameter."""
    return [Wire(z, 0.25, ((0.25, 2.3),)) for z in hexagon(rings)]


def round_shield(radius: float) -> Shield:
    return Shield(Circle((0.0, 0.0), radius))


@pytest.fixture(scope="module", params=[1.5, 1.7], ids=["touching-the-shield", "clear-of-the-shield"])
def seven(request: pytest.FixtureRequest) -> tuple[Case, Floats]:
    wires, shield = bundle(1), float(request.param)
    return as_case(wires, round_shield(shield)), capacitance(tuple(wires), InShield(shield))


@pytest.mark.parametrize("accuracy", [1e-2, 1e-3, 1e-4, 1e-5])
def test_seven_touching_wires(seven: tuple[Case, Floats], accuracy: float) -> None:
    check_against(*seven, accuracy)


def test_thirty_seven_touching_wires() -> None:
    """Within 2 GB, as the tool itself foresees it."""
    wires = bundle(3)
    solution = solve(build_layout(as_case(wires, round_shield(4.0))), 1e-4, Limits(memory=MEMORY))
    assert solution.status == "met", solution.reason
    assert solution.bracket.relative <= 1e-4
    exact = capacitance(tuple(wires), InShield(4.0), digits=1e-6)
    bracket = relative(solution)
    assert_allclose(bracket.value, exact, rtol=0, atol=1e-4 * exact.diagonal().min())
    assert_encloses(bracket, exact)


@pytest.mark.parametrize("accuracy", [1e-3, 1e-6])
@pytest.mark.parametrize("gap", [0.0, 0.02, 0.1])
def test_a_coated_wire_on_the_plane_and_just_above(gap: float, accuracy: float) -> None:
    wire = Wire(1j * (1.5 + gap), 1.0, ((0.5, 3.0),))
    check_against(as_case([wire], GroundPlane()), capacitance((wire,), OverPlane()), accuracy)


@pytest.mark.parametrize("seed", TOUCHING_SEEDS)
def test_random_chains_of_touching_wires(seed: int) -> None:
    """Three unequal wires, each touching the next, the largest permittivity moderate."""
    random = np.random.default_rng(seed)
    wires: list[Wire] = []
    for _ in range(3):
        coatings = tuple((float(random.uniform(0.1, 0.3)), float(random.uniform(1.5, 4.0))) for _ in range(2))
        wire = Wire(0j, float(random.uniform(0.2, 0.5)), coatings)
        if wires:
            reach = wires[-1].outside + wire.outside
            centre = wires[-1].centre + cmath.rect(reach, random.uniform(-1.0, 1.0))
            wire = Wire(centre, wire.radius, coatings)
        wires.append(wire)
    exact = capacitance(tuple(wires), InOpenSpace())
    check_against(as_case(wires, OpenSpace()), exact, 10 ** random.uniform(-6, -3))


def test_a_touching_pair_of_a_data_cable() -> None:
    """0.511 mm (24 AWG), PE to 0.90 mm, eps 2.3, touching, in air: 3.940 nF per 100 m. Source: multipoles, recomputed.

    At most 5.6 nF per 100 m is allowed for the pair in its cable (category 5, published data sheets).
    """
    wires = [Wire(x + 0j, 0.2555, ((0.1945, 2.3),)) for x in (-0.45, 0.45)]
    solution = check_against(as_case(wires, OpenSpace()), capacitance(tuple(wires), InOpenSpace()), 1e-6)
    per_100_m = solution.bracket.value[0, 0] * 100 * 1e9
    assert_allclose(per_100_m, 3.940, rtol=1.3e-4)
    assert per_100_m < 5.6


def test_a_bare_wire_resting_on_a_board() -> None:
    """No closed form: finer brackets must agree with coarser ones, and the board raises C, by less than 4.4."""
    case = wire_on_board()
    fine = relative(solved(case, 1e-6))
    for accuracy in (1e-2, 1e-3, 1e-4, 1e-5):
        coarse = relative(solved(case, accuracy))
        assert coarse.lower[0, 0] <= fine.upper[0, 0]
        assert fine.lower[0, 0] <= coarse.upper[0, 0]
        assert abs(coarse.value - fine.value)[0, 0] <= (coarse.half_width + fine.half_width)[0, 0]
    bare = relative(solved(Case("bare", "", case.conductors, case.boundary, "shield"), 1e-5))
    assert bare.upper[0, 0] < fine.lower[0, 0] < 4.4 * bare.lower[0, 0]


def test_the_board_is_drawn_as_it_says() -> None:
    """The board of the case above, of the background's permittivity, changes nothing."""
    case = wire_on_board()
    neutral = Case("bare", "", case.conductors, case.boundary, "shield")
    of_air = replace(case, dielectrics=(replace(case.dielectrics[0], material=Material(1.0)),))
    one, two = (solved(c, 1e-6).bracket.value / VACUUM_PERMITTIVITY for c in (neutral, of_air))
    assert_allclose(one, two, rtol=1e-6)


@pytest.mark.parametrize("offset", [0.02, 0.1, 0.3])
@pytest.mark.parametrize("permittivity", [1.01, 100.0])
def test_two_contacts_close_to_each_other(offset: float, permittivity: float) -> None:
    """Two wires touch the surface of a slab from both sides, side by side: brackets of all accuracies overlap."""
    text = (
        "units: m\nconductors:\n  above: {shape: circle, radius: 1, at: [0, 1]}\n"
        f"  below: {{shape: circle, radius: 1, at: [{offset}, -1]}}\n"
        "dielectrics:\n"
        f"  slab: {{shape: rectangle, width: 20, height: 10, at: [0, -5], permittivity: {permittivity}}}\n"
        "boundary: {kind: shield, shape: circle, radius: 4}\n"
    )
    coarse, fine = (relative(solved(read_text(text), accuracy)) for accuracy in (1e-4, 1e-7))
    for lower, upper in ((coarse.lower, fine.upper), (fine.lower, coarse.upper)):
        assert np.linalg.eigvalsh(upper - lower)[0] > -1e-10 * np.abs(upper).max()
