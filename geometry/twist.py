"""Twist: what a lay length says about a layout whose cores run along helices."""

from __future__ import annotations

import math
from dataclasses import dataclass


@dataclass(frozen=True)
class Twist:
    """Cores laid up around an axis."""

    lay_length: float
    """Length of cable in which a core goes once around, m."""
    pitch_diameter: float
    """Of the circle on which the centres of the cores lie, m."""

    @property
    def length_factor(self) -> float:
        """Length of a core per length of cable: sqrt(1 + (pi D / lay)^2), a helix unrolled into a triangle.

        Source: common practice; IEC 60287-1-1 calls the same ratio lay-up factor (from memory).
        """
        return math.hypot(1.0, math.pi * self.pitch_diameter / self.lay_length)


LEFT_OUT = (
    "the section is taken square to the cores, as if they ran straight: other cores and screens are seen in this one"
    " position, not in the mean over a lay, unbalance does not average out, and fields along the cable are left out;"
    " so the bracket is about the section, and the length factor carries no bound"
)
"""What a two-dimensional section cannot know of a twisted cable."""
