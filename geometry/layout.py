"""A layout: the plane cut into regions by exact curves, each region a dielectric or the inside of a conductor."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from nightcap.geometry.case import Material
from nightcap.geometry.curves import Curve, Floats

Numbers = TypeVar("Numbers", int, NDArray[np.int64])


def conductor_side(conductor: Numbers) -> Numbers:
    """The side number that stands for a conductor; its own inverse."""
    return -1 - conductor


MAGNETIC_WALL = 1 << 40
"""The side number of what lies beyond a line of symmetry that no flux passes."""
FAR_WALL = MAGNETIC_WALL + 1
"""The side number of what lies beyond the far wall."""


@dataclass(frozen=True)
class Piece:
    """A curve between two points of the layout, meeting others only there."""

    curve: Curve
    """Exact; its ends are points[start] and points[end] to within the layout's tolerance."""
    start: int
    end: int
    sides: tuple[int, int]
    """What lies left and right: a region number, ``conductor_side(k)``, MAGNETIC_WALL or FAR_WALL.
    On the rim: the near region, the far one."""
    conductor: int | None = None
    """The conductor that the piece itself is, of no thickness; both its sides may be regions, even the same one."""

    @property
    def wall(self) -> int:
        """MAGNETIC_WALL or FAR_WALL if it lies on one, else 0."""
        side = max(self.sides)
        return side if side >= MAGNETIC_WALL and self.conductor is None else 0

    @property
    def surface(self) -> int | None:
        """The conductor on whose surface the piece lies, or that it is."""
        lowest = min(self.sides)
        return self.conductor if lowest >= 0 else conductor_side(lowest)


@dataclass(frozen=True)
class Region:
    """A connected dielectric face, meshed on its own."""

    loops: tuple[tuple[int, ...], ...]
    """Closed walks over pieces: +(k+1) along piece k, -(k+1) against it. The outer loop first,
    counter-clockwise; then the holes, clockwise."""
    material: int
    """Index into Layout.materials."""
    far: bool = False
    """True for the inverted outside of the rim."""
    embedded: tuple[int, ...] = ()
    """Numbers of the pieces of thin strips inside it, which belong to no loop; they may end on one."""


@dataclass(frozen=True)
class FarWall:
    """Where a domain with slabs ends: a square about the layout, so far away that it hardly matters what is there.

    The bounds hold for unbounded space all the same. Potentials are constant on the wall and continued by that constant
    to infinity: a continuous function on the whole plane, so Dirichlet's principle gives an upper bound. The flux
    function is constant along the wall, so no flux passes, and is continued by no flux at all: divergence-free on the
    whole plane, whatever the materials there, with the same charges; so Thomson's principle gives a lower bound.
    Neither continuation has any energy. What both lose against the exact field goes as (layout / wall)^2.
    """

    reach: float
    """From the middle of the layout to each side of the square, m."""
    conductor: int | None
    """The conductor that reaches to infinity, whose potential the wall has; None if the wall's potential floats."""


@dataclass(frozen=True, eq=False)
class Layout:
    """Closed regions with exact outlines, overlaps resolved.

    Open space is a near and a far region that share the rim: the outside of the circle ``rim_centre``,
    ``rim_radius`` appears inverted on its inside, so the far region overlaps the near ones.
    """

    points: Floats
    """(P, 2), m."""
    pieces: tuple[Piece, ...]
    regions: tuple[Region, ...]
    materials: tuple[Material, ...]
    conductors: tuple[str, ...]
    """All of them; a shield or plane comes last."""
    reference: int
    """Index into conductors."""
    size: float
    """Greatest extent of the drawn shapes, m."""
    rim: tuple[tuple[float, float], float] | None = None
    """Centre and radius of the rim, if space is open."""
    wall: FarWall | None = None
    """Instead of a rim, where slabs run to infinity."""
