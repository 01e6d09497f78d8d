"""Conductors of several figures, and stranded ones."""

from __future__ import annotations

import math
from typing import Annotated, Any, ClassVar, Literal

from pydantic import BeforeValidator, Field, ValidationInfo, model_validator

from nightcap.geometry.case_file.quantities import Gauge, PlainNumber, PositiveLength, whole
from nightcap.geometry.case_file.schema import COUNT, Entry
from nightcap.geometry.case_file.shapes.keys import ShapeKeys, TurnedKeys, exactly_one
from nightcap.geometry.motion import Motion
from nightcap.geometry.shapes import Circle, Shape, Strands
from nightcap.geometry.sites import hexagonal_sites, layered_sites

WHOLE_SHELLS = {7: 3, 19: 5, 37: 7, 61: 9}
"""Numbers of equal wires that fill whole layers, and how many of them lie across."""
EFFECTIVE = {7: 0.939, 19: 0.970, 37: 0.980}
"""Diameter of the round wire of the same capacitance in a coaxial cable, over the overall one. Source: MIL-C-17."""


def _count(value: object, info: ValidationInfo) -> int:
    number = whole(value, 1, 61, info)
    if number not in WHOLE_SHELLS:
        raise ValueError(f"must be one of {', '.join(map(str, WHOLE_SHELLS))}, which lie in whole layers")
    return number


class StrandsKeys(TurnedKeys):
    """Equal round wires in whole layers about the middle one: one conductor."""

    count: Annotated[int, BeforeValidator(_count), COUNT] = Field(description="Number of strands: 7, 19, 37 or 61.")
    strand_diameter: PositiveLength | None = Field(None, description="Diameter of one strand.")
    overall_diameter: PositiveLength | None = Field(None, description="Diameter over all strands.")
    awg: Gauge | None = Field(None, description="Gauge of one strand, ASTM B258.")
    lay: Literal["concentric", "hexagonal"] = Field(
        "concentric", description="concentric: each layer on a circle; hexagonal: closest packing."
    )
    form: Literal["true", "effective"] = Field(
        "true", description="true: every strand; effective: one round wire of the same capacitance."
    )
    factor: PlainNumber | None = Field(
        None, description="Effective over overall diameter; 7: 0.939, 19: 0.970, 37: 0.980."
    )

    @model_validator(mode="after")
    def _fits(self) -> StrandsKeys:
        exactly_one(self, "strand_diameter", "overall_diameter", "awg")
        if self.factor is not None and not 0.5 <= self.factor <= 1:
            raise ValueError("factor must lie between 0.5 and 1")
        if self.factor is not None and self.form == "true":
            raise ValueError("factor goes with form: effective")
        if self.form == "effective" and self.factor is None and self.count not in EFFECTIVE:
            raise ValueError(f"for {self.count} strands no published factor is at hand; give one with 'factor'")
        return self

    def _strand(self) -> float:
        return self.strand_diameter or self.awg or (self.overall_diameter or 0.0) / WHOLE_SHELLS[self.count]

    def figure(self) -> Shape:
        """The strands, or the wire that stands for them."""
        d = self._strand()
        if self.form == "effective":
            factor = self.factor or EFFECTIVE[self.count]
            return Circle(self.at, factor * WHOLE_SHELLS[self.count] * d / 2)
        if self.lay == "hexagonal":
            sites = hexagonal_sites(self.count, d)
        else:
            shells = (WHOLE_SHELLS[self.count] + 1) // 2
            sites = [site for site, _ in layered_sites(d, [(6 * shell, d) for shell in range(1, shells)])]
        strands = Strands(tuple(Circle(site, d / 2) for site in sites))
        return Motion(self.at, math.radians(self.rotate)).shape(strands)


class LayerOfWiresEntry(Entry):
    """Equal wires evenly around what lies within."""

    count: Annotated[int, BeforeValidator(lambda value, info: whole(value, 1, 200, info)), COUNT] = Field(
        description="Number of wires in the layer."
    )
    diameter: PositiveLength = Field(description="Diameter of each.")


class LayeredStrandsKeys(TurnedKeys):
    """Wires of unlike diameters in concentric layers, each upon the one below: one conductor."""

    core_diameter: PositiveLength = Field(description="Diameter of the wire in the middle.")
    layers: tuple[LayerOfWiresEntry, ...] = Field(description="From the inside out: count and diameter.")

    @model_validator(mode="after")
    def _fits(self) -> LayeredStrandsKeys:
        outer = self.core_diameter / 2
        for k, layer in enumerate(self.layers, start=1):
            radius = outer + layer.diameter / 2
            if layer.count > 1 and 2 * radius * math.sin(math.pi / layer.count) < layer.diameter * (1 - 1e-9):
                most = int(math.pi / math.asin(layer.diameter / 2 / radius) * (1 + 1e-9))
                raise ValueError(f"layers: at most {most} such wires have room in layer {k}")
            outer += layer.diameter
        return self

    def figure(self) -> Shape:
        """The wires."""
        wires = layered_sites(self.core_diameter, [(layer.count, layer.diameter) for layer in self.layers])
        strands = Strands(tuple(Circle(at, radius) for at, radius in wires))
        return Motion(self.at, math.radians(self.rotate)).shape(strands)


class UnionKeys(ShapeKeys):
    """Several figures that are one conductor; they may touch, overlap or lie apart."""

    has_parts: ClassVar[bool] = True
    parts: Any = Field(description="List of shapes.")
