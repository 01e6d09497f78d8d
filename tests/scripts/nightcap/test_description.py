from dataclasses import replace

from stand_ins import open_pair, screened_pair

from nightcap.description import describe, description
from nightcap.geometry.case import GroundPlane
from nightcap.geometry.shapes import Polygon, Rectangle
from nightcap.geometry.strip import Strip
from nightcap.lengths import length_text


def test_everything_that_the_case_says_is_repeated() -> None:
    text = "\n".join(description(*screened_pair()))
    for part in (
        "red: circle, diameter 0.5 mm, at (-0.6 mm, 0 mm)", "coating 0.25 mm, solid (permittivity 2.3)",
        "shield 'screen', inside: circle, diameter 2.6 mm", "reference: screen", "3 regions, 2 materials",
    ):  # fmt: skip
        assert part in text


def test_metals_are_named_by_their_conductivity() -> None:
    case, layout = screened_pair()
    first, *others = case.conductors
    assert "MS/m" not in "\n".join(description(case, layout))
    case = replace(case, conductors=(replace(first, conductivity=58e6), *others))
    assert "    red: circle, diameter 0.5 mm, at (-0.6 mm, 0 mm); 58 MS/m" in list(description(case, layout))


def test_open_space_is_named() -> None:
    assert "boundary: open space" in "\n".join(description(*open_pair()))


def test_shapes_in_words() -> None:
    board = Rectangle((0.0, 1e-3), 2e-3, 1e-3, corner_radius=1e-4, angle=0.5235987755982988)
    assert describe(board) == "rectangle, 2 mm x 1 mm, corner radius 0.1 mm, turned 30 degrees, at (0 mm, 1 mm)"
    assert (
        describe(Polygon(((0.0, 0.0), (1.0, 0.0), (0.0, 2.0))))
        == "polygon of 3 points, from (0 mm, 0 mm) to (1 m, 2 m)"
    )
    bent = Strip(((0.0, 0.0), (3e-3, 0.0), (3e-3, 4e-3)))
    assert describe(bent) == "strip of no thickness through 3 points, 7 mm long, from (0 mm, 0 mm) to (3 mm, 4 mm)"
    assert describe(Strip(bent.points[:2])) == "strip of no thickness, 3 mm long, from (0 mm, 0 mm) to (3 mm, 0 mm)"
    assert describe(GroundPlane(0.0)) == "ground plane 'plane' at y = 0 mm"


def test_lengths_take_the_unit_that_suits_them() -> None:
    assert [length_text(x) for x in (35e-6, 0.511e-3, 0.25, 3.0, 2e-8)] == [
        "35 um",
        "0.511 mm",
        "250 mm",
        "3 m",
        "20 nm",
    ]
