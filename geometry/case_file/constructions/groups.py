"""Groups of equal wires: pair, quad, ring, bundle, ribbon; with a filler and a belt around them."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from typing import Annotated, Any

from pydantic import BeforeValidator, Field, ValidationInfo, WithJsonSchema

from nightcap.geometry.case import Conductor, Dielectric
from nightcap.geometry.case_file.constructions.built import Built, Place
from nightcap.geometry.case_file.constructions.wires import overall_size, placed, read_wire
from nightcap.geometry.case_file.materials import MaterialKeys
from nightcap.geometry.case_file.quantities import Degrees, PointOf, PositiveLength, whole
from nightcap.geometry.case_file.schema import COUNT, NAMES, Entry, Text
from nightcap.geometry.curves import Point
from nightcap.geometry.motion import Motion
from nightcap.geometry.shapes import Circle, Ring
from nightcap.geometry.sites import hexagonal_sites, ring_sites, row_sites, touching_ring_radius

MOST_WIRES = 500
Sites = Callable[[int, float], list[Point]]
"""From the number of wires and the distance of neighbours, m, to their centres."""


def _wires(value: object, info: ValidationInfo) -> int:
    return whole(value, 2, MOST_WIRES, info)


def _names(value: object) -> tuple[str, ...]:
    if not isinstance(value, list) or any(not isinstance(name, str) for name in value):
        raise ValueError("must be a list of names, e.g. [red, white]")
    if len(set(value)) < len(value):
        raise ValueError("holds a name twice")
    return tuple(value)


Count = Annotated[int, BeforeValidator(_wires), COUNT]
Names = Annotated[tuple[str, ...], BeforeValidator(_names), WithJsonSchema({"title": "list of names", **NAMES})]


class PlacedKeys(Entry):
    """What every construction has."""

    kind: Text = Field(description="Word for the construction.")
    at: PointOf = Field((0.0, 0.0), description="Its middle.")
    rotate: Degrees = Field(0.0, description="Degrees, counter-clockwise about its middle.")

    def motion(self) -> Motion:
        """From the origin to its place."""
        return Motion(self.at, math.radians(self.rotate))


class FillerEntry(MaterialKeys):
    """A round body in which the wires lie."""

    diameter: PositiveLength | None = Field(None, description="Default: around all wires.")


class BeltEntry(MaterialKeys):
    """A layer around the filler, or around all wires."""

    thickness: PositiveLength = Field(description="Thickness of the layer.")


class GroupKeys(PlacedKeys):
    """Equal wires in a regular arrangement."""

    wire: Any = Field(description="The wire: shape (circle unless named), its size, coatings; no place.")
    pitch: PositiveLength | None = Field(None, description="Distance of neighbours' centres; default: they touch.")
    names: Names | None = Field(None, description="Names of the wires; default: 1, 2, 3 ...")
    filler: Any = Field(None, description="A round body in which the wires lie: material, diameter.")
    belt: Any = Field(None, description="A layer around the filler, or around all wires: material, thickness.")


class PairKeys(GroupKeys):
    """Two wires side by side along x."""


class QuadKeys(GroupKeys):
    """Four wires at the corners of a square; 1 and 3, 2 and 4 are its pairs. Pitch is the side of the square."""


class RingKeys(GroupKeys):
    """Wires evenly around a circle, the first on the x axis."""

    count: Count = Field(description="Number of wires.")


class BundleKeys(GroupKeys):
    """Wires on a hexagonal grid, from the middle outwards."""

    count: Count = Field(description="Number of wires.")


class RibbonKeys(GroupKeys):
    """Wires in a row along x."""

    count: Count = Field(description="Number of wires.")


def _around(count: int, pitch: float) -> list[Point]:
    return ring_sites(count, touching_ring_radius(count, pitch))


def _square(count: int, pitch: float) -> list[Point]:
    return ring_sites(count, touching_ring_radius(count, pitch), math.radians(135.0))


def read_pair(place: Place, name: str) -> Built | None:
    """Two wires."""
    return _read(place, name, PairKeys, row_sites, 2)


def read_quad(place: Place, name: str) -> Built | None:
    """Four wires."""
    return _read(place, name, QuadKeys, _square, 4)


def read_ring(place: Place, name: str) -> Built | None:
    """Wires around a circle."""
    return _read(place, name, RingKeys, _around)


def read_bundle(place: Place, name: str) -> Built | None:
    """Wires on a hexagonal grid."""
    return _read(place, name, BundleKeys, hexagonal_sites)


def read_ribbon(place: Place, name: str) -> Built | None:
    """Wires in a row."""
    return _read(place, name, RibbonKeys, row_sites)


def _read(place: Place, name: str, model: type[GroupKeys], sites: Sites, count: int = 0) -> Built | None:
    keys, wire = place.keys(model), read_wire(place)
    filler, belt = place.below("filler"), place.below("belt")
    fill = filler.keys(FillerEntry) if filler else None
    wrap = belt.keys(BeltEntry) if belt else None
    if keys is None or wire is None:
        return None
    count = count or getattr(keys, "count", 0)
    names = keys.names or tuple(str(k + 1) for k in range(count))
    if len(names) != count:
        place.note(f"must hold {count} names, one per wire; it holds {len(names)}", "names")
        return None
    centres = sites(count, keys.pitch or max(overall_size(wire)))
    wires = tuple(placed(wire, f"{name}.{own}", at) for own, at in zip(names, centres, strict=True))
    return Built(wires, _sheath(name, wire, centres, fill, wrap)).moved(keys.motion())


def _sheath(
    name: str, wire: Conductor, centres: Sequence[Point], fill: FillerEntry | None, wrap: BeltEntry | None
) -> tuple[Dielectric, ...]:
    """Belt and filler around wires."""
    inner = 2 * max(math.hypot(*at) for at in centres) + max(overall_size(wire))
    inner = fill.diameter if fill and fill.diameter else inner
    painted = []
    if wrap:
        around = Ring((0.0, 0.0), inner / 2 + wrap.thickness, inner / 2)
        painted.append(Dielectric(f"{name}.belt", around, wrap.record()))
    if fill:
        painted.append(Dielectric(f"{name}.filler", Circle((0.0, 0.0), inner / 2), fill.record()))
    return tuple(painted)
