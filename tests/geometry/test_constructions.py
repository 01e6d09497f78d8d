"""Constructions give the conductors that a person would have written one by one."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case
from nightcap.geometry.case_file import read_text
from nightcap.geometry.curves import Arc
from nightcap.geometry.errors import CaseError
from nightcap.geometry.motion import Motion
from nightcap.geometry.shapes import Circle, Polygon, Rectangle, signed_area
from nightcap.solver.solve import solve

WIRE = "wire: {diameter: 0.5, coatings: [{thickness: 0.25, permittivity: 2.3}]}"


def case_of(constructions: str, rest: str = "boundary: {kind: open}") -> Case:
    return read_text(f"units: mm\naccuracy: 1e-3\nconstructions:\n{constructions}\n{rest}\n")


def centres(case: Case) -> dict[str, tuple[float, float]]:
    found = {}
    for conductor in case.conductors:
        assert isinstance(conductor.shape, Circle)
        found[conductor.name] = conductor.shape.centre
    return found


def test_touching_pair_equals_the_same_written_out() -> None:
    case = case_of(f"  p: {{kind: pair, {WIRE}, names: [a, b], at: [1, 2], rotate: 90}}")
    assert list(centres(case)) == ["p.a", "p.b"]
    assert_allclose(list(centres(case).values()), [(1e-3, 1.5e-3), (1e-3, 2.5e-3)], rtol=1e-12)
    assert case.conductors[0].coatings[0].thickness == pytest.approx(0.25e-3, rel=1e-12)
    assert case.reference == "p.b"


def test_pitch_may_be_given() -> None:
    assert_allclose(centres(case_of(f"  p: {{kind: pair, {WIRE}, pitch: 2}}"))["p.2"], (1e-3, 0.0), atol=1e-15)


def test_quad_has_its_pairs_on_the_diagonals() -> None:
    at = centres(case_of(f"  q: {{kind: quad, {WIRE}, names: [a1, b1, a2, b2]}}"))
    assert_allclose(at["q.a1"], -np.array(at["q.a2"]), rtol=1e-12)
    assert_allclose(math.dist(at["q.a1"], at["q.b1"]), 1e-3, rtol=1e-12)
    assert_allclose(math.dist(at["q.a1"], at["q.a2"]), math.sqrt(2) * 1e-3, rtol=1e-12)


def test_bundle_and_ring_and_ribbon_touch() -> None:
    for kind in ("bundle", "ring", "ribbon"):
        at = list(centres(case_of(f"  x: {{kind: {kind}, count: 7, {WIRE}}}")).values())
        assert_allclose(min(math.dist(a, b) for k, a in enumerate(at) for b in at[:k]), 1e-3, rtol=1e-12)


def test_filler_and_belt_lie_around_all_wires() -> None:
    case = case_of(
        f"  p: {{kind: pair, {WIRE}, filler: {{permittivity: 1.6}}, belt: {{thickness: 0.2, permittivity: 3}}}}"
    )
    assert [d.name for d in case.dielectrics] == ["p.belt", "p.filler"]
    layout = build_layout(case)
    assert max(layout.materials[r.material].permittivity for r in layout.regions if not r.far) == 3


def test_published_ribbon_cable() -> None:
    """Paul, Analysis of Multiconductor Transmission Lines, 2007: three-wire ribbon, geometry from memory."""
    case = read_text(
        "units: mil\naccuracy: 1e-6\nconstructions:\n"
        "  tape: {kind: ribbon, count: 3, pitch: 50, names: [return, centre, outer],"
        " wire: {radius: 7.5, coatings: [{thickness: 10, permittivity: 3.5}]}}\n"
        "reference: tape.return\nboundary: {kind: open}\n"
    )
    C = solve(build_layout(case), case.accuracy).bracket.value * 1e12
    assert_allclose(C, [[37.432, -18.716], [-18.716, 24.982]], rtol=3e-5)


def test_stranger_wires_and_places_are_refused() -> None:
    with pytest.raises(CaseError) as caught:
        case_of(
            "  a: {kind: pair, wire: {diameter: 0.5, at: [0, 0]}}\n"
            "  b: {kind: pair}\n"
            f"  c: {{kind: pair, {WIRE}, names: [x]}}\n"
            f"  d: {{kind: bundle, {WIRE}, count: 1}}\n"
            f"  e: {{kind: pear, {WIRE}}}\n"
            f"  f: {{{WIRE}}}\n"
            "  g: {kind: copies, of: pear, move: [1, 0]}\n"
            "  h: {kind: copies, of: c, move: [1, 0], mirror: 0}\n"
            "  i: {kind: copies, of: c, row: 3}\n"
            f"  j: {{kind: pair, {WIRE}, names: [x, x]}}\n"
            f"  k: {{kind: ribbon, {WIRE}, count: 3, pitch: -1}}\n"
        )
    said = {problem.key: problem.text for problem in caught.value.problems}
    assert "given by the construction" in said["constructions.a.wire.at"]
    assert "'wire' is missing" in said["constructions.b"]
    assert "must hold 2 names" in said["constructions.c.names"]
    assert "from 2 to 500" in said["constructions.d.count"]
    assert "did you mean 'pair'" in said["constructions.e.kind"]
    assert "'kind' is missing" in " ".join(said["constructions.f"].split()) or "key 'kind'" in said["constructions.f"]
    assert "is not drawn before this" in said["constructions.g.of"]
    assert "exactly one of ring" in said["constructions.h"]
    assert "go together" in said["constructions.i"]
    assert "twice" in said["constructions.j.names"]
    assert "greater than 0" in said["constructions.k.pitch"]


def test_mistakes_of_what_is_built_point_at_the_construction() -> None:
    case = case_of(f"  p: {{kind: pair, {WIRE}}}\n  q: {{kind: pair, {WIRE}, at: [0.1, 0.1]}}")
    with pytest.raises(CaseError) as caught:
        build_layout(case)
    assert {problem.key for problem in caught.value.problems} >= {"constructions.q.1", "constructions.q.2"}
    assert all(problem.key.startswith("constructions.") for problem in caught.value.problems)
    assert {problem.line for problem in caught.value.problems} == {4, 5}


def test_names_are_unique_over_all_groups() -> None:
    with pytest.raises(CaseError, match="is the name of a conductor or dielectric already"):
        case_of(f"  p: {{kind: pair, {WIRE}}}", "conductors: {p: {shape: circle, radius: 1}}\nboundary: {kind: open}")


COPIES = """\
  red: {{kind: pair, {wire}, at: [3, 1]}}
  more: {{kind: copies, of: red, {how}}}
"""


@pytest.mark.parametrize(
    ("how", "expected"),
    [
        ("ring: 4", {"more.2.red.1": (-1.0, 2.5), "more.3.red.1": (-2.5, -1.0), "more.4.red.2": (1.0, -3.5)}),
        ("row: 3, step: [0, 5]", {"more.2.red.1": (2.5, 6.0), "more.3.red.2": (3.5, 11.0)}),
        ("mirror: 90", {"more.red.1": (-2.5, 1.0), "more.red.2": (-3.5, 1.0)}),
        ("mirror: 0, about: [0, 5]", {"more.red.1": (2.5, 9.0)}),
        ("rotate: 180, about: [3, 0]", {"more.red.1": (3.5, -1.0)}),
        ("move: [1, -4]", {"more.red.2": (4.5, -3.0)}),
    ],
)
def test_copies(how: str, expected: dict[str, tuple[float, float]]) -> None:
    at = centres(case_of(COPIES.format(wire=WIRE, how=how)))
    for name, place in expected.items():
        assert_allclose(np.array(at[name]) * 1e3, place, atol=1e-12)


def test_a_copy_of_one_conductor_takes_the_plain_name() -> None:
    case = case_of(
        "  b: {kind: copies, of: a, ring: 3, about: [0, 2]}",
        "conductors: {a: {shape: circle, radius: 0.1}}\nboundary: {kind: open}",
    )
    assert [conductor.name for conductor in case.conductors] == ["a", "b.2", "b.3"]


def test_screen_with_drain_wire_is_one_conductor_that_touches_nothing() -> None:
    case = case_of(
        f"  pair: {{kind: pair, {WIRE}}}\n"
        "  screen: {kind: screen, inner_diameter: 3, thickness: 0.05, drain: {diameter: 0.3, facing: 90}}\n"
        "  jacket: {kind: jacket, inner_diameter: 3.1, thickness: 0.4, permittivity: 5, material: PVC}\n",
        "boundary: {kind: open}\nreference: screen",
    )
    assert [conductor.name for conductor in case.conductors] == ["pair.1", "pair.2", "screen"]
    assert [dielectric.name for dielectric in case.dielectrics] == ["jacket"]
    solution = solve(build_layout(case), case.accuracy)
    assert solution.status == "met"
    without = case_of(f"  pair: {{kind: pair, {WIRE}}}", "boundary: {kind: shield, shape: circle, diameter: 3}")
    nearly = solve(build_layout(without), case.accuracy)
    gained = np.diag(solution.bracket.lower) - np.diag(nearly.bracket.upper)
    assert (gained > 0).all()  # more grounded metal, more capacitance
    assert_allclose(solution.bracket.value, nearly.bracket.value, rtol=0.03)  # the drain wire is all that differs


def test_screen_faults() -> None:
    with pytest.raises(CaseError) as caught:
        case_of(
            "  a: {kind: screen, inner_diameter: 3, thickness: 0.05, drain: {facing: 90}}\n"
            "  b: {kind: screen, inner_diameter: 3, thickness: 0.05, drain: {diameter: 2}}\n"
            "  c: {kind: jacket, inner_diameter: 3, thickness: 0.05}\n"
        )
    said = {problem.key: problem.text for problem in caught.value.problems}
    assert "exactly one of diameter, awg" in said["constructions.a.drain"]
    assert "more than half" in said["constructions.b.drain"]
    assert "needs permittivity, or material" in said["constructions.c"]


BOARD = """\
  pcb:
    kind: board
    width: 10
    layers: [{name: core, thickness: 0.4, permittivity: 4.4}, {thickness: 0.2, permittivity: 4.2}]
    traces:
      in: {upon: core, x: 0, width: 0.4, thickness: 0.035}
      a: {x: -0.3, width: 0.2, top: 0.17, thickness: 0.035}
      back: {under: core, x: 0, width: 8, thickness: 0.035}
    mask: {thickness: 0.02, permittivity: 3.5}
"""


def test_board_equals_the_same_written_out() -> None:
    built = case_of(BOARD, "boundary: {kind: open}\nreference: pcb.back")
    written = read_text(
        "units: mm\naccuracy: 1e-3\nconductors:\n"
        "  in: {shape: rectangle, width: 0.4, height: 0.035, at: [0, 0.4175]}\n"
        "  a: {shape: polygon, points: [[-0.4, 0.6], [-0.2, 0.6], [-0.215, 0.635], [-0.385, 0.635]]}\n"
        "  back: {shape: rectangle, width: 8, height: 0.035, at: [0, -0.0175]}\n"
        "dielectrics:\n"
        "  mask: {shape: rectangle, width: 10, height: 0.02, at: [0, 0.61], permittivity: 3.5}\n"
        "  over_a: {shape: rectangle, width: 0.01, height: 0.01, at: [-0.3, 0.615], permittivity: 3.5}\n"
        "  core: {shape: rectangle, width: 10, height: 0.4, at: [0, 0.2], permittivity: 4.4}\n"
        "  prepreg: {shape: rectangle, width: 10, height: 0.2, at: [0, 0.5], permittivity: 4.2}\n"
        "boundary: {kind: open}\nreference: back\n"
    )
    assert [d.name for d in built.dielectrics] == ["pcb.mask", "pcb.mask.a", "pcb.core", "pcb.2"]
    for one, other in zip(built.conductors, written.conductors, strict=True):
        ours, theirs = ([c.start for c in conductor.shape.outline()] for conductor in (one, other))
        assert_allclose(sorted(ours), sorted(theirs), rtol=1e-12, atol=1e-15)
    mask = next(d for d in built.dielectrics if d.name == "pcb.mask.a").shape
    top = max(curve.start[1] for curve in mask.outline())
    assert_allclose(top, 0.655e-3, rtol=1e-12)
    build_layout(built)


def test_board_faults() -> None:
    with pytest.raises(CaseError) as caught:
        case_of(
            BOARD.replace("upon: core", "upon: cure")
            .replace("thickness: 0.2", "thickness: 0")
            .replace("x: -0.3", "y: 1"),
        )
    said = {problem.key: problem.text for problem in caught.value.problems}
    assert "greater than 0" in said["constructions.pcb.layers[1].thickness"]
    assert "unknown key" in said["constructions.pcb.traces.a.y"]
    with pytest.raises(CaseError, match="did you mean 'core'"):
        case_of(BOARD.replace("upon: core", "upon: cure"))
    with pytest.raises(CaseError, match="'layers' is missing"):
        case_of("  pcb: {kind: board, width: 3}")


FIGURES = st.sampled_from(
    [
        Circle((1.0, 2.0), 0.5),
        Rectangle((0.5, -1.0), 2.0, 1.0, 0.2, 0.3),
        Polygon(((0.0, 0.0), (2.0, 0.0), (0.5, 1.0))),
        Polygon(((0.0, 0.0), (2.0, 0.0), (0.5, 1.0)), corner_radius=0.1),
    ]
)


@given(FIGURES, st.floats(-3, 3), st.floats(-3, 3), st.booleans())
def test_motions_keep_outlines_closed_and_counter_clockwise(
    figure: Circle | Rectangle | Polygon, angle: float, shift: float, mirrored: bool
) -> None:
    outline = Motion((shift, -shift), angle, mirrored).shape(figure).outline()
    for one, two in zip(outline, outline[1:] + outline[:1], strict=True):
        assert_allclose(one.end, two.start, atol=1e-12)
    assert signed_area([curve.start for curve in outline]) > 0
    assert all(curve.sweep > 0 for curve in outline if isinstance(curve, Arc))
    lengths = [sum(curve.length for curve in shape.outline()) for shape in (figure, Motion().shape(figure))]
    assert_allclose(sum(curve.length for curve in outline), lengths[0], rtol=1e-12)


@given(st.floats(-3, 3), st.floats(-5, 5), st.floats(-5, 5))
def test_mirror_leaves_its_line_in_place_and_undoes_itself(angle: float, x: float, y: float) -> None:
    mirror = Motion.mirror(angle, (x, y))
    on_line = (x + 2 * math.cos(angle), y + 2 * math.sin(angle))
    assert_allclose(mirror.point(on_line), on_line, atol=1e-12)
    assert_allclose(mirror.point(mirror.point((1.0, 7.0))), (1.0, 7.0), atol=1e-12)
