"""Where equal things lie: in a ring, in a row, in a hexagonal bundle, in concentric layers."""

from __future__ import annotations

import math
from collections.abc import Sequence

from nightcap.geometry.curves import Point


def ring_sites(count: int, radius: float, first: float = 0.0) -> list[Point]:
    """Centres of ``count`` things evenly around a circle, m; ``first`` is the polar angle of the first, radians."""
    angles = [first + math.tau * k / count for k in range(count)]
    return [(radius * math.cos(angle), radius * math.sin(angle)) for angle in angles]


def touching_ring_radius(count: int, diameter: float) -> float:
    """Radius, m, of the circle through the centres of ``count`` >= 2 round things in a ring that touch each other."""
    return diameter / 2 / math.sin(math.pi / count)


def row_sites(count: int, pitch: float) -> list[Point]:
    """Centres of ``count`` things in a row along x, about the origin, m."""
    return [((k - (count - 1) / 2) * pitch, 0.0) for k in range(count)]


def hexagonal_sites(count: int, pitch: float) -> list[Point]:
    """The first ``count`` sites of a hexagonal grid, m, shell by shell around the origin.

    1, 7, 19, 37, 61 fill whole shells; within a shell counter-clockwise from the x axis.
    """
    shells = range(math.ceil((math.sqrt(12 * count - 3) - 3) / 6) + 1)
    sites = [site for shell in shells for site in _shell(shell)]
    return [(pitch * x, pitch * y) for x, y in sites[:count]]


def _shell(shell: int) -> list[Point]:
    """The sites of one hexagonal shell for pitch 1."""
    if shell == 0:
        return [(0.0, 0.0)]
    corners = ring_sites(6, float(shell))
    return [
        (a[0] + (b[0] - a[0]) * k / shell, a[1] + (b[1] - a[1]) * k / shell)
        for a, b in zip(corners, corners[1:] + corners[:1], strict=True)
        for k in range(shell)
    ]


def layered_sites(core: float, layers: Sequence[tuple[int, float]]) -> list[tuple[Point, float]]:
    """Centres and radii, m, of round wires laid in concentric layers upon a core, each touching what it lies on.

    core : diameter of the core, m; layers : count and diameter, m, of the wires of each layer, from the inside out.
    """
    wires: list[tuple[Point, float]] = [((0.0, 0.0), core / 2)]
    outer = core / 2
    for count, diameter in layers:
        wires += [(site, diameter / 2) for site in ring_sites(count, outer + diameter / 2)]
        outer += diameter
    return wires
