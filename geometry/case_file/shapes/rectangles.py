"""Rectangles and ovals."""

from __future__ import annotations

import math

from pydantic import Field, model_validator

from nightcap.geometry.case_file.quantities import LengthFromZero, PositiveLength
from nightcap.geometry.case_file.shapes.keys import TurnedKeys
from nightcap.geometry.shapes import Rectangle


class RectangleKeys(TurnedKeys):
    """A rectangle about its centre."""

    width: PositiveLength = Field(description="Along x before it is turned.")
    height: PositiveLength = Field(description="Along y before it is turned.")
    corner_radius: LengthFromZero = Field(0.0, description="Radius of the corners.")

    @model_validator(mode="after")
    def _corners_fit(self) -> RectangleKeys:
        if self.corner_radius > min(self.width, self.height) / 2 * (1 + 1e-12):
            raise ValueError("corner_radius must be at most half of the shorter side")
        return self

    def figure(self) -> Rectangle:
        """The rectangle."""
        radius = min(self.corner_radius, min(self.width, self.height) / 2)
        return Rectangle(self.at, self.width, self.height, radius, math.radians(self.rotate))


class OvalKeys(TurnedKeys):
    """Two half circles and the straight lines between them."""

    width: PositiveLength = Field(description="Along x before it is turned.")
    height: PositiveLength = Field(description="Along y before it is turned.")

    def figure(self) -> Rectangle:
        """The oval."""
        return Rectangle(self.at, self.width, self.height, min(self.width, self.height) / 2, math.radians(self.rotate))
