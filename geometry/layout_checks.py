"""Geometric mistakes in a case: what overlaps, sticks out, touches, or comes too close."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import combinations

import numpy as np

from nightcap.geometry.arrangement import Arrangement, CutPiece
from nightcap.geometry.case import Case, GroundPlane
from nightcap.geometry.curves import Point
from nightcap.geometry.errors import Problem
from nightcap.geometry.finding import Finding
from nightcap.geometry.gaps import gaps_below, surfaces
from nightcap.geometry.outside import what_lies_outside
from nightcap.geometry.painting import Drawing
from nightcap.geometry.thin_checks import strip_findings, vanished

SMALLEST_GAP = 1e-6
"""Between two conductors, relative to the layout's size."""


def find_problems(
    case: Case, drawing: Drawing, plane: Arrangement, members: Sequence[frozenset[int]]
) -> tuple[Problem, ...]:
    """Every geometric mistake once, in the order of the file.

    members : for each loop of the arrangement the outlines around the face on its left.
    """
    found = dict.fromkeys(what_lies_outside(case, drawing))
    found |= dict.fromkeys(_overlaps(case, drawing, _faces(drawing, plane, members)))
    found |= dict.fromkeys(vanished(case, drawing, plane))
    found |= dict.fromkeys(strip_findings(case, drawing, plane, members, (_boundary_name(case), _sticks_out(case))))
    overlapping = {finding.pair for finding in found}
    contacts = [finding for finding in _contacts(case, drawing, plane, members) if finding.pair not in overlapping]
    found |= dict.fromkeys(contacts)
    touching = overlapping | {finding.pair for finding in contacts}
    found |= dict.fromkeys(finding for finding in _narrow_gaps(case, drawing) if finding.pair not in touching)
    problems = [replace(case.source.problem(one.key, one.text), place=one.place) for one in found]
    return tuple(sorted(problems, key=lambda problem: problem.line or 0))


Faces = dict[frozenset[int], Point]
"""The sets of outlines around faces, and a place in one such face or on its edge, m."""


def _is_kept(drawing: Drawing, inside: frozenset[int]) -> bool:
    """Whether a face lies on the side of the symmetry lines that is solved."""
    return drawing.around - {len(drawing.drawn)} <= inside


def _faces(drawing: Drawing, plane: Arrangement, members: Sequence[frozenset[int]]) -> Faces:
    faces: Faces = {}
    for loop, inside in sorted(zip(plane.loops, members, strict=True), key=lambda item: sorted(item[1])):
        if inside not in faces and _is_kept(drawing, inside):
            x, y = plane.points[[plane.anchor_of(half) for half in loop]].mean(axis=0).tolist()
            faces[inside] = (x, y)
    return faces


def _boundary_name(case: Case) -> str:
    return case.outer_conductor or ""


def _overlaps(case: Case, drawing: Drawing, faces: Faces) -> Iterator[Finding]:
    """Faces that two things claim, each pair once."""
    for inside, place in faces.items():
        claim = _Claim.of(drawing, inside)
        for finding in (*_conductor_conflicts(case, drawing, claim), *_coating_conflicts(case, drawing, claim)):
            yield replace(finding, place=place)


@dataclass(frozen=True)
class _Claim:
    """What claims a face."""

    conductors: tuple[int, ...]
    coats: dict[int, int]
    """For each conductor the innermost of its coatings that covers the face, as an outline's number."""
    in_domain: bool

    @classmethod
    def of(cls, drawing: Drawing, inside: frozenset[int]) -> _Claim:
        domain = len(drawing.drawn)
        conductors, coats = set(), {}
        for number in sorted(inside - drawing.around):  # the innermost coating is painted last
            drawn = drawing.drawn[number]
            if drawn.conductor is not None and drawn.material is None:
                conductors.add(drawn.conductor)
            elif drawn.conductor is not None:
                coats[drawn.conductor] = number
        return cls(tuple(sorted(conductors)), coats, domain in inside)


def _conductor_conflicts(case: Case, drawing: Drawing, claim: _Claim) -> Iterator[Finding]:
    names = [conductor.name for conductor in case.conductors]
    for one, two in combinations(claim.conductors, 2):
        a, b = names[one], names[two]
        yield Finding((a, b), f"conductors.{b}", f"overlaps conductor '{a}'; conductors must not meet")
    for owner in claim.conductors:
        name = names[owner]
        if not claim.in_domain:
            yield Finding((name, _boundary_name(case)), f"conductors.{name}", _sticks_out(case))
        for other, number in claim.coats.items():
            if other != owner:
                key = drawing.drawn[number].key
                text = f"cuts into conductor '{name}'; it may touch it at most (move '{names[other]}' away or make its"
                yield Finding((name, key), key, f"{text} insulation thinner)")


def _coating_conflicts(case: Case, drawing: Drawing, claim: _Claim) -> Iterator[Finding]:
    if not claim.in_domain:
        for other, number in claim.coats.items():
            if other not in claim.conductors:
                key = drawing.drawn[number].key
                yield Finding((key, _boundary_name(case)), key, _coat_sticks_out(case))
    for (one, first), (_, second) in combinations(sorted(claim.coats.items()), 2):
        if not claim.conductors and drawing.drawn[first].material != drawing.drawn[second].material:
            a, key = case.conductors[one].name, drawing.drawn[second].key
            yield Finding((key, a), key, f"overlaps a coating of '{a}' of another material; they may touch at most")


def _is_conductor(drawing: Drawing, number: int) -> bool:
    return drawing.drawn[number].material is None


def _sticks_out(case: Case) -> str:
    if isinstance(case.boundary, GroundPlane):
        return f"reaches below the ground plane '{case.boundary.name}' at y = {case.boundary.at:g} m"
    return f"is not wholly inside the shield '{_boundary_name(case)}'"


def _coat_sticks_out(case: Case) -> str:
    if isinstance(case.boundary, GroundPlane):
        return f"cuts into the ground plane '{case.boundary.name}'; it may touch it at most"
    return f"cuts into the shield '{_boundary_name(case)}'; it may touch it at most"


def _contacts(case: Case, drawing: Drawing, plane: Arrangement, members: Sequence[frozenset[int]]) -> Iterator[Finding]:
    """Conductors that meet in a point or along an edge: a short circuit."""
    names = [c.name for c in case.conductors]
    at: dict[int, set[str]] = {}
    for k, piece in enumerate(plane.pieces):
        if not any(_is_kept(drawing, members[plane.loop_of[half]]) for half in (2 * k, 2 * k + 1)):
            continue
        for number, _ in piece.outlines:
            name = _surface_name(case, drawing, names, number, piece)
            if name:
                at.setdefault(piece.start, set()).add(name)
                at.setdefault(piece.end, set()).add(name)
    order = [*names, _boundary_name(case)]
    for point, together in at.items():
        x, y = plane.points[point].tolist()
        for a, b in combinations(sorted(together, key=order.index), 2):
            key = f"conductors.{b}" if b in names else f"conductors.{a}"
            other = a if b in names else b
            text = f"touches '{other}': a short circuit; leave a gap, or draw them as one conductor"
            yield Finding((a, b), key, text, (x, y))


def _surface_name(case: Case, drawing: Drawing, names: list[str], number: int, piece: CutPiece) -> str:
    """The conductor on whose surface a piece lies as part of an outline, or nothing."""
    if number in drawing.around:
        rim = number == len(drawing.drawn) and drawing.domain.rim and piece.curve.curvature
        return "" if rim or _is_magnetic(case, drawing, number, piece) else _boundary_name(case)
    conductor = drawing.drawn[number].conductor
    return names[conductor] if conductor is not None and _is_conductor(drawing, number) else ""


def _is_magnetic(case: Case, drawing: Drawing, number: int, piece: CutPiece) -> bool:
    if number == len(drawing.drawn):
        return False
    middle = piece.curve.at(np.array(0.5))
    on = [line for line in case.symmetry if abs(middle[line.axis] - line.at) <= 16 * drawing.tolerance]
    return not any(line.is_electric for line in on)


def _narrow_gaps(case: Case, drawing: Drawing) -> Iterator[Finding]:
    """Pairs of conductors closer than the smallest gap."""
    least = SMALLEST_GAP * drawing.size
    names = [*(c.name for c in case.conductors), _boundary_name(case)]
    for gap in gaps_below(surfaces(case, drawing), least):
        one, two = gap.conductors
        a, b = names[one], names[two]
        key = f"conductors.{b}" if two < len(case.conductors) else f"conductors.{a}"
        other = a if two < len(case.conductors) else b
        limit = f"the smallest gap allowed here is {least:.2g} m (1e-6 of the layout)"
        yield Finding((a, b), key, f"is {gap.width:.2g} m from '{other}'; {limit}", gap.middle)
