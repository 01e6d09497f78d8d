"""What every shape of a case file has."""

from __future__ import annotations

from typing import ClassVar

from pydantic import Field

from nightcap.geometry.case_file.quantities import Degrees, PointOf
from nightcap.geometry.case_file.schema import Entry, Text
from nightcap.geometry.shapes import Shape


class ShapeKeys(Entry):
    """What every shape has."""

    is_thin: ClassVar[bool] = False
    """Whether the shape encloses nothing."""
    has_parts: ClassVar[bool] = False
    """Whether the shape is made of others."""
    shape: Text = Field(description="Word for the shape.")

    def figure(self) -> Shape:
        """The figure described. Raises ValueError where the numbers allow none."""
        raise NotImplementedError


class TurnedKeys(ShapeKeys):
    """What shapes have that lie about a centre and may be turned."""

    at: PointOf = Field((0.0, 0.0), description="Centre.")
    rotate: Degrees = Field(0.0, description="Degrees, counter-clockwise about the centre.")


def exactly_one(entry: Entry, *names: str) -> str:
    """The one of some keys that is given. Raises ValueError if none or several are."""
    given = [name for name in names if getattr(entry, name) is not None]
    if len(given) != 1:
        said = "none is given" if not given else f"{', '.join(given)} are given"
        raise ValueError(f"needs exactly one of {', '.join(names)}; {said}")
    return given[0]
