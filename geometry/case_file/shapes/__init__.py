"""The shapes that a case file knows: word, keys, and the figure they describe."""

from __future__ import annotations

from functools import cache
from typing import Any

from nightcap.geometry.case_file.problems import Problems, listed, one_of, under
from nightcap.geometry.case_file.schema import Entry, EntryType, checked
from nightcap.geometry.case_file.shapes.bent_strips import BentStripKeys
from nightcap.geometry.case_file.shapes.circles import CircleKeys, RingKeys
from nightcap.geometry.case_file.shapes.keys import ShapeKeys
from nightcap.geometry.case_file.shapes.polygons import PolygonKeys, RegularPolygonKeys, TrapezoidKeys
from nightcap.geometry.case_file.shapes.rectangles import OvalKeys, RectangleKeys
from nightcap.geometry.case_file.shapes.sectors import ArcStripKeys, SectorKeys
from nightcap.geometry.case_file.shapes.slabs import SlabKeys
from nightcap.geometry.case_file.yaml_tree import Tree
from nightcap.geometry.shapes import Shape

SHAPES: dict[str, type[ShapeKeys]] = {
    "circle": CircleKeys,
    "rectangle": RectangleKeys,
    "polygon": PolygonKeys,
    "ring": RingKeys,
    "oval": OvalKeys,
    "sector": SectorKeys,
    "arc_strip": ArcStripKeys,
    "bent_strip": BentStripKeys,
    "trapezoid": TrapezoidKeys,
    "regular_polygon": RegularPolygonKeys,
    "slab": SlabKeys,
}
"""A new shape is one more class and one more line here."""


ONLY_FOR = {"slab": "dielectrics"}
"""The one group of entries that a shape is for."""


def _words_for(path: str) -> list[str]:
    """The shapes that an entry may have."""
    return [word for word in SHAPES if path.startswith(ONLY_FOR.get(word, ""))]


def shaped(
    own: type[EntryType], tree: Tree, path: str, problems: Problems, context: dict[str, Any]
) -> tuple[EntryType, Shape] | None:
    """An entry that has a shape besides keys of its own, or None after noting every mistake in it."""
    words = _words_for(path)
    if not isinstance(tree, dict):
        problems.add(path, f"must be a mapping with the key 'shape' ({listed(words)}) and the keys of that shape")
        return None
    word = tree.get("shape")
    if not isinstance(word, str) or word not in SHAPES:
        if "shape" in tree:
            problems.add(under(path, "shape"), one_of(word, words))
        else:
            problems.add(path, f"the key 'shape' is missing; allowed: {listed(words)}")
        return None
    if word not in words:
        problems.add(under(path, "shape"), f"'{word}' is a shape for {ONLY_FOR[word]} only; allowed: {listed(words)}")
        return None
    entry = checked(_combined(own, SHAPES[word]), tree, path, problems, context)
    if entry is None:
        return None
    figure: Shape = entry.figure()
    try:
        if getattr(entry, "corner_radius", 0.0):
            figure.outline()
    except ValueError as error:
        problems.add(under(path, "corner_radius"), str(error))
        return None
    return entry, figure


@cache
def _combined(own: type[Entry], shape: type[ShapeKeys]) -> Any:
    """One model of both sets of keys."""
    return type(f"{own.__name__}{shape.__name__}", (shape, own), {"__module__": __name__})
