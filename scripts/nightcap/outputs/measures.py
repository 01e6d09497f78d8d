"""The dimensions that a drawing shows: overall, the smallest figure, the thinnest layer, the narrowest gap."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from scipy.spatial import ConvexHull

from nightcap.geometry.case import Case
from nightcap.geometry.curves import Floats, Point
from nightcap.geometry.gaps import smallest_gap, surfaces
from nightcap.geometry.motion import Motion
from nightcap.geometry.painting import Drawing, box
from nightcap.geometry.shapes import Outline
from nightcap.geometry.slab import Slab
from nightcap.geometry.strip import Strip
from nightcap.outputs.outlines import points_along


@dataclass(frozen=True)
class Measure:
    """A length between two points of a drawing."""

    what: str
    ends: tuple[Point, Point]
    """In metres."""

    @property
    def length(self) -> float:
        """In metres."""
        return math.dist(*self.ends)


def measures(case: Case, drawing: Drawing) -> list[Measure]:
    """The narrowest gap, the smallest figure and the thinnest layer, as far as there are any."""
    found = []
    gap = smallest_gap(surfaces(case, drawing))
    if gap and gap.width > drawing.tolerance:  # else they meet, which is told as a mistake
        names = [conductor.name for conductor in case.conductors]
        names += [case.outer_conductor or ""]
        one, two = (names[k] for k in gap.conductors)
        found.append(Measure(f"narrowest gap between conductors, {one} to {two}", gap.ends))
    figures = [_caliper(f"smallest figure, {name}", outline) for name, outline in _figures(case, drawing)]
    layers = list(_layers(case))
    found += [min(kind, key=lambda measure: measure.length) for kind in (figures, layers) if kind]
    return found


def _figures(case: Case, drawing: Drawing) -> Iterator[tuple[str, Outline]]:
    """Conductors and dielectrics, without coatings and slabs."""
    slabs = {dielectric.name for dielectric in case.dielectrics if isinstance(dielectric.shape, Slab)}
    for drawn in drawing.drawn:
        if drawn.conductor is not None and isinstance(case.conductors[drawn.conductor].shape, Strip):
            continue  # of no thickness
        group, _, name = drawn.key.partition(".")
        if drawn.material is None or (group == "dielectrics" and name not in slabs):
            yield name, drawn.outline


def _layers(case: Case) -> Iterator[Measure]:
    """Each coating, measured to the right of its conductor."""
    for conductor in case.conductors:
        inner = conductor.shape.outline()
        points = np.concatenate([points_along(curve) for curve in inner])
        x, y = points[np.argmax(points[:, 0])].tolist()
        for layer in conductor.coatings:
            yield Measure(f"thinnest coating, on {conductor.name}", ((x, y), (x + layer.thickness, y)))
            x += layer.thickness


def _caliper(what: str, outline: Outline) -> Measure:
    """The least distance of two parallel lines that hold a figure between them."""
    points = np.concatenate([points_along(curve) for curve in outline])
    hull = points[ConvexHull(points).vertices]
    edges = np.roll(hull, -1, axis=0) - hull
    normals = np.stack([-edges[:, 1], edges[:, 0]], axis=1) / np.hypot(*edges.T)[:, None]
    reach = (hull[None] - hull[:, None]) @ normals[:, :, None]
    k = int(np.argmin(reach[:, :, 0].max(axis=1)))
    return Measure(what, _across(outline, normals[k], hull.mean(axis=0)))


def _across(outline: Outline, normal: Floats, middle: Floats) -> tuple[Point, Point]:
    """Ends of a line along a normal, through the middle of a figure, exactly as long as the figure is deep there."""
    turn = Motion(angle=-math.atan2(normal[1], normal[0]))
    low, high = box([tuple(turn.curve(curve) for curve in outline)])
    start, end = (middle + (x - middle @ normal) * normal for x in (low[0], high[0]))
    (ax, ay), (bx, by) = start.tolist(), end.tolist()
    return (ax, ay), (bx, by)
