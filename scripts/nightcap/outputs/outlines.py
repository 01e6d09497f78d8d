"""Outlines of a layout as polygons fine enough for the eye."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Iterator, Sequence

import numpy as np

from nightcap.geometry.curves import Curve, Floats
from nightcap.geometry.layout import Layout, Region, conductor_side
from nightcap.geometry.symmetry import SymmetryLine

FINEST_TURN = math.radians(2.0)


def points_along(curve: Curve) -> Floats:
    """Points (n, 2) on a curve, both ends included, m."""
    turn = abs(curve.curvature) * curve.length
    return curve.at(np.linspace(0.0, 1.0, 2 + math.floor(turn / FINEST_TURN)))


def region_loops(layout: Layout, region: Region) -> list[Floats]:
    """The closed polygons of a region, holes after the outside."""
    return [np.concatenate([_walked(layout, step)[:-1] for step in loop]) for loop in region.loops]


def conductor_loops(layout: Layout, conductor: int, lines: Sequence[SymmetryLine] = ()) -> list[Floats]:
    """The closed polygons around a conductor (index into layout.conductors), its inside on the left.

    What symmetry lines cut open is closed along them.
    """
    leaving: dict[int, list[int]] = defaultdict(list)
    for step in conductor_steps(layout, conductor):
        leaving[_start(layout, step)].append(step)
    arriving = {_end(layout, step) for steps in leaving.values() for step in steps}
    heads = [point for point in leaving if point not in arriving]
    loops = []
    while leaving:
        loop = list(_loop(layout, leaving, heads.pop() if heads else next(iter(leaving))))
        points = np.concatenate([_walked(layout, step)[:-1] for step in loop])
        if _end(layout, loop[-1]) != _start(layout, loop[0]):
            tail = _walked(layout, loop[-1])[-1]
            points = np.concatenate([points, [tail], _corner_between(tail, points[0], lines)])
        loops.append(points)
    return loops


def _corner_between(one: Floats, other: Floats, lines: Sequence[SymmetryLine]) -> Floats:
    """Where two symmetry lines cross, if one point lies on each of them, else nothing; (0 or 1, 2)."""
    if len(lines) == 2 and not np.isclose(one, other, rtol=1e-9, atol=0).any():
        crossing = {line.axis: line.at for line in lines}
        return np.array([[crossing[0], crossing[1]]])
    return np.empty((0, 2))


def clipped(loop: Floats, low: Floats, high: Floats) -> Floats:
    """The part (n, 2) of a closed polygon inside a rectangle, cut side by side.

    Source: I. E. Sutherland and G. W. Hodgman, Reentrant polygon clipping, 1974 (from memory).
    """
    for axis, bound, sign in ((0, low[0], 1), (1, low[1], 1), (0, high[0], -1), (1, high[1], -1)):
        depth = sign * (loop[:, axis] - bound)
        after, next_depth = np.roll(loop, -1, axis=0), np.roll(depth, -1)
        kept: list[Floats] = []
        for k in range(len(loop)):
            if depth[k] >= 0:
                kept.append(loop[k])
            if (depth[k] >= 0) != (next_depth[k] >= 0):
                t = depth[k] / (depth[k] - next_depth[k])
                kept.append((1 - t) * loop[k] + t * after[k])
        loop = np.array(kept).reshape(-1, 2)
    return loop


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
        if piece.surface is None and not piece.wall and not any(layout.regions[side].far for side in piece.sides)
    ]


def strip_lines(layout: Layout, conductor: int) -> list[Floats]:
    """The pieces of a conductor that have no thickness."""
    return [points_along(piece.curve) for piece in layout.pieces if piece.conductor == conductor]


def surface_lines(layout: Layout, conductor: int) -> list[Floats]:
    """The surface of a conductor curve by curve: for a shield, which has no inside to fill."""
    return [_walked(layout, step) for step in conductor_steps(layout, conductor)]


def _loop(layout: Layout, leaving: dict[int, list[int]], point: int) -> Iterator[int]:
    """Takes one loop, or one open chain, out of the steps that leave each point, starting at one."""
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
