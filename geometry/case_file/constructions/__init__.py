"""Constructions: what cables and boards are made of, each expanding to plain conductors and dielectrics."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

from nightcap.geometry.case_file.constructions.board import BoardKeys, read_board
from nightcap.geometry.case_file.constructions.built import Built, Place
from nightcap.geometry.case_file.constructions.copies import CopiesKeys, read_copies
from nightcap.geometry.case_file.constructions.groups import (
    BundleKeys,
    PairKeys,
    QuadKeys,
    RibbonKeys,
    RingKeys,
    read_bundle,
    read_pair,
    read_quad,
    read_ribbon,
    read_ring,
)
from nightcap.geometry.case_file.constructions.sheaths import JacketKeys, ScreenKeys, read_jacket, read_screen
from nightcap.geometry.case_file.problems import Problems, listed, one_of, under
from nightcap.geometry.case_file.schema import Entry
from nightcap.geometry.case_file.yaml_tree import Tree

CONSTRUCTIONS: dict[str, Callable[[Place, str], Built | None]] = {
    "pair": read_pair,
    "quad": read_quad,
    "ring": read_ring,
    "bundle": read_bundle,
    "ribbon": read_ribbon,
    "screen": read_screen,
    "jacket": read_jacket,
    "board": read_board,
}
"""A new construction is one more reader and one more line here; copies, which need what was drawn, are apart."""
KEYS: dict[str, type[Entry]] = {
    "pair": PairKeys,
    "quad": QuadKeys,
    "ring": RingKeys,
    "bundle": BundleKeys,
    "ribbon": RibbonKeys,
    "screen": ScreenKeys,
    "jacket": JacketKeys,
    "board": BoardKeys,
    "copies": CopiesKeys,
}
"""The keys of each, for those who describe a case file."""
KINDS = (*CONSTRUCTIONS, "copies")


def read_constructions(
    entries: Mapping[str, Tree], drawn: Mapping[str, Built], problems: Problems, context: dict[str, Any]
) -> Built:
    """All constructions of a file.

    drawn : the conductors and dielectrics of the file itself, by name, for copies.
    """
    known = dict(drawn)
    built = {}
    for name, tree in entries.items():
        result = _read(Place(tree, under("constructions", name), problems, context), name, known)
        if result:
            built[name] = known[name] = result
            known |= {one.name: Built((one,)) for one in result.conductors}
            known |= {one.name: Built((), (one,)) for one in result.dielectrics}
    return Built.joined(built.values())


def _read(place: Place, name: str, drawn: Mapping[str, Built]) -> Built | None:
    kind = place.tree.get("kind") if isinstance(place.tree, dict) else None
    if not isinstance(place.tree, dict) or "kind" not in place.tree:
        place.note(f"must be a mapping with the key 'kind' ({listed(KINDS)})")
        return None
    if not isinstance(kind, str) or kind not in KINDS:
        place.note(one_of(kind, KINDS), "kind")
        return None
    return read_copies(place, name, drawn) if kind == "copies" else CONSTRUCTIONS[kind](place, name)
