"""How slabs, symmetry lines, twist and a reference of several pieces appear on screen, in files and in pictures."""

import json
import math

import numpy as np
import pytest
from numpy.testing import assert_allclose

from nightcap.description import description
from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case
from nightcap.geometry.case_file import read_text
from nightcap.outputs.drawing import Drawing, view_of
from nightcap.outputs.outlines import clipped, conductor_loops
from nightcap.outputs.picture import png
from nightcap.outputs.result_json import json_text, result_document
from nightcap.result import Result, solved_result
from nightcap.screen import result_lines
from nightcap.solver.solve import solve

TWISTED = """\
accuracy: 1e-3
conductors:
  red: {shape: circle, radius: 0.25, at: [-0.6, 0]}
  white: {shape: circle, radius: 0.25, at: [0.6, 0]}
  drain: {shape: circle, radius: 0.1, at: [0, 1]}
boundary: {kind: box, width: 4, height: 4}
reference: [box, drain]
twist: {lay_length: 40, between: [red, white]}
"""
QUARTER = """\
accuracy: 1e-3
conductors: {core: {shape: circle, radius: 1}}
boundary: {kind: shield, shape: circle, radius: 2}
symmetry: [{wall: magnetic, x: 0}, {wall: magnetic, y: 0}]
"""
OVER_WATER = """\
accuracy: 1e-3
conductors: {wire: {shape: circle, radius: 1, at: [2, 3]}}
dielectrics: {water: {shape: slab, to: 0, permittivity: 80}, ice: {shape: slab, from: 0, to: 1, permittivity: 3.2}}
boundary: {kind: open}
symmetry: [{wall: electric, x: 0}]
"""


def result_of(text: str) -> Result:
    case = read_text(text)
    return solved_result("case", case, solve(build_layout(case), case.accuracy, ties=case.ties), None)


def test_twist_is_reported_per_metre_of_core_and_of_cable() -> None:
    result = result_of(TWISTED)
    document = json.loads(json_text(result_document(result)))
    twist = document["twist"]
    factor = math.sqrt(1 + (math.pi * 1.2 / 40) ** 2)
    assert_allclose([twist["lay_length"], twist["pitch_diameter"]], [0.04, 1.2e-3], rtol=1e-12)
    assert_allclose(twist["length_factor"], factor, rtol=1e-14)
    for name in ("value", "lower", "upper", "half_width"):
        per_cable = twist["capacitance_per_cable_length"][name]
        assert_allclose(per_cable, factor * np.array(document["capacitance"][name]), rtol=1e-14)
    assert document["conductors"] == ["red", "white"]
    assert (document["reference"], document["reference_pieces"]) == ("box", ["box", "drain"])
    lines = list(result_lines(result))
    text = " ".join(" ".join(lines).split())
    for part in (
        "1 m of cable holds 1.004432 m of each core",
        "Maxwell capacitance per metre of cable",
        "on the diagonal to the reference, box, drain",
        "not in the mean over a lay",
    ):
        assert part in text
    assert max(map(len, lines)) <= 80


def test_the_part_that_is_solved_is_named() -> None:
    result = result_of(QUARTER)
    (note,) = json.loads(json_text(result_document(result)))["notes"]
    assert "x >= 0 m and y >= 0 m" in note
    assert "charges on this part alone" in " ".join(" ".join(result_lines(result)).split())
    assert "twist" not in result_document(result)


def test_check_repeats_all_of_it() -> None:
    cases = [read_text(text) for text in (TWISTED, OVER_WATER)]
    text = "\n".join(line for case in cases for line in description(case, build_layout(case)))
    for part in (
        "shield 'box', inside: rectangle, 4 mm x 4 mm",
        "reference: box, drain",
        "twist: lay length 40 mm, pitch circle 1.2 mm; 1.004432 m of core per metre of cable",
        "water: half space below y = 0 mm",
        "ice: slab without end, from y = 0 mm to 1 mm",
        "symmetry: electric wall at x = 0 mm, solved where x is greater",
        "reference: electric-wall",
    ):
        assert part in text
    assert "tied together" not in text


def picture_of(case: Case) -> bytes:
    layout = build_layout(case)
    solution = solve(layout, case.accuracy)
    return png(Drawing(case, layout, solution.conductors, solution.potentials[:, 0], solution.fields))


@pytest.mark.parametrize("text", [QUARTER, OVER_WATER])
def test_pictures_show_the_drawn_part_only(text: str) -> None:
    case = read_text(text)
    view = view_of(case)
    assert -1e-3 < view.left < 0
    assert view.width < 8e-3
    assert len(picture_of(case)) > 20_000


def test_view_holds_the_edges_of_slabs() -> None:
    view = view_of(read_text(OVER_WATER))
    assert view.bottom < -0.5e-3
    assert view.top > 4e-3


def test_what_lines_cut_open_is_closed_along_them() -> None:
    """The quarter of a disc, with its corner: pi / 4."""
    case = read_text(QUARTER)
    (loop,) = conductor_loops(build_layout(case), 0, case.symmetry)
    x, y = loop.T * 1e3
    area = 0.5 * abs(np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y))
    assert_allclose(area, np.pi / 4, rtol=1e-3)


def test_polygons_are_clipped_to_what_is_seen() -> None:
    """A triangle a million times larger than the view, and one that does not reach it."""
    low, high = np.array([0.0, 0.0]), np.array([2.0, 1.0])
    huge = clipped(1e6 * np.array([[-1.0, -1.0], [1.0, -1.0], [0.0, 1.0]]), low, high)
    assert_allclose([huge.min(axis=0), huge.max(axis=0)], [low, high], rtol=0, atol=1e-9)
    assert len(clipped(np.array([[3.0, 0.0], [4.0, 0.0], [3.0, 1.0]]), low, high)) == 0
    corner = clipped(np.array([[1.0, 0.0], [5.0, 0.0], [1.0, 4.0]]), low, high)
    x, y = corner.T
    assert_allclose(0.5 * abs(np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y)), 1.0, rtol=1e-12)
