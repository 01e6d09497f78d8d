"""The boundaries that a case file knows."""

from __future__ import annotations

from typing import Any

from pydantic import Field

from nightcap.geometry.case import Boundary, GroundPlane, OpenSpace, Shield
from nightcap.geometry.case_file.materials import MetalKeys
from nightcap.geometry.case_file.problems import Problems, listed, one_of, under
from nightcap.geometry.case_file.quantities import Length, PointOf, PositiveLength
from nightcap.geometry.case_file.schema import Entry, Text, checked
from nightcap.geometry.case_file.shapes import shaped
from nightcap.geometry.case_file.yaml_tree import Tree
from nightcap.geometry.shapes import Rectangle, chains


class ShieldKeys(MetalKeys):
    """A grounded conductor whose inside is the shape."""

    kind: Text = Field(description="Word for the boundary.")
    name: Text = Field("shield", description="What it is called in results.")


class BoxKeys(MetalKeys):
    """A rectangular shield."""

    kind: Text = Field(description="Word for the boundary.")
    name: Text = Field("box", description="What it is called in results.")
    width: PositiveLength = Field(description="Of its inside.")
    height: PositiveLength = Field(description="Of its inside.")
    at: PointOf = Field((0.0, 0.0), description="Centre.")


class OpenKeys(Entry):
    """Unbounded space all around."""

    kind: Text = Field(description="Word for the boundary.")


class GroundPlaneKeys(MetalKeys):
    """A grounded plane below the layout."""

    kind: Text = Field(description="Word for the boundary.")
    name: Text = Field("plane", description="What it is called in results.")
    at: Length = Field(0.0, description="Height y of the plane.")


def _shield(tree: Tree, path: str, problems: Problems, context: dict[str, Any]) -> Boundary | None:
    read = shaped(ShieldKeys, tree, path, problems, context)
    if read and len(chains(read[1].outline())) > 1:
        problems.add(under(path, "shape"), "the inside of a shield has no hole; draw what is in it as a conductor")
        return None
    return Shield(read[1], read[0].name, read[0].siemens_per_metre()) if read else None


def _box(tree: Tree, path: str, problems: Problems, context: dict[str, Any]) -> Boundary | None:
    entry = checked(BoxKeys, tree, path, problems, context)
    if entry is None:
        return None
    return Shield(Rectangle(entry.at, entry.width, entry.height), entry.name, entry.siemens_per_metre())


def _open(tree: Tree, path: str, problems: Problems, context: dict[str, Any]) -> Boundary | None:
    return OpenSpace() if checked(OpenKeys, tree, path, problems, context) else None


def _ground_plane(tree: Tree, path: str, problems: Problems, context: dict[str, Any]) -> Boundary | None:
    entry = checked(GroundPlaneKeys, tree, path, problems, context)
    return GroundPlane(entry.at, entry.name, entry.siemens_per_metre()) if entry else None


KEYS: dict[str, type[Entry]] = {
    "shield": ShieldKeys,
    "box": BoxKeys,
    "open": OpenKeys,
    "ground_plane": GroundPlaneKeys,
}
BOUNDARIES = {"shield": _shield, "box": _box, "open": _open, "ground_plane": _ground_plane}
"""A new kind is one more reader and one more line here."""


def read_boundary(tree: Tree, path: str, problems: Problems, context: dict[str, Any]) -> Boundary | None:
    """The boundary of a case, or None after noting every mistake in it."""
    if not isinstance(tree, dict):
        problems.add(path, f"must be a mapping with the key 'kind' ({listed(BOUNDARIES)})")
        return None
    if "kind" not in tree:
        problems.add(path, f"the key 'kind' is missing; allowed: {listed(BOUNDARIES)}")
        return None
    kind = tree["kind"]
    if not isinstance(kind, str) or kind not in BOUNDARIES:
        problems.add(under(path, "kind"), one_of(kind, BOUNDARIES))
        return None
    return BOUNDARIES[kind](tree, path, problems, context)
