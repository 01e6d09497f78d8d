"""The infinitely thin strip in a case file."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import Annotated, ClassVar

from pydantic import BeforeValidator, Field, model_validator

from nightcap.geometry.case_file.quantities import LIST_OF_POINTS, MOST_POINTS, Degrees, PointOf, PositiveLength
from nightcap.geometry.case_file.shapes.keys import ShapeKeys
from nightcap.geometry.strip import Strip

CLOSEST = 1e-6
"""Least distance between two parts of a strip that do not follow each other, relative to its size."""
SHARPEST = math.radians(0.1)
"""A strip that turns back on itself more closely is refused."""


def _some_points(value: object) -> object:
    if not isinstance(value, list) or len(value) < 2:
        raise ValueError("must be a list of at least 2 points, e.g. [[-0.1, 0.4], [0.1, 0.4]]")
    if len(value) > MOST_POINTS:
        raise ValueError(f"must be at most {MOST_POINTS} points")
    return value


StripPoints = Annotated[tuple[PointOf, ...], BeforeValidator(_some_points), LIST_OF_POINTS]


class StripKeys(ShapeKeys):
    """A conductor of no thickness: through points, or straight of a width about its middle."""

    is_thin: ClassVar[bool] = True
    points: StripPoints | None = Field(None, description="Points that the strip runs through, ends included.")
    width: PositiveLength | None = Field(None, description="Of a straight strip, from end to end.")
    at: PointOf | None = Field(None, description="Middle of a straight strip; without it [0, 0].")
    rotate: Degrees | None = Field(None, description="Of a straight strip: degrees, counter-clockwise.")

    @model_validator(mode="after")
    def _one_form(self) -> StripKeys:
        if (self.points is None) == (self.width is None):
            said = "neither is given" if self.width is None else "both are given"
            raise ValueError(f"needs exactly one of points, width; {said}")
        if self.points is not None and (self.at is not None or self.rotate is not None):
            raise ValueError("at and rotate go with width; with points, write the points where they are")
        return self

    @model_validator(mode="after")
    def _meets_itself_nowhere(self) -> StripKeys:
        if self.points is None:
            return self
        size = max(math.dist(self.points[0], point) for point in self.points)
        for k, (a, b) in enumerate(pairwise(self.points), start=1):
            if math.dist(a, b) <= CLOSEST * size:
                raise ValueError(f"points: points {k} and {k + 1} are the same")
        strip = Strip(self.points)
        angle, corner = strip.sharpest
        if angle < SHARPEST:
            raise ValueError(f"points: the strip runs back on itself at point {corner}")
        distance, one, two = strip.nearest
        if distance <= CLOSEST * size:
            raise ValueError(f"points: parts {one} and {two} of the strip cross or touch; it must not meet itself")
        return self

    def figure(self) -> Strip:
        """The strip."""
        if self.points is not None:
            return Strip(self.points)
        assert self.width is not None  # noqa: S101 - one of the two is given
        (x, y), angle = self.at or (0.0, 0.0), math.radians(self.rotate or 0.0)
        u, v = self.width / 2 * math.cos(angle), self.width / 2 * math.sin(angle)
        return Strip(((x - u, y - v), (x + u, y + v)))
