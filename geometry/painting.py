"""What a case draws, as outlines in the order in which they are painted."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from nightcap.geometry.case import Case, GroundPlane, Material, Shield
from nightcap.geometry.curves import Arc, Floats, Point, Segment
from nightcap.geometry.shapes import Circle, Outline

RIM = 1.5
"""Radius of the rim over that of the drawn shapes."""
TOLERANCE = 1e-9
"""Points and edges this close, relative to the layout's size, are one."""


@dataclass(frozen=True)
class Drawn:
    """One outline, and what it encloses."""

    outline: Outline
    key: str
    """Key path in the case file."""
    conductor: int | None = None
    """The conductor whose surface it is, or whose coating it encloses."""
    material: Material | None = None
    """What fills it; None for a conductor."""


@dataclass(frozen=True, eq=False)
class Drawing:
    """Outlines in the order of painting, the domain's own last."""

    drawn: tuple[Drawn, ...]
    domain: Outline
    """The inside of the shield or of the rim; over a ground plane the half disc above it."""
    size: float
    """Greatest extent of the drawn shapes, m."""
    rim: tuple[Point, float] | None

    @property
    def tolerance(self) -> float:
        """Points and edges this close are one, m."""
        return TOLERANCE * self.size

    @property
    def outlines(self) -> list[Outline]:
        """All outlines; the domain's has the highest number."""
        return [d.outline for d in self.drawn] + [self.domain]


def paint(case: Case) -> Drawing:
    """Lists the outlines: dielectrics, coatings from the outside in, conductors."""
    drawn = [Drawn(d.shape.outline(), f"dielectrics.{d.name}", None, d.material) for d in case.dielectrics]
    for number, conductor in enumerate(case.conductors):
        thickness = 0.0
        coats = []
        for k, coating in enumerate(conductor.coatings):
            thickness += coating.thickness
            outline = conductor.shape.grown(thickness).outline()
            coats.append(Drawn(outline, f"conductors.{conductor.name}.coatings[{k}]", number, coating.material))
        drawn += reversed(coats)
    drawn += [Drawn(c.shape.outline(), f"conductors.{c.name}", k) for k, c in enumerate(case.conductors)]
    if isinstance(case.boundary, Shield):
        domain = case.boundary.shape.outline()
        low, high = box([*(d.outline for d in drawn), domain])
        return Drawing(tuple(drawn), domain, float((high - low).max()), None)
    low, high = box([d.outline for d in drawn])
    middle = (low + high) / 2
    if isinstance(case.boundary, GroundPlane):
        middle[1] = case.boundary.at
    centre = (float(middle[0]), float(middle[1]))
    radius = RIM * max(_reach(d.outline, middle) for d in drawn)
    whole = Circle(centre, radius).outline()
    if isinstance(case.boundary, GroundPlane):
        floor = Segment((centre[0] - radius, centre[1]), (centre[0] + radius, centre[1]))
        return Drawing(tuple(drawn), (floor, *whole[:2]), float((high - low).max()), (centre, radius))
    return Drawing(tuple(drawn), whole, float((high - low).max()), (centre, radius))


def box(outlines: list[Outline]) -> tuple[Floats, Floats]:
    """Low and high corner of the smallest box around some outlines."""
    points = np.array([point for outline in outlines for curve in outline for point in _extremes(curve)])
    return points.min(axis=0), points.max(axis=0)


def _extremes(curve: object) -> list[Point]:
    """Points of a curve among which are its extreme ones in x and y."""
    assert isinstance(curve, Segment | Arc)  # noqa: S101 - the shapes are made of nothing else
    points = [curve.start, curve.end]
    if isinstance(curve, Arc):
        low, high = sorted((curve.start_angle, curve.end_angle))
        quarter = np.pi / 2
        turns = range(int(np.ceil(low / quarter)), int(np.floor(high / quarter)) + 1)
        points += [Arc(curve.centre, curve.radius, k * quarter, k * quarter).start for k in turns]
    return points


def _reach(outline: Outline, centre: Floats) -> float:
    """Greatest distance of an outline from a point, m."""
    reach = 0.0
    for curve in outline:
        reach = max(reach, float(np.hypot(*(np.array(curve.start) - centre))))
        if isinstance(curve, Arc):
            reach = max(reach, float(np.hypot(*(np.array(curve.centre) - centre))) + curve.radius)
    return reach
