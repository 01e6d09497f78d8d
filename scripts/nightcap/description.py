"""What ``nightcap check`` says it understood."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sized
from functools import singledispatch

from nightcap.digits import grouped
from nightcap.geometry.case import Case, Coating, GroundPlane, Limits, Material, OpenSpace, Shield
from nightcap.geometry.curves import Point
from nightcap.geometry.layout import Layout
from nightcap.geometry.shapes import Circle, Polygon, Rectangle
from nightcap.geometry.strip import Strip
from nightcap.lengths import length_text


def description(case: Case, layout: Layout) -> Iterator[str]:
    """Lines about a case, with lengths in the unit that suits each."""
    yield f"  {case.title}"
    yield "  conductors"
    for conductor in case.conductors:
        yield f"    {conductor.name}: {describe(conductor.shape)}{'; floating' if conductor.floating else ''}"
        yield from (f"      {_coating(coating)}" for coating in conductor.coatings)
    if case.dielectrics:
        yield "  dielectrics, later over earlier"
    for dielectric in case.dielectrics:
        yield f"    {dielectric.name}: {describe(dielectric.shape)}; {_material(dielectric.material)}"
    yield f"  background: {_material(case.background)}"
    yield f"  boundary: {describe(case.boundary)}"
    yield f"  reference: {case.reference}"
    yield from (f"  tied together: {', '.join(group)}" for group in case.ties)
    yield f"  accuracy: {case.accuracy:.3g}; limits: {_limits(case.limits)}"
    if case.expect:
        exact = ", exact" if case.expect.exact else ""
        yield f"  expects: {case.expect.source} (tolerance {case.expect.tolerance:.3g}{exact})"
    yield (
        f"  layout: {_count(layout.regions, 'region')}, {_count(layout.materials, 'material')},"
        f" {_count(layout.pieces, 'curve')}, {length_text(layout.size)} across"
    )


def _count(things: Sized, word: str) -> str:
    return f"{len(things)} {word}{'' if len(things) == 1 else 's'}"


@singledispatch
def describe(thing: object) -> str:
    """A shape or a boundary in words."""
    return type(thing).__name__.lower()


@describe.register
def _(circle: Circle) -> str:
    return f"circle, diameter {length_text(2 * circle.radius)}, at {_point(circle.centre)}"


@describe.register
def _(rectangle: Rectangle) -> str:
    text = f"rectangle, {length_text(rectangle.width)} x {length_text(rectangle.height)}"
    if rectangle.corner_radius:
        text += f", corner radius {length_text(rectangle.corner_radius)}"
    if rectangle.angle:
        text += f", turned {math.degrees(rectangle.angle):.6g} degrees"
    return f"{text}, at {_point(rectangle.centre)}"


@describe.register
def _(polygon: Polygon) -> str:
    low = tuple(min(point[k] for point in polygon.points) for k in (0, 1))
    high = tuple(max(point[k] for point in polygon.points) for k in (0, 1))
    return f"polygon of {len(polygon.points)} points, from {_point((low[0], low[1]))} to {_point((high[0], high[1]))}"


@describe.register
def _(strip: Strip) -> str:
    through = "" if len(strip.points) == 2 else f" through {len(strip.points)} points"
    ends = f"from {_point(strip.points[0])} to {_point(strip.points[-1])}"
    return f"strip of no thickness{through}, {length_text(strip.length)} long, {ends}"


@describe.register
def _(shield: Shield) -> str:
    return f"shield {shield.name!r}, inside: {describe(shield.shape)}"


@describe.register
def _(_space: OpenSpace) -> str:
    return "open space"


@describe.register
def _(plane: GroundPlane) -> str:
    return f"ground plane {plane.name!r} at y = {length_text(plane.at)}"


def _coating(coating: Coating) -> str:
    return f"coating {length_text(coating.thickness)}, {_material(coating.material)}"


def _material(material: Material) -> str:
    text = f"permittivity {material.permittivity:.6g}"
    if material.loss_tangent:
        text += f", loss tangent {material.loss_tangent:.3g}"
    return f"{material.name} ({text})" if material.name else text


def _limits(limits: Limits) -> str:
    return f"{grouped(limits.triangles)} triangles, {limits.memory / 1e9:.3g} GB, {limits.time:.3g} s"


def _point(point: Point) -> str:
    return f"({length_text(point[0])}, {length_text(point[1])})"
