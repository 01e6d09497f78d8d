"""The tool against every closed form that circles, rectangles and polygons can express, and some recomputed digits."""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass

import numpy as np
import pytest
from judging import check_against, relative, solved
from multipoles import InShield, Wire, capacitance
from numpy.testing import assert_allclose
from references import eccentric_coax, layered_coax, square_in_square, two_wires, wire_over_plane
from samples import coax
from samples import square_in_square as squares
from samples import two_wires as two_wires_case

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
from nightcap.geometry.constants import VACUUM_PERMITTIVITY
from nightcap.geometry.curves import Point
from nightcap.geometry.shapes import Circle, Polygon, Rectangle

ACCURACY = 1e-6


def wires(
    centres: list[Point],
    radius: float,
    boundary: Boundary,
    coat: tuple[float, float] | None = None,
    dielectrics: tuple[Dielectric, ...] = (),
) -> Case:
    """Equal wires, each with one coat (thickness, permittivity) or none."""
    coatings = (Coating(coat[0], Material(coat[1])),) if coat else ()
    conductors = tuple(Conductor(f"w{k}", Circle(at, radius), coatings) for k, at in enumerate(centres))
    reference = conductors[-1].name if isinstance(boundary, OpenSpace) else boundary.name
    return Case("wires", "", conductors, boundary, reference, dielectrics)


def round_shield(radius: float) -> Shield:
    return Shield(Circle((0.0, 0.0), radius))


def unequal_wires() -> Case:
    pair = (Conductor("small", Circle((0.0, 0.0), 1.0)), Conductor("large", Circle((3.0, 4.0), 2.0)))
    return Case("unequal", "", pair, OpenSpace(), "large")


def lower_half(size: float, permittivity: float) -> tuple[Dielectric, ...]:
    """A dielectric that fills everything below y = 0 of a domain of this half-width, and reaches beyond it."""
    shape = Rectangle((0.0, -size), 3 * size, 2 * size)
    return (Dielectric("water", shape, Material(permittivity)),)


def sector(angle: float, turned: float, permittivity: float, reach: float) -> Dielectric:
    """A wedge with its tip at the origin that reaches beyond a shield."""
    rim = [cmath.rect(reach, turned + angle * k / 4) for k in range(5)]
    return Dielectric("wedge", Polygon(((0.0, 0.0), *((z.real, z.imag) for z in rim))), Material(permittivity))


def wedged_coax() -> Case:
    dielectrics = (sector(2.1, 0.3, 4.0, 9.0), sector(1.1, 3.0, 2.5, 9.0))
    core = (Conductor("core", Circle((0.0, 0.0), 1.0)),)
    return Case("wedges", "", core, round_shield(2.0), "shield", dielectrics)


def half_filled_squares() -> Case:
    case = squares(2.0, 4.0)
    return Case("half", "", case.conductors, case.boundary, "shield", lower_half(4.0, 5.0))


def turned_squares(ratio: float) -> Case:
    """The inner square drawn as a polygon, the outer one as a turned rectangle."""
    corners = [cmath.rect(ratio * math.sqrt(2), 0.3 + math.pi / 4 + k * math.pi / 2) for k in range(4)]
    core = Conductor("core", Polygon(tuple((z.real, z.imag) for z in corners)))
    return Case("turned", "", (core,), Shield(Rectangle((0.0, 0.0), 2.0, 2.0, angle=0.3)), "shield")


def painted_coax() -> Case:
    """Layers as painted discs, the later over the earlier."""
    discs = tuple(
        Dielectric(f"disc{r}", Circle((0.0, 0.0), r), Material(eps)) for r, eps in ((3.0, 2.0), (2.0, 6.0), (1.5, 3.0))
    )
    case = coax(1.0, 4.0)
    return Case("painted", "", case.conductors, case.boundary, "shield", discs)


def round_in_square() -> Case:
    core = (Conductor("core", Circle((0.0, 0.0), 0.5)),)
    return Case("round", "", core, Shield(Rectangle((0.0, 0.0), 2.0, 2.0)), "shield")


PAIR: list[Point] = [(-1.5, 0.0), (1.5, 0.0)]
CORES: list[Point] = [(0.5 * math.cos(t), 0.5 * math.sin(t)) for t in (2 * math.pi * k / 3 for k in range(3))]
CORE_DIAGONAL, CORE_OTHER = 6.7261973354383, -1.1436395890287
IMMERSED = (1.0 + 4.0) / 2 * capacitance((Wire(-1.5 + 0j, 1.0), Wire(1.5 + 0j, 1.0)), InShield(4.0))
SECTORS = (2.1 * 4.0 + 1.1 * 2.5 + (2 * math.pi - 3.2) * 1.0) / math.log(2.0)


@dataclass(frozen=True, eq=False)
class Known:
    """A layout whose matrix is known."""

    name: str
    case: Case
    exact: object
    """(N, N) or a number, C' / eps0."""
    source: str


SMYTHE = "Smythe, Static and Dynamic Electricity (from memory)"
SERIES = "capacitors in series, common practice"
KNOWN = [
    Known("two equal wires", two_wires_case(3.0), two_wires(3.0, 1.0), SMYTHE),
    Known("two unequal wires", unequal_wires(), two_wires(5.0, 1.0, 2.0), SMYTHE),
    Known("wire over plane", wires([(0.0, 2.0)], 1.0, GroundPlane()), wire_over_plane(2.0, 1.0), SMYTHE),
    Known("plane elsewhere", wires([(7.0, -3.0)], 1.0, GroundPlane(at=-4.1)), wire_over_plane(1.1, 1.0), SMYTHE),
    Known("wire close to plane", wires([(0.0, 1.01)], 1.0, GroundPlane()), wire_over_plane(1.01, 1.0), SMYTHE),
    Known("wire high over plane", wires([(0.0, 40.0)], 1.0, GroundPlane()), wire_over_plane(40.0, 1.0), SMYTHE),
    Known("coax", coax(1.0, 2.0), layered_coax((1.0, 2.0), (1.0,)), "Maxwell, Treatise (from memory)"),
    Known("thin gap coax", coax(1.0, 1.02), layered_coax((1.0, 1.02), (1.0,)), "Maxwell, Treatise (from memory)"),
    Known("thin core coax", coax(0.01, 1.0), layered_coax((0.01, 1.0), (1.0,)), "Maxwell, Treatise (from memory)"),
    Known("eccentric coax", coax(1.0, 4.0, 2.0), eccentric_coax(1.0, 4.0, 2.0), SMYTHE),
    Known("very eccentric coax", coax(1.0, 4.0, 2.99), eccentric_coax(1.0, 4.0, 2.99), SMYTHE),
    Known(
        "layered coax",
        coax(1.0, 4.0, coating=Coating(1.0, Material(2.25))),
        layered_coax((1.0, 2.0, 4.0), (2.25, 1.0)),
        SERIES,
    ),
    Known("painted coax", painted_coax(), layered_coax((1.0, 1.5, 2.0, 3.0, 4.0), (3.0, 6.0, 2.0, 1.0)), SERIES),
    Known("coax with wedges", wedged_coax(), SECTORS, "capacitors in parallel, common practice"),
    Known(
        "pair half immersed",
        wires(PAIR, 1.0, round_shield(4.0), dielectrics=lower_half(4.0, 4.0)),
        IMMERSED,
        "symmetry about the plane through both centres; pair by multipoles",
    ),
    Known("square in square", squares(2.0, 4.0), square_in_square(0.5), "Bowman 1935 (from memory)"),
    Known("small square in square", squares(0.2, 1.0), square_in_square(0.2), "Bowman 1935 (from memory)"),
    Known("large square in square", squares(0.9, 1.0), square_in_square(0.9), "Bowman 1935 (from memory)"),
    Known("turned squares", turned_squares(0.3), square_in_square(0.3), "Bowman 1935 (from memory)"),
    Known("half filled squares", half_filled_squares(), 3.0 * square_in_square(0.5), "Bowman 1935, and symmetry"),
    Known("round in square", round_in_square(), 8.17247084772095, "Schwarz-Christoffel map and series, recomputed"),
    Known(
        "three cores",
        wires(CORES, 0.25, round_shield(1.0)),
        np.full((3, 3), CORE_OTHER) + (CORE_DIAGONAL - CORE_OTHER) * np.eye(3),
        "multipoles with 40 and 60 harmonics, recomputed",
    ),
    Known("coated pair", wires(PAIR, 1.0, OpenSpace(), (0.4, 3.5)), 5.3820066094417, "multipoles, recomputed"),
    Known("coated over ground", wires([(0.0, 2.0)], 1.0, GroundPlane(), (0.5, 3.0)), 6.3942903176805, "multipoles"),
]


@pytest.mark.parametrize("known", KNOWN, ids=lambda known: known.name)
def test_exact_value(known: Known) -> None:
    check_against(known.case, known.exact, ACCURACY)


def test_inductance_of_a_pair_in_a_shield() -> None:
    """Geometry: Paul 2007, p. 175; L / mu0 is the inverse of C / eps0, to the digits recomputed by multipoles.

    The thin-wire form printed there gives 0.466514 and 0.035514.
    """
    solution = solved(wires([(-25.0, 0.0), (25.0, 0.0)], 2.0, round_shield(50.0)), ACCURACY)
    L = relative(solution).inverse()
    exact = np.array([[0.466308893202, 0.035310791728], [0.035310791728, 0.466308893202]])
    assert_allclose(L.value, exact, rtol=ACCURACY)
    assert (np.abs(L.value - exact) <= L.half_width + 1e-12).all()
    assert_allclose(L.value, [[0.466514, 0.035514], [0.035514, 0.466514]], rtol=6e-3)


@pytest.mark.parametrize("ratio", [1.5, 3.0, 8.0])
def test_rounded_constants_of_the_cable_formula(ratio: float) -> None:
    """C = eps / (18 ln(D / d)) nF/m is 0.138 % low. Source: IEC 60287-1-1 (from memory)."""
    value = solved(coax(1.0, ratio, coating=Coating(ratio - 1.0, Material(2.3))), ACCURACY).bracket.value
    printed = 2.3 / (18 * math.log(ratio)) * 1e-9
    assert_allclose(printed / value, [[1 - 0.00138]], rtol=1e-5)
    assert_allclose(value, [[VACUUM_PERMITTIVITY * layered_coax((1.0, ratio), (2.3,))]], rtol=ACCURACY)
