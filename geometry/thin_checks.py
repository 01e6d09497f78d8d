"""Geometric mistakes that no face of the arrangement tells of: with thin strips, and what rounding swallows."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from nightcap.geometry.arrangement import Arrangement
from nightcap.geometry.case import Case
from nightcap.geometry.finding import Finding
from nightcap.geometry.painting import Drawing


def vanished(case: Case, drawing: Drawing, plane: Arrangement) -> Iterator[Finding]:
    """Conductors of whose outline nothing is left, as all their points are one."""
    left = {number for piece in plane.pieces for number, _ in piece.outlines}
    for number, drawn in enumerate(drawing.drawn):
        if number not in left and drawn.material is None and drawn.conductor is not None:
            name = case.conductors[drawn.conductor].name
            text = f"is too small for this layout, where points within {8 * drawing.tolerance:.1g} m are one"
            yield Finding((name, ""), f"conductors.{name}", text)


def strip_findings(
    case: Case, drawing: Drawing, plane: Arrangement, members: Sequence[frozenset[int]], beyond: tuple[str, str]
) -> Iterator[Finding]:
    """What lies on both sides of each piece of a strip must leave room for it.

    beyond : name of the boundary, and what to say of a strip that is not inside it.
    """
    for k, piece in enumerate(plane.pieces):
        sides = [members[plane.loop_of[half]] for half in (2 * k, 2 * k + 1)]
        for number in sorted(piece.strips):
            owner = drawing.drawn[number].conductor
            if owner is not None:
                yield from _conflicts(case, drawing, owner, sides)
                if not all(len(drawing.drawn) in side for side in sides):
                    name = case.conductors[owner].name
                    yield Finding((name, beyond[0]), f"conductors.{name}", beyond[1])


def _conflicts(case: Case, drawing: Drawing, owner: int, sides: list[frozenset[int]]) -> Iterator[Finding]:
    names = [conductor.name for conductor in case.conductors]
    name = names[owner]
    for number in sorted(sides[0] & sides[1]):
        other = drawing.drawn[number].conductor if number < len(drawing.drawn) else None
        if other is not None and drawing.drawn[number].material is None:
            first, second = sorted((owner, other))
            text = f"overlaps conductor '{names[first]}'; conductors must not meet"
            yield Finding((names[first], names[second]), f"conductors.{names[second]}", text)
    for number in sorted(_coats(drawing, owner, sides[0]) & _coats(drawing, owner, sides[1])):
        key = drawing.drawn[number].key
        text = f"cuts into conductor '{name}'; it may touch it at most (move it away or make the insulation thinner)"
        yield Finding((name, key), key, text)


def _coats(drawing: Drawing, owner: int, side: frozenset[int]) -> set[int]:
    """The innermost coating of each other conductor that covers a face: two layers may have a strip between them."""
    innermost: dict[int, int] = {}
    for number in sorted(side):
        drawn = drawing.drawn[number] if number < len(drawing.drawn) else None
        if drawn and drawn.conductor is not None and drawn.material is not None and drawn.conductor != owner:
            innermost[drawn.conductor] = number
    return set(innermost.values())
