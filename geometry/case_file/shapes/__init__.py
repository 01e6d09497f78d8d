"""The shapes that a case file knows: word, keys, and the figure they describe."""

from __future__ import annotations

from functools import cache
from typing import Any

from nightcap.geometry.case_file.entries import ConductorKeys
from nightcap.geometry.case_file.problems import Problems, listed, one_of, under
from nightcap.geometry.case_file.schema import Entry, EntryType, checked
from nightcap.geometry.case_file.shapes.bent_strips import BentStripKeys
from nightcap.geometry.case_file.shapes.circles import CircleKeys, RingKeys
from nightcap.geometry.case_file.shapes.keys import ShapeKeys
from nightcap.geometry.case_file.shapes.polygons import PolygonKeys, RegularPolygonKeys, TrapezoidKeys
from nightcap.geometry.case_file.shapes.rectangles import OvalKeys, RectangleKeys
from nightcap.geometry.case_file.shapes.sectors import ArcStripKeys, SectorKeys
from nightcap.geometry.case_file.shapes.slabs import SlabKeys
from nightcap.geometry.case_file.shapes.smooth import EllipseKeys, SmoothKeys
from nightcap.geometry.case_file.shapes.strips import StripKeys
from nightcap.geometry.case_file.shapes.traced import OutlineKeys
from nightcap.geometry.case_file.shapes.unions import LayeredStrandsKeys, StrandsKeys, UnionKeys
from nightcap.geometry.case_file.yaml_tree import Tree
from nightcap.geometry.shapes import Shape, Union

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
    "strip": StripKeys,
    "ellipse": EllipseKeys,
    "smooth": SmoothKeys,
    "outline": OutlineKeys,
    "strands": StrandsKeys,
    "layered_strands": LayeredStrandsKeys,
    "union": UnionKeys,
}
"""A new shape is one more class and one more line here."""


MOST_PARTS = 500
ONLY_FOR = {"slab": "dielectrics", "union": "conductors", "strands": "conductors", "layered_strands": "conductors"}
"""The one group of entries that a shape is for."""


def words_for(path: str, own: type[Entry]) -> list[str]:
    """The shapes that an entry at a path, with keys of its own, may have."""
    group = path.partition(".")[0]
    words = [word for word in SHAPES if group in (ONLY_FOR.get(word, group), "constructions")]
    return [word for word in words if own is ConductorKeys or not SHAPES[word].is_thin]


def shaped(
    own: type[EntryType], tree: Tree, path: str, problems: Problems, context: dict[str, Any]
) -> tuple[EntryType, Shape] | None:
    """An entry that has a shape besides keys of its own, or None after noting every mistake in it."""
    word = _word(own, tree, path, problems)
    if word is None:
        return None
    entry = checked(combined(own, SHAPES[word]), tree, path, problems, context)
    if entry is None:
        return None
    if SHAPES[word].has_parts:
        parts = _parts(entry.parts, under(path, "parts"), problems, context)
        return (entry, Union(parts)) if parts else None
    figure: Shape = entry.figure()
    try:
        if getattr(entry, "corner_radius", 0.0):
            figure.outline()
    except ValueError as error:
        problems.add(under(path, "corner_radius"), str(error))
        return None
    return entry, figure


def _parts(tree: Tree, path: str, problems: Problems, context: dict[str, Any]) -> tuple[Shape, ...]:
    """The parts of a union; none after noting every mistake in them."""
    if not isinstance(tree, list) or not 2 <= len(tree) <= MOST_PARTS:
        problems.add(path, f"must be a list of 2 to {MOST_PARTS} shapes")
        return ()
    read = [shaped(Entry, part, under(path, k), problems, context) for k, part in enumerate(tree)]
    parts = [part[1] for part in read if part]
    return tuple(parts) if len(parts) == len(tree) else ()


def _word(own: type[Entry], tree: Tree, path: str, problems: Problems) -> str | None:
    """The shape that an entry names, or None after noting why it may not."""
    words = words_for(path, own)
    word = tree.get("shape") if isinstance(tree, dict) else None
    if not isinstance(tree, dict):
        problems.add(path, f"must be a mapping with the key 'shape' ({listed(words)}) and the keys of that shape")
    elif "shape" not in tree:
        problems.add(path, f"the key 'shape' is missing; allowed: {listed(words)}")
    elif not isinstance(word, str) or word not in SHAPES:
        problems.add(under(path, "shape"), one_of(word, words))
    elif SHAPES[word].is_thin and own is not ConductorKeys:
        problems.add(under(path, "shape"), f"a {word} encloses nothing; only a conductor can be one")
    elif word not in words:
        problems.add(under(path, "shape"), f"'{word}' is a shape for {ONLY_FOR[word]} only; allowed: {listed(words)}")
    else:
        return word
    return None


@cache
def combined(own: type[Entry], shape: type[ShapeKeys]) -> Any:
    """One model of a shape's keys and an entry's own."""
    return type(f"{own.__name__}{shape.__name__}", (shape, own), {"__module__": __name__, "__doc__": shape.__doc__})
