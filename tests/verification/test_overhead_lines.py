"""Overhead lines as printed in textbooks, by the algebra of brackets: earth left floating, phases transposed."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case, Conductor, GroundPlane, OpenSpace
from nightcap.geometry.constants import VACUUM_PERMITTIVITY
from nightcap.geometry.shapes import Circle
from nightcap.solver.solve import solve


@pytest.mark.parametrize(
    ("over_earth", "printed"),
    [(False, 0.00817e-9), (True, 0.00820e-9)],
)
def test_single_phase_line(over_earth: bool, printed: float) -> None:
    """r 0.328 cm, spacing 3 m, 7.5 m above earth, F/m to neutral: twice the value between the wires.

    Source: Kothari and Nagrath, Modern Power System Analysis, Ex. 3.1. The book's 0.0242 / log10 is 0.16 % above
    2 pi eps0 ln 10, and three digits are printed: 2.5e-3 in all.
    """
    wires = tuple(Conductor(n, Circle((x, 7.5), 0.00328)) for n, x in (("go", -1.5), ("return", 1.5)))
    boundary = GroundPlane(name="earth") if over_earth else OpenSpace()
    case = Case("line", "", wires, boundary, "earth" if over_earth else "return")
    bracket = solve(build_layout(case), 1e-6).bracket
    if over_earth:  # rows go, return against earth -> go, earth against return -> earth floats
        bracket = bracket.with_reference(1).eliminate([1])
    assert_allclose(2 * bracket.value[0, 0], printed, rtol=2.5e-3)


def test_earth_raises_the_capacitance_of_the_line_as_printed() -> None:
    """0.00820 / 0.00817, two quotients of rounded numbers: their difference is known to a third of itself."""
    factor = np.log(3 / 0.00328) / np.log(3 / (0.00328 * np.sqrt(1 + 3**2 / (4 * 7.5**2))))
    assert_allclose(factor - 1, 0.00820 / 0.00817 - 1, atol=0.0012, rtol=0)
    wires = tuple(Conductor(n, Circle((x, 7.5), 0.00328)) for n, x in (("go", -1.5), ("return", 1.5)))
    alone = solve(build_layout(Case("line", "", wires, OpenSpace(), "return")), 1e-6).bracket
    above = solve(build_layout(Case("line", "", wires, GroundPlane(name="earth"), "earth")), 1e-6).bracket
    above = above.with_reference(1).eliminate([1])
    assert_allclose(above.value[0, 0] / alone.value[0, 0], factor, rtol=1e-5)


def test_transposed_three_phase_line() -> None:
    """Radius 0.0462 ft, spacings 20, 20, 38 ft: 8.8466 pF/m to neutral by the equivalent equilateral spacing.

    Source: Grainger and Stevenson, Power System Analysis, 1994, Ex. 5.2 (from memory), with eps0 = 8.85e-12 F/m and the
    spacing rounded to 24.8 ft, 7e-4 together. Transposition averages the potential coefficients of the three positions;
    on charges that sum to zero these are the pseudo-inverse of C.
    """
    foot = 0.3048
    places = [(0.0, 0.0), (19.0, float(np.sqrt(20**2 - 19**2))), (38.0, 0.0)]
    wires = tuple(Conductor(f"w{k}", Circle((foot * x, foot * y), 0.0462 * foot)) for k, (x, y) in enumerate(places))
    C = solve(build_layout(Case("line", "", wires, OpenSpace(), "w2")), 1e-6).bracket.value
    full = np.block([[C, -C.sum(axis=1, keepdims=True)], [-C.sum(axis=0, keepdims=True), C.sum()]])
    P = np.linalg.pinv(full)
    own, mutual = np.trace(P) / 3, (P.sum() - np.trace(P)) / 6
    assert_allclose(1 / (own - mutual), 8.8466e-12, rtol=8e-4)
    unrounded = 2 * np.pi * VACUUM_PERMITTIVITY / np.log(np.cbrt(20 * 20 * 38) / 0.0462)
    assert_allclose(1 / (own - mutual), unrounded, rtol=2e-5)
