"""Layers that run to infinity."""

from __future__ import annotations

import math

from pydantic import Field, model_validator

from nightcap.geometry.case_file.quantities import Length
from nightcap.geometry.case_file.shapes.keys import ShapeKeys
from nightcap.geometry.slab import Slab


class SlabKeys(ShapeKeys):
    """A layer between two heights that runs to infinity."""

    low: Length | None = Field(None, alias="from", description="Height of its lower edge; without it: no lower end.")
    high: Length | None = Field(None, alias="to", description="Height of its upper edge; without it: no upper end.")

    @model_validator(mode="after")
    def _has_edges(self) -> SlabKeys:
        if self.low is None and self.high is None:
            raise ValueError("needs from, to or both; a dielectric that fills all space is the background")
        if self.low is not None and self.high is not None and self.low >= self.high:
            raise ValueError("from must be less than to")
        return self

    def figure(self) -> Slab:
        """The slab."""
        low = -math.inf if self.low is None else self.low
        return Slab(low, math.inf if self.high is None else self.high)
