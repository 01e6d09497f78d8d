"""Free ends of infinitely thin strips: the field is as singular there as it can be, more so beside dielectrics."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from scipy.optimize import brentq

from nightcap.geometry.curves import direction_and_bend
from nightcap.geometry.grading import Grading
from nightcap.geometry.layout import Layout, Piece

Arms = Sequence[tuple[float, Piece]]
"""The pieces that meet in a point, each with the polar angle at which it leaves."""
PLAIN = 0.5
"""Exponent at an end in a homogeneous dielectric: the potential goes as the root of the distance."""


def is_tip(layout: Layout, meeting: Arms) -> bool:
    """Whether just one piece of a strip ends there, within the domain; closed outlines have two."""
    surface = [piece for _, piece in meeting if piece.surface is not None]
    inside = all(side < len(layout.regions) for _, piece in meeting for side in piece.sides)
    return len(surface) == 1 and surface[0].conductor is not None and inside


def tips(layout: Layout) -> dict[int, frozenset[int]]:
    """The points of a layout where a strip ends, with the numbers of all pieces that meet there."""
    at: dict[int, list[int]] = {}
    for k, piece in enumerate(layout.pieces):
        at.setdefault(piece.start, []).append(k)
        at.setdefault(piece.end, []).append(k)
    strips = [k for k, piece in enumerate(layout.pieces) if piece.conductor is not None]
    ends = [point for k in strips for point in (layout.pieces[k].start, layout.pieces[k].end)]
    return {point: frozenset(at[point]) for point in ends if ends.count(point) == 1}


def tip_fraction(layout: Layout, meeting: Arms, grading: Grading) -> float | None:
    """The grading that the end of a strip needs; None at a cusp, which has rules of its own.

    With a potential that goes as r^s the share of the innermost ring of size h goes as h^(2 s); grading.tip is meant
    for s = 1/2.
    """
    angles = sorted(angle % math.tau for angle, _ in meeting)
    if (np.diff([*angles, angles[0] + math.tau]) < 1e-6).any():
        return None
    return float(grading.tip ** (PLAIN / exponent(*_sectors(layout, meeting))))


def _sectors(layout: Layout, meeting: Arms) -> tuple[list[float], list[float]]:
    """Angles, radians, and permittivities of the sectors around the end of a strip, counter-clockwise."""
    strip = next(angle for angle, piece in meeting if piece.surface is not None)
    arms = sorted((((angle - strip) % math.tau, angle, piece) for angle, piece in meeting), key=lambda arm: arm[0])
    turns = [turn for turn, _, _ in arms]
    opening = np.diff([*turns, math.tau]).tolist()
    permittivity = []
    for _, angle, piece in arms:
        starts = abs(math.remainder(direction_and_bend(piece.curve, True)[0] - angle, math.tau)) < 1e-9
        region = layout.regions[piece.sides[0] if starts else piece.sides[1]]
        permittivity.append(layout.materials[region.material].permittivity)
    return opening, permittivity


def exponent(opening: Sequence[float], permittivity: Sequence[float]) -> float:
    """The least s > 0 for which r^s f(angle) is a potential between two sides of a strip, across these sectors.

    In each sector u and permittivity u' / s turn like cosine and sine of s times the angle; both are continuous, and u
    vanishes on the strip. Source: separation of variables, as in Meixner 1972 for edges (from memory).
    """

    def far_side(s: float) -> float:
        u, flux = 0.0, 1.0
        for angle, eps in zip(opening, permittivity, strict=True):
            c, w = math.cos(s * angle), math.sin(s * angle)
            u, flux = c * u + w / eps * flux, c * flux - eps * w * u
        return u

    trial = np.geomspace(1e-3, 1.0, 400)
    values = np.array([far_side(s) for s in trial])
    change = np.flatnonzero(np.sign(values[1:]) != np.sign(values[:-1]))
    return float(brentq(far_side, trial[change[0]], trial[change[0] + 1])) if change.size else float(trial[0])
