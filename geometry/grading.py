"""How far a first mesh is graded towards the places where fields change fast."""

from __future__ import annotations

import math
from dataclasses import dataclass


@dataclass(frozen=True)
class Grading:
    """How far the first mesh is graded, as fractions of the local length."""

    corner: float = 1e-3
    """Edge length at a sharp corner of a conductor."""
    tip: float = 1e-4
    """Edge length at the free end of an infinitely thin strip; shorter where dielectrics end there too."""
    bend: float = 5e-2
    """Edge length at a corner of a dielectric, or where materials meet on a conductor."""
    contact: float = 1e-2
    """Edge length where two curves touch."""
    turn: float = math.tau / 10
    """Greatest angle that one edge spans on an arc, radians; what its polynomial leaves of it goes as turn^9."""


def grading_for(accuracy: float) -> Grading:
    """A first grading that suits an accuracy; refinement by shares does the rest.

    At a corner of 270 degrees the share of the innermost ring of size h goes as h^(4/3); the lens beside a chord at a
    contact has an area that goes as h^3. At the end of a strip, with dielectric all around, the share goes as h.
    """
    return Grading(
        corner=min(max(0.3 * accuracy**0.75, 1e-7), 0.05),
        tip=min(max(0.5 * accuracy, 1e-9), 0.05),
        bend=min(max(accuracy**0.5, 1e-4), 0.1),
        contact=min(max(0.3 * accuracy ** (1 / 3), 1e-4), 0.05),
        turn=math.tau / (10 if accuracy >= 3e-9 else 18),
    )
