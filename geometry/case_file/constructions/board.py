"""A board: layers of laminate upon each other, traces on and in them, solder mask over all."""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import pairwise
from typing import Any

from pydantic import Field, model_validator

from nightcap.geometry.case import Conductor, Dielectric
from nightcap.geometry.case_file.constructions.built import Built, Place
from nightcap.geometry.case_file.constructions.groups import PlacedKeys
from nightcap.geometry.case_file.materials import MaterialKeys, MetalKeys
from nightcap.geometry.case_file.problems import one_of
from nightcap.geometry.case_file.quantities import Degrees, Length, PointOf, PositiveLength
from nightcap.geometry.case_file.schema import Flag, Text
from nightcap.geometry.curves import Point
from nightcap.geometry.shapes import Polygon, Rectangle, Shape


class LayerEntry(MaterialKeys):
    """One layer of laminate."""

    name: Text = Field("", description="What traces call it by; default: its number from below.")
    thickness: PositiveLength = Field(description="Thickness of the layer.")


class MaskEntry(MaterialKeys):
    """Solder mask: follows the upper surface of the board and of its traces at an even thickness."""

    thickness: PositiveLength = Field(description="Thickness of the mask.")


class TraceEntry(MetalKeys):
    """A trace of rectangular or trapezoidal section."""

    upon: Text | None = Field(None, description="It lies upon this layer; default: the topmost.")
    under: Text | None = Field(None, description="It lies below this layer, hanging from it.")
    x: Length = Field(description="Middle of the trace.")
    width: PositiveLength = Field(description="Width where it lies upon its layer (the foot).")
    top: PositiveLength | None = Field(None, description="Width of the other face, if it was etched narrower.")
    thickness: PositiveLength = Field(description="Thickness of the copper.")
    floating: Flag = Field(False, description="True for a trace without charge.")

    @model_validator(mode="after")
    def _one_side(self) -> TraceEntry:
        if self.upon is not None and self.under is not None:
            raise ValueError("needs one of upon and under, not both")
        return self

    def figure(self, surface: float) -> Shape:
        """The section of a trace whose foot lies at a height, m."""
        up = -1.0 if self.under is not None else 1.0
        far = surface + up * self.thickness
        if self.top is None or self.top == self.width:
            return Rectangle((self.x, (surface + far) / 2), self.width, self.thickness)
        foot, top = self.width / 2, self.top / 2
        corners = ((self.x - foot, surface), (self.x + foot, surface), (self.x + top, far), (self.x - top, far))
        return Polygon(corners)


class BoardKeys(PlacedKeys):
    """Layers from below upwards; ``at`` is the middle of the lowest face."""

    at: PointOf = Field((0.0, 0.0), description="Middle of its lowest face.")
    rotate: Degrees = Field(0.0, description="Degrees, counter-clockwise about that point.")
    width: PositiveLength = Field(description="Width of the board.")
    layers: Any = Field(description="Layers from below upwards: thickness, material, name.")
    traces: Any = Field(None, description="Name to trace: upon, x, width, top, thickness.")
    mask: Any = Field(None, description="Solder mask over the upper side: thickness, material.")


def read_board(place: Place, name: str) -> Built | None:
    """The layers, the mask that is painted before them, and the traces."""
    keys = place.keys(BoardKeys)
    layers = _layers(place)
    over = place.below("mask")
    mask = over.keys(MaskEntry) if over else None
    traces = _traces(place, layers)
    if keys is None or not layers:
        return None
    heights = _heights(layers)
    sheets = [
        Dielectric(f"{name}.{layer.name}", Rectangle((0.0, (low + high) / 2), keys.width, high - low), layer.record())
        for layer, (low, high) in zip(layers, pairwise(heights), strict=True)
    ]
    level = {layer.name: (low, high) for layer, (low, high) in zip(layers, pairwise(heights), strict=True)}
    conductors = tuple(
        Conductor(
            f"{name}.{own}",
            trace.figure(_foot(trace, level, heights[-1])),
            floating=trace.floating,
            conductivity=trace.siemens_per_metre(),
        )
        for own, trace in traces.items()
    )
    painted = _mask(name, mask, keys.width, heights[-1], conductors) + sheets if mask else sheets
    return Built(conductors, tuple(painted)).moved(keys.motion())


def _heights(layers: Sequence[LayerEntry]) -> list[float]:
    """Heights of all faces, m, from the lowest."""
    heights = [0.0]
    for layer in layers:
        heights.append(heights[-1] + layer.thickness)
    return heights


def _foot(trace: TraceEntry, level: dict[str, tuple[float, float]], top: float) -> float:
    """Height of the face on which a trace lies, m."""
    if trace.under is not None:
        return level[trace.under][0]
    return top if trace.upon is None else level[trace.upon][1]


def _layers(place: Place) -> list[LayerEntry]:
    listed = place.below("layers")
    if listed is None:
        return []
    if not isinstance(listed.tree, list) or not listed.tree:
        listed.note("must be a list of layers from below, e.g. [{thickness: 1.5, permittivity: 4.4}]")
        return []
    entries = [(k, below.keys(LayerEntry)) for k in range(len(listed.tree)) if (below := listed.below(k))]
    layers = [entry.model_copy(update={"name": entry.name or str(k + 1)}) for k, entry in entries if entry]
    names = [layer.name for layer in layers]
    if len(set(names)) < len(names):
        listed.note("two layers have one name")
    return layers if len(layers) == len(listed.tree) else []


def _traces(place: Place, layers: Sequence[LayerEntry]) -> dict[str, TraceEntry]:
    listed = place.below("traces")
    if listed is None:
        return {}
    if not isinstance(listed.tree, dict):
        listed.note("must be a mapping from names to traces")
        return {}
    known = [layer.name for layer in layers]
    traces = {}
    for own in listed.tree:
        below = listed.below(own)
        entry = below.keys(TraceEntry) if below else None
        if below is None or entry is None:
            continue
        unknown = next((word for word in (entry.upon, entry.under) if word is not None and word not in known), None)
        if unknown is None:
            traces[own] = entry
        elif known:
            below.note(one_of(unknown, known), "upon" if entry.upon else "under")
    return traces


def _mask(name: str, mask: MaskEntry, width: float, top: float, traces: Sequence[Conductor]) -> list[Dielectric]:
    """Mask over the board, and around the traces on top of it; the layers, painted later, cover what is below."""
    sheet = Rectangle((0.0, top + mask.thickness / 2), width, mask.thickness)
    painted = [Dielectric(f"{name}.mask", sheet, mask.record())]
    for trace in traces:
        if math.isclose(min(y for _, y in _corners(trace.shape)), top, rel_tol=0.0, abs_tol=1e-9 * width):
            around = trace.shape.grown(mask.thickness)
            painted.append(Dielectric(f"{name}.mask.{trace.name.removeprefix(name + '.')}", around, mask.record()))
    return painted


def _corners(shape: Shape) -> list[Point]:
    return [curve.start for curve in shape.outline()]
