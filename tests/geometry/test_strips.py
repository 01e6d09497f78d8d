"""Infinitely thin strips from case file to mesh: read, checked, laid out, slit open."""

import math

import numpy as np
import pytest
from numpy.testing import assert_allclose

from nightcap.geometry.arrangement import arrange
from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case, Coating, Conductor, Dielectric, GroundPlane, Material, OpenSpace, Shield
from nightcap.geometry.case_file import read_text
from nightcap.geometry.corners import corner_sizes
from nightcap.geometry.curves import Point
from nightcap.geometry.errors import CaseError
from nightcap.geometry.grading import Grading, grading_for
from nightcap.geometry.layout import Layout
from nightcap.geometry.mesh import Mesh
from nightcap.geometry.refine import refine
from nightcap.geometry.shapes import Circle, Rectangle
from nightcap.geometry.strip import Strip
from nightcap.geometry.tips import exponent, tips
from nightcap.geometry.valid import first_mesh

DISC = Shield(Circle((0.0, 0.0), 1.0))
SOLID = Material(4.0, name="solid")
LOWER = Dielectric("lower", Rectangle((0.0, -1.0), 4.0, 2.0), SOLID)


def case(*strips: tuple[Point, ...], dielectrics: tuple[Dielectric, ...] = (), coat: float = 0.0) -> Case:
    coats = (Coating(coat, SOLID),) if coat else ()
    conductors = tuple(Conductor(f"s{k}", Strip(points), coats) for k, points in enumerate(strips))
    return Case("strips", "", conductors, DISC, "shield", dielectrics)


STRAIGHT = ((-0.5, 0.0), (0.5, 0.0))
BENT = ((-0.5, 0.0), (0.0, 0.3), (0.5, 0.0))
CASES = {
    "straight": case(STRAIGHT),
    "bent": case(BENT),
    "two": case(STRAIGHT, ((-0.5, 0.2), (0.5, 0.3))),
    "on an edge": case(STRAIGHT, dielectrics=(LOWER,)),
    "through an edge": case(((0.0, -0.5), (0.1, 0.5)), dielectrics=(LOWER,)),
    "up to an edge": case(((0.0, 0.0), (0.0, 0.5)), dielectrics=(LOWER,)),
    "coated": case(BENT, coat=0.1),
    "open": Case("o", "", (Conductor("a", Strip(STRAIGHT)), Conductor("b", Circle((0, 2), 0.5))), OpenSpace(), "b"),
    "over a plane": Case("p", "", (Conductor("a", Strip(((0.0, 0.2), (0.0, 1.0)))),), GroundPlane(), "plane"),
}


def strip_pieces(layout: Layout) -> list[int]:
    return [k for k, piece in enumerate(layout.pieces) if piece.conductor is not None]


@pytest.mark.parametrize(
    ("name", "embedded", "in_loops"),
    [
        ("straight", 1, 0),
        ("bent", 2, 0),
        ("two", 2, 0),
        ("on an edge", 0, 1),
        ("through an edge", 2, 0),
        ("up to an edge", 1, 0),
        ("coated", 2, 0),
        ("over a plane", 1, 0),
    ],
)
def test_strips_are_embedded_or_lie_between_dielectrics(name: str, embedded: int, in_loops: int) -> None:
    layout = build_layout(CASES[name])
    inside = [piece for region in layout.regions for piece in region.embedded]
    walked = {abs(step) - 1 for region in layout.regions for loop in region.loops for step in loop}
    assert len(inside) == embedded
    assert sorted({*inside, *(walked & set(strip_pieces(layout)))}) == strip_pieces(layout)
    assert len(walked & set(strip_pieces(layout))) == in_loops
    for number, region in enumerate(layout.regions):
        for k in region.embedded:
            assert layout.pieces[k].sides == (number, number)
            assert layout.pieces[k].surface == layout.pieces[k].conductor


def test_a_strip_is_embedded_where_it_lies() -> None:
    layout = build_layout(CASES["through an edge"])
    for region in layout.regions:
        (piece,) = region.embedded
        height = layout.pieces[piece].curve.at(np.array(0.5))[1]
        assert (layout.materials[region.material] == SOLID) == (height < 0)


def euler(mesh: Mesh) -> int:
    return len(np.unique(mesh.triangles)) - len(mesh.edges) + len(mesh.triangles)


@pytest.mark.parametrize("name", CASES)
def test_meshes_are_slit_open_along_strips(name: str) -> None:
    """Each strip is a hole; both its sides have edges of their own, and only its free ends are one vertex."""
    layout = build_layout(CASES[name])
    mesh = first_mesh(layout, grading_for(1e-4))
    for finer in (mesh, refine(mesh, np.ones(len(mesh.triangles), dtype=bool))):
        assert euler(finer) == 2 - len(layout.conductors)  # a sphere with a hole for each, shield and plane too
        boundary = (finer.edge_triangles < 0).any(axis=1)
        assert (finer.edge_conductor[boundary] >= 0).all()
        assert (finer.edge_conductor[~boundary] < 0).all()
        lengths = finer.edge_lengths()
        for conductor in {layout.pieces[k].conductor for k in strip_pieces(layout)}:
            drawn = sum(p.curve.length for p in layout.pieces if p.conductor == conductor)
            assert_allclose(lengths[finer.edge_conductor == conductor].sum(), 2 * drawn, rtol=1e-12)
    ends = list(tips(layout))
    for k in strip_pieces(layout):
        for row in np.flatnonzero(mesh.curve_piece == k):
            at = mesh.points[mesh.curve_edges[row]]
            for point, vertex in zip(at, mesh.curve_edges[row], strict=True):
                same = np.flatnonzero(np.hypot(*(mesh.points - point).T) == 0)
                assert len(same) == (1 if vertex in ends else 2)


def test_the_wide_side_of_a_bend_keeps_its_vertex() -> None:
    """The field is singular there; vertices with the numbers of the layout's points are split most."""
    layout = build_layout(CASES["bent"])
    mesh = first_mesh(layout, grading_for(1e-4))
    (bend,) = (k for k, point in enumerate(layout.points) if np.allclose(point, (0.0, 0.3)))
    beside = mesh.points[mesh.triangles[(mesh.triangles == bend).any(axis=1)]].mean(axis=1)
    assert (beside[:, 1] > 0.3 - 0.6 * np.abs(beside[:, 0])).all()


def test_triangles_keep_the_parameters_of_their_curves() -> None:
    """A strip close to a round coat: curved triangles on one side, the slit on the other."""
    wire = Conductor("w", Circle((0.0, -0.3), 0.2), (Coating(0.05, SOLID),))
    foil = Conductor("s", Strip(((-0.5, 0.0), (0.5, 0.0))))
    mesh = first_mesh(build_layout(Case("c", "", (wire, foil), DISC, "shield")), grading_for(1e-4))
    assert_allclose(mesh.curved.nodes[:, :3], mesh.points[mesh.triangles[mesh.curved.index]], rtol=1e-12, atol=1e-12)
    round_edges = np.flatnonzero(mesh.edge_conductor == 0)
    assert_allclose(np.hypot(*(mesh.points[mesh.edges[round_edges]] - [0, -0.3]).T), 0.2, rtol=1e-12)


def test_exponents_at_an_end() -> None:
    """1/2 in one dielectric, or between two equal halves; with a dense one ahead tan^2(pi s / 2) = eps1 / eps2.

    Source: separation of variables, by hand.
    """
    assert_allclose(exponent([math.tau], [3.0]), 0.5, rtol=1e-9)
    assert_allclose(exponent([math.pi, math.pi], [1.0, 9.0]), 0.5, rtol=1e-9)
    for eps in (0.1, 2.0, 10.0):
        ahead = exponent([math.pi / 2, math.pi, math.pi / 2], [1.0, eps, 1.0])
        assert_allclose(math.tan(math.pi * ahead / 2) ** 2, 1 / eps, rtol=1e-9)


def test_ends_and_bends_are_corners_and_straight_joints_are_not() -> None:
    grading = Grading(corner=0.01, tip=0.001)
    layout = build_layout(case(((-0.5, 0.0), (-0.2, 0.0), (0.1, 0.0), (0.1, 0.4))))
    sizes = {tuple(np.round(layout.points[k], 9).tolist()): size for k, size in corner_sizes(layout, grading).items()}
    assert_allclose(sizes.pop((-0.5, 0.0)), 0.001 * 0.3, rtol=1e-9)
    assert_allclose(sizes.pop((0.1, 0.4)), 0.001 * 0.4, rtol=1e-9)
    assert_allclose(sizes.pop((0.1, 0.0)), 0.01 * 0.3, rtol=1e-9)
    assert not sizes


def test_an_end_on_a_dense_dielectric_is_graded_further() -> None:
    """The share of the innermost ring of size h goes as h^(2 s): it must be the same as at an end with s = 1/2."""
    layout = build_layout(CASES["up to an edge"])
    s = 2 / math.pi * math.atan(0.5)  # permittivity 4 ahead
    (size,) = (size for k, size in corner_sizes(layout, Grading(tip=1e-3)).items() if not layout.points[k].any())
    assert_allclose(size, 0.5 * 1e-3 ** (0.5 / s), rtol=1e-6)


def test_a_walk_along_a_strip_and_back_has_no_area_at_all() -> None:
    """Not a tiny positive one, which would make it the outer boundary of a face."""
    random = np.random.default_rng(271828)
    for _ in range(20):
        points = tuple((float(x), float(y)) for x, y in np.cumsum(random.uniform(0.1, 1.0, (7, 2)), axis=0) / 3)
        plane = arrange([Strip(points).outline()], 1e-9)
        assert plane.areas == (0.0,)


def shoelace(curves: tuple[object, ...]) -> float:
    points = np.concatenate([curve.at(np.linspace(0, 1, 2001)[:-1]) for curve in curves])  # type: ignore[attr-defined]
    x, y = points.T
    return float((x * np.roll(y, -1) - y * np.roll(x, -1)).sum() / 2)


def test_coats_are_round_about_ends_and_outer_sides() -> None:
    radius = 0.1
    stadium = Strip(STRAIGHT).grown(radius)
    assert_allclose(shoelace(stadium.outline()), 2 * radius + math.pi * radius**2, rtol=1e-6)
    elbow = Strip(((0.0, 0.0), (1.0, 0.0), (1.0, 1.0))).grown(radius)
    # two rectangles that share a square at the inner side, two half caps, a quarter at the outer side
    assert_allclose(shoelace(elbow.outline()), 4 * radius + (1 + 1 / 4) * math.pi * radius**2 - radius**2, rtol=1e-6)
    for coat in (stadium, elbow):
        curves = coat.outline()
        assert all(math.dist(a.end, b.start) < 1e-12 for a, b in zip(curves, curves[1:] + curves[:1], strict=True))
    assert Strip(((0.0, 0.0), (1.0, 0.0), (1.0, 0.25), (0.0, 0.25))).grown(radius).outline()
    with pytest.raises(ValueError, match="meet itself"):
        Strip(((0.0, 0.0), (1.0, 0.0), (1.0, 0.15), (0.0, 0.15))).grown(radius).outline()
    with pytest.raises(ValueError, match="meet itself"):
        Strip(((0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.3, 1.0), (0.3, 0.15))).grown(radius).outline()


BASE = """\
units: mm
conductors:
  wire: {{shape: circle, radius: 0.2, at: [-0.6, 0], coatings: [{{thickness: 0.1, permittivity: 2}}]}}
  foil: {{shape: strip, {keys}}}
boundary: {{kind: {boundary}}}
"""
ROUND = "shield, name: screen, shape: circle, radius: 2"
LOOP = "points: [[0, 0], [0.3, 0], [0.3, 0.1], [0, 0.1]]"
FAULTS = {
    "one point": ("points: [[0, 0]]", "conductors.foil.points", "at least 2 points"),
    "no list": ("points: 5", "conductors.foil.points", "at least 2 points"),
    "a broken point": ("points: [[0, 0], [1, 2, 3]]", "conductors.foil.points[1]", "pair of lengths"),
    "no form": ("", "conductors.foil", "exactly one of points, width; neither"),
    "two forms": ("width: 1, points: [[0, 0], [1, 0]]", "conductors.foil", "exactly one of points, width; both"),
    "points and at": ("points: [[0, 0], [1, 0]], at: [0, 0]", "conductors.foil", "at and rotate go with width"),
    "no width": ("width: 0", "conductors.foil.width", "greater than 0"),
    "thickness": ("width: 1, thickness: 0.1", "conductors.foil.thickness", "unknown key"),
    "points that repeat": ("points: [[0, 0], [0, 0], [1, 0]]", "conductors.foil", "points 1 and 2 are the same"),
    "back on itself": ("points: [[0, 0], [1, 0], [0.5, 0]]", "conductors.foil", "back on itself at point 2"),
    "hairpin": ("points: [[0, 0], [1, 0], [0, 0.001]]", "conductors.foil", "back on itself at point 2"),
    "crosses itself": (
        "points: [[0, 0], [1, 0], [0.5, 0.5], [0.5, -0.5]]",
        "conductors.foil",
        "parts 1 and 3 of the strip cross",
    ),
    "closes": ("points: [[0, 0], [1, 0], [1, 1], [0, 0]]", "conductors.foil", "parts 1 and 3 of the strip cross"),
    "touches itself": ("points: [[0, 0], [1, 0], [1, 1], [0.5, 0]]", "conductors.foil", "parts 1 and 3"),
    "through a wire": ("points: [[-1, 0], [1, 0]]", "conductors.foil", "overlaps conductor 'wire'"),
    "up to a wire": ("points: [[-0.4, 0], [1, 0]]", "conductors.foil", "touches 'wire': a short circuit"),
    "inside a wire": ("points: [[-0.7, 0], [-0.5, 0]]", "conductors.foil", "overlaps conductor 'wire'"),
    "into a coat": (
        "points: [[-0.35, 0], [1, 0]]",
        "conductors.wire.coatings[0]",
        "cuts into conductor 'foil'; it may touch it at most",
    ),
    "through the shield": ("points: [[0, 0], [3, 0]]", "conductors.foil", "not wholly inside the shield 'screen'"),
    "up to the shield": ("points: [[0, 0], [2, 0]]", "conductors.foil", "touches 'screen': a short circuit"),
    "beyond the shield": ("points: [[3, 0], [4, 0]]", "conductors.foil", "not wholly inside the shield 'screen'"),
    "a hair's gap": ("points: [[0, 0], [1.9999999, 0]]", "conductors.foil", "smallest gap"),
    "no room for a coat": (
        f"{LOOP}, coatings: [{{thickness: 0.08, permittivity: 2}}]",
        "conductors.foil.coatings[0]",
        "cannot be laid evenly around this figure",
    ),
    "no room for a second coat": (
        f"{LOOP}, coatings: [{{thickness: 0.03, permittivity: 2}}, {{thickness: 0.03, permittivity: 3}}]",
        "conductors.foil.coatings[1]",
        "cannot be laid evenly around this figure",
    ),
    "a coat into another": (
        "points: [[-0.25, 0], [1, 0]], coatings: [{thickness: 0.1, permittivity: 3}]",
        "conductors.foil.coatings[0]",
        "overlaps a coating of 'wire' of another material",
    ),
    "lost in rounding": ("width: 1e-9", "conductors.foil", "too small for this layout"),
}


def problems(text: str) -> list[tuple[str, str, int | None]]:
    with pytest.raises(CaseError) as caught:
        build_layout(read_text(text, "foil.yaml"))
    return [(problem.key, problem.text, problem.line) for problem in caught.value.problems]


@pytest.mark.parametrize("fault", FAULTS)
def test_fault(fault: str) -> None:
    keys, key, words = FAULTS[fault]
    found = problems(BASE.format(keys=keys, boundary=ROUND))
    assert any(k == key and words in text and line is not None for k, text, line in found), found
    assert len(found) <= 2


def test_faults_of_two_strips() -> None:
    for other in ("points: [[0.5, -0.5], [0.5, 0.5]]", "points: [[0.5, 0], [0.5, 1]]", "points: [[0.2, 0], [0.8, 0]]"):
        text = BASE.format(keys="points: [[0, 0], [1, 0]]", boundary=ROUND)
        text = text.replace("boundary:", f"  guard: {{shape: strip, {other}}}\nboundary:")
        ((key, words, line),) = problems(text)
        assert (key, line) == ("conductors.guard", 5)
        assert "touches 'foil': a short circuit" in words


def test_below_a_ground_plane() -> None:
    text = BASE.format(keys="points: [[0, 0.5], [0, -0.5]]", boundary="ground_plane")
    text = text.replace("at: [-0.6, 0]", "at: [-0.6, 1]")
    ((key, words, _),) = problems(text)
    assert key == "conductors.foil"
    assert "below the ground plane" in words


def test_only_a_conductor_can_be_a_strip() -> None:
    text = BASE.format(keys="width: 0.2", boundary="shield, shape: strip, width: 3")
    found = problems(text + "dielectrics: {film: {shape: strip, width: 1, permittivity: 2}}\n")
    assert {key for key, _, _ in found} == {"boundary.shape", "dielectrics.film.shape"}
    assert all("only a conductor" in words for _, words, _ in found)


FINE = [
    "points: [[-0.3, 0], [1, 0]]",
    "points: [[-0.9, 0.3], [-0.3, 0.3]]",
    "width: 0.4, at: [0.3, 0], rotate: 30",
    f"{LOOP}, coatings: [{{thickness: 0.04, permittivity: 2}}]",
]


@pytest.mark.parametrize("keys", FINE)
def test_what_is_allowed(keys: str) -> None:
    layout = build_layout(read_text(BASE.format(keys=keys, boundary=ROUND)))
    assert strip_pieces(layout)


def test_width_and_points_are_two_ways_to_say_one_thing() -> None:
    turned = read_text(BASE.format(keys="width: 0.4, at: [0.3, 0.1], rotate: 90", boundary=ROUND)).conductors[1].shape
    assert isinstance(turned, Strip)
    assert_allclose(turned.points, [(0.3e-3, -0.1e-3), (0.3e-3, 0.3e-3)], atol=1e-15)


def test_a_strip_between_two_layers_of_a_coat_is_allowed_and_one_within_a_layer_is_not() -> None:
    bar = Conductor("bar", Rectangle((0.0, 0.0), 0.4, 0.2), (Coating(0.1, SOLID), Coating(0.1, Material(2.0))))
    for height, allowed in ((0.2, True), (0.15, False)):
        foil = Conductor("foil", Strip(((-0.1, height), (0.1, height))))
        both = Case("layers", "", (bar, foil), DISC, "shield")
        if allowed:
            assert build_layout(both).regions
        else:
            with pytest.raises(CaseError, match="cuts into conductor 'foil'"):
                build_layout(both)
