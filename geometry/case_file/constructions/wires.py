"""The wires that constructions are made of: conductors whose place the construction gives."""

from __future__ import annotations

from dataclasses import replace

from nightcap.geometry.case import Conductor
from nightcap.geometry.case_file.constructions.built import Place, total_thickness
from nightcap.geometry.case_file.entries import ConductorKeys
from nightcap.geometry.case_file.layers import check_coatings, read_coatings
from nightcap.geometry.case_file.problems import under
from nightcap.geometry.case_file.shapes import shaped
from nightcap.geometry.curves import Point
from nightcap.geometry.motion import Motion
from nightcap.geometry.painting import box


def read_wire(place: Place) -> Conductor | None:
    """The wire of a construction, about the origin: any shape, a circle unless another is named."""
    wire = place.below("wire")
    if wire is None:
        place.note("the key 'wire' is missing, e.g. wire: {awg: 24, coatings: [{thickness: 0.2, permittivity: 2.26}]}")
        return None
    if isinstance(wire.tree, dict) and "at" in wire.tree:
        wire.note("the place of a wire is given by the construction; leave it out", "at")
        return None
    tree = {"shape": "circle", **wire.tree} if isinstance(wire.tree, dict) else wire.tree
    read = shaped(ConductorKeys, tree, wire.path, wire.problems, wire.context)
    coats = tree.get("coatings") if isinstance(tree, dict) else None
    coatings = read_coatings(coats, under(wire.path, "coatings"), wire.problems, wire.context)
    if read is None:
        return None
    check_coatings(read[1], coatings, under(wire.path, "coatings"), wire.problems)
    return Conductor("", read[1], coatings, read[0].floating, read[0].siemens_per_metre())


def overall_size(wire: Conductor) -> Point:
    """Width and height of a wire with its insulation, m."""
    low, high = box([wire.shape.grown(total_thickness(wire.coatings)).outline()])
    return (float(high[0] - low[0]), float(high[1] - low[1]))


def placed(wire: Conductor, name: str, at: Point) -> Conductor:
    """The wire in a place of its own."""
    return replace(wire, name=name, shape=Motion(at).shape(wire.shape))
