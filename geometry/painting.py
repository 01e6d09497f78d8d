"""What a case draws, as outlines in the order in which they are painted."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from nightcap.geometry.case import Case, Material, Shield
from nightcap.geometry.curves import Arc, Floats, Point, Segment
from nightcap.geometry.domain import Domain, shielded, unbounded
from nightcap.geometry.polynomial_arc import PolynomialArc
from nightcap.geometry.shapes import Outline, parts_of
from nightcap.geometry.slab import Slab

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
    """Outlines in the order of painting, then the domain's own, then the window's that symmetry lines leave of it."""

    drawn: tuple[Drawn, ...]
    domain: Domain

    @property
    def size(self) -> float:
        """Greatest extent of the drawn shapes, m."""
        return self.domain.size

    @property
    def tolerance(self) -> float:
        """Points and edges this close are one, m."""
        return TOLERANCE * self.size

    @property
    def outlines(self) -> list[Outline]:
        """All outlines; the domain's comes after the drawn ones, the window's last, if there is one."""
        window = self.domain.window
        return [d.outline for d in self.drawn] + [self.domain.outline] + ([window] if window else [])

    @property
    def around(self) -> frozenset[int]:
        """Numbers of the outlines that what is solved lies inside of: the domain's and the window's."""
        return frozenset(range(len(self.drawn), len(self.outlines)))


def paint(case: Case) -> Drawing:
    """Lists the outlines: dielectrics, coatings from the outside in, conductors."""
    conductors = _painted_conductors(case)
    bodies = [() if isinstance(d.shape, Slab) else d.shape.outline() for d in case.dielectrics]
    domain = _domain(case, [*filter(None, bodies), *(d.outline for d in conductors)])
    dielectrics = []
    for d, body in zip(case.dielectrics, bodies, strict=True):
        outline = domain.filled_by(d.shape) if isinstance(d.shape, Slab) else body
        dielectrics.append(Drawn(outline, f"dielectrics.{d.name}", None, d.material))
    return Drawing((*dielectrics, *conductors), domain)


def _painted_conductors(case: Case) -> list[Drawn]:
    """Coatings from the outside in, one conductor after the other; then the conductors. Unions part by part."""
    drawn: list[Drawn] = []
    for number, conductor in enumerate(case.conductors):
        thickness = 0.0
        coats: list[Drawn] = []
        for k, coating in enumerate(conductor.coatings):
            thickness += coating.thickness
            key = f"conductors.{conductor.name}.coatings[{k}]"
            layer = parts_of(conductor.shape.grown(thickness))
            coats = [*(Drawn(part.outline(), key, number, coating.material) for part in layer), *coats]
        drawn += coats
    for number, conductor in enumerate(case.conductors):
        key = f"conductors.{conductor.name}"
        drawn += [Drawn(part.outline(), key, number) for part in parts_of(conductor.shape)]
    return drawn


def _domain(case: Case, outlines: list[Outline]) -> Domain:
    if isinstance(case.boundary, Shield):
        shield = case.boundary.shape.outline()
        return shielded(case, shield, *box([*outlines, shield]))
    return unbounded(case, *box(outlines), reach=lambda middle: max(_reach(o, middle) for o in outlines))


def box(outlines: list[Outline]) -> tuple[Floats, Floats]:
    """Low and high corner of the smallest box around some outlines."""
    points = np.array([point for outline in outlines for curve in outline for point in _extremes(curve)])
    return points.min(axis=0), points.max(axis=0)


def _extremes(curve: object) -> list[Point]:
    """Points around a curve among which are its extreme ones in x and y; of a polynomial arc the control points."""
    if isinstance(curve, PolynomialArc):
        return list(curve.control)
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
        for point in curve.control if isinstance(curve, PolynomialArc) else ():
            reach = max(reach, float(np.hypot(*(np.array(point) - centre))))
        if isinstance(curve, Arc):
            reach = max(reach, float(np.hypot(*(np.array(curve.centre) - centre))) + curve.radius)
    return reach
