"""Corners, where the field is not smooth: triangles there are cut into layers that shrink towards the corner."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from nightcap.geometry.curves import Floats, Ints, direction_and_bend
from nightcap.geometry.grading import Grading
from nightcap.geometry.layout import FAR_WALL, MAGNETIC_WALL, Layout, Piece
from nightcap.geometry.mesh import Triangulation, ascending
from nightcap.geometry.tips import is_tip, tip_fraction

SHRINK = 0.4
"""Size of each layer relative to the one around it."""
FINEST = 1e-11
"""Least edge length at a corner relative to its coordinates, which have 16 digits."""


def corner_sizes(layout: Layout, grading: Grading) -> dict[int, float]:
    """The points of a layout where the field is not smooth, and the edge length, m, wanted at each."""
    arms: dict[int, list[tuple[float, Piece]]] = {}
    for piece in layout.pieces:
        for point, from_start in ((piece.start, True), (piece.end, False)):
            arms.setdefault(point, []).append((direction_and_bend(piece.curve, from_start)[0], piece))
    sizes = {}
    for point, meeting in arms.items():
        fraction = tip_fraction(layout, meeting, grading) if is_tip(layout, meeting) else _fraction(meeting, grading)
        if fraction is not None:
            sizes[point] = fraction * min(piece.curve.length for _, piece in meeting)
    return sizes


def with_layers(flat: Triangulation, spans: Floats, grading: Grading) -> tuple[Triangulation, Floats]:
    """Cuts the triangles around each corner into layers, down to the edge length wanted there.

    spans : (B, 2) curve parameters of the curve edges; returned for the new ones. Babuska and Guo 1988: on layers that
    shrink geometrically, polynomials approach singular fields exponentially.
    """
    for corner, size in corner_sizes(flat.layout, grading).items():
        around = np.flatnonzero((flat.triangles == corner).any(axis=1))
        spokes = np.setdiff1d(flat.triangles[around], [corner])
        reach = np.hypot(*(flat.points[spokes] - flat.points[corner]).T).min()
        least = max(size, FINEST * float(np.abs(flat.points[[corner, *spokes]]).max()))
        layers = math.ceil(math.log(max(reach / least, 1.0)) / -math.log(SHRINK))
        if layers:
            flat, spans = _layered(flat, spans, corner, around, spokes, layers)
    return flat, spans


def _layered(
    flat: Triangulation, spans: Floats, corner: int, around: Ints, spokes: Ints, layers: int
) -> tuple[Triangulation, Floats]:
    """Cuts the triangles around one corner: along each spoke, its outer vertex first, then ``layers`` new ones."""
    shrunk = SHRINK ** np.arange(1, layers + 1)
    new = len(flat.points) + np.arange(len(spokes) * layers).reshape(len(spokes), layers)
    chain = np.concatenate([spokes[:, None], new], axis=1)
    at = flat.points[corner]
    points = at + shrunk[:, None] * (flat.points[spokes] - at)[:, None, :]
    on_curve = np.flatnonzero((flat.curve_edges == corner).any(axis=1))
    edges, pieces, parameters = [], [], []
    for row in on_curve:
        start, end = flat.curve_edges[row]
        t, outer = spans[row] if start == corner else spans[row, ::-1]
        spoke = int(np.searchsorted(spokes, start + end - corner))
        along = np.concatenate([[outer], t + shrunk * (outer - t), [t]])
        points[spoke] = flat.layout.pieces[flat.curve_piece[row]].curve.at(along[1:-1])
        vertices = np.append(chain[spoke], corner)
        edges.append(np.stack([vertices[:-1], vertices[1:]], axis=1))
        parameters.append(np.stack([along[:-1], along[1:]], axis=1))
        pieces.append(np.full(layers + 1, flat.curve_piece[row]))
    triangles, orientation = ascending(_ring(flat, corner, around, spokes, chain))
    kept, old = np.delete(np.arange(len(flat.triangles)), around), np.delete(np.arange(len(spans)), on_curve)
    curve_edges = np.concatenate([flat.curve_edges[old], *edges])
    spans = np.concatenate([spans[old], *parameters])
    turned = curve_edges[:, 0] > curve_edges[:, 1]
    curve_edges[turned], spans[turned] = curve_edges[turned][:, ::-1], spans[turned][:, ::-1]
    finer = replace(
        flat,
        points=np.concatenate([flat.points, points.reshape(-1, 2)]),
        triangles=np.concatenate([flat.triangles[kept], triangles]),
        orientation=np.concatenate([flat.orientation[kept], orientation]),
        region=np.concatenate([flat.region[kept], np.tile(flat.region[around], 2 * layers + 1)]),
        curve_edges=curve_edges,
        curve_piece=np.concatenate([flat.curve_piece[old], *pieces]),
    )
    return finer, spans


def _ring(flat: Triangulation, corner: int, around: Ints, spokes: Ints, chain: Ints) -> Ints:
    """The counter-clockwise triangles, layer by layer, that take the place of those around a corner."""
    corners = flat.triangles[around].copy()
    clockwise = flat.orientation[around] < 0
    corners[clockwise] = corners[clockwise][:, ::-1]
    place = np.argmax(corners == corner, axis=1)
    rows = np.arange(len(corners))
    first = chain[np.searchsorted(spokes, corners[rows, (place + 1) % 3])]
    second = chain[np.searchsorted(spokes, corners[rows, (place + 2) % 3])]
    parts = []
    for k in range(chain.shape[1] - 1):
        parts.append(np.stack([first[:, k], second[:, k], second[:, k + 1]], axis=1))
        parts.append(np.stack([first[:, k], second[:, k + 1], first[:, k + 1]], axis=1))
    parts.append(np.stack([np.full(len(corners), corner), first[:, -1], second[:, -1]], axis=1))
    return np.concatenate(parts)


def _fraction(meeting: list[tuple[float, Piece]], grading: Grading) -> float | None:
    """The grading that a point needs at which these pieces meet, or None where it is smooth."""
    angles = sorted(angle % math.tau for angle, _ in meeting)
    openings = np.diff([*angles, angles[0] + math.tau])
    smooth = len(angles) == 2 and abs(openings[0] - math.pi) < 1e-6
    cusped = bool((openings < 1e-6).any())
    if smooth or cusped or any(piece.wall == FAR_WALL for _, piece in meeting):
        return None
    if any(piece.wall for _, piece in meeting):
        return _fraction_at_mirror(meeting, grading)
    on_conductor = any(piece.surface is not None for _, piece in meeting)
    if on_conductor and _opens_wide(meeting):
        return grading.corner
    return grading.bend if len(angles) > 2 or not on_conductor else None


def _opens_wide(meeting: list[tuple[float, Piece]]) -> bool:
    """Whether the dielectric around a point of a conductor's surface spans more than a half turn."""
    surface = sorted(angle % math.tau for angle, piece in meeting if piece.surface is not None)
    if len(surface) != 2:
        return True
    between = surface[1] - surface[0]
    if any(piece.conductor is not None for _, piece in meeting):  # a strip has dielectric on both sides
        return abs(between - math.pi) > 1e-6
    others = [angle % math.tau for angle, piece in meeting if piece.surface is None]
    if others:
        inside = surface[0] < others[0] < surface[1]
        return (between if inside else math.tau - between) > math.pi + 1e-6
    return _dielectric_angle(meeting) > math.pi + 1e-6


def _fraction_at_mirror(meeting: list[tuple[float, Piece]], grading: Grading) -> float | None:
    """The same for a point on a line that no flux passes, where the layout goes on as its mirror image."""
    wanted = [_fraction_beside(angle, piece, meeting, grading) for angle, piece in meeting if piece.wall]
    return min((fraction for fraction in wanted if fraction is not None), default=None)


def _fraction_beside(angle: float, wall: Piece, meeting: list[tuple[float, Piece]], grading: Grading) -> float | None:
    """Between one magnetic wall and the next conductor, or wall, around the point: reflection doubles that angle."""
    inside_is_left = (wall.sides[1] >= MAGNETIC_WALL) == _leaves_along(angle, wall)
    around = [((other - angle) * (1 if inside_is_left else -1) % math.tau, piece) for other, piece in meeting]
    around = sorted(((turn, piece) for turn, piece in around if piece is not wall), key=lambda arm: arm[0])
    end = next((k for k, (_, piece) in enumerate(around) if piece.wall or min(piece.sides) < 0), len(around) - 1)
    opening, last = around[end]
    interfaces = [turn for turn, _ in around[:end]]
    if not last.wall and opening > math.pi / 2 + 1e-6:
        return grading.corner
    is_smooth = last.wall and len(interfaces) == 1 and abs(opening - math.pi) < 1e-6 > abs(interfaces[0] - math.pi / 2)
    return grading.bend if interfaces and not is_smooth else None


def _dielectric_angle(meeting: list[tuple[float, Piece]]) -> float:
    """Angle of the dielectric at a corner where just two pieces of a conductor's surface meet."""
    (angle, piece), (other, _) = meeting
    starts_here = _leaves_along(angle, piece)
    left, right = piece.sides if starts_here else piece.sides[::-1]
    turn = (other - angle) % math.tau
    return turn if left >= 0 > right else math.tau - turn


def _leaves_along(angle: float, piece: Piece) -> bool:
    return abs(math.remainder(direction_and_bend(piece.curve, True)[0] - angle, math.tau)) < 1e-9
