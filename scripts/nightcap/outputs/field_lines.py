"""Field lines: contours of the flux function, followed from triangle to triangle.

The flux function jumps across cuts, so a contour plot of it would break there. A line is followed instead: in each
triangle along the level at which it came in, and over each edge to the same point in the next triangle, whatever
level that has there. Between two neighbouring lines flows the same charge.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from nightcap.geometry.curves import Floats

Ints = NDArray[np.int64]
Flags = NDArray[np.bool_]
Rim = tuple[tuple[float, float], float]
"""Centre and radius, m."""
LONGEST = 20_000
"""Steps after which a line is given up."""
ASIDE = 1e-4
"""Of the distance between lines: so little beside the middle that no line runs exactly through corners."""


@dataclass(frozen=True, eq=False)
class FluxSheet:
    """Triangles with the values of a flux function, corners not shared."""

    corners: Floats
    """(T, 3, 2), m; inverted on the far sheet."""
    flux: Floats
    """(T, 3), C/m."""
    neighbour: Ints
    """(3 T,): edge e of triangle t is number 3 t + e, from corner e to corner e + 1; its partner's number, or -1."""
    labels: Ints
    """(T, 3): equal for corners that are one point of one sheet."""
    far: Flags
    """(T,)."""
    rim: Rim | None


def flux_sheet(
    corners: Floats, flux: Floats, far: Flags, rim: Rim | None, size: float, places: Ints | None = None
) -> FluxSheet:
    """Finds which triangles touch, also across the rim.

    size : of the layout, m; corners agree to 1e-9 of it. places : (T, 3) numbers that are the same for corners that are
    one point; without them corners are one where they agree, so that the two sides of a slit would grow together.
    """
    grid = np.rint(_drawn_in(corners.reshape(-1, 2), size) / (1e-9 * size)).astype(np.int64)
    sheet = np.repeat(far, 3).astype(np.int64)
    columns = (grid[:, 0], grid[:, 1]) if places is None else (places.reshape(-1),)
    labels = _labels(*columns, sheet).reshape(-1, 3)
    neighbour = _partners(labels, np.ones(labels.shape, dtype=bool))
    if rim is not None:
        centre, radius = rim
        off = np.abs(np.hypot(*(corners - np.asarray(centre)).transpose(2, 0, 1)) - radius)
        on_rim = off < 1e-6 * radius
        is_open = (neighbour < 0).reshape(-1, 3) & on_rim & np.roll(on_rim, -1, axis=1)
        across = _partners(_labels(grid[:, 0], grid[:, 1]).reshape(-1, 3), is_open)
        neighbour = np.where(across >= 0, across, neighbour)
    return FluxSheet(corners, flux, neighbour, labels, far, rim)


def field_lines(sheet: FluxSheet, surface: Flags, count: int) -> list[Floats]:
    """Lines (n, 2), m, that start on a surface at equal charges from each other, in true coordinates.

    surface : (3 T,) True for the edges of the conductor from which the lines start.
    """
    lines: list[Floats] = []
    for edge, fraction in _starts(sheet, surface, count):
        lines += _parts(sheet.rim, *_follow(sheet, edge, fraction))
    return lines


def unfolded(points: Floats, rim: Rim | None) -> Floats:
    """True coordinates (..., 2) of points on the far sheet: the inversion in the rim undone, infinity brought near."""
    if rim is None:
        return points
    centre, radius = rim
    away = points - np.asarray(centre)
    distance = np.hypot(away[..., 0], away[..., 1])[..., None]
    direction = np.where(distance > 0, away / np.maximum(distance, 1e-300), [1.0, 0.0])
    true: Floats = np.asarray(centre) + direction * radius**2 / np.maximum(distance, 1e-3 * radius)
    return true


def _drawn_in(points: Floats, size: float) -> Floats:
    """Points (n, 2) with their distances from the middle made logarithmic: far away, they agree less closely."""
    away = points - np.median(points, axis=0)
    return np.asarray(np.sign(away) * size * np.log1p(np.abs(away) / size))


def _labels(*columns: Ints) -> Ints:
    """Numbers that are equal where all columns are."""
    order = np.lexsort(columns)
    differs = np.zeros(len(order), dtype=bool)
    for column in columns:
        differs[1:] |= np.diff(column[order]) != 0
    labels = np.empty(len(order), dtype=np.int64)
    labels[order] = np.cumsum(differs)
    return labels


def _partners(labels: Ints, wanted: Flags) -> Ints:
    """For each edge (3 T,) the only other wanted one with the same two ends, or -1."""
    ends = np.sort(np.stack([labels, np.roll(labels, -1, axis=1)], axis=-1).reshape(-1, 2), axis=1)
    number = np.flatnonzero(wanted.reshape(-1))
    key = ends[number, 0] * (labels.max(initial=0) + 1) + ends[number, 1]
    order = np.argsort(key, kind="stable")
    same = np.flatnonzero(np.diff(key[order]) == 0)
    one, two = number[order[same]], number[order[same + 1]]
    partners = np.full(labels.size, -1, dtype=np.int64)
    partners[one], partners[two] = two, one
    return partners


def _starts(sheet: FluxSheet, surface: Flags, count: int) -> Iterator[tuple[int, float]]:
    """Edges, and the fraction along each, that cut the charge of a surface into equal parts."""
    edges, along = _in_order(sheet, np.flatnonzero(surface))
    charge = np.abs(np.roll(sheet.flux, -1, axis=1) - sheet.flux).reshape(-1)[edges]
    reached = np.concatenate([[0.0], np.cumsum(charge)])
    for level in (np.arange(count) + 0.5 + ASIDE) / count * reached[-1]:
        k = min(int(np.searchsorted(reached, level, side="right")) - 1, len(edges) - 1)
        fraction = float((level - reached[k]) / charge[k]) if charge[k] > 0 else 0.5
        yield int(edges[k]), fraction if along[k] else 1.0 - fraction


def _in_order(sheet: FluxSheet, edges: Ints) -> tuple[Ints, Flags]:
    """Edges of a surface as they follow each other, and whether each is walked from its first end to its last.

    From an open end, if the surface has one, else from where the field is strongest.
    """
    first, last = sheet.labels.reshape(-1), np.roll(sheet.labels, -1, axis=1).reshape(-1)
    step = np.roll(sheet.corners, -1, axis=1) - sheet.corners
    length = np.hypot(step[..., 0], step[..., 1]).reshape(-1)
    strength = np.abs(np.roll(sheet.flux, -1, axis=1) - sheet.flux).reshape(-1) / length
    touching: dict[int, list[int]] = {}
    for edge in edges.tolist():
        for end in (int(first[edge]), int(last[edge])):
            touching.setdefault(end, []).append(edge)
    is_inner = np.array(
        [len(touching[a]) > 1 < len(touching[b]) for a, b in zip(first[edges], last[edges], strict=True)]
    )
    left = dict.fromkeys(edges[np.lexsort((-strength[edges], is_inner))].tolist())
    ordered, along = [], []
    while left:
        current: int | None = next(iter(left))
        assert current is not None  # noqa: S101 - there is one left
        start = int(last[current]) if len(touching[int(last[current])]) == 1 else int(first[current])
        while current is not None:
            del left[current]
            ordered.append(current)
            along.append(start == int(first[current]))
            start = int(last[current] if along[-1] else first[current])
            current = next((e for e in touching[start] if e in left), None)
    return np.array(ordered, dtype=np.int64), np.array(along, dtype=np.bool_)


def _follow(sheet: FluxSheet, edge: int, fraction: float) -> tuple[list[Floats], list[bool]]:
    """The points of a line from an edge on, and whether the triangle after each lies on the far sheet."""
    points, far = [], []
    for _ in range(LONGEST):
        t, e = divmod(edge, 3)
        corners, values = sheet.corners[t], sheet.flux[t].tolist()
        a, b, c = e, (e + 1) % 3, (e + 2) % 3
        points.append((1 - fraction) * corners[a] + fraction * corners[b])
        far.append(bool(sheet.far[t]))
        level = (1 - fraction) * values[a] + fraction * values[b]
        a, b = (b, c) if (values[c] - level) * (values[a] - level) > 0 else (c, a)
        span = values[b] - values[a]
        fraction = min(max((level - values[a]) / span, 0.0), 1.0) if span else 0.5
        partner = int(sheet.neighbour[3 * t + a])
        if partner < 0:
            points.append((1 - fraction) * corners[a] + fraction * corners[b])
            far.append(far[-1])
            break
        same_sense = sheet.labels[t, a] == sheet.labels.reshape(-1)[partner]
        if sheet.far[partner // 3] != sheet.far[t]:  # other labels there, the same coordinates
            start = sheet.corners[partner // 3, partner % 3]
            same_sense = bool(np.hypot(*(start - corners[a])) < np.hypot(*(start - corners[b])))
        edge, fraction = partner, fraction if same_sense else 1.0 - fraction
    return points, far


def _parts(rim: Rim | None, points: list[Floats], far: list[bool]) -> Iterator[Floats]:
    """The runs of a line on one sheet, each with the point on the rim where it ends."""
    start = 0
    for k in range(1, len(points) + 1):
        if k == len(points) or far[k] != far[start]:
            part = np.array(points[start : k + 1])
            if len(part) > 1:
                yield unfolded(part, rim) if far[start] else part
            start = k
