"""Outlines of a layout as polygons fine enough for the eye."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Iterator

import numpy as np

from nightcap.geometry.curves import Curve, Floats
from nightcap.geometry.layout import Layout, Region, conductor_side

FINEST_TURN = math.radians(2.0)


def points_along(curve: Curve) -> Floats:
    """Points (n, 2) on a curve, both ends included, m."""
    turn = abs(curve.curvature) * curve.length
    return curve.at(np.linspace(0.0, 1.0, 2 + math.floor(turn / FINEST_TURN)))


def region_loops(layout: Layout, region: Region) -> list[Floats]:
    """The closed polygons of a region, holes after the outside."""
    return [np.concatenate([_walked(layout, step)[:-1] for step in loop]) for loop in region.loops]


def conductor_loops(layout: Layout, conductor: int) -> list[Floats]:
    """The closed polygons around a conductor (index into layout.conductors), its inside on the left."""
    leaving: dict[int, list[int]] = defaultdict(list)
    for step in conductor_steps(layout, conductor):
        leaving[_start(layout, step)].append(step)
    loops = []
    while leaving:
        loop = list(_loop(layout, leaving))
        loops.append(np.concatenate([_walked(layout, step)[:-1] for step in loop]))
    return loops


def conductor_steps(layout: Layout, conductor: int) -> Iterator[int]:
    """Signed pieces, as in Region.loops, that have the conductor on their left and the near sheet on the other side;
    not those of thin strips.
    """
    side = conductor_side(conductor)
    for k, piece in enumerate(layout.pieces):
        left, right = piece.sides
        other = right if left == side else left
        if side in piece.sides and not (other >= 0 and layout.regions[other].far):
            yield k + 1 if left == side else -(k + 1)


def interface_lines(layout: Layout) -> list[Floats]:
    """The curves between two dielectrics of the near sheet."""
    return [
        points_along(piece.curve)
        for piece in layout.pieces
        if piece.surface is None and not any(layout.regions[side].far for side in piece.sides)
    ]


def strip_lines(layout: Layout, conductor: int) -> list[Floats]:
    """The pieces of a conductor that have no thickness."""
    return [points_along(piece.curve) for piece in layout.pieces if piece.conductor == conductor]


def surface_lines(layout: Layout, conductor: int) -> list[Floats]:
    """The surface of a conductor curve by curve: for a shield, which has no inside to fill."""
    return [_walked(layout, step) for step in conductor_steps(layout, conductor)]


def _loop(layout: Layout, leaving: dict[int, list[int]]) -> Iterator[int]:
    """Takes one loop, or one open chain, out of the steps that leave each point."""
    point = next(iter(leaving))
    while point in leaving:
        step = leaving[point].pop()
        if not leaving[point]:
            del leaving[point]
        yield step
        point = _end(layout, step)


def _walked(layout: Layout, step: int) -> Floats:
    points = points_along(layout.pieces[abs(step) - 1].curve)
    return points if step > 0 else points[::-1]


def _start(layout: Layout, step: int) -> int:
    piece = layout.pieces[abs(step) - 1]
    return piece.start if step > 0 else piece.end


def _end(layout: Layout, step: int) -> int:
    return _start(layout, -step)
