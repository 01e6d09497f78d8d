"""Layers of insulation, as a case file lists them."""

from __future__ import annotations

from typing import Any

from nightcap.geometry.case import Coating
from nightcap.geometry.case_file.entries import CoatingEntry
from nightcap.geometry.case_file.problems import Problems, under
from nightcap.geometry.case_file.schema import checked
from nightcap.geometry.case_file.yaml_tree import Tree
from nightcap.geometry.shapes import Shape

MOST_LAYERS = 20


def read_coatings(tree: Tree, path: str, problems: Problems, context: dict[str, Any]) -> tuple[Coating, ...]:
    """Layers from the inside out; none after noting that it is no list."""
    if tree is None:
        return ()
    if not isinstance(tree, list):
        problems.add(path, "must be a list of layers, e.g. [{thickness: 0.2, permittivity: 2.3}]")
        return ()
    if len(tree) > MOST_LAYERS:
        problems.add(path, f"must be at most {MOST_LAYERS} layers")
        return ()
    read = [checked(CoatingEntry, layer, under(path, k), problems, context) for k, layer in enumerate(tree)]
    return tuple(Coating(layer.thickness, layer.record()) for layer in read if layer)


def check_coatings(shape: Shape, coatings: tuple[Coating, ...], path: str, problems: Problems) -> None:
    """Notes a coating that cannot be laid evenly around a figure."""
    thickness = 0.0
    for k, coating in enumerate(coatings):
        thickness += coating.thickness
        try:
            shape.grown(thickness).outline()
        except ValueError as error:
            problems.add(under(path, k), f"cannot be laid evenly around this figure: it {error}")
            return
