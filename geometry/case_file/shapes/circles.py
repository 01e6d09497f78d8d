"""Circles, rings and ovals."""

from __future__ import annotations

from pydantic import Field, model_validator

from nightcap.geometry.case_file.quantities import Gauge, PointOf, PositiveLength
from nightcap.geometry.case_file.shapes.keys import ShapeKeys, exactly_one
from nightcap.geometry.shapes import Circle, Ring


class CircleKeys(ShapeKeys):
    """A circle by its diameter, radius or wire gauge."""

    diameter: PositiveLength | None = Field(None, description="Diameter.")
    radius: PositiveLength | None = Field(None, description="Radius.")
    awg: Gauge | None = Field(None, description="American wire gauge, ASTM B258.")
    at: PointOf = Field((0.0, 0.0), description="Centre.")

    @model_validator(mode="after")
    def _one_size(self) -> CircleKeys:
        exactly_one(self, "diameter", "radius", "awg")
        return self

    def figure(self) -> Circle:
        """The circle."""
        if self.radius is not None:
            return Circle(self.at, self.radius)
        return Circle(self.at, (self.diameter or self.awg or 0.0) / 2)


class RingKeys(ShapeKeys):
    """A tube: the space between two circles. What lies in its hole is drawn by itself."""

    outer_diameter: PositiveLength | None = Field(None, description="Diameter outside.")
    outer_radius: PositiveLength | None = Field(None, description="Radius outside.")
    inner_diameter: PositiveLength | None = Field(None, description="Diameter of the hole.")
    inner_radius: PositiveLength | None = Field(None, description="Radius of the hole.")
    wall: PositiveLength | None = Field(None, description="Thickness of the wall.")
    at: PointOf = Field((0.0, 0.0), description="Centre.")

    @model_validator(mode="after")
    def _hole_fits(self) -> RingKeys:
        exactly_one(self, "outer_diameter", "outer_radius")
        exactly_one(self, "inner_diameter", "inner_radius", "wall")
        figure = self.figure()
        if not 0 < figure.inner < figure.outer:
            raise ValueError("the hole must be smaller than the ring, and the wall less thick than the ring is wide")
        return self

    def figure(self) -> Ring:
        """The ring."""
        outer = self.outer_radius or (self.outer_diameter or 0.0) / 2
        if self.wall is not None:
            return Ring(self.at, outer, outer - self.wall)
        return Ring(self.at, outer, self.inner_radius or (self.inner_diameter or 0.0) / 2)
