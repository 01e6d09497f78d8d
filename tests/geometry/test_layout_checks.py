"""Geometric mistakes: each is found, blamed on the right key, with both names, all at once."""

import pytest
from samples import FOAM, SOLID

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import (
    Boundary,
    Case,
    Coating,
    Conductor,
    Dielectric,
    GroundPlane,
    OpenSpace,
    Shield,
    Source,
)
from nightcap.geometry.errors import CaseError
from nightcap.geometry.shapes import Circle, Rectangle, Shape

ROUND = Shield(Circle((0.0, 0.0), 5.0), "screen")


def wire(name: str, x: float, radius: float = 0.5, *coats: Coating, y: float = 0.0) -> Conductor:
    return Conductor(name, Circle((x, y), radius), coats)


def case(*conductors: Conductor, boundary: Boundary = ROUND, dielectrics: tuple[Dielectric, ...] = ()) -> Case:
    reference = conductors[-1].name if isinstance(boundary, OpenSpace) else boundary.name
    source = Source("wires.yaml", {f"conductors.{c.name}": k + 2 for k, c in enumerate(conductors)})
    return Case("wires", "", conductors, boundary, reference, dielectrics, source=source)


THICK, OTHER = Coating(0.4, SOLID), Coating(0.4, FOAM)

FAULTS = {
    "overlap": (case(wire("a", 0), wire("b", 0.8)), "conductors.b", "overlaps conductor 'a'"),
    "one inside the other": (case(wire("a", 0, 1.0), wire("b", 0, 0.3)), "conductors.b", "overlaps conductor 'a'"),
    "the same place": (case(wire("a", 0), wire("b", 0)), "conductors.b", "overlaps conductor 'a'"),
    "touch": (case(wire("a", 0), wire("b", 1.0)), "conductors.b", "touches 'a': a short circuit"),
    "touch along an edge": (
        case(
            Conductor("a", Rectangle((0.0, 0.0), 1.0, 1.0)),
            Conductor("b", Rectangle((1.0, 0.2), 1.0, 1.0)),
        ),
        "conductors.b",
        "touches 'a'",
    ),
    "touches the shield": (case(wire("a", 4.5)), "conductors.a", "touches 'screen'"),
    "cuts the shield": (case(wire("a", 4.8)), "conductors.a", "not wholly inside the shield 'screen'"),
    "outside the shield": (case(wire("a", 0), wire("b", 9)), "conductors.b", "not wholly inside"),
    "around the shield": (case(wire("a", 0, 9.0)), "conductors.a", "not wholly inside"),
    "below the plane": (case(wire("a", 0, y=-3), boundary=GroundPlane()), "conductors.a", "below the ground plane"),
    "through the plane": (case(wire("a", 0, y=0.2), boundary=GroundPlane()), "conductors.a", "below the ground plane"),
    "on the plane": (case(wire("a", 0, y=0.5), boundary=GroundPlane()), "conductors.a", "touches 'plane'"),
    "coat into a wire": (
        case(wire("a", 0, 0.5, THICK), wire("b", 1.2)),
        "conductors.a.coatings[0]",
        "cuts into conductor 'b'",
    ),
    "coat into another coat": (
        case(wire("a", 0, 0.5, THICK), wire("b", 1.5, 0.5, OTHER)),
        "conductors.b.coatings[0]",
        "overlaps a coating of 'a' of another material",
    ),
    "coat into the shield": (case(wire("a", 4.2, 0.5, THICK)), "conductors.a.coatings[0]", "cuts into the shield"),
    "coat into the plane": (
        case(wire("a", 0, 0.5, THICK, y=0.7), boundary=GroundPlane()),
        "conductors.a.coatings[0]",
        "cuts into the ground plane",
    ),
    "a hair's gap": (case(wire("a", 0), wire("b", 1.000001)), "conductors.b", "smallest gap"),
    "a hair's gap to the shield": (case(wire("a", 4.499999)), "conductors.a", "smallest gap"),
}


@pytest.mark.parametrize("fault", FAULTS)
def test_fault(fault: str) -> None:
    wrong, key, words = FAULTS[fault]
    with pytest.raises(CaseError) as caught:
        build_layout(wrong)
    problems = caught.value.problems
    assert any(p.key == key and words in p.text and p.line is not None for p in problems), list(map(str, problems))
    assert len(problems) <= 2


def test_all_mistakes_at_once() -> None:
    wrong = case(wire("a", 0), wire("b", 0.5), wire("c", 9), wire("d", -2, 0.5, THICK), wire("e", -3.2))
    with pytest.raises(CaseError) as caught:
        build_layout(wrong)
    assert {p.key for p in caught.value.problems} == {"conductors.b", "conductors.c", "conductors.d.coatings[0]"}
    assert {p.line for p in caught.value.problems} == {3, 4, 5}


FINE: dict[str, Shape] = {"half outside": Circle((5.0, 0.0), 2.0), "far outside": Circle((50.0, 0.0), 2.0)}


@pytest.mark.parametrize("where", FINE)
def test_dielectrics_may_stick_out(where: str) -> None:
    painted = (Dielectric("block", FINE[where], SOLID),)
    assert build_layout(case(wire("a", 0), dielectrics=painted)).regions


def test_what_may_touch() -> None:
    coats = case(wire("a", 0, 0.5, THICK), wire("b", 1.8, 0.5, OTHER), wire("c", -1.4))
    assert len(build_layout(coats).regions) == 3
    assert build_layout(case(wire("a", 4.1, 0.5, THICK))).regions
    assert build_layout(case(wire("a", 0, 0.5, THICK, y=0.9), boundary=GroundPlane())).regions
