"""Geometric mistakes in a case: what overlaps, sticks out, touches, or comes too close."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import combinations

import numpy as np
from scipy.spatial import cKDTree

from nightcap.geometry.arrangement import Arrangement
from nightcap.geometry.case import Case, GroundPlane, OpenSpace
from nightcap.geometry.crossing import CurveTable
from nightcap.geometry.curves import Floats
from nightcap.geometry.errors import Problem
from nightcap.geometry.painting import Drawing

SMALLEST_GAP = 1e-6
"""Between two conductors, relative to the layout's size."""


def find_problems(
    case: Case, drawing: Drawing, plane: Arrangement, members: Sequence[frozenset[int]]
) -> tuple[Problem, ...]:
    """Every geometric mistake once, in the order of the case's conductors.

    members : for each loop of the arrangement the outlines around the face on its left.
    """
    found = dict.fromkeys(_overlaps(case, drawing, set(members)))
    overlapping = {text_key for text_key, _, _ in found}
    contacts = [c for c in _contacts(case, drawing, plane) if c[0] not in overlapping]
    found |= dict.fromkeys(contacts)
    touching = overlapping | {c[0] for c in contacts}
    found |= dict.fromkeys(c for c in _narrow_gaps(case, drawing) if c[0] not in touching)
    return tuple(case.source.problem(key, text) for _, key, text in found)


Finding = tuple[tuple[str, str], str, str]
"""The pair that is in conflict, the key to blame, and the message."""


def _boundary_name(case: Case) -> str:
    return "" if isinstance(case.boundary, OpenSpace) else case.boundary.name


def _overlaps(case: Case, drawing: Drawing, faces: set[frozenset[int]]) -> Iterator[Finding]:
    """Faces that two things claim, each pair once."""
    domain = len(drawing.drawn)
    for inside in sorted(faces, key=sorted):
        conductors = sorted({drawing.drawn[k].conductor for k in inside if k < domain and _is_conductor(drawing, k)})
        coats = _innermost_coats(drawing, inside - {domain})
        for one, two in combinations(conductors, 2):
            a, b = case.conductors[one].name, case.conductors[two].name
            yield (a, b), f"conductors.{b}", f"overlaps conductor '{a}'; conductors must not meet"
        for owner in conductors:
            name = case.conductors[owner].name
            if domain not in inside:
                yield (name, _boundary_name(case)), f"conductors.{name}", _sticks_out(case)
            for other, number in coats.items():
                if other != owner:
                    key, a = drawing.drawn[number].key, case.conductors[other].name
                    yield (name, key), key, f"cuts into conductor '{name}'; it may touch it at most" + _room(a)
        if domain not in inside:
            for other, number in coats.items():
                if other not in conductors:
                    key = drawing.drawn[number].key
                    yield (key, _boundary_name(case)), key, _coat_sticks_out(case)
        for (one, first), (two, second) in combinations(sorted(coats.items()), 2):
            if not conductors and drawing.drawn[first].material != drawing.drawn[second].material:
                a, key = case.conductors[one].name, drawing.drawn[second].key
                text = f"overlaps a coating of '{a}' of another material; they may touch at most"
                yield (key, a), key, text


def _room(name: str) -> str:
    return f" (move '{name}' away or make its insulation thinner)"


def _is_conductor(drawing: Drawing, number: int) -> bool:
    return drawing.drawn[number].material is None


def _innermost_coats(drawing: Drawing, inside: frozenset[int]) -> dict[int, int]:
    """For each conductor the innermost of its coatings that covers a face: the outline last painted."""
    coats: dict[int, int] = {}
    for number in sorted(inside):
        drawn = drawing.drawn[number]
        if drawn.material is not None and drawn.conductor is not None:
            coats[drawn.conductor] = number
    return coats


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
    for one, two, gap in zip(*_near_pairs(table, least), strict=True):
        if owner[one] != owner[two] and gap < least:
            pair = (min(owner[one], owner[two]), max(owner[one], owner[two]))
            gaps[pair] = min(gap, gaps.get(pair, np.inf))
    for (one, two), gap in sorted(gaps.items()):
        a, b = names[one], names[two]
        key = f"conductors.{b}" if two < len(case.conductors) else f"conductors.{a}"
        other = a if two < len(case.conductors) else b
        text = f"is {gap:.2g} m from '{other}'; the smallest gap allowed here is {least:.2g} m (1e-6 of the layout)"
        yield (a, b), key, text


def _near_pairs(table: CurveTable, margin: float) -> tuple[Floats, Floats, Floats]:
    """Pairs of curves whose boxes come within a margin, and the distance between the curves of each, m."""
    boxes = table.boxes(margin)
    overlap = (boxes[:, None, :2] <= boxes[None, :, 2:]).all(axis=2)
    one, two = np.nonzero(np.triu(overlap & overlap.T, 1))
    return one, two, np.array([_distance(table, i, j) for i, j in zip(one, two, strict=True)])


def _distance(table: CurveTable, one: int, two: int) -> float:
    """Distance of two curves that do not meet: between an end and a curve, or along the line of the centres."""
    samples = np.linspace(0.0, 1.0, 257)
    points = [_along(table, k, samples) for k in (one, two)]
    distances, nearest = cKDTree(points[1]).query(points[0])
    k = int(np.argmin(distances))
    span = [samples[[max(i - 1, 0), min(i + 1, 256)]] for i in (k, int(nearest[k]))]
    for _ in range(12):
        grids = [np.linspace(*s, 9) for s in span]
        fine = [_along(table, c, g) for c, g in zip((one, two), grids, strict=True)]
        apart = np.hypot(*(fine[0][:, None] - fine[1][None]).transpose(2, 0, 1))
        i, j = np.unravel_index(np.argmin(apart), apart.shape)
        span = [g[[max(m - 1, 0), min(m + 1, 8)]] for g, m in zip(grids, (i, j), strict=True)]
    return float(apart.min())


def _along(table: CurveTable, k: int, t: Floats) -> Floats:
    if table.radius[k] == 0:
        return np.asarray(table.start[k] + t[:, None] * (table.end[k] - table.start[k]))
    phi = table.angle[k] + t * table.sweep[k]
    return np.asarray(table.centre[k] + table.radius[k] * np.stack([np.cos(phi), np.sin(phi)], axis=1))
