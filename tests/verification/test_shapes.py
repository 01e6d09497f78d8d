"""Every shape of arcs and lines against an independent boundary integral equation, and against closed forms.

The integral equation (tests/boundary_equations.py) agrees with closed forms to rounding; see the first tests.
"""

from __future__ import annotations

import itertools
import math
from functools import cache

import numpy as np
import pytest
from boundary_equations import capacitance
from judging import check_against, solved
from multipoles import InShield, Wire
from multipoles import capacitance as by_multipoles
from numpy.testing import assert_allclose

from nightcap.geometry.case import Case, Coating, Conductor, Material, Shield
from nightcap.geometry.case_file import read_text
from nightcap.geometry.curves import Floats
from nightcap.geometry.shapes import Circle, Rectangle, parts_of

RADIUS = 2.0


def case_of(*keys: str) -> Case:
    lines = "".join(f"  c{k}: {{{own}}}\n" for k, own in enumerate(keys))
    return read_text(f"units: m\nconductors:\n{lines}boundary: {{kind: shield, shape: circle, radius: {RADIUS}}}\n")


def test_reference_agrees_with_closed_forms() -> None:
    """Coaxial and eccentric circles; Smythe, Static and Dynamic Electricity."""
    coax = capacitance([Circle((0.0, 0.0), 1.0).outline()], 2.0)
    assert_allclose(coax, [[2 * math.pi / math.log(2)]], rtol=1e-13)
    eccentric = capacitance([Circle((2.0, 0.0), 1.0).outline()], 4.0)
    assert_allclose(eccentric, [[5.89012307048722]], rtol=1e-13)


def test_reference_agrees_with_multipoles() -> None:
    wires = (Wire(-0.5 + 0j, 0.25, ()), Wire(0.25 + 0.4j, 0.25, ()))
    ours = capacitance([Circle((w.centre.real, w.centre.imag), w.radius).outline() for w in wires], 1.0)
    assert_allclose(ours, by_multipoles(wires, InShield(1.0), 1.0), rtol=1e-12)


def test_reference_converges_at_sharp_corners() -> None:
    """A square in a circle with finer and finer panels: all digits that the checks below need stand still."""
    square = [Rectangle((0.1, 0.0), 1.0, 1.0).outline()]
    assert_allclose(capacitance(square, RADIUS, levels=7), capacitance(square, RADIUS), rtol=1e-7)


HOLLOW = "[[-0.8, -0.8], [0.8, -0.8], [0.8, 0], [0, 0], [0, 0.8], [-0.8, 0.8]]"
SMOOTH = {
    "oval": ("shape: oval, width: 1.6, height: 0.7, at: [0.2, 0.1], rotate: 25",),
    "oval that is a circle": ("shape: oval, width: 1, height: 1, at: [0.3, 0]",),
    "ring": ("shape: ring, outer_radius: 0.8, wall: 0.3, at: [0.3, 0.2]",),
    "rounded rectangle": ("shape: rectangle, width: 1.5, height: 0.8, corner_radius: 0.2, rotate: 33",),
    "rounded polygon with a hollow": (f"shape: polygon, points: {HOLLOW}, corner_radius: 0.2",),
    "rounded hexagon": ("shape: regular_polygon, sides: 6, across_flats: 1.4, corner_radius: 0.2, at: [0.2, 0]",),
    "rounded sector": ("shape: sector, outer_radius: 1, from: 20, to: 140, corner_radius: 0.15, at: [0.1, -0.4]",),
    "rounded sector of a ring": (
        "shape: sector, inner_radius: 0.6, outer_radius: 1.2, from: 100, to: 330, corner_radius: 0.2",
    ),
    "rounded trapezoid": ("shape: trapezoid, foot: 1.4, top: 0.9, height: 0.5, corner_radius: 0.1, at: [0, -0.5]",),
    "straight strip with round ends": (
        "shape: bent_strip, points: [[-0.8, -0.3], [0.7, 0.4]], thickness: 0.2, ends: round",
    ),
    "two ovals": (
        "shape: oval, width: 1, height: 0.4, at: [0, 0.5]",
        "shape: oval, width: 1, height: 0.4, at: [0.2, -0.5], rotate: 80",
    ),
}
SHARP = {
    "sector": ("shape: sector, outer_radius: 1, from: 20, to: 140, at: [0.1, -0.4]",),
    "sector of a ring": ("shape: sector, inner_radius: 0.6, outer_radius: 1.2, from: 100, to: 330",),
    "foil with a gap": ("shape: arc_strip, inner_radius: 1, thickness: 0.1, gap: 0.6, facing: 30",),
    "lapped foil": ("shape: arc_strip, inner_radius: 1, thickness: 0.1, overlap: 0.8, clearance: 0.1, facing: 30",),
    "bent strip": ("shape: bent_strip, points: [[-0.9, -0.6], [0.4, -0.6], [0.8, 0.7]], thickness: 0.2",),
    "trapezoid": ("shape: trapezoid, foot: 1.4, etch_angle: 60, height: 0.5, at: [0, -0.5]",),
    "pentagon": ("shape: regular_polygon, sides: 5, across_corners: 2, at: [0.2, 0.1], rotate: 10",),
    "polygon with a hollow": (f"shape: polygon, points: {HOLLOW}",),
    "foil around a wire": (
        "shape: arc_strip, inner_radius: 1, thickness: 0.1, gap: 0.6, facing: 30",
        "shape: circle, radius: 0.4, at: [0.1, 0.1]",
    ),
}


@cache
def exact_of(keys: tuple[str, ...]) -> Floats:
    return capacitance([conductor.shape.outline() for conductor in case_of(*keys).conductors], RADIUS)


def check(keys: tuple[str, ...], *accuracies: float) -> None:
    for accuracy in accuracies:
        check_against(case_of(*keys), exact_of(keys), accuracy)


@pytest.mark.parametrize("name", SMOOTH)
def test_smooth_shapes(name: str) -> None:
    check(SMOOTH[name], 1e-4, 1e-5, 1e-6)


@pytest.mark.parametrize("name", SHARP)
def test_shapes_with_sharp_corners(name: str) -> None:
    check(SHARP[name], 1e-4, 1e-5)


def test_parts_that_lie_apart_are_one_conductor() -> None:
    """The same as two conductors joined: the sum of all entries."""
    parts = "{shape: circle, radius: 0.3, at: [-0.6, 0]}, {shape: oval, width: 1, height: 0.5, at: [0.6, 0.2]}"
    case = case_of(f"shape: union, parts: [{parts}]")
    outlines = [part.outline() for part in parts_of(case.conductors[0].shape)]
    check_against(case, capacitance(outlines, RADIUS).sum(), 1e-6)


def test_parts_that_overlap() -> None:
    """Two circles that overlap have the outline of two arcs; the corners where these meet are hollow."""
    case = case_of(
        "shape: union, parts: [{shape: circle, radius: 0.5, at: [-0.4, 0]}, {shape: circle, radius: 0.5, at: [0.4, 0]}]"
    )
    from nightcap.geometry.curves import Arc

    angle = math.acos(0.8)
    arcs = [
        [Arc((x, 0.0), 0.5, first + k * turn, first + (k + 1) * turn) for k in range(4)]
        for x, first, turn in (
            (0.4, angle - math.pi, (math.tau - 2 * angle) / 4),
            (-0.4, angle, (math.tau - 2 * angle) / 4),
        )
    ]
    check_against(case, capacitance([[*arcs[0], *arcs[1]]], RADIUS), 1e-6)


@pytest.mark.parametrize("accuracy", [1e-3, 1e-5, 1e-7])
def test_two_touching_circles_in_a_wide_shield(accuracy: float) -> None:
    """Two equal circles that touch are, seen from far, a circle of radius pi a / 2: w = coth(pi i a / z) maps what is
    outside of them onto what is outside of a slit from -1 to 1, whose radius is 1/2. Corrections go as (a / R)^4.

    Conformal radius from the map, common practice.
    """
    far = 1000.0
    case = read_text(
        "units: m\nconductors: {a: {shape: union, parts: ["
        "{shape: circle, radius: 1, at: [-1, 0]}, {shape: circle, radius: 1, at: [1, 0]}]}}\n"
        f"boundary: {{kind: shield, shape: circle, radius: {far}}}\n"
    )
    check_against(case, 2 * math.pi / math.log(far / (math.pi / 2)), accuracy)


@pytest.mark.parametrize(("count", "factor"), [(7, 0.939), (19, 0.97), (37, 0.98)])
def test_effective_diameter_of_strands(count: int, factor: float) -> None:
    """The list of MIL-C-17 has 0.939, 0.970 and 0.980; the last digit of the second and third is not reached.

    19 strands in concentric layers have 0.9688, 37 have 0.9790.
    """
    digits = 3 if count == 7 else 2
    for ratio in (2.0, 3.3):
        case = case_of(f"shape: strands, count: {count}, overall_diameter: {2 * RADIUS / ratio}")
        C = solved(case, 1e-5).bracket.value[0, 0] / 8.8541878188e-12
        assert round(ratio * math.exp(-2 * math.pi / C), digits) == factor


def strands(count: int, lay: str) -> Case:
    return case_of(f"shape: strands, count: {count}, strand_diameter: 0.4, lay: {lay}")


@pytest.mark.parametrize(("count", "lay"), [(7, "concentric"), (19, "hexagonal")])
def test_touching_strands(count: int, lay: str) -> None:
    """The surface that is seen from outside consists of the outer arcs between contacts, where the charge vanishes."""
    case = strands(count, lay)
    outer = [arc for circle in parts_of(case.conductors[0].shape) for arc in _outer_arcs(circle, case)]
    exact = capacitance([outer], RADIUS, levels=2)
    for accuracy in (1e-4, 1e-5):
        check_against(case, exact, accuracy)


def _outer_arcs(circle: object, case: Case) -> list[object]:
    """The arc of a strand between its two outermost contacts, in quarters; none if it has six neighbours."""
    from nightcap.geometry.curves import Arc

    assert isinstance(circle, Circle)
    others = [part for part in parts_of(case.conductors[0].shape) if isinstance(part, Circle) and part != circle]
    near = [o for o in others if math.dist(o.centre, circle.centre) < 2.001 * circle.radius]
    angles = sorted(math.atan2(o.centre[1] - circle.centre[1], o.centre[0] - circle.centre[0]) for o in near)
    if len(angles) == 6:
        return []
    gaps = [((b - a) % math.tau, a) for a, b in zip(angles, angles[1:] + angles[:1], strict=True)]
    turn, first = max(gaps)
    return [Arc(circle.centre, circle.radius, first + turn * k / 4, first + turn * (k + 1) / 4) for k in range(4)]


CORE = "shape: circle, radius: 0.3"
TUBE = "shape: ring, outer_radius: 1.2, inner_radius: 0.9"


def nested(*radii: float) -> float:
    return 2 * math.pi / math.log(radii[1] / radii[0])


@pytest.mark.parametrize("accuracy", [1e-4, 1e-6])
def test_core_in_a_tube(accuracy: float) -> None:
    """Two capacitors in series that meet in the tube."""
    inner, outer = nested(0.3, 0.9), nested(1.2, RADIUS)
    case = case_of(CORE, TUBE)
    check_against(case, np.array([[inner, -inner], [-inner, inner + outer]]), accuracy)


def test_core_in_a_floating_tube() -> None:
    case = case_of(CORE, TUBE + ", floating: true")
    inner, outer = nested(0.3, 0.9), nested(1.2, RADIUS)
    bracket = solved_reduced(case)
    assert bracket[0] <= inner * outer / (inner + outer) <= bracket[1]


def solved_reduced(case: Case) -> tuple[float, float]:
    from nightcap.geometry.build_layout import build_layout
    from nightcap.solver.solve import solve

    floating = [conductor.name for conductor in case.conductors if conductor.floating]
    solution = solve(build_layout(case), 1e-6, floating=floating)
    assert solution.status == "met"
    low, high = solution.bracket.lower, solution.bracket.upper
    return low[0, 0] / 8.8541878188e-12, high[0, 0] / 8.8541878188e-12


def test_three_nested_tubes_and_a_core() -> None:
    rings = [(0.5, 0.6), (0.8, 1.0), (1.3, 1.5)]
    keys = [CORE, *(f"shape: ring, outer_radius: {b}, inner_radius: {a}" for a, b in rings)]
    steps = [nested(a, b) for a, b in ((0.3, 0.5), (0.6, 0.8), (1.0, 1.3), (1.5, RADIUS))]
    exact = np.diag([steps[0], *(a + b for a, b in itertools.pairwise(steps))])
    for k, step in enumerate(steps[:-1]):
        exact[k, k + 1] = exact[k + 1, k] = -step
    check_against(case_of(*keys), exact, 1e-6)


def test_eccentric_cores_in_two_chambers() -> None:
    """Each core sees only its own tube; the tubes see each other and the shield."""
    tubes = [(-0.9, 0.0), (0.9, 0.3)]
    keys = [f"shape: ring, outer_radius: 0.7, inner_radius: 0.6, at: [{x}, {y}]" for x, y in tubes]
    keys += [f"shape: circle, radius: 0.2, at: [{x + 0.25}, {y}]" for x, y in tubes]
    own = 2 * math.pi / math.acosh((0.2**2 + 0.6**2 - 0.25**2) / (2 * 0.2 * 0.6))  # Smythe
    outside = by_multipoles(tuple(Wire(complex(*at), 0.7, ()) for at in tubes), InShield(RADIUS), 1.0)
    exact = np.block([[outside + own * np.eye(2), -own * np.eye(2)], [-own * np.eye(2), own * np.eye(2)]])
    check_against(case_of(*keys), exact, 1e-6)


@pytest.mark.parametrize("name", ["rounded sector", "rounded polygon with a hollow", "oval", "bent strip", "trapezoid"])
def test_a_coat_of_vacuum_changes_nothing(name: str) -> None:
    keys = {**SMOOTH, **SHARP}[name]
    case = case_of(*keys)
    shape = case.conductors[0].shape
    coated = Conductor("c0", shape, (Coating(0.08, Material(1.0, name="none")),))
    exact = capacitance([shape.outline()], RADIUS)
    check_against(Case("", "", (coated,), case.boundary, "shield"), exact, 1e-4)


def test_a_coated_oval_that_is_a_circle() -> None:
    """Series capacitors, through the outlines of ovals."""
    oval = Rectangle((0.0, 0.0), 1.0, 1.0, 0.5)
    coated = Conductor("c0", oval, (Coating(0.3, Material(2.5)),))
    exact = 2 * math.pi / (math.log(0.8 / 0.5) / 2.5 + math.log(RADIUS / 0.8))
    check_against(Case("", "", (coated,), Shield(Circle((0.0, 0.0), RADIUS)), "shield"), exact, 1e-6)


def random_layout(random: np.random.Generator) -> tuple[str, ...]:
    """Two shapes in the left and right half of the shield."""
    found = []
    for x in (-0.95, 0.95):
        size, turn, kind = random.uniform(0.3, 0.75), random.uniform(0, 180), random.integers(5)
        width, height = size * np.array([1.0, random.uniform(0.4, 1.0)])
        place = f"at: [{x}, {random.uniform(-0.2, 0.2)}], rotate: {turn}"
        found.append(
            (
                f"shape: oval, width: {2 * width}, height: {2 * height}, {place}",
                f"shape: rectangle, width: {width}, height: {height}, corner_radius: {height / 4}, {place}",
                f"shape: regular_polygon, sides: {random.integers(3, 9)}, across_corners: {2 * size}, {place}",
                f"shape: sector, outer_radius: {size}, from: 0, to: {random.uniform(40, 170)}, {place}",
                f"shape: trapezoid, foot: {width}, top: {width / 2}, height: {height}, {place}",
            )[kind]
        )
    return tuple(found)


@pytest.mark.parametrize("number", range(12))
def test_random_shapes(number: int) -> None:
    random = np.random.default_rng(53_071 + number)
    check(random_layout(random), float(10 ** random.uniform(-5, -3)))
