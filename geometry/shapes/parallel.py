"""Parallel curves: outlines at an even distance outside a figure, exact for segments and arcs."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from nightcap.geometry.crossing import cut_parameters
from nightcap.geometry.curves import Arc, Curve, Point, Segment, direction_and_bend
from nightcap.geometry.shapes.outline import Outline, Shape


@dataclass(frozen=True)
class Grown:
    """A figure with a layer of even thickness laid around it; sharp corners are rounded about their points."""

    figure: Shape
    thickness: float
    """In metres."""

    def outline(self) -> Outline:
        return parallel(self.figure.outline(), self.thickness)

    def grown(self, thickness: float) -> Grown:
        return Grown(self.figure, self.thickness + thickness)


def parallel(outline: Outline, distance: float) -> Outline:
    """The outline at a distance, m, on the right of a closed one, which is outside.

    Raises ValueError where an arc turns inwards too sharply, or where the result would meet itself.
    """
    if distance == 0.0:  # else corners would turn into arcs of no length
        return outline
    turns = [_turn(before, curve) for before, curve in pairwise((outline[-1], *outline))]
    curves: list[Curve] = []
    for curve, turn, following in zip(outline, turns, turns[1:] + turns[:1], strict=True):
        if turn > 0:
            start = direction_and_bend(curve, from_start=True)[0] - math.pi / 2
            curves.append(Arc(curve.start, distance, start - turn, start))
        curves.append(_trimmed(_shifted(curve, distance), curve, (turn, following), distance))
    result = tuple(curves)
    if meets_itself(result):
        raise ValueError("would meet itself")
    return result


def _turn(before: Curve, after: Curve) -> float:
    """Angle of the corner where two curves meet, radians, positive to the left; 0 where they run on smoothly."""
    arriving = direction_and_bend(before, from_start=False)[0] + math.pi
    turn = math.remainder(direction_and_bend(after, from_start=True)[0] - arriving, math.tau)
    return turn if abs(turn) > 1e-9 else 0.0


def _shifted(curve: Curve, distance: float) -> Curve:
    if isinstance(curve, Arc):
        radius = curve.radius + math.copysign(distance, curve.sweep)
        if radius <= 1e-9 * curve.radius:
            raise ValueError("is thicker than a hollow of the outline is round")
        return Arc(curve.centre, radius, curve.start_angle, curve.end_angle)
    if not isinstance(curve, Segment):
        raise ValueError("is bent unevenly; draw the layer as a dielectric of its own")
    angle = direction_and_bend(curve, from_start=True)[0] - math.pi / 2
    shift = (distance * math.cos(angle), distance * math.sin(angle))
    return Segment(_sum(curve.start, shift), _sum(curve.end, shift))


def _trimmed(shifted: Curve, curve: Curve, turns: tuple[float, float], distance: float) -> Curve:
    """A shifted curve without what lies beyond its neighbours, at corners that turn to the right."""
    cuts = [distance * math.tan(-turn / 2) if turn < 0 else 0.0 for turn in turns]
    if not any(cuts):
        return shifted
    if not isinstance(curve, Segment):
        raise ValueError("has to follow a sharp hollow corner beside an arc")
    if sum(cuts) >= curve.length:
        raise ValueError("is too thick for a hollow corner")
    return shifted.part(cuts[0] / curve.length, 1 - cuts[1] / curve.length)


def meets_itself(outline: Outline) -> bool:
    """Whether the curves of a closed outline meet anywhere but at the ends where they follow each other."""
    size = float(np.ptp([curve.start for curve in outline], axis=0).max())
    return any(len(cuts) > 2 for cuts in cut_parameters(outline, 1e-9 * size))


def _sum(one: Point, two: Point) -> Point:
    return (one[0] + two[0], one[1] + two[1])
