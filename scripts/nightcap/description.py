"""What ``nightcap check`` says it understood."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence, Sized
from functools import singledispatch

from nightcap.digits import grouped
from nightcap.geometry.case import Case, Coating, GroundPlane, Limits, Material, OpenSpace, Shield
from nightcap.geometry.curves import Point
from nightcap.geometry.layout import Layout
from nightcap.geometry.motion import Moved
from nightcap.geometry.shapes import (
    BentStrip,
    Circle,
    Ellipse,
    LappedStrip,
    Polygon,
    Rectangle,
    Ring,
    Sector,
    Smooth,
    Strands,
    Traced,
    Union,
)
from nightcap.geometry.slab import Slab
from nightcap.geometry.strip import Strip
from nightcap.geometry.symmetry import SymmetryLine
from nightcap.geometry.twist import Twist
from nightcap.lengths import length_text

FIRST_VARIANTS = 4
"""So many are named."""


def description(case: Case, layout: Layout) -> Iterator[str]:
    """Lines about a case, with lengths in the unit that suits each."""
    yield f"  {case.title}"
    yield from _parameters(case)
    yield "  conductors"
    for conductor in case.conductors:
        also = _metal(conductor.conductivity) + ("; floating" if conductor.floating else "")
        yield f"    {conductor.name}: {describe(conductor.shape)}{also}"
        yield from (f"      {_coating(coating)}" for coating in conductor.coatings)
    if case.dielectrics:
        yield "  dielectrics, later over earlier"
    for dielectric in case.dielectrics:
        yield f"    {dielectric.name}: {describe(dielectric.shape)}; {_material(dielectric.material)}"
    yield f"  background: {_material(case.background)}"
    yield f"  boundary: {describe(case.boundary)}{_metal(getattr(case.boundary, 'conductivity', None))}"
    yield from (f"  {_line(line)}" for line in case.symmetry)
    yield f"  reference: {', '.join(case.reference_pieces)}"
    yield from (f"  tied together: {', '.join(group)}" for group in case.ties if case.reference not in group)
    if case.twist:
        yield f"  twist: {_twist(case.twist)}"
    yield f"  accuracy: {case.accuracy:.3g}; limits: {_limits(case.limits)}"
    if case.expect:
        exact = ", exact" if case.expect.exact else ""
        yield f"  expects: {case.expect.source} (tolerance {case.expect.tolerance:.3g}{exact})"
    yield (
        f"  layout: {_count(layout.regions, 'region')}, {_count(layout.materials, 'material')},"
        f" {_count(layout.pieces, 'curve')}, {length_text(layout.size)} across"
    )


def variant_lines(names: Sequence[str]) -> Iterator[str]:
    """How many variants there are, and the first of them."""
    if names[0]:
        yield f"  {_count(names, 'variant')}, the first of which is described above"
        yield from (f"    {name}" for name in names[:FIRST_VARIANTS])
        if len(names) > FIRST_VARIANTS:
            yield f"    and {len(names) - FIRST_VARIANTS} more, the last {names[-1]}"


def _parameters(case: Case) -> Iterator[str]:
    if case.parameters:
        yield f"  parameters{f', in variant {case.variant_name}' if case.variant_name else ''}"
    for one in case.parameters:
        value = length_text(one.value) if one.is_length else f"{one.value:.6g}"
        formula = f"{one.formula} = " if one.formula else ""
        yield f"    {one.name} = {formula}{value}{'' if one.is_used else '; used nowhere'}"


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
def _(ring: Ring) -> str:
    outer, inner = length_text(2 * ring.outer), length_text(2 * ring.inner)
    return f"ring, diameters {outer} and {inner}, at {_point(ring.centre)}"


@describe.register
def _(sector: Sector) -> str:
    radii = f"radii {length_text(sector.inner)} to {length_text(sector.outer)}"
    angles = f"from {math.degrees(sector.start):.6g} to {math.degrees(sector.end):.6g} degrees"
    return f"sector, {radii}, {angles}{_corners(sector.corner_radius)}, about {_point(sector.centre)}"


@describe.register
def _(strip: LappedStrip) -> str:
    text = f"lapped strip, radius within {length_text(strip.inner)}, thickness {length_text(strip.thickness)}"
    lap = f"overlap {length_text(strip.overlap * strip.inner)}, clearance {length_text(strip.clearance)}"
    return f"{text}, {lap}, about {_point(strip.centre)}"


@describe.register
def _(strip: BentStrip) -> str:
    ends = f"from {_point(strip.points[0])} to {_point(strip.points[-1])}"
    return f"bent strip through {len(strip.points)} points, {ends}, thickness {length_text(strip.thickness)}"


@describe.register
def _(strands: Strands) -> str:
    sizes = " and ".join(length_text(2 * radius) for radius in sorted({circle.radius for circle in strands.circles}))
    overall = length_text(2 * strands.overall_radius)
    return f"{len(strands.circles)} strands of {sizes}, {overall} over all, at {_point(strands.circles[0].centre)}"


@describe.register
def _(union: Union) -> str:
    return f"union of {'; '.join(describe(part) for part in union.parts)}"


@describe.register
def _(ellipse: Ellipse) -> str:
    turned = f", turned {math.degrees(ellipse.angle):.6g} degrees" if ellipse.angle else ""
    axes = f"{length_text(ellipse.width)} x {length_text(ellipse.height)}"
    return f"ellipse, {axes}{turned}, at {_point(ellipse.centre)}"


@describe.register
def _(smooth: Smooth) -> str:
    return f"smooth curve through {len(smooth.points)} points, from {_point(smooth.points[0])}"


@describe.register
def _(traced: Traced) -> str:
    return f"outline of {_count(traced.curves, 'curve')}, from {_point(traced.curves[0].start)}"


@describe.register
def _(moved: Moved) -> str:
    motion = moved.motion
    mirrored = ", mirrored" if motion.mirrored else ""
    turned = f", turned {math.degrees(motion.angle):.6g} degrees" if motion.angle else ""
    return f"{describe(moved.figure)}{mirrored}{turned}, moved by {_point(motion.shift)}"


def _corners(radius: float) -> str:
    return f", corner radius {length_text(radius)}" if radius else ""


@describe.register
def _(rectangle: Rectangle) -> str:
    text = f"rectangle, {length_text(rectangle.width)} x {length_text(rectangle.height)}"
    text += _corners(rectangle.corner_radius)
    if rectangle.angle:
        text += f", turned {math.degrees(rectangle.angle):.6g} degrees"
    return f"{text}, at {_point(rectangle.centre)}"


@describe.register
def _(polygon: Polygon) -> str:
    low = tuple(min(point[k] for point in polygon.points) for k in (0, 1))
    high = tuple(max(point[k] for point in polygon.points) for k in (0, 1))
    return f"polygon of {len(polygon.points)} points, from {_point((low[0], low[1]))} to {_point((high[0], high[1]))}"


@describe.register
def _(slab: Slab) -> str:
    if math.isinf(slab.low):
        return f"half space below y = {length_text(slab.high)}"
    if math.isinf(slab.high):
        return f"half space above y = {length_text(slab.low)}"
    return f"slab without end, from y = {length_text(slab.low)} to {length_text(slab.high)}"


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


def _line(line: SymmetryLine) -> str:
    """Such as: symmetry: magnetic wall at x = 0 mm, solved where x is greater."""
    axis, wall = "xy"[line.axis], "electric" if line.is_electric else "magnetic"
    return f"symmetry: {wall} wall at {axis} = {length_text(line.at)}, solved where {axis} is greater"


def _twist(twist: Twist) -> str:
    return (
        f"lay length {length_text(twist.lay_length)}, pitch circle {length_text(twist.pitch_diameter)};"
        f" {twist.length_factor:.6f} m of core per metre of cable"
    )


def _coating(coating: Coating) -> str:
    return f"coating {length_text(coating.thickness)}, {_material(coating.material)}"


def _material(material: Material) -> str:
    text = f"permittivity {material.permittivity:.6g}"
    if material.loss_tangent:
        text += f", loss tangent {material.loss_tangent:.3g}"
    return f"{material.name} ({text})" if material.name else text


def _metal(conductivity: float | None) -> str:
    return "" if conductivity is None else f"; {conductivity / 1e6:.4g} MS/m"


def _limits(limits: Limits) -> str:
    return f"{grouped(limits.triangles)} triangles, {limits.memory / 1e9:.3g} GB, {limits.time:.3g} s"


def _point(point: Point) -> str:
    return f"({length_text(point[0])}, {length_text(point[1])})"
