"""What a picture is drawn from, and the part of the plane that it shows."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

import numpy as np

from nightcap.geometry.case import Case, GroundPlane, Shield
from nightcap.geometry.curves import Floats
from nightcap.geometry.domain import straight_edges
from nightcap.geometry.layout import Layout
from nightcap.geometry.shapes import Shape
from nightcap.geometry.slab import Slab
from nightcap.outputs.outlines import points_along

MARGIN = {Shield: 0.08, GroundPlane: 0.35}
"""Of the size of what is drawn, around it; open space gets the last."""
OPEN_MARGIN = 0.45
CLOSE_UP = 2.0
"""Room left around conductors that are small in their shield, in sizes of what they take."""


@dataclass(frozen=True, eq=False)
class Drawing:
    """A solved layout."""

    case: Case
    layout: Layout
    conductors: tuple[str, ...]
    """Those that remain after ties and floating; the first is shown at one volt, the others at none."""
    potentials: Floats
    """(N,) what this means for each row of the sampled fields, V."""
    fields: Any
    """nightcap.solver.fields: has sample(subdivisions)."""


@dataclass(frozen=True)
class View:
    """A rectangle of the plane, m."""

    left: float
    bottom: float
    right: float
    top: float

    @property
    def width(self) -> float:
        return self.right - self.left

    @property
    def height(self) -> float:
        return self.top - self.bottom

    def sees(self, low: Floats, high: Floats) -> Any:
        """Which boxes, from low (n, 2) to high (n, 2), reach into the view: (n,) bool."""
        return (
            (high[:, 0] >= self.left)
            & (low[:, 0] <= self.right)
            & (high[:, 1] >= self.bottom)
            & (low[:, 1] <= self.top)
        )


def view_of(case: Case) -> View:
    """The drawn shapes with a margin; the plane below them too, where there is one."""
    low, high = _box(_shapes(case))
    if isinstance(case.boundary, Shield):
        inner_low, inner_high = _box(conductor.shape for conductor in case.conductors)
        room = CLOSE_UP * float((inner_high - inner_low).max())
        if room < float((high - low).max()) / 2:  # small conductors in a wide shield: look at these
            low, high = np.maximum(low, inner_low - room / 2), np.minimum(high, inner_high + room / 2)
    else:
        heights = [y for d in case.dielectrics if isinstance(d.shape, Slab) for y in d.shape.heights]
        low[1], high[1] = min([low[1], *heights]), max([high[1], *heights])
    for line in straight_edges(case):
        low[line.axis] = line.at
    margin = MARGIN.get(type(case.boundary), OPEN_MARGIN) * float((high - low).max())
    start = low - margin
    for line in straight_edges(case):
        start[line.axis] = line.at - 0.2 * margin
    return View(float(start[0]), float(start[1]), float(high[0] + margin), float(high[1] + margin))


def _box(shapes: Iterable[Shape]) -> tuple[Floats, Floats]:
    """Low and high corner of the box around some shapes, m."""
    points = np.concatenate([points_along(curve) for shape in shapes for curve in shape.outline()])
    return points.min(axis=0), points.max(axis=0)


def _shapes(case: Case) -> Iterable[Shape]:
    if isinstance(case.boundary, Shield):
        yield case.boundary.shape
        return
    for conductor in case.conductors:
        yield conductor.shape.grown(sum(coating.thickness for coating in conductor.coatings))
    for dielectric in case.dielectrics:
        if not isinstance(dielectric.shape, Slab):
            yield dielectric.shape
