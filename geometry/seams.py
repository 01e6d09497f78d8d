"""Where full circles are divided into arcs: away from the points where they touch something."""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import pairwise

import numpy as np

from nightcap.geometry.curves import Arc, Curve, Floats, Segment
from nightcap.geometry.shapes import Outline

QUARTER = math.pi / 2
NEAREST = 1e-3
"""Angle, radians, that a seam keeps from a contact, unless it lies in it."""
CHOICES = np.arange(16) * QUARTER / 16


def with_clear_seams(chains: Sequence[Outline], tolerance: float) -> list[Outline]:
    """The chains with every circle turned so that none of its four seams lies close beside a contact.

    Two curves that touch are within the tolerance, m, of each other some way to either side of the contact; a seam
    there would be taken for a second contact.
    """
    circles = {k: first for k, chain in enumerate(chains) if (first := _first_of_circle(chain))}
    if not circles:
        return list(chains)
    contacts = _Contacts([curve for chain in chains for curve in chain], tolerance)
    turned = list(chains)
    for k, first in circles.items():
        angles = contacts.of(first)
        slack = tolerance / first.radius
        offset = _offset(angles - first.start_angle, slack)
        if offset:
            sign = math.copysign(1.0, first.sweep)
            starts = [first.start_angle + offset + sign * QUARTER * j for j in range(5)]
            turned[k] = tuple(Arc(first.centre, first.radius, a, b) for a, b in pairwise(starts))
    return turned


def _first_of_circle(chain: Outline) -> Arc | None:
    """The first quarter of a chain that is a full circle, else None."""
    arcs = [curve for curve in chain if isinstance(curve, Arc)]
    if len(chain) != 4 or len(arcs) != 4:
        return None
    same = all(arc.centre == arcs[0].centre and arc.radius == arcs[0].radius for arc in arcs)
    whole = math.isclose(abs(sum(arc.sweep for arc in arcs)), math.tau, rel_tol=1e-9)
    return arcs[0] if same and whole else None


def _offset(contacts: Floats, slack: float) -> float:
    """By how much to turn seams a quarter turn apart, given the directions of contacts from the first one."""
    if _is_clear(contacts, 0.0, slack):
        return 0.0
    return float(max(CHOICES, key=lambda choice: np.abs(_from_seam(contacts, choice)).min()))


def _is_clear(contacts: Floats, offset: float, slack: float) -> bool:
    apart = np.abs(_from_seam(contacts, offset))
    return bool(((apart <= slack) | (apart >= NEAREST)).all())


def _from_seam(contacts: Floats, offset: float) -> Floats:
    """Angles from the nearest seam."""
    return np.asarray((contacts - offset + QUARTER / 2) % QUARTER - QUARTER / 2)


class _Contacts:
    """Which circles and lines touch a circle, and where."""

    def __init__(self, curves: Sequence[Curve], tolerance: float) -> None:
        arcs = {(c.centre, c.radius) for c in curves if isinstance(c, Arc)}
        lines = [c for c in curves if isinstance(c, Segment)]
        self.tolerance = 2 * tolerance
        self.centre = np.array([centre for centre, _ in arcs]).reshape(-1, 2)
        self.radius = np.array([radius for _, radius in arcs])
        self.start = np.array([c.start for c in lines]).reshape(-1, 2)
        along = np.array([c.end for c in lines]).reshape(-1, 2) - self.start
        length = np.hypot(*along.T)
        self.normal = np.stack([-along[:, 1], along[:, 0]], axis=1) / np.maximum(length, 1e-300)[:, None]

    def of(self, circle: Arc) -> Floats:
        """Polar angles of the contacts, radians."""
        away = self.centre - np.array(circle.centre)
        d = np.hypot(*away.T)
        outside = np.abs(d - (self.radius + circle.radius)) <= self.tolerance
        inside = (np.abs(d - np.abs(self.radius - circle.radius)) <= self.tolerance) & (d > self.tolerance)
        sign = np.where(inside & (self.radius < circle.radius) | outside, 1.0, -1.0)
        touching = (sign[:, None] * away)[outside | inside]
        height = ((self.start - np.array(circle.centre)) * self.normal).sum(axis=1)
        feet = (height[:, None] * self.normal)[np.abs(np.abs(height) - circle.radius) <= self.tolerance]
        points = np.concatenate([touching, feet])
        return np.asarray(np.arctan2(points[:, 1], points[:, 0]))
