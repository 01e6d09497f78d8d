"""Sectors, and strips bent around a circle."""

from __future__ import annotations

import math

from pydantic import Field, model_validator

from nightcap.geometry.case_file.quantities import Degrees, LengthFromZero, PointOf, PositiveLength
from nightcap.geometry.case_file.shapes.keys import ShapeKeys, TurnedKeys, exactly_one
from nightcap.geometry.shapes import LappedStrip, Sector, Shape


class SectorKeys(TurnedKeys):
    """Part of a ring or of a disc between two directions, counter-clockwise; ``at`` is the centre of its arcs."""

    at: PointOf = Field((0.0, 0.0), description="Centre of its arcs.")
    rotate: Degrees = Field(0.0, description="Degrees, counter-clockwise about that centre.")
    outer_radius: PositiveLength = Field(description="Radius of the outer arc.")
    inner_radius: LengthFromZero = Field(0.0, description="Radius of the inner arc; 0 for a part of a disc.")
    start: Degrees = Field(alias="from", description="Direction of one flank, degrees from the x axis.")
    end: Degrees = Field(alias="to", description="Direction of the other flank, degrees, counter-clockwise.")
    corner_radius: LengthFromZero = Field(0.0, description="Radius of the corners.")

    @model_validator(mode="after")
    def _fits(self) -> SectorKeys:
        figure = self.figure()
        if not 1e-3 < figure.end - figure.start < math.tau - 1e-3:
            raise ValueError("from and to must differ, by less than a full turn")
        if figure.inner >= figure.outer:
            raise ValueError("inner_radius must be less than outer_radius")
        if figure.corner_radius and not figure.inner and figure.end - figure.start > math.pi * (1 - 1e-6):
            raise ValueError("corner_radius: corners can be rounded where the sector is less than a half disc")
        most = figure.greatest_corner_radius
        if figure.corner_radius > most * (1 + 1e-9):
            raise ValueError(f"corner_radius: at most {most:.6g} m fits here")
        return self

    def figure(self) -> Sector:
        """The sector."""
        start, end = (math.radians(angle + self.rotate) for angle in (self.start, self.end))
        end = start + (end - start) % math.tau
        return Sector(self.at, self.inner_radius, self.outer_radius, start, end, self.corner_radius)


class ArcStripKeys(ShapeKeys):
    """A foil around a circle that does not close, or that overlaps itself."""

    inner_diameter: PositiveLength | None = Field(None, description="Diameter within.")
    inner_radius: PositiveLength | None = Field(None, description="Radius within.")
    thickness: PositiveLength = Field(description="Thickness of the foil.")
    gap: PositiveLength | None = Field(None, description="What is left open, along the inner circle.")
    overlap: PositiveLength | None = Field(None, description="How far the end lies over the beginning.")
    clearance: PositiveLength | None = Field(None, description="Distance of the two layers where they overlap.")
    facing: Degrees = Field(0.0, description="Direction of the middle of the gap or overlap, degrees from the x axis.")
    at: PointOf = Field((0.0, 0.0), description="Centre.")

    @model_validator(mode="after")
    def _fits(self) -> ArcStripKeys:
        exactly_one(self, "inner_diameter", "inner_radius")
        exactly_one(self, "gap", "overlap")
        if (self.overlap is None) != (self.clearance is None):
            raise ValueError("overlap and clearance go together")
        if self.gap is not None and self.gap >= math.tau * self._radius() * 0.999:
            raise ValueError("gap: there is nothing left of the foil")
        if self.overlap is not None and self.overlap > math.pi * self._radius():
            raise ValueError("overlap must be at most half of the circumference")
        return self

    def _radius(self) -> float:
        return self.inner_radius or (self.inner_diameter or 0.0) / 2

    def figure(self) -> Shape:
        """The foil."""
        radius, facing = self._radius(), math.radians(self.facing)
        if self.gap is not None:
            half = self.gap / radius / 2
            return Sector(self.at, radius, radius + self.thickness, facing + half, facing - half + math.tau)
        lap = (self.overlap or 0.0) / radius
        return LappedStrip(self.at, radius, self.thickness, lap, self.clearance or 0.0, facing - lap / 2)
