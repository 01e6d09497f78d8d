"""Outlines of all shapes: closed, in the right sense, of the right area and length; and coatings parallel to them."""

import math

import numpy as np
import pytest
from numpy.testing import assert_allclose

from nightcap.geometry.arrangement import arrange
from nightcap.geometry.case_file import read_text
from nightcap.geometry.curves import Arc
from nightcap.geometry.errors import CaseError
from nightcap.geometry.shapes import Outline, Shape, chains


def figure(keys: str) -> Shape:
    text = f"units: m\nconductors: {{one: {{{keys}}}}}\nboundary: {{kind: ground_plane, at: -9}}\n"
    return read_text(text).conductors[0].shape


def area(outline: Outline) -> float:
    """By Green's theorem, exactly for segments and arcs."""
    total = 0.0
    for curve in outline:
        (x0, y0), (x1, y1) = curve.start, curve.end
        total += (x0 * y1 - x1 * y0) / 2
        if isinstance(curve, Arc):
            total += curve.radius**2 * (curve.sweep - math.sin(curve.sweep)) / 2
    return total


def length(outline: Outline) -> float:
    return sum(curve.length for curve in outline)


TAN = math.tan(math.radians(70))
HEX = 6 * math.tan(math.pi / 6)
SHAPES = {
    "circle": ("shape: circle, radius: 2", math.pi * 4, math.tau * 2),
    "rectangle": ("shape: rectangle, width: 3, height: 2, rotate: 20", 6, 10),
    "rounded rectangle": (
        "shape: rectangle, width: 3, height: 2, corner_radius: 0.5",
        6 - (4 - math.pi) / 4,
        10 - (8 - math.tau) / 2,
    ),
    "rectangle as round as can be": (
        "shape: rectangle, width: 3, height: 2, corner_radius: 1",
        2 + math.pi,
        2 + math.tau,
    ),
    "oval": ("shape: oval, width: 2, height: 5, rotate: 33, at: [1, 2]", 6 + math.pi, 6 + math.tau),
    "oval that is a circle": ("shape: oval, width: 2, height: 2", math.pi, math.tau),
    "ring": ("shape: ring, outer_radius: 2, wall: 0.5", math.pi * (4 - 2.25), math.tau * 3.5),
    "ring by diameters": ("shape: ring, outer_diameter: 4, inner_diameter: 3", math.pi * (4 - 2.25), math.tau * 3.5),
    "sector of a disc": ("shape: sector, outer_radius: 2, from: 20, to: 110", math.pi, math.pi + 4),
    "sector of a ring": (
        "shape: sector, inner_radius: 1, outer_radius: 2, from: 350, to: 80",
        math.pi * 3 / 4,
        math.pi * 1.5 + 2,
    ),
    "wide sector": (
        "shape: sector, inner_radius: 1, outer_radius: 2, from: 0, to: 300",
        math.pi * 3 * 300 / 360,
        math.tau * 3 * 300 / 360 + 2,
    ),
    "foil with a gap": (
        "shape: arc_strip, inner_radius: 2, thickness: 0.1, gap: 1, facing: 45",
        (math.tau - 0.5) / 2 * (2.1**2 - 4),
        (math.tau - 0.5) * 4.1 + 0.2,
    ),
    "straight strip": ("shape: bent_strip, points: [[0, 0], [3, 4]], thickness: 0.5", 2.5, 11),
    "straight strip, round ends": (
        "shape: bent_strip, points: [[0, 0], [3, 4]], thickness: 0.5, ends: round",
        2.5 + math.pi / 16,
        10 + math.pi / 2,
    ),
    "bent strip": (
        "shape: bent_strip, points: [[0, 0], [2, 0], [2, 2]], thickness: 0.5",
        2 - 0.0625 + math.pi / 64,
        8 - 0.5 + math.pi / 8 + 1,
    ),
    "trapezoid": ("shape: trapezoid, foot: 3, top: 2, height: 1", 2.5, 5 + 2 * math.hypot(0.5, 1)),
    "etched": (
        "shape: trapezoid, foot: 3, etch_angle: 70, height: 1, rotate: 90, at: [3, 1]",
        3 - 1 / TAN,
        6 - 2 / TAN + 2 / math.sin(math.radians(70)),
    ),
    "hexagon": ("shape: regular_polygon, sides: 6, across_flats: 2", HEX, 2 * HEX),
    "square on its corner": ("shape: regular_polygon, sides: 4, across_corners: 2, rotate: 45", 2, 4 * math.sqrt(2)),
    "rounded hexagon": (
        "shape: regular_polygon, sides: 6, across_flats: 2, corner_radius: 0.5",
        0.25 * HEX + 0.5 * HEX + 0.25 * math.pi,  # a hexagon half as large, and a band of 0.5 around it
        HEX + math.pi,
    ),
    "polygon with a hollow, rounded": (
        "shape: polygon, points: [[0, 0], [4, 0], [4, 2], [2, 2], [2, 4], [0, 4]], corner_radius: 0.5",
        12 - 4 * 0.25 * (1 - math.pi / 4),
        16 - 6 + 6 * math.pi / 4,
    ),
}


@pytest.mark.parametrize("name", SHAPES)
def test_outline_is_closed_and_of_the_right_area_and_length(name: str) -> None:
    keys, expected_area, expected_length = SHAPES[name]
    outline = figure(keys).outline()
    for chain in chains(outline):
        ends = np.array([curve.end for curve in chain])
        starts = np.array([curve.start for curve in (*chain[1:], chain[0])])
        assert_allclose(ends, starts, atol=1e-9)
    assert all(abs(curve.sweep) <= math.pi * (1 + 1e-12) for curve in outline if isinstance(curve, Arc))
    assert_allclose(area(outline), expected_area, rtol=1e-9)
    assert_allclose(length(outline), expected_length, rtol=1e-9)


@pytest.mark.parametrize("name", SHAPES)
@pytest.mark.parametrize("thickness", [0.01, 0.2])
def test_a_coating_adds_the_area_of_a_parallel_band(name: str, thickness: float) -> None:
    """Steiner 1840: a band of thickness t around a figure has the area L t + pi t^2. Sharp hollows lose a little."""
    outline = chains(figure(SHAPES[name][0]).outline())[0]
    grown = chains(figure(SHAPES[name][0]).grown(thickness).outline())[0]
    band = area(grown) - area(outline)
    hollow = (1 - math.pi / 4) * thickness**2 if name == "bent strip" else 0.0  # one square corner, trimmed
    assert_allclose(band, length(outline) * thickness + math.pi * thickness**2 - hollow, rtol=1e-8)


@pytest.mark.parametrize("name", SHAPES)
def test_a_layer_of_no_thickness_changes_nothing(name: str) -> None:
    one = figure(SHAPES[name][0])
    grown = one.grown(0.0).outline()
    assert min(curve.length for curve in grown) > 0
    assert_allclose(area(grown), area(one.outline()), rtol=1e-12)


def test_lapped_foil_goes_around_and_over_itself() -> None:
    keys = "shape: arc_strip, inner_radius: 2, thickness: 0.1, overlap: 1, clearance: 0.05, facing: 90"
    outline = figure(keys).outline()
    assert len(chains(outline)) == 1
    assert len(arrange([outline], 1e-9).loops) == 2  # one face within, one outside: it meets itself nowhere
    middle = (math.tau + 0.5) * (2 + 0.05 + 0.15 / 4)  # of the middle line, which moves out by half a pitch a turn
    assert_allclose(area(outline), 0.1 * middle, rtol=0.02)


FAULTS = {
    "shape: ring, outer_radius: 1, wall: 1": "smaller than the ring",
    "shape: ring, outer_radius: 1": "exactly one of inner_diameter",
    "shape: ring, outer_radius: 1, outer_diameter: 2, wall: 0.1": "exactly one of outer_diameter",
    "shape: sector, outer_radius: 1, from: 10, to: 10": "must differ",
    "shape: sector, outer_radius: 1, inner_radius: 2, from: 10, to: 20": "less than outer_radius",
    "shape: sector, outer_radius: 1, from: 0, to: 200, corner_radius: 0.1": "less than a half disc",
    "shape: sector, outer_radius: 1, from: 0, to: 90, corner_radius: 0.9": "at most 0.414214 m fits",
    "shape: sector, outer_radius: 1, start: 0, to: 90": "'from' is missing",
    "shape: arc_strip, inner_radius: 1, thickness: 0.1": "exactly one of gap, overlap",
    "shape: arc_strip, inner_radius: 1, thickness: 0.1, gap: 7": "nothing left",
    "shape: arc_strip, inner_radius: 1, thickness: 0.1, overlap: 1": "go together",
    "shape: arc_strip, inner_radius: 1, thickness: 0.1, overlap: 4, clearance: 0.1": "half of the circumference",
    "shape: bent_strip, points: [[0, 0]], thickness: 0.1": "at least 2 points",
    "shape: bent_strip, points: [[0, 0], [0, 0]], thickness: 0.1": "are the same",
    "shape: bent_strip, points: [[0, 0], [1, 0], [0, 0.1]], thickness: 0.3": "has a joint too tight",
    "shape: bent_strip, points: [[0, 0], [4, 0], [4, 4], [2, -4]], thickness: 0.3": "would meet itself",
    "shape: bent_strip, points: [[0, 0], [1, 0]], thickness: 0.3, ends: oval": "flat",
    "shape: trapezoid, foot: 1, height: 1": "exactly one of top, etch_angle",
    "shape: trapezoid, foot: 1, height: 1, etch_angle: 45": "flanks meet",
    "shape: trapezoid, foot: 1, height: 1, etch_angle: 5": "between 10 and 170",
    "shape: regular_polygon, sides: 2, across_flats: 1": "from 3 to 100",
    "shape: regular_polygon, sides: 6": "exactly one of across_flats",
    "shape: polygon, points: [[0, 0], [1, 0], [0, 1]], corner_radius: 0.5": "too large for the shortest side",
    "shape: polygon, points: [[0, 0], [1, 1], [1, 0], [0, 1]]": "cross or touch",
    "shape: circle, radius: 0,5": "write a point, not a comma",
    "shape: oval, width: 1, height: 0": "greater than 0",
}


@pytest.mark.parametrize("keys", FAULTS)
def test_numbers_that_allow_no_figure(keys: str) -> None:
    with pytest.raises(CaseError, match=FAULTS[keys]):
        figure(keys)


def test_a_coating_that_fills_a_hollow_is_refused() -> None:
    keys = "shape: arc_strip, inner_radius: 1, thickness: 0.1, gap: 0.5, coatings: [{thickness: 0.3, permittivity: 2}]"
    with pytest.raises(CaseError, match="cannot be laid evenly"):
        figure(keys)


def test_a_shield_with_a_hole_is_refused() -> None:
    with pytest.raises(CaseError, match="hole"):
        read_text(
            "conductors: {a: {shape: circle, radius: 1}}\n"
            "boundary: {kind: shield, shape: ring, outer_radius: 5, wall: 1}\n"
        )
