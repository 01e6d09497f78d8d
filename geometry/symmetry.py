"""Lines about which a layout is symmetric: one side of each is solved."""

from __future__ import annotations

from dataclasses import dataclass

ELECTRIC_WALL = "electric-wall"
"""Name of the conductor that an electric wall is, where there is no shield and no plane that it could be part of."""


@dataclass(frozen=True)
class SymmetryLine:
    """The line x = at, or y = at; what is solved lies on the side of the greater coordinate.

    Electric wall: potential zero, for fields that are odd about the line. Magnetic wall: no flux passes, for even ones.
    """

    axis: int
    """0 for x, 1 for y."""
    at: float
    """m."""
    is_electric: bool

    def __str__(self) -> str:
        return f"{'electric' if self.is_electric else 'magnetic'} wall at {'xy'[self.axis]} = {self.at:g} m"
