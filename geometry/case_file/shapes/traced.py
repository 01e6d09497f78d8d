"""Outlines that were drawn elsewhere: SVG path data, well-known text, files of either."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Annotated, Any

from pydantic import BeforeValidator, Field, PrivateAttr, ValidationInfo, WithJsonSchema, model_validator

from nightcap.geometry.case_file.quantities import LENGTHS, Degrees, PlainNumber, PointOf
from nightcap.geometry.case_file.schema import Flag, Text
from nightcap.geometry.case_file.shapes.keys import TurnedKeys, exactly_one
from nightcap.geometry.curves import Arc, Curve, Segment
from nightcap.geometry.motion import Motion
from nightcap.geometry.polynomial_arc import PolynomialArc
from nightcap.geometry.shapes import Outline, Traced
from nightcap.geometry.shapes.parallel import meets_itself
from nightcap.geometry.traced import closed, from_path_data, from_well_known_text

LARGEST = 200_000
"""Bytes of a file."""


def _unit(value: object) -> str:
    if not isinstance(value, str) or value not in LENGTHS:
        raise ValueError(f"{value!r} is no unit of length; allowed: {', '.join(LENGTHS)}")
    return value


class OutlineKeys(TurnedKeys):
    """A closed outline from SVG path data or well-known text; ``at`` is where its origin goes."""

    at: PointOf = Field((0.0, 0.0), description="Where the origin of its numbers goes.")
    rotate: Degrees = Field(0.0, description="Degrees, counter-clockwise about its origin.")
    path: Text | None = Field(None, description="SVG path data, e.g. 'M 0 0 H 2 V 1 Z'.")
    wkt: Text | None = Field(None, description="OGC well-known text of one polygon.")
    file: Text | None = Field(None, description="A file beside the case: .svg with one path, or .wkt.")
    unit: Annotated[str, BeforeValidator(_unit), WithJsonSchema({"enum": list(LENGTHS)})] | None = Field(
        None, description="Unit of its numbers; default: that of the file."
    )
    scale: PlainNumber = Field(1.0, description="Its numbers are multiplied by this.")
    flip: Flag = Field(False, description="True to mirror y, which runs downwards in SVG.")
    _outline: Outline = PrivateAttr(())

    @model_validator(mode="after")
    def _read(self, info: ValidationInfo) -> OutlineKeys:
        context: dict[str, Any] = info.context or {}
        word = exactly_one(self, "path", "wkt", "file")
        if self.scale <= 0:
            raise ValueError("scale must be greater than 0")
        try:
            if word == "file":
                drawn = _from_file(Path(context.get("folder", ".")) / (self.file or ""))
            else:
                drawn = from_well_known_text(self.wkt or "") if self.path is None else from_path_data(self.path)
            factor = self.scale * (LENGTHS[self.unit] if self.unit else context.get("unit", 1e-3))
            motion = Motion(self.at, math.radians(self.rotate), mirrored=self.flip)
            self._outline = closed([motion.curve(_scaled(curve, factor)) for curve in drawn])
            if meets_itself(self._outline):
                raise ValueError("crosses or touches itself")
        except ValueError as error:
            raise ValueError(f"{word}: {error}") from error
        return self

    def figure(self) -> Traced:
        """The figure."""
        return Traced(self._outline)


def _from_file(path: Path) -> Outline:
    """The outline in a file. Raises ValueError."""
    try:
        if path.stat().st_size > LARGEST:
            raise ValueError(f"is larger than {LARGEST} bytes")
        text = path.read_text(encoding="utf-8-sig")
    except OSError as error:
        raise ValueError(f"cannot be read: {error.strerror or error}") from error
    except UnicodeDecodeError as error:
        raise ValueError("is not text in UTF-8") from error
    if path.suffix.lower() == ".svg":
        return from_path_data(_path_in(text))
    return from_well_known_text(text)


def _path_in(text: str) -> str:
    """The path data of the only path of an SVG file. Raises ValueError."""
    from xml.etree import ElementTree as ET

    if "<!DOCTYPE" in text or "<!ENTITY" in text:
        raise ValueError("must not hold a document type or entities")
    try:
        root = ET.fromstring(text)  # noqa: S314 - entities, which could multiply, were refused
    except ET.ParseError as error:
        raise ValueError(f"is no SVG: {error}") from error
    paths = [element.get("d", "") for element in root.iter() if element.tag.rpartition("}")[2] == "path"]
    if len(paths) != 1:
        raise ValueError(f"must hold exactly one path; it holds {len(paths)}")
    return paths[0]


def _scaled(curve: Curve, factor: float) -> Curve:
    """A curve with all its lengths multiplied."""
    if isinstance(curve, Segment):
        (x0, y0), (x1, y1) = curve.start, curve.end
        return Segment((factor * x0, factor * y0), (factor * x1, factor * y1))
    if isinstance(curve, PolynomialArc):
        return PolynomialArc(tuple((factor * x, factor * y) for x, y in curve.control), factor * curve.deviation)
    assert isinstance(curve, Arc)  # noqa: S101 - outlines are made of nothing else
    x, y = curve.centre
    return Arc((factor * x, factor * y), factor * curve.radius, curve.start_angle, curve.end_angle)
