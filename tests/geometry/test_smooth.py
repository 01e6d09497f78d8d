"""Polynomial arcs: exact parts, areas, windings, nearest points; and what is refused of smooth shapes."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from nightcap.geometry.case_file import read_text
from nightcap.geometry.errors import CaseError
from nightcap.geometry.polynomial_arc import PolynomialArc
from nightcap.geometry.shapes import Ellipse, Smooth

BEND = PolynomialArc(((0.0, 0.0), (1.0, 2.0), (3.0, -1.0), (4.0, 1.0)))


@given(st.floats(0.0, 0.9), st.floats(0.05, 1.0), st.floats(0.0, 1.0))
def test_a_part_is_the_same_curve(low: float, share: float, t: float) -> None:
    high = low + share * (1 - low)
    assert_allclose(BEND.part(low, high).at(np.array(t)), BEND.at(np.array(low + t * (high - low))), atol=1e-12)


def test_ends_directions_and_bends() -> None:
    angle, bend = BEND.heading(from_start=True)
    assert_allclose([angle, bend], [math.atan2(2, 1), BEND.bend(np.array([0.0]))[0]], rtol=1e-12)
    angle, bend = BEND.reversed().heading(from_start=False)
    assert_allclose(angle, BEND.heading(from_start=True)[0], rtol=1e-12)
    assert_allclose(bend, BEND.heading(from_start=True)[1], rtol=1e-12)


def test_length_and_area_of_an_ellipse() -> None:
    """The perimeter is 4 a E(e), the area pi a b."""
    from scipy.special import ellipe

    outline = Ellipse((1.0, 2.0), 4.0, 2.0, 0.3).outline()
    assert_allclose(sum(c.length for c in outline), 8 * ellipe(0.75), rtol=1e-12)
    chords = sum(a.start[0] * a.end[1] - a.end[0] * a.start[1] for a in outline) / 2
    swept = sum(c.swept for c in outline if isinstance(c, PolynomialArc))
    assert_allclose(chords + swept, 2 * math.pi, rtol=1e-12)


def test_pieces_of_an_ellipse_lie_on_it() -> None:
    for curve in Ellipse((0.0, 0.0), 4.0, 2.0).outline():
        x, y = curve.at(np.linspace(0, 1, 101)).T
        assert_allclose((x / 2) ** 2 + y**2, 1.0, rtol=1e-13)


@given(st.floats(-3, 3), st.floats(-2, 2))
def test_winding_of_an_ellipse(x: float, y: float) -> None:
    inside = (x / 2) ** 2 + y**2
    if abs(inside - 1) < 1e-6:
        return
    turn = sum(c.winding((x, y)) for c in Ellipse((0.0, 0.0), 4.0, 2.0).outline() if isinstance(c, PolynomialArc))
    assert_allclose(turn, math.tau if inside < 1 else 0.0, atol=1e-9)


@given(st.floats(0.05, 0.95), st.floats(-0.2, 0.2))
def test_nearest_point(t: float, away: float) -> None:
    """Beside the curve, nearer than its radius of curvature, the foot of the perpendicular is the point itself."""
    u, v = BEND.tangent(np.array(t))
    x = BEND.at(np.array([t])) + away * np.array([[-v, u]])
    assert_allclose(BEND.nearest(x), [t], atol=1e-9)


def test_spline_runs_through_its_points_without_kinks() -> None:
    points = ((1.0, 0.0), (0.9, 0.7), (0.0, 0.5), (-1.0, 0.1), (0.0, -0.7))
    outline = Smooth(points).outline()
    assert_allclose([c.start for c in outline], points, atol=1e-15)
    for one, two in zip(outline, outline[1:] + outline[:1], strict=True):
        assert isinstance(one, PolynomialArc)
        assert isinstance(two, PolynomialArc)
        assert_allclose(one.tangent(np.array(1.0)), two.tangent(np.array(0.0)), atol=1e-9)
        assert_allclose(one.bend(np.array([1.0])), two.bend(np.array([0.0])), rtol=1e-6, atol=1e-9)


def test_sense_of_rotation_does_not_matter() -> None:
    points = ((1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0))
    for given_points in (points, points[::-1]):
        outline = Smooth(given_points).outline()
        assert sum(a.start[0] * a.end[1] - a.end[0] * a.start[1] for a in outline) > 0


FAULTS = {
    "shape: ellipse, width: 1, height: 1e-4": "at least 0.001 of the other",
    "shape: ellipse, width: 1": "'height' is missing",
    "shape: smooth, points: [[0, 0], [1, 0]]": "at least 3 points",
    "shape: smooth, points: [[0, 0], [0, 0], [1, 1]]": "are the same",
    "shape: smooth, points: [[0, 0], [1, 1], [1, 0], [0, 1]]": "meets itself",
    "shape: outline, path: 'M 0 0 L 1 0 L 1 1'": "is not closed",
    "shape: outline, path: 'M 0 0 L'": "no SVG path data",
    "shape: outline, path: ''": "draws nothing",
    "shape: outline, path: 'M 0 0 L 1 1 L 1 0 L 0 1 Z'": "crosses or touches itself",
    "shape: outline, path: 'M 0 0 C 0 0 1 1 1 0 Z'": "has no direction",
    "shape: outline, wkt: 'POINT (1 1)'": "must be one POLYGON",
    "shape: outline, wkt: 'POLYGON EMPTY'": "EMPTY",
    "shape: outline, wkt: 'POLYGONE ((0 0))'": "no well-known text",
    "shape: outline, wkt: 'POLYGON ((0 0, 1 0, 0 1, 0 0))', path: 'M 0 0'": "exactly one of path, wkt, file",
    "shape: outline": "exactly one of path, wkt, file",
    "shape: outline, file: none.svg": "cannot be read",
    "shape: outline, path: 'M 0 0 H 1 V 1 Z', unit: parsec": "no unit of length",
    "shape: outline, path: 'M 0 0 H 1 V 1 Z', scale: -1": "greater than 0",
    "shape: ellipse, width: 1, height: 1, coatings: [{thickness: 0.1, permittivity: 2}]": "bent unevenly",
}


@pytest.mark.parametrize("keys", FAULTS)
def test_faults(keys: str) -> None:
    with pytest.raises(CaseError, match=FAULTS[keys]):
        read_text(f"conductors: {{a: {{{keys}}}}}\nboundary: {{kind: ground_plane, at: -9}}\n")
