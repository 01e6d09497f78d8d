"""Geometric mistakes in a case: what overlaps, sticks out, touches, or comes too close."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations

import numpy as np
from scipy.spatial import cKDTree

from nightcap.geometry.arrangement import Arrangement
from nightcap.geometry.case import Case, GroundPlane, OpenSpace
from nightcap.geometry.crossing import CurveTable
from nightcap.geometry.curves import Floats
from nightcap.geometry.errors import Problem
from nightcap.geometry.mesh import Ints
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
    found = dict.fromkeys(_overlaps(case, drawing, set(members)))
    found |= dict.fromkeys(vanished(case, drawing, plane))
    found |= dict.fromkeys(strip_findings(case, drawing, plane, members, (_boundary_name(case), _sticks_out(case))))
    overlapping = {text_key for text_key, _, _ in found}
    contacts = [c for c in _contacts(case, drawing, plane) if c[0] not in overlapping]
    found |= dict.fromkeys(contacts)
    touching = overlapping | {c[0] for c in contacts}
    found |= dict.fromkeys(c for c in _narrow_gaps(case, drawing) if c[0] not in touching)
    problems = [case.source.problem(key, text) for _, key, text in found]
    return tuple(sorted(problems, key=lambda problem: problem.line or 0))


Finding = tuple[tuple[str, str], str, str]
"""The pair that is in conflict, the key to blame, and the message."""


def _boundary_name(case: Case) -> str:
    return "" if isinstance(case.boundary, OpenSpace) else case.boundary.name


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
        for number in sorted(inside - {domain}):  # the innermost coating is painted last
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


def _contacts(case: Case, drawing: Drawing, plane: Arrangement) -> Iterator[Finding]:
    """Conductors that meet in a point or along an edge: a short circuit."""
    names = [c.name for c in case.conductors]
    at: dict[int, set[str]] = {}
    for piece in plane.pieces:
        for number, _ in piece.outlines:
            name = _surface_name(case, drawing, names, number)
            if name and not (number == len(drawing.drawn) and drawing.rim and piece.curve.curvature):
                at.setdefault(piece.start, set()).add(name)
                at.setdefault(piece.end, set()).add(name)
    order = [*names, _boundary_name(case)]
    for together in at.values():
        for a, b in combinations(sorted(together, key=order.index), 2):
            key = f"conductors.{b}" if b in names else f"conductors.{a}"
            other = a if b in names else b
            yield (a, b), key, f"touches '{other}': a short circuit; leave a gap, or draw them as one conductor"


def _surface_name(case: Case, drawing: Drawing, names: list[str], number: int) -> str:
    if number == len(drawing.drawn):
        return _boundary_name(case)
    conductor = drawing.drawn[number].conductor
    return names[conductor] if conductor is not None and _is_conductor(drawing, number) else ""


def _narrow_gaps(case: Case, drawing: Drawing) -> Iterator[Finding]:
    """Pairs of conductors closer than the smallest gap."""
    least = SMALLEST_GAP * drawing.size
    surfaces = [(d.conductor, d.outline) for d in drawing.drawn if d.material is None]
    if not isinstance(case.boundary, OpenSpace):
        floor = drawing.domain[:1] if drawing.rim else drawing.domain
        surfaces.append((len(case.conductors), floor))
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
    """Distance of two curves that do not meet: the nearest of samples, then closer and closer around them."""
    samples = np.linspace(0.0, 1.0, 257)
    distances, nearest = cKDTree(_along(table, two, samples)).query(_along(table, one, samples))
    k = int(np.argmin(distances))
    t, u, step = float(samples[k]), float(samples[nearest[k]]), 1 / 256
    least = float(distances[k])
    for _ in range(12):
        around = np.linspace(-step, step, 9)
        ts, us = np.clip(t + around, 0.0, 1.0), np.clip(u + around, 0.0, 1.0)
        apart = np.hypot(*(_along(table, one, ts)[:, None] - _along(table, two, us)[None]).transpose(2, 0, 1))
        i, j = np.unravel_index(int(np.argmin(apart)), apart.shape)
        t, u, step, least = float(ts[i]), float(us[j]), step / 4, float(apart.min())
    return least


def _along(table: CurveTable, k: int, t: Floats) -> Floats:
    if table.radius[k] == 0:
        return np.asarray(table.start[k] + t[:, None] * (table.end[k] - table.start[k]))
    phi = table.angle[k] + t * table.sweep[k]
    return np.asarray(table.centre[k] + table.radius[k] * np.stack([np.cos(phi), np.sin(phi)], axis=1))
