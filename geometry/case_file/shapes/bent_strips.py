"""Strips along polylines."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import BeforeValidator, Field, ValidationInfo, model_validator

from nightcap.geometry.case_file.quantities import LIST_OF_POINTS, PositiveLength, points_of
from nightcap.geometry.case_file.shapes.keys import ShapeKeys
from nightcap.geometry.curves import Point
from nightcap.geometry.shapes import BentStrip


def _path(value: object, info: ValidationInfo) -> tuple[Point, ...]:
    return points_of(value, info, least=2, example="[[0, 0], [2, 0], [2, 1]]")


class BentStripKeys(ShapeKeys):
    """A strip of even thickness along points, round on the outside of its joints."""

    points: Annotated[tuple[Point, ...], BeforeValidator(_path), LIST_OF_POINTS] = Field(
        description="Points of its middle line."
    )
    thickness: PositiveLength = Field(description="Thickness of the strip.")
    ends: Literal["flat", "round"] = Field("flat", description="How its two ends are shaped.")

    @model_validator(mode="after")
    def _is_simple(self) -> BentStripKeys:
        if any(one == two for one, two in zip(self.points, self.points[1:], strict=False)):
            raise ValueError("points: two points that follow each other are the same")
        try:
            self.figure().outline()
        except ValueError as error:
            raise ValueError(f"points: the strip {error}") from error
        return self

    def figure(self) -> BentStrip:
        """The strip."""
        return BentStrip(self.points, self.thickness, self.ends == "round")
