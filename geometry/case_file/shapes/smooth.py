"""Smooth closed shapes: ellipses, and curves through points."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import Annotated

from pydantic import BeforeValidator, Field, ValidationInfo, model_validator

from nightcap.geometry.case_file.quantities import LIST_OF_POINTS, PositiveLength, points_of
from nightcap.geometry.case_file.shapes.keys import ShapeKeys, TurnedKeys
from nightcap.geometry.curves import Point
from nightcap.geometry.shapes import Ellipse, Smooth
from nightcap.geometry.shapes.parallel import meets_itself

THINNEST = 1e-3
"""Least ratio of an ellipse's axes."""


class EllipseKeys(TurnedKeys):
    """An ellipse about its centre."""

    width: PositiveLength = Field(description="Full axis along x before it is turned.")
    height: PositiveLength = Field(description="Full axis along y before it is turned.")

    @model_validator(mode="after")
    def _is_thick(self) -> EllipseKeys:
        if min(self.width, self.height) < THINNEST * max(self.width, self.height):
            raise ValueError(f"one axis must be at least {THINNEST:g} of the other")
        return self

    def figure(self) -> Ellipse:
        """The ellipse."""
        return Ellipse(self.at, self.width, self.height, math.radians(self.rotate))


def _around(value: object, info: ValidationInfo) -> tuple[Point, ...]:
    return points_of(value, info, least=3, example="[[1, 0], [0, 1], [-1, 0], [0, -1]]")


class SmoothKeys(ShapeKeys):
    """The smooth closed curve through points: a periodic cubic spline."""

    points: Annotated[tuple[Point, ...], BeforeValidator(_around), LIST_OF_POINTS] = Field(
        description="Points that it runs through, in either sense of rotation."
    )

    @model_validator(mode="after")
    def _is_simple(self) -> SmoothKeys:
        closed = [*self.points, self.points[0]]
        if any(math.dist(a, b) == 0 for a, b in pairwise(closed)):
            raise ValueError("points: two points that follow each other are the same")
        if meets_itself(self.figure().outline()):
            raise ValueError("points: the curve through them meets itself")
        return self

    def figure(self) -> Smooth:
        """The figure."""
        return Smooth(self.points)
