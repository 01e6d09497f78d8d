"""A layer of dielectric between two heights that runs to infinity: a board, the earth, the sea."""

from __future__ import annotations

import math
from dataclasses import dataclass

from nightcap.geometry.shapes import Outline


@dataclass(frozen=True)
class Slab:
    """All points with low <= y <= high."""

    low: float
    """m; -inf for a half space below ``high``."""
    high: float
    """m; inf for a half space above ``low``."""

    @property
    def heights(self) -> tuple[float, ...]:
        """Its finite edges, m."""
        return tuple(y for y in (self.low, self.high) if math.isfinite(y))

    def outline(self) -> Outline:
        """A slab has no closed outline."""
        raise TypeError("a slab has an outline only within a domain")

    def grown(self, thickness: float) -> Slab:
        """The slab with a layer of even thickness (m) on either side."""
        return Slab(self.low - thickness, self.high + thickness)
