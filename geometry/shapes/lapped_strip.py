"""A strip bent into a tube that overlaps itself."""

from __future__ import annotations

import math
from dataclasses import dataclass

from nightcap.geometry.curves import Arc, Point, Segment
from nightcap.geometry.shapes.outline import Outline, Shape, arcs
from nightcap.geometry.shapes.parallel import Grown


@dataclass(frozen=True)
class LappedStrip:
    """A strip bent into a tube whose end lies over its beginning: a spiral of half circles about two centres."""

    centre: Point
    inner: float
    """Radius within, where the strip begins, m."""
    thickness: float
    overlap: float
    """Angle by which it goes beyond a full turn, radians, at most pi."""
    clearance: float
    """Between the two layers of the lap, m."""
    start: float
    """Polar angle where it begins, radians."""

    def outline(self) -> Outline:
        within = self._spiral(0.0)
        outside = self._spiral(self.thickness)
        ends = (Segment(within[0].start, outside[0].start), Segment(outside[-1].end, within[-1].end))
        return (ends[0], *outside, ends[1], *(arc.reversed() for arc in reversed(within)))

    def grown(self, thickness: float) -> Shape:
        return Grown(self, thickness)

    def _spiral(self, out: float) -> list[Arc]:
        """Each half turn about the other centre, half a pitch further out, so that direction does not jump."""
        step = (self.thickness + self.clearance) / 2
        c, s = math.cos(self.start), math.sin(self.start)
        found = []
        for half, sweep in enumerate((math.pi, math.pi, self.overlap)):
            shift = step if half % 2 else 0.0
            centre = (self.centre[0] + shift * c, self.centre[1] + shift * s)
            first = self.start + half * math.pi
            found += arcs(centre, self.inner + out + half * step, first, first + sweep)
        return found
