"""Case files that are right: every key, unit and shape."""

import math
from pathlib import Path

import pytest
from numpy.testing import assert_allclose

from nightcap.geometry.case import GroundPlane, OpenSpace, Shield
from nightcap.geometry.case_file import read_case, read_text
from nightcap.geometry.constants import VACUUM_PERMITTIVITY
from nightcap.geometry.shapes import Circle, Polygon, Rectangle

FULL = """
title: Tide-gauge pair in a screened tail
units: mm
accuracy: 0.01 %
conductors:
  red:
    shape: circle
    diameter: 0.5
    at: [-0.62, 0]
    coatings:
      - {thickness: 0.35, permittivity: 2.26, loss_tangent: 2e-4, material: polyethylene}
      - {thickness: "0.1 mm", permittivity: 3}
  white: {shape: circle, awg: 24, at: [0.62, 0]}
  bar: {shape: rectangle, width: 12 mil, height: 0.02 in, at: [0, 1], corner_radius: 0.05, rotate: 30, floating: true}
  fin: {shape: polygon, points: [[0, -1], [0.2, -1], [0, -0.8]]}
dielectrics:
  belt: {shape: circle, diameter: 3.4, permittivity: 1.6}
background: {permittivity: 1.0006}
boundary: {kind: shield, name: screen, shape: circle, radius: 1.9e3 um}
reference: screen
tie: [[white, fin]]
limits: {triangles: 5000, memory: 2 GB, time: 10 min}
expect:
  relative: [[3.0, -1.0], [-1.0, 4.0]]
  tolerance: 1 %
  source: made up for this test
"""


def test_every_key() -> None:
    case = read_text(FULL, name="tail")
    red, white, bar, fin = case.conductors
    assert (case.name, case.title, case.accuracy) == ("tail", "Tide-gauge pair in a screened tail", 1e-4)
    assert isinstance(red.shape, Circle)
    assert_allclose([red.shape.radius, *red.shape.centre], [0.25e-3, -0.62e-3, 0], rtol=1e-15)
    assert_allclose([c.thickness for c in red.coatings], [0.35e-3, 0.1e-3], rtol=1e-15)
    assert [c.material.permittivity for c in red.coatings] == [2.26, 3.0]
    assert red.coatings[0].material.loss_tangent == 2e-4
    assert red.coatings[0].material.name == "polyethylene"
    assert isinstance(white.shape, Circle)
    assert isinstance(bar.shape, Rectangle)
    assert_allclose(bar.shape.width, 12 * 25.4e-6, rtol=1e-15)
    assert_allclose(bar.shape.height, 0.02 * 25.4e-3, rtol=1e-15)
    assert_allclose(bar.shape.angle, math.pi / 6, rtol=1e-15)
    assert bar.floating
    assert isinstance(fin.shape, Polygon)
    assert case.dielectrics[0].name == "belt"
    assert case.background.permittivity == 1.0006
    assert isinstance(case.boundary, Shield)
    assert isinstance(case.boundary.shape, Circle)
    assert_allclose(case.boundary.shape.radius, 1.9e-3, rtol=1e-15)
    assert case.reference == "screen"
    assert case.ties == (("white", "fin"),)
    assert (case.limits.triangles, case.limits.memory, case.limits.time) == (5000, 2e9, 600.0)
    assert case.expect is not None
    assert_allclose(case.expect.capacitance[0][0], 3 * VACUUM_PERMITTIVITY, rtol=1e-15)
    assert case.expect.tolerance == 0.01


@pytest.mark.parametrize(
    ("gauge", "millimetres"),
    [("10", 2.5882), ("24", 0.510559), ("36", 0.127), ('"1/0"', 8.2515), ('"4/0"', 11.684)],
)
def test_wire_gauges(gauge: str, millimetres: float) -> None:
    """Source: ASTM B258 (0000 is 0.46 in and 36 is 0.005 in by definition)."""
    case = read_text(f"conductors: {{a: {{shape: circle, awg: {gauge}}}}}\nboundary: {{kind: ground_plane, at: -20}}")
    shape = case.conductors[0].shape
    assert isinstance(shape, Circle)
    assert_allclose(2e3 * shape.radius, millimetres, rtol=2e-5)


@pytest.mark.parametrize(
    ("unit", "metres"), [("m", 1), ("cm", 1e-2), ("um", 1e-6), ("mil", 25.4e-6), ("in", 25.4e-3), ("ft", 0.3048)]
)
def test_bare_numbers_take_the_files_unit(unit: str, metres: float) -> None:
    case = read_text(
        f"units: {unit}\nconductors: {{a: {{shape: circle, radius: 2}}}}\nboundary: {{kind: ground_plane, at: -5}}"
    )
    shape = case.conductors[0].shape
    assert isinstance(shape, Circle)
    assert_allclose(shape.radius, 2 * metres, rtol=1e-15)
    assert isinstance(case.boundary, GroundPlane)
    assert_allclose(case.boundary.at, -5 * metres, rtol=1e-15)


def test_defaults() -> None:
    pair = (
        "conductors: {a: {shape: circle, radius: 1}, b: {shape: circle, radius: 1, at: [3, 0]}}\nboundary: {kind: open}"
    )
    case = read_text(pair, name="pair")
    assert isinstance(case.boundary, OpenSpace)
    assert case.reference == "b"
    assert case.title == "pair"
    assert case.accuracy == 1e-4
    plane = read_text(pair.replace("open", "ground_plane, at: -2"))
    assert plane.reference == "plane"
    assert plane.background.permittivity == 1.0


def test_words_that_other_yaml_versions_misread_stay_names() -> None:
    case = read_text(
        "conductors: {on: {shape: circle, radius: 1}, no: {shape: circle, radius: 1, at: [3, 0]},"
        " 1: {shape: circle, radius: 1, at: [6, 0]}}\nboundary: {kind: open}"
    )
    assert [c.name for c in case.conductors] == ["on", "no", "1"]


def test_reads_a_file_and_names_the_case_after_it(tmp_path: Path) -> None:
    path = tmp_path / "gauge tail.yaml"
    path.write_text("\ufeff" + FULL, encoding="utf-8")
    case = read_case(path)
    assert case.name == "gauge tail"
    assert case.source.file == str(path)
    assert case.source.lines["conductors.red.coatings[1].thickness"] == 12
    assert case.source.problem("conductors.red.coatings[1].colour", "x").line == 12
