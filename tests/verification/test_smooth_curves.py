"""Ellipses, splines and outlines drawn elsewhere, against closed forms and an independent integral equation."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest
from boundary_equations import capacitance
from judging import check_against, solved
from numpy.testing import assert_allclose

from nightcap.geometry.case import Case
from nightcap.geometry.case_file import read_case, read_text
from nightcap.geometry.curves import Floats

COAX = 2 * math.pi / math.log(2)
SQUARES = 10.2340925693680517  # Bowman 1935: a square of half the size in a square


def in_circle(keys: str, radius: float = 2.0) -> Case:
    return read_text(
        f"units: m\nconductors: {{a: {{{keys}}}}}\nboundary: {{kind: shield, shape: circle, radius: {radius}}}\n"
    )


@pytest.mark.parametrize("accuracy", [1e-4, 1e-5, 1e-7])
@pytest.mark.parametrize("turn", [0, 20, 90])
def test_confocal_ellipses(accuracy: float, turn: float) -> None:
    """2 pi / ln((a2 + b2) / (a1 + b1)); Smythe, Static and Dynamic Electricity."""
    outer = f"width: 6, height: {2 * math.sqrt(6)}, rotate: {turn}, at: [1, 2]"
    case = read_text(
        f"units: m\nconductors: {{a: {{shape: ellipse, width: 4, height: 2, rotate: {turn}, at: [1, 2]}}}}\n"
        f"boundary: {{kind: shield, shape: ellipse, {outer}}}\n"
    )
    check_against(case, 10.5261908254150, accuracy)


def on_circle(count: int, radius: float = 1.0) -> str:
    angles = math.tau * np.arange(count) / count
    return ", ".join(f"[{radius * math.cos(a):.17g}, {radius * math.sin(a):.17g}]" for a in angles)


CIRCLES = {
    "ellipse": "shape: ellipse, width: 2, height: 2",
    "path of two arcs": "shape: outline, path: 'M 1 0 A 1 1 0 0 1 -1 0 A 1 1 0 0 1 1 0 Z'",
    "path, the other way round": "shape: outline, path: 'M 1 0 A 1 1 0 0 0 -1 0 A 1 1 0 0 0 1 0 Z'",
    "path in centimetres, scaled, turned": (
        "shape: outline, unit: cm, scale: 2, rotate: 30, flip: true, "
        "path: 'M 50 0 A 50 50 0 0 1 -50 0 A 50 50 0 0 1 50 0 Z'"
    ),
}


@pytest.mark.parametrize("name", CIRCLES)
def test_other_ways_to_draw_a_circle(name: str) -> None:
    check_against(in_circle(CIRCLES[name]), COAX, 1e-7)


def test_spline_through_a_circle() -> None:
    """A periodic cubic spline of step h misses a circle by h^4 / 384 at most: 5e-8 here. de Boor 1978, from memory."""
    case = in_circle(f"shape: smooth, points: [{on_circle(96)}]")
    solution = solved(case, 1e-8)
    assert_allclose(solution.bracket.value[0, 0] / 8.8541878188e-12, COAX, rtol=2e-7)


SQUARE = {
    "path": "shape: outline, path: 'M -1 -1 H 1 V 1 H -1 Z'",
    "well-known text": "shape: outline, wkt: 'POLYGON ((-1 -1, 1 -1, 1 1, -1 1, -1 -1))'",
}


@pytest.mark.parametrize("name", SQUARE)
def test_square_in_square(name: str) -> None:
    case = read_text(f"units: m\nconductors: {{a: {{{SQUARE[name]}}}}}\nboundary: {{kind: box, width: 4, height: 4}}\n")
    check_against(case, SQUARES, 1e-5)


def test_well_known_text_with_a_hole() -> None:
    """A square frame around a core is a shield for it."""
    frame = "POLYGON ((-3 -3, 3 -3, 3 3, -3 3, -3 -3), (-2 -2, 2 -2, 2 2, -2 2, -2 -2))"
    case = read_text(
        f"units: m\nconductors: {{frame: {{shape: outline, wkt: '{frame}'}}, "
        "core: {shape: rectangle, width: 2, height: 2}}\n"
        "boundary: {kind: open}\nreference: frame\n"
    )
    check_against(case, SQUARES, 1e-4)


def test_files_beside_the_case(tmp_path: Path) -> None:
    (tmp_path / "duct.svg").write_text(
        '<svg xmlns="http://www.w3.org/2000/svg"><path d="M 1 0 A 1 1 0 0 1 -1 0 A 1 1 0 0 1 1 0 Z"/></svg>'
    )
    (tmp_path / "bar.wkt").write_text("POLYGON ((-1 -1, 1 -1, 1 1, -1 1, -1 -1))")
    path = tmp_path / "case.yaml"
    path.write_text(
        "units: m\nconductors: {a: {shape: outline, file: duct.svg}}\n"
        "boundary: {kind: shield, shape: circle, radius: 2}\n"
    )
    check_against(read_case(path), COAX, 1e-6)
    path.write_text(
        "units: m\nconductors: {a: {shape: outline, file: bar.wkt}}\nboundary: {kind: box, width: 4, height: 4}\n"
    )
    check_against(read_case(path), SQUARES, 1e-4)


def by_equation(case: Case, radius: float = 2.0) -> Floats:
    """The integral equation wants curves of constant speed."""
    return capacitance([[_EvenSpeed(curve) for curve in c.shape.outline()] for c in case.conductors], radius)


class _EvenSpeed:
    """A curve run through at constant speed, by inverting its arc length."""

    def __init__(self, curve: object) -> None:
        self.curve, self.length, self.start, self.end = curve, curve.length, curve.start, curve.end  # type: ignore[attr-defined]
        self.curvature = curve.curvature  # type: ignore[attr-defined]
        t = np.linspace(0.0, 1.0, 4001)
        from scipy.interpolate import make_interp_spline

        speed = np.hypot(*curve.derivative(t).T)  # type: ignore[attr-defined]
        way = make_interp_spline(t, speed, k=7).antiderivative()(t)
        self.inverse = make_interp_spline(way / way[-1], t, k=7)

    def at(self, s: Floats) -> Floats:
        return np.asarray(self.curve.at(self.inverse(s)))  # type: ignore[attr-defined]

    def tangent(self, s: Floats) -> Floats:
        return np.asarray(self.curve.tangent(self.inverse(s)))  # type: ignore[attr-defined]


SHAPES = {
    "ellipse off centre": "shape: ellipse, width: 2, height: 0.8, at: [0.3, 0.2], rotate: 35",
    "bean": "shape: smooth, points: [[1, 0], [0.9, 0.7], [0, 0.5], [-0.9, 0.7], [-1, 0], [0, -0.7]]",
    "path of Bezier curves": "shape: outline, path: 'M 1 0 C 1 0.8 -0.6 1.2 -1 0 Q -0.2 -1.3 1 0 Z'",
}


@pytest.mark.parametrize("name", SHAPES)
def test_smooth_shapes_against_the_integral_equation(name: str) -> None:
    case = in_circle(SHAPES[name])
    exact = by_equation(case)
    for accuracy in (1e-4, 1e-5):
        check_against(case, exact, accuracy)


def test_dielectrics_of_vacuum_change_nothing_wherever_they_cross() -> None:
    """Ellipses and splines that cross each other, the conductor and the background, all of permittivity 1."""
    case = read_text(
        "units: m\nconductors: {a: {shape: circle, radius: 1}}\n"
        "dielectrics:\n"
        "  one: {shape: ellipse, width: 3.4, height: 0.7, permittivity: 1, material: one}\n"
        "  two: {shape: ellipse, width: 0.8, height: 3.2, rotate: 20, permittivity: 1, material: two}\n"
        "  bean: {shape: smooth, points: [[1.5, 0], [0.9, 0.7], [0, 1.5], [-0.9, 0.7], [0, -1.3]], permittivity: 1,"
        " material: bean}\n"
        "boundary: {kind: shield, shape: circle, radius: 2}\n"
    )
    check_against(case, COAX, 1e-6)


def test_half_an_ellipse_of_dielectric() -> None:
    """A conductor that is exactly the dielectric's own ellipse: curves that lie on each other are one."""
    case = read_text(
        "units: m\nconductors: {a: {shape: ellipse, width: 4, height: 2}}\n"
        "dielectrics: {d: {shape: ellipse, width: 4, height: 2, permittivity: 7}}\n"
        f"boundary: {{kind: shield, shape: ellipse, width: 6, height: {2 * math.sqrt(6)}}}\n"
    )
    check_against(case, 10.5261908254150, 1e-6)


def test_confocal_layers() -> None:
    """Capacitors in series between confocal ellipses."""
    focus = math.sqrt(3)
    halves = [(2.0, 1.0), (2.5, math.sqrt(2.5**2 - focus**2)), (3.0, math.sqrt(6))]
    sums = [a + b for a, b in halves]
    exact = 2 * math.pi / (math.log(sums[1] / sums[0]) / 4 + math.log(sums[2] / sums[1]))
    shapes = [f"shape: ellipse, width: {2 * a}, height: {2 * b}" for a, b in halves]
    case = read_text(
        f"units: m\nconductors: {{a: {{{shapes[0]}}}}}\ndielectrics: {{d: {{{shapes[1]}, permittivity: 4}}}}\n"
        f"boundary: {{kind: shield, {shapes[2]}}}\n"
    )
    check_against(case, exact, 1e-6)
