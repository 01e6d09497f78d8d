"""Geometric mistakes in a case: what overlaps, sticks out, touches, or comes too close."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations

import numpy as np

from nightcap.geometry.arrangement import Arrangement, CutPiece
from nightcap.geometry.case import Case, GroundPlane
from nightcap.geometry.crossing import CurveTable
from nightcap.geometry.curves import Floats
from nightcap.geometry.errors import Problem
from nightcap.geometry.mesh import Ints
from nightcap.geometry.outside import Finding, what_lies_outside
from nightcap.geometry.painting import Drawing

SMALLEST_GAP = 1e-6
"""Between two conductors, relative to the layout's size."""


def find_problems(
    case: Case, drawing: Drawing, plane: Arrangement, members: Sequence[frozenset[int]]
) -> tuple[Problem, ...]:
    """Every geometric mistake once, in the order of the file.

    members : for each loop of the arrangement the outlines around the face on its left.
    """
    found = dict.fromkeys(what_lies_outside(case, drawing))
    found |= dict.fromkeys(_overlaps(case, drawing, {face for face in members if _is_kept(drawing, face)}))
    overlapping = {text_key for text_key, _, _ in found}
    contacts = [c for c in _contacts(case, drawing, plane, members) if c[0] not in overlapping]
    found |= dict.fromkeys(contacts)
    touching = overlapping | {c[0] for c in contacts}
    found |= dict.fromkeys(c for c in _narrow_gaps(case, drawing) if c[0] not in touching)
    problems = [case.source.problem(key, text) for _, key, text in found]
    return tuple(sorted(problems, key=lambda problem: problem.line or 0))


def _boundary_name(case: Case) -> str:
    return case.outer_conductor or ""


def _is_kept(drawing: Drawing, inside: frozenset[int]) -> bool:
    """Whether a face lies on the side of the symmetry lines that is solved."""
    return drawing.around - {len(drawing.drawn)} <= inside


def _overlaps(case: Case, drawing: Drawing, faces: set[frozenset[int]]) -> Iterator[Finding]:
    """Faces that two things claim, each pair once."""
    for inside in sorted(faces, key=sorted):
        claim = _Claim.of(drawing, inside)
        yield from _conductor_conflicts(case, drawing, claim)
        yield from _coating_conflicts(case, drawing, claim)


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
        yield (a, b), f"conductors.{b}", f"overlaps conductor '{a}'; conductors must not meet"
    for owner in claim.conductors:
        name = names[owner]
        if not claim.in_domain:
            yield (name, _boundary_name(case)), f"conductors.{name}", _sticks_out(case)
        for other, number in claim.coats.items():
            if other != owner:
                key = drawing.drawn[number].key
                text = f"cuts into conductor '{name}'; it may touch it at most (move '{names[other]}' away or make its"
                yield (name, key), key, f"{text} insulation thinner)"


def _coating_conflicts(case: Case, drawing: Drawing, claim: _Claim) -> Iterator[Finding]:
    if not claim.in_domain:
        for other, number in claim.coats.items():
            if other not in claim.conductors:
                key = drawing.drawn[number].key
                yield (key, _boundary_name(case)), key, _coat_sticks_out(case)
    for (one, first), (_, second) in combinations(sorted(claim.coats.items()), 2):
        if not claim.conductors and drawing.drawn[first].material != drawing.drawn[second].material:
            a, key = case.conductors[one].name, drawing.drawn[second].key
            yield (key, a), key, f"overlaps a coating of '{a}' of another material; they may touch at most"


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
    for together in at.values():
        for a, b in combinations(sorted(together, key=order.index), 2):
            key = f"conductors.{b}" if b in names else f"conductors.{a}"
            other = a if b in names else b
            yield (a, b), key, f"touches '{other}': a short circuit; leave a gap, or draw them as one conductor"


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
    surfaces = [(d.conductor, d.outline) for d in drawing.drawn if d.material is None]
    surfaces += [(len(case.conductors), surface) for surface in drawing.domain.grounded]
    owner = np.array([conductor for conductor, outline in surfaces for _ in outline])
    table = CurveTable([curve for _, outline in surfaces for curve in outline])
    names = [*(c.name for c in case.conductors), _boundary_name(case)]
    gaps: dict[tuple[int, int], float] = {}
    for one, two in _near_pairs(table, owner, least):
        gap = _distance(table, one, two)
        if gap < least:
            pair = (min(owner[one], owner[two]), max(owner[one], owner[two]))
            gaps[pair] = min(gap, gaps.get(pair, np.inf))
    for (one, two), gap in sorted(gaps.items()):
        a, b = names[one], names[two]
        key = f"conductors.{b}" if two < len(case.conductors) else f"conductors.{a}"
        other = a if two < len(case.conductors) else b
        text = f"is {gap:.2g} m from '{other}'; the smallest gap allowed here is {least:.2g} m (1e-6 of the layout)"
        yield (a, b), key, text


def _near_pairs(table: CurveTable, owner: Ints, margin: float) -> list[tuple[int, int]]:
    """Pairs of curves of two conductors that may come within a margin: none does whose samples are farther apart."""
    boxes = table.boxes(margin)
    reaches = (boxes[:, None, :2] <= boxes[None, :, 2:]).all(axis=2)
    one, two = np.nonzero(reaches & reaches.T & (owner[:, None] < owner))
    t = np.linspace(0.0, 1.0, 17)
    samples = np.array([_along(table, k, t) for k in range(len(owner))])
    apart = np.hypot(*(samples[one, :, None] - samples[two, None]).transpose(3, 0, 1, 2)).min(axis=(1, 2))
    near = apart - (table.length[one] + table.length[two]) / 32 <= margin
    return [(int(i), int(j)) for i, j in zip(one[near], two[near], strict=True)]


def _distance(table: CurveTable, one: int, two: int) -> float:
    """Distance of two curves that do not meet: the nearest of samples on one, then closer and closer around it."""
    t, step = np.linspace(0.0, 1.0, 257), 1 / 256
    for _ in range(12):
        apart = _distances_to(table, two, _along(table, one, t))
        nearest = t[int(np.argmin(apart))]
        t, step = np.clip(nearest + step * np.linspace(-1.0, 1.0, 17), 0.0, 1.0), step / 8
    return float(apart.min())


def _distances_to(table: CurveTable, k: int, x: Floats) -> Floats:
    """(n,) distances of points x (n, 2) from a curve."""
    start, end = table.start[k], table.end[k]
    if table.radius[k] == 0:
        along = np.clip(((x - start) @ (end - start)) / table.length[k] ** 2, 0.0, 1.0)
        return np.asarray(np.hypot(*(x - start - along[:, None] * (end - start)).T))
    away = x - table.centre[k]
    turned = np.sign(table.sweep[k]) * (np.arctan2(away[:, 1], away[:, 0]) - table.angle[k])
    beside = np.mod(turned, 2 * np.pi) <= np.abs(table.sweep[k])
    to_ends = np.minimum(np.hypot(*(x - start).T), np.hypot(*(x - end).T))
    return np.asarray(np.where(beside, np.abs(np.hypot(*away.T) - table.radius[k]), to_ends))


def _along(table: CurveTable, k: int, t: Floats) -> Floats:
    if table.radius[k] == 0:
        return np.asarray(table.start[k] + t[:, None] * (table.end[k] - table.start[k]))
    phi = table.angle[k] + t * table.sweep[k]
    return np.asarray(table.centre[k] + table.radius[k] * np.stack([np.cos(phi), np.sin(phi)], axis=1))
