"""Boxes, slabs, symmetry lines, twist and references of several pieces: what a file says, and every mistake in it."""

import math

import numpy as np
import pytest
from numpy.testing import assert_allclose

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import GroundPlane, OpenSpace, Shield
from nightcap.geometry.case_file import read_text
from nightcap.geometry.corners import corner_sizes
from nightcap.geometry.errors import CaseError
from nightcap.geometry.grading import Grading
from nightcap.geometry.layout import FAR_WALL, MAGNETIC_WALL
from nightcap.geometry.shapes import Rectangle
from nightcap.geometry.slab import Slab
from nightcap.geometry.symmetry import SymmetryLine

BASE = """\
units: mm
conductors:
  red: {shape: circle, radius: 0.2, at: [0.6, 0.5]}
  white: {shape: circle, radius: 0.2, at: [1.6, 0.5]}
dielectrics:
  water: {shape: slab, to: 0, permittivity: 80}
boundary: {kind: open}
"""


def with_lines(*lines: str, boundary: str = "{kind: open}") -> str:
    return BASE.replace("{kind: open}", boundary) + "".join(f"{line}\n" for line in lines)


BOX = "{kind: box, width: 6, height: 4}"
PLANE = "{kind: ground_plane, at: -1}"
FAULTS = {
    "box without height": (with_lines(boundary="{kind: box, width: 6}"), 7, "boundary", "'height' is missing"),
    "box with a shape": (
        with_lines(boundary="{kind: box, width: 6, height: 4, shape: circle}"),
        7,
        "boundary.shape",
        "unknown key",
    ),
    "box of negative width": (
        with_lines(boundary="{kind: box, width: -6, height: 4}"),
        7,
        "boundary.width",
        "greater than 0",
    ),
    "box too small": (
        with_lines(boundary="{kind: box, width: 2, height: 4}"),
        4,
        "conductors.white",
        "not wholly inside the shield 'box'",
    ),
    "slab of metal": (
        BASE.replace("white: {shape: circle, radius: 0.2, at: [1.6, 0.5]}", "white: {shape: slab, from: 3}"),
        4,
        "conductors.white.shape",
        "for dielectrics only; allowed: circle",
    ),
    "slab as shield": (
        with_lines(boundary="{kind: shield, shape: slab, to: 3}"),
        7,
        "boundary.shape",
        "dielectrics only",
    ),
    "slab upside down": (BASE.replace("to: 0", "from: 2, to: 0"), 6, "dielectrics.water", "from must be less than to"),
    "slab without edges": (BASE.replace("to: 0, ", ""), 6, "dielectrics.water", "needs from, to or both"),
    "slab with a width": (BASE.replace("to: 0", "to: 0, width: 3"), 6, "dielectrics.water.width", "unknown key"),
    "slab with a misspelt edge": (
        BASE.replace("to: 0", "form: 0"),
        6,
        "dielectrics.water.form",
        "did you mean 'from'?",
    ),
    "slab of text": (BASE.replace("to: 0", "to: low"), 6, "dielectrics.water.to", "not a number"),
    "slab below the plane": (with_lines(boundary="{kind: ground_plane, at: 0}"), 6, "dielectrics.water", "lies below"),
    "slab beyond a line": (
        with_lines("symmetry: [{wall: magnetic, y: 0}]"),
        6,
        "dielectrics.water",
        "beyond the symmetry line y = 0 m",
    ),
    "symmetry as word": (with_lines("symmetry: magnetic"), 8, "symmetry", "list of one or two lines"),
    "no lines": (with_lines("symmetry: []"), 8, "symmetry", "list of one or two lines"),
    "three lines": (
        with_lines("symmetry: [{wall: magnetic, x: 0}, {wall: magnetic, y: 0}, {wall: magnetic, x: 1}]"),
        8,
        "symmetry",
        "list of one or two lines",
    ),
    "two lines of one direction": (
        with_lines("symmetry: [{wall: magnetic, x: 0}, {wall: electric, x: 1}]"),
        8,
        "symmetry[1]",
        "a line in x already",
    ),
    "line of another kind": (
        with_lines("symmetry: [{wall: magnetc, x: 0}]"),
        8,
        "symmetry[0].wall",
        "did you mean 'magnetic'?",
    ),
    "line without place": (with_lines("symmetry: [{wall: magnetic}]"), 8, "symmetry[0]", "exactly one of x, y"),
    "line with two places": (
        with_lines("symmetry: [{wall: magnetic, x: 0, y: 0}]"),
        8,
        "symmetry[0]",
        "exactly one of x, y",
    ),
    "line without kind": (with_lines("symmetry: [{x: 0}]"), 8, "symmetry[0]", "'wall' is missing"),
    "line with a stranger": (with_lines("symmetry: [{wall: magnetic, z: 0}]"), 8, "symmetry[0].z", "unknown key"),
    "line along the plane": (
        with_lines("symmetry: [{wall: magnetic, y: 0}]", boundary=PLANE),
        8,
        "symmetry[0]",
        "allowed here: x",
    ),
    "line past the box": (
        with_lines("symmetry: [{wall: magnetic, x: -9}]", boundary=BOX),
        8,
        "symmetry[0]",
        "does not cross the shield 'box'",
    ),
    "conductor beyond the line": (
        with_lines("symmetry: [{wall: magnetic, x: 1.1}]"),
        3,
        "conductors.red",
        "beyond the symmetry line x = 0.0011 m",
    ),
    "conductor across an electric wall": (
        with_lines("symmetry: [{wall: electric, x: 0.5}]"),
        3,
        "conductors.red",
        "touches 'electric-wall': a short circuit",
    ),
    "conductor close to an electric wall": (
        with_lines("symmetry: [{wall: electric, x: 0.3999999}]"),
        3,
        "conductors.red",
        "from 'electric-wall'; the smallest gap",
    ),
    "conductor that touches an electric wall of a box": (
        with_lines("symmetry: [{wall: electric, x: 0.4}]", boundary=BOX),
        3,
        "conductors.red",
        "touches 'box'",
    ),
    "conductor named like the wall": (
        with_lines("symmetry: [{wall: electric, x: 0}]").replace("white:", "electric-wall:"),
        4,
        "conductors.electric-wall",
        "already",
    ),
    "one wire and its equal image": (
        with_lines("symmetry: [{wall: magnetic, x: 0}]").replace(
            "  white: {shape: circle, radius: 0.2, at: [1.6, 0.5]}\n", ""
        ),
        2,
        "conductors",
        "at least two",
    ),
    "reference of nobody": (with_lines("reference: []"), 8, "reference", "or a list of names"),
    "reference of numbers": (with_lines("reference: [1, 2]"), 8, "reference", "or a list of names"),
    "reference twice": (with_lines("reference: [red, red]"), 8, "reference", "twice"),
    "reference of strangers": (with_lines("reference: [white, blue]"), 8, "reference", "'blue' is not known"),
    "reference of all": (with_lines("reference: [white, red]"), 2, "conductors", "none remains"),
    "reference that is tied": (
        with_lines("tie: [[red, box]]", "reference: [box, red]", boundary=BOX),
        9,
        "reference",
        "another group already",
    ),
    "floating piece of the reference": (
        with_lines("reference: [box, red]", boundary=BOX).replace("radius: 0.2,", "radius: 0.2, floating: true,", 1),
        3,
        "conductors.red.floating",
        "cannot float",
    ),
    "twist without lay": (with_lines("twist: {pitch_diameter: 1}"), 8, "twist", "'lay_length' is missing"),
    "twist without diameter": (with_lines("twist: {lay_length: 30}"), 8, "twist", "exactly one of pitch_diameter"),
    "twist with two diameters": (
        with_lines("twist: {lay_length: 30, pitch_diameter: 1, between: [red, white]}"),
        8,
        "twist",
        "exactly one of pitch_diameter",
    ),
    "twist of strangers": (
        with_lines("twist: {lay_length: 30, between: [red, whte]}"),
        8,
        "twist.between",
        "did you mean 'white'?",
    ),
    "twist of one": (with_lines("twist: {lay_length: 30, between: [red]}"), 8, "twist.between", "two conductors"),
    "twist of one with itself": (
        with_lines("twist: {lay_length: 30, between: [red, red]}"),
        8,
        "twist.between",
        "centre",
    ),
    "twist of no length": (
        with_lines("twist: {lay_length: 0, between: [red, white]}"),
        8,
        "twist.lay_length",
        "greater than 0",
    ),
    "twist as number": (with_lines("twist: 30"), 8, "twist", "must be a mapping"),
}


@pytest.mark.parametrize("fault", FAULTS)
def test_fault(fault: str) -> None:
    text, line, key, words = FAULTS[fault]
    with pytest.raises(CaseError) as caught:
        build_layout(read_text(text, "broken.yaml"))
    problems = caught.value.problems
    assert any(p.line == line and p.key == key and words in p.text for p in problems), list(map(str, problems))
    assert len(problems) <= 3


def test_what_the_file_says_is_understood() -> None:
    case = read_text(with_lines("symmetry: [{wall: magnetic, x: 0.6}, {wall: electric, y: -1 cm}]"))
    assert case.symmetry == (SymmetryLine(0, 0.6e-3, False), SymmetryLine(1, -0.01, True))
    assert case.dielectrics[0].shape == Slab(-math.inf, 0.0)
    assert isinstance(case.boundary, OpenSpace)
    assert case.reference == "electric-wall"
    case = read_text(with_lines("reference: [box, white]", boundary=BOX))
    assert case.boundary == Shield(Rectangle((0.0, 0.0), 6e-3, 4e-3), "box")
    assert case.reference_pieces == ("box", "white")
    assert case.ties == (("box", "white"),)
    case = read_text(with_lines("twist: {lay_length: 30, between: [red, white]}", boundary=PLANE))
    assert case.twist is not None
    assert isinstance(case.boundary, GroundPlane)
    assert_allclose(case.twist.length_factor, math.sqrt(1 + (math.pi / 30) ** 2), rtol=1e-14)
    assert (case.reference, case.reference_pieces) == ("plane", ("plane",))


@pytest.mark.parametrize(("boundary", "walls", "area"), [("{kind: open}", 4, 4), (PLANE, 3, 2)])
def test_slabs_end_the_domain_at_a_far_wall(boundary: str, walls: int, area: float) -> None:
    layout = build_layout(read_text(with_lines(boundary=boundary)))
    assert layout.wall is not None
    assert layout.rim is None
    on_wall = [piece for piece in layout.pieces if piece.wall == FAR_WALL]
    assert len(on_wall) == walls + 2  # two sides are cut where the water ends
    assert layout.wall.conductor == (None if boundary == "{kind: open}" else 2)
    assert layout.wall.reach > 1000 * layout.size / 2
    assert {region.far for region in layout.regions} == {False}
    assert_allclose(sum(p.curve.length for p in on_wall), 2 * area * layout.wall.reach, rtol=1e-2)


def test_nearest_coordinates_keep_their_digits_beside_a_far_wall() -> None:
    """The surface of the water lies at y = 0 exactly, and the points on it too, whatever the wall's distance."""
    layout = build_layout(read_text("accuracy: 1e-9\n" + BASE))
    surface = [p for p in layout.pieces if p.curve.curvature == 0 and not p.wall]
    assert {p.curve.start[1] for p in surface} | {p.curve.end[1] for p in surface} == {0.0}


def test_lines_bear_the_walls_and_nothing_lies_beyond_them() -> None:
    lines = "symmetry: [{wall: magnetic, x: 0.6}, {wall: electric, y: -1}]"
    layout = build_layout(read_text(with_lines(lines).replace("80", "1")))
    assert layout.conductors == ("red", "white", "electric-wall")
    magnetic = [p for p in layout.pieces if p.wall == MAGNETIC_WALL]
    assert {round(x, 12) for p in magnetic for x in (p.curve.start[0], p.curve.end[0])} == {0.6e-3}
    assert layout.points.min(axis=0) == pytest.approx([0.6e-3, -1e-3], abs=1e-12)
    assert [p for p in layout.pieces if -3 in p.sides and not np.isclose(p.curve.start[1], -1e-3)] == []


def test_open_space_beyond_the_rim_is_closed_along_both_lines() -> None:
    text = with_lines("symmetry: [{wall: magnetic, y: 0.5}, {wall: electric, x: 0}]")
    layout = build_layout(read_text(text.replace("  water: {shape: slab, to: 0, permittivity: 80}\n", "  {}\n")))
    (far,) = [region for region in layout.regions if region.far]
    assert layout.rim is not None
    assert_allclose(layout.rim[0], (0.0, 0.5e-3), rtol=1e-12)
    steps = [abs(step) - 1 for step in far.loops[0]]
    assert [layout.pieces[k].sides[1] for k in steps[-2:]] == [-3, MAGNETIC_WALL]
    for one, other in zip(far.loops[0], far.loops[0][1:] + far.loops[0][:1], strict=True):
        assert layout.pieces[abs(one) - 1].end == layout.pieces[abs(other) - 1].start


def test_meshes_are_graded_to_corners_that_reflection_makes_sharp_and_to_no_others() -> None:
    """A square on its corner, cut through two of its corners; a line at right angles is no corner."""
    diamond = "conductors: {core: {shape: rectangle, width: 1, height: 1, rotate: 45}}\n"
    upright = "conductors: {core: {shape: rectangle, width: 1, height: 1}}\n"
    rest = "boundary: {kind: shield, shape: circle, radius: 2}\nsymmetry: [{wall: magnetic, y: 0}]\n"
    for body, corners in ((diamond, 3), (upright, 2)):
        layout = build_layout(read_text(body + rest))
        assert len(corner_sizes(layout, Grading())) == corners
