"""What lies around wires: a screen with or without a drain wire, a jacket."""

from __future__ import annotations

import math
from typing import Any

from pydantic import Field, model_validator

from nightcap.geometry.case import Conductor, Dielectric
from nightcap.geometry.case_file.constructions.built import Built, Place
from nightcap.geometry.case_file.constructions.groups import PlacedKeys
from nightcap.geometry.case_file.materials import MaterialKeys, MetalKeys
from nightcap.geometry.case_file.quantities import Degrees, Gauge, PositiveLength
from nightcap.geometry.case_file.schema import Entry
from nightcap.geometry.case_file.shapes.keys import exactly_one
from nightcap.geometry.shapes import Circle, Ring, Shape, Union


class DrainEntry(Entry):
    """A bare wire that touches the inside of a screen."""

    diameter: PositiveLength | None = Field(None, description="Diameter of the wire.")
    awg: Gauge | None = Field(None, description="Its gauge, ASTM B258.")
    facing: Degrees = Field(0.0, description="Direction in which it lies, degrees from the x axis.")

    @model_validator(mode="after")
    def _one_size(self) -> DrainEntry:
        exactly_one(self, "diameter", "awg")
        return self


class ScreenKeys(PlacedKeys, MetalKeys):
    """A round screen of even thickness, and its drain wire: one conductor."""

    inner_diameter: PositiveLength = Field(description="Diameter within.")
    thickness: PositiveLength = Field(description="Thickness of the foil or braid.")
    drain: Any = Field(None, description="A bare wire along the inside: diameter or awg, facing.")


class JacketKeys(PlacedKeys, MaterialKeys):
    """A round layer of insulation around everything."""

    inner_diameter: PositiveLength = Field(description="Diameter within.")
    thickness: PositiveLength = Field(description="Thickness of the layer.")


def read_screen(place: Place, name: str) -> Built | None:
    """A conductor with the construction's own name."""
    keys, below = place.keys(ScreenKeys), place.below("drain")
    drain = below.keys(DrainEntry) if below else None
    if keys is None or (below and drain is None):
        return None
    inner = keys.inner_diameter / 2
    shape: Shape = Ring((0.0, 0.0), inner + keys.thickness, inner)
    if below and drain:
        radius = (drain.diameter or drain.awg or 0.0) / 2
        if radius >= inner / 2:
            below.note("the drain wire fills more than half of the screen")
            return None
        angle = math.radians(drain.facing)
        centre = ((inner - radius) * math.cos(angle), (inner - radius) * math.sin(angle))
        shape = Union((shape, Circle(centre, radius)))
    return Built((Conductor(name, shape, conductivity=keys.siemens_per_metre()),)).moved(keys.motion())


def read_jacket(place: Place, name: str) -> Built | None:
    """A dielectric with the construction's own name."""
    keys = place.keys(JacketKeys)
    if keys is None:
        return None
    inner = keys.inner_diameter / 2
    ring = Ring((0.0, 0.0), inner + keys.thickness, inner)
    return Built((), (Dielectric(name, ring, keys.record()),)).moved(keys.motion())
