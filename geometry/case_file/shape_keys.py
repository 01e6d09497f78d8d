"""What the entries of all shapes have in common."""

from __future__ import annotations

from typing import ClassVar

from pydantic import Field

from nightcap.geometry.case_file.schema import Entry, Text
from nightcap.geometry.shapes import Shape


class ShapeKeys(Entry):
    """What every shape has."""

    is_thin: ClassVar[bool] = False
    """True for a figure without an inside, which only a conductor can have."""
    shape: Text = Field(description="Word for the shape.")

    def figure(self) -> Shape:
        """The figure described."""
        raise NotImplementedError
