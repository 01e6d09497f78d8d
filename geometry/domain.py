"""The part of the plane that is solved: inside a shield, a rim or a far wall, and on one side of symmetry lines."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from nightcap.geometry.case import Case, GroundPlane
from nightcap.geometry.curves import Floats, Point, Segment
from nightcap.geometry.shapes import Circle, Outline
from nightcap.geometry.slab import Slab
from nightcap.geometry.symmetry import SymmetryLine

RIM = 1.5
"""Radius of the rim over that of the drawn shapes."""
NEAREST_WALL, FARTHEST_WALL = 1e3, 1e6
"""Reach of the far wall over that of the drawn shapes."""
WALL_LOSS = 4.0
"""The half-width of the bracket that a far wall leaves is, relative, at most about this over its reach squared."""


@dataclass(frozen=True, eq=False)
class Domain:
    """What the drawn shapes are cut with."""

    outline: Outline
    """The inside of the shield, of the rim or of the far wall; over a ground plane the part above it, floor first."""
    box: tuple[Floats, Floats]
    """Low and high corner of all outlines, the domain's included, m."""
    shown: tuple[Floats, Floats]
    """Low and high corner of what is drawn, m."""
    rim: tuple[Point, float] | None = None
    wall: float | None = None
    """From the middle to each side of the far wall, m."""
    grounded: tuple[Outline, ...] = ()
    """The surface of the outer conductor, as far as it is near the drawn shapes."""
    lines: tuple[SymmetryLine, ...] = ()

    @property
    def size(self) -> float:
        """Greatest extent of the drawn shapes, m."""
        return float((self.shown[1] - self.shown[0]).max())

    @property
    def window(self) -> Outline | None:
        """A rectangle around everything on the kept side of the symmetry lines, if there are any."""
        if not self.lines:
            return None
        start, end = _grown(*self.box)
        for line in self.lines:
            end[line.axis] += max(line.at - start[line.axis], 0.0)
            start[line.axis] = line.at
        return rectangle(start, end)

    def filled_by(self, slab: Slab) -> Outline:
        """The outline of a slab that reaches beyond the domain on all open sides."""
        start, end = _grown(*self.box)
        height = end[1] - start[1]
        bottom = slab.low if slab.low > -np.inf else min(start[1], slab.high - height)
        top = slab.high if slab.high < np.inf else max(end[1], slab.low + height)
        start[1], end[1] = bottom, top
        return rectangle(start, end)


def shielded(case: Case, shield: Outline, low: Floats, high: Floats) -> Domain:
    """The inside of a shield. low, high : box around all that is drawn, the shield included."""
    lines = (_beside(line, low, high) for line in case.symmetry if line.is_electric)
    return Domain(shield, (low, high), (low, high), grounded=(shield, *lines), lines=case.symmetry)


def unbounded(case: Case, low: Floats, high: Floats, reach: Callable[[Floats], float]) -> Domain:
    """Space without end, or half of it, inside a rim or, where there are slabs, a far wall.

    low, high : box around all that is drawn but the slabs; reach : greatest distance of it from a point.
    """
    slabs = [dielectric.shape for dielectric in case.dielectrics if isinstance(dielectric.shape, Slab)]
    for point in _anchors(case, slabs, (low + high) / 2) if slabs else ():
        low, high = np.minimum(low, point), np.maximum(high, point)
    middle = (low + high) / 2
    for line in straight_edges(case):
        middle[line.axis] = line.at
    farthest = max(reach(middle), *(abs(y - middle[1]) for slab in slabs for y in slab.heights), 0.0)
    farthest *= _wall_distance(case) if slabs else RIM
    centre = (float(middle[0]), float(middle[1]))
    start, end = middle - farthest, middle + farthest
    outline = rectangle(start, end) if slabs else Circle(centre, farthest).outline()
    if isinstance(case.boundary, GroundPlane):
        start[1] = case.boundary.at
        floor = Segment((centre[0] - farthest, centre[1]), (centre[0] + farthest, centre[1]))
        outline = rectangle(start, end) if slabs else (floor, *outline[:2])
    return Domain(
        outline,
        (np.minimum(low, start), np.maximum(high, end)),
        (low, high),
        rim=None if slabs else (centre, farthest),
        wall=farthest if slabs else None,
        grounded=tuple(_beside(line, low, high) for line in straight_edges(case) if line.is_electric),
        lines=case.symmetry,
    )


def straight_edges(case: Case) -> tuple[SymmetryLine, ...]:
    """The straight edges of an unbounded domain: the symmetry lines, and the plane, which is an electric one."""
    if isinstance(case.boundary, GroundPlane):
        return (*case.symmetry, SymmetryLine(1, case.boundary.at, is_electric=True))
    return case.symmetry


def rectangle(low: Floats, high: Floats) -> Outline:
    """The outline between two corners, bottom first, with exactly their coordinates."""
    (left, bottom), (right, top) = low.tolist(), high.tolist()
    points = [(left, bottom), (right, bottom), (right, top), (left, top)]
    return tuple(Segment(a, b) for a, b in zip(points, points[1:] + points[:1], strict=True))


def _anchors(case: Case, slabs: Sequence[Slab], middle: Floats) -> list[Floats]:
    """Points that count as drawn besides the shapes: on the slabs' edges, and on the straight edges of the domain."""
    points = [np.array([middle[0], y]) for slab in slabs for y in slab.heights]
    for line in straight_edges(case):
        point = middle.copy()
        point[line.axis] = line.at
        points.append(point)
    return points


def _wall_distance(case: Case) -> float:
    """Reach of the far wall over that of the layout, such that it costs a tenth of the accuracy."""
    return float(np.clip(np.sqrt(10 * WALL_LOSS / case.accuracy), NEAREST_WALL, FARTHEST_WALL))


def _beside(line: SymmetryLine, low: Floats, high: Floats) -> Outline:
    """The part of a line beside a box, and half as much again on either side."""
    start, end = _grown(low, high)
    start[line.axis] = end[line.axis] = line.at
    return (Segment((float(start[0]), float(start[1])), (float(end[0]), float(end[1]))),)


def _grown(low: Floats, high: Floats) -> tuple[Floats, Floats]:
    """A box with half its size as a margin."""
    margin = float((high - low).max()) / 2
    return low - margin, high + margin
