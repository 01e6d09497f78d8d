"""Layouts: regions, exact outlines, contacts, and what does not change with scale, place and order."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose
from samples import FOAM, SOLID, coax, square_in_square, touching_pair, two_wires, wire_on_board

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case, Coating, Conductor, Dielectric, GroundPlane, Material, Shield
from nightcap.geometry.curves import Arc
from nightcap.geometry.grading import grading_for
from nightcap.geometry.layout import Layout, conductor_side
from nightcap.geometry.shapes import Circle, Polygon, Rectangle
from nightcap.geometry.valid import first_mesh


def area(layout: Layout, region: int) -> float:
    """By Green's theorem on the exact outlines, m^2."""
    total = 0.0
    for walk in layout.regions[region].loops:
        for step in walk:
            piece = layout.pieces[abs(step) - 1]
            curve = piece.curve if step > 0 else piece.curve.reversed()
            (ax, ay), (bx, by) = curve.start, curve.end
            total += (ax * by - bx * ay) / 2
            if isinstance(curve, Arc):
                total += curve.radius**2 * (curve.sweep - math.sin(curve.sweep)) / 2
    return total


def near_area(layout: Layout) -> float:
    return sum(area(layout, k) for k, region in enumerate(layout.regions) if not region.far)


def bundle(rings: int, pitch: float, shield: float) -> Case:
    """Hexagonal bundle of coated wires, outer diameter 1."""
    span = range(-rings, rings + 1)
    centres = [(pitch * (i + j / 2), pitch * j * math.sqrt(3) / 2) for i in span for j in span if abs(i + j) <= rings]
    wires = tuple(Conductor(f"w{k}", Circle(c, 0.25), (Coating(0.25, SOLID),)) for k, c in enumerate(centres))
    return Case("bundle", "", wires, Shield(Circle((0.0, 0.0), shield)), "shield")


def trace() -> Case:
    """A trace on the edge of its substrate, in a box that the substrate touches on three sides."""
    conductor = Conductor("trace", Rectangle((0.0, 0.4175), 0.2, 0.035))
    board = Dielectric("board", Rectangle((0.0, 0.2), 4.0, 0.4), Material(4.4))
    return Case("trace", "", (conductor,), Shield(Rectangle((0.0, 1.0), 4.0, 2.0)), "shield", (board,))


def lying_wire() -> Case:
    wire = Conductor("wire", Circle((0.0, 1.5), 1.0), (Coating(0.5, SOLID),))
    return Case("lying", "", (wire,), GroundPlane(), "plane")


VALID = [
    two_wires(),
    coax(),
    square_in_square(),
    touching_pair(),
    wire_on_board(),
    trace(),
    lying_wire(),
    bundle(1, 1.0, 1.6),
]


@pytest.mark.parametrize("case", VALID, ids=lambda case: case.name)
def test_loops_are_closed_and_agree_with_the_sides(case: Case) -> None:
    layout = build_layout(case)
    rim = layout.rim
    for number, region in enumerate(layout.regions):
        for walk in region.loops:
            for step, following in zip(walk, [*walk[1:], walk[0]], strict=True):
                piece, after = layout.pieces[abs(step) - 1], layout.pieces[abs(following) - 1]
                end = piece.end if step > 0 else piece.start
                assert end == (after.start if following > 0 else after.end)
                on_rim = rim is not None and isinstance(piece.curve, Arc) and piece.curve.radius == rim[1]
                assert (number in piece.sides) if on_rim else piece.sides[0 if step > 0 else 1] == number
    for piece in layout.pieces:
        tolerance = 1e-8 * layout.size
        assert_allclose(piece.curve.start, layout.points[piece.start], rtol=0, atol=tolerance)
        assert_allclose(piece.curve.end, layout.points[piece.end], rtol=0, atol=tolerance)


@pytest.mark.parametrize(
    ("case", "expected"),
    [
        (coax(), 3 * math.pi),
        (square_in_square(), 12.0),
        (touching_pair(), math.pi * (1 - 2 * 0.25**2)),
        (trace(), 8.0 - 0.2 * 0.035),
        (wire_on_board(), 18.0 - math.pi / 4),
        (bundle(3, 1.0, 3.5), math.pi * (3.5**2 - 37 * 0.25**2)),
    ],
    ids=lambda value: getattr(value, "name", ""),
)
def test_regions_fill_the_domain(case: Case, expected: float) -> None:
    assert_allclose(near_area(build_layout(case)), expected, rtol=1e-9)


@pytest.mark.parametrize("scale", [1.0, 0.1, 1e-3 / 3, math.pi])
@pytest.mark.parametrize(
    ("rings", "shield", "regions"),
    [(1, 1.6, 7 + 6 + 1), (1, 1.5, 7 + 6 + 6), (3, 4.0, 37 + 54 + 1), (3, 3.5, 37 + 54 + 6)],
)
def test_bundles_that_touch_exactly(scale: float, rings: int, shield: float, regions: int) -> None:
    """A coat per wire, a gap per triangle of wires, and the rim of the bundle, cut where the shield is touched."""
    wires = tuple(
        Conductor(
            wire.name,
            Circle((scale * wire.shape.centre[0], scale * wire.shape.centre[1]), scale * 0.25),  # type: ignore[attr-defined]
            (Coating(scale * 0.25, SOLID),),
        )
        for wire in bundle(rings, 1.0, shield).conductors
    )
    case = Case("bundle", "", wires, Shield(Circle((0.0, 0.0), scale * shield)), "shield")
    assert len(build_layout(case).regions) == regions


def test_coats_of_one_material_fuse_and_others_do_not() -> None:
    def pair(first: Material, second: Material, distance: float) -> Case:
        coats = ((Coating(0.3, first),), (Coating(0.3, second),))
        wires = tuple(Conductor(f"w{k}", Circle((k * distance, 0.0), 0.2), coat) for k, coat in enumerate(coats))
        return Case("pair", "", wires, Shield(Circle((distance / 2, 0.0), 3.0)), "shield")

    assert len(build_layout(pair(SOLID, SOLID, 0.9)).regions) == 2
    assert len(build_layout(pair(SOLID, SOLID, 1.0)).regions) == 3
    assert len(build_layout(pair(SOLID, FOAM, 1.0)).regions) == 3


def test_a_conductor_astride_the_edge_of_a_dielectric() -> None:
    wire = Conductor("wire", Circle((0.0, 0.0), 0.5))
    lower = Dielectric("lower", Rectangle((0.0, -2.0), 8.0, 4.0), SOLID)
    layout = build_layout(Case("astride", "", (wire,), Shield(Circle((0.0, 0.0), 2.0)), "shield", (lower,)))
    assert len(layout.regions) == 2
    assert_allclose([area(layout, 0), area(layout, 1)], np.pi * (4 - 0.25) / 2, rtol=1e-9)


def test_later_dielectrics_cover_earlier_ones_and_crossings_are_found() -> None:
    wire = Conductor("wire", Circle((0.0, -1.5), 0.2))
    one = Dielectric("one", Rectangle((0.0, 0.0), 2.0, 1.0), SOLID)
    two = Dielectric("two", Circle((1.0, 0.0), 0.8), FOAM)
    layout = build_layout(Case("painted", "", (wire,), Shield(Circle((0.0, 0.0), 3.0)), "shield", (one, two)))
    by_material = {layout.materials[r.material].name: area(layout, k) for k, r in enumerate(layout.regions)}
    assert_allclose(by_material["foam"], math.pi * 0.64, rtol=1e-12)
    half = 0.8**2 * (math.pi - 2 * math.acos(0.5 / 0.8)) / 2 + 0.5 * math.sqrt(
        0.64 - 0.25
    )  # of the disc within the strip
    assert_allclose(by_material["solid"], 2.0 - half, rtol=1e-12)


def test_open_space_has_a_far_region_bounded_by_the_rim() -> None:
    layout = build_layout(two_wires())
    far = [region for region in layout.regions if region.far]
    assert len(far) == 1
    assert layout.rim is not None
    assert_allclose(area(layout, len(layout.regions) - 1), math.pi * layout.rim[1] ** 2, rtol=1e-12)
    plane = build_layout(lying_wire())
    assert_allclose(area(plane, len(plane.regions) - 1), math.pi * plane.rim[1] ** 2 / 2, rtol=1e-12)  # type: ignore[index]
    assert sum(conductor_side(1) in piece.sides for piece in plane.pieces) >= 3


def counts(layout: Layout) -> tuple[int, int, int]:
    return len(layout.points), len(layout.pieces), len(layout.regions)


def moved(case: Case, scale: float, turn: float, shift: float) -> Case:
    """A case of circles after a similarity."""
    c, s = scale * math.cos(turn), scale * math.sin(turn)

    def circle(shape: Circle) -> Circle:
        x, y = shape.centre
        return Circle((c * x - s * y + shift * scale, s * x + c * y - shift * scale), scale * shape.radius)

    wires = tuple(
        replace(w, shape=circle(w.shape), coatings=tuple(replace(k, thickness=scale * k.thickness) for k in w.coatings))  # type: ignore[arg-type]
        for w in case.conductors
    )
    boundary = Shield(circle(case.boundary.shape)) if isinstance(case.boundary, Shield) else case.boundary  # type: ignore[arg-type]
    return replace(case, conductors=wires, boundary=boundary)


@settings(max_examples=20, deadline=None)
@given(
    st.sampled_from([touching_pair(), two_wires(), bundle(1, 1.0, 1.6), coax(1.0, 4.0, 2.0)]),
    st.sampled_from([1e-6, 1.0, 7.3, 1e6]),
    st.floats(0, 1.5),
    st.sampled_from([0.0, 1.0, 1000.0]),
)
def test_counts_do_not_change_with_scale_turn_and_place(case: Case, scale: float, turn: float, shift: float) -> None:
    before = build_layout(case).regions
    assert len(build_layout(moved(case, scale, turn, shift)).regions) == len(before)


@pytest.mark.parametrize("turn", [1e-12, 1e-9, 1e-7, 1e-6, 2.54e-5, 1e-4, 1e-3])
@pytest.mark.parametrize("case", [touching_pair(), bundle(1, 1.0, 1.6)])
def test_contacts_close_beside_the_ends_of_arcs(case: Case, turn: float) -> None:
    """Two curves that touch are within the tolerance of each other some way to either side."""
    layout = build_layout(moved(case, 1.0, turn, 0.0))
    assert len(layout.regions) == len(build_layout(case).regions)
    assert min(piece.curve.length for piece in layout.pieces) > 1e-4


def test_counts_do_not_change_with_the_order_of_conductors() -> None:
    case = bundle(1, 1.0, 1.5)
    assert counts(build_layout(replace(case, conductors=case.conductors[::-1]))) == counts(build_layout(case))


@pytest.mark.parametrize("excess", [-3e-9, -0.9e-9, -1e-10, 0.0, 1e-10, 0.9e-9, 3e-9, 1e-7])
def test_nearly_exact_contact_meshes(excess: float) -> None:
    """Within 1e-9 of the layout's size coats touch in one point; beyond, they overlap or leave a gap."""
    wires = tuple(Conductor(f"w{k}", Circle((k * (1.0 + excess), 0.0), 0.25), (Coating(0.25, SOLID),)) for k in (0, 1))
    layout = build_layout(Case("near", "", wires, Shield(Circle((0.5, 0.0), 1.5)), "shield"))
    fused = excess < -1.5e-9
    assert len(layout.regions) == (2 if fused else 3)
    if abs(excess) < 1e-9 or excess > 1e-8:
        first_mesh(layout, grading_for(1e-3))


@pytest.mark.parametrize("case", VALID, ids=lambda case: case.name)
def test_valid_layouts_mesh(case: Case) -> None:
    mesh = first_mesh(build_layout(case), grading_for(1e-4))
    assert len(mesh.triangles) > 10


@pytest.mark.parametrize("touching", [False, True], ids=["apart", "touching"])
def test_random_chains_of_touching_coats_mesh(touching: bool) -> None:
    """Radii from 0.3 to 1, in a shield that touches the outermost coat from inside, or not."""
    random = np.random.default_rng(20261201)
    for _ in range(12):
        count = int(random.integers(2, 5))
        radii = random.uniform(0.3, 1.0, count)
        steps = radii[1:] + radii[:-1]
        angles = random.uniform(-0.5, 0.5, count - 1)
        centres = np.cumsum(
            [[0.0, 0.0], *(steps[:, None] * np.stack([np.cos(angles), np.sin(angles)], axis=1))], axis=0
        )
        wires = tuple(
            Conductor(f"w{k}", Circle((float(x), float(y)), 0.5 * r), (Coating(0.5 * r, Material(1.0 + k)),))
            for k, ((x, y), r) in enumerate(zip(centres, radii.tolist(), strict=True))
        )
        middle = centres.mean(axis=0)
        reach = float((np.hypot(*(centres - middle).T) + radii).max()) * (1.0 if touching else 1.2)
        shield = Shield(Circle((float(middle[0]), float(middle[1])), reach))
        mesh = first_mesh(build_layout(Case("chain", "", wires, shield, "shield")), grading_for(1e-3))
        assert (mesh.least_permittivity <= mesh.greatest_permittivity).all()


def test_a_polygon_and_a_rounded_rectangle_with_coats() -> None:
    bar = Conductor("bar", Rectangle((0.0, 0.0), 2.0, 1.0, 0.2, 0.3), (Coating(0.3, SOLID),))
    fin = Conductor("fin", Polygon(((3.0, 0.0), (4.0, 0.0), (3.0, 1.0))), (Coating(0.2, FOAM),))
    layout = build_layout(Case("bars", "", (bar, fin), Shield(Circle((1.0, 0.0), 5.0)), "shield"))
    assert len(layout.regions) == 3
    coat = next(k for k, r in enumerate(layout.regions) if layout.materials[r.material] == FOAM)
    perimeter = 2 + math.sqrt(2)
    assert_allclose(area(layout, coat), 0.2 * perimeter + math.pi * 0.04, rtol=1e-12)
