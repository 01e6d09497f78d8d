"""The plane cut by curves: points, pieces between them, and the faces that these enclose."""

from __future__ import annotations

import math
from collections import Counter, deque
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components
from scipy.spatial import cKDTree

from nightcap.geometry.crossing import cut_parameters
from nightcap.geometry.curves import Arc, Curve, Flags, Floats, Ints, Point, direction_and_bend
from nightcap.geometry.polynomial_arc import PolynomialArc

Loop = tuple[int, ...]
"""Half-edges walked with their face on the left: 2 k along piece k, 2 k + 1 against it."""


@dataclass(frozen=True)
class CutPiece:
    """A curve between two points of an arrangement that meets others only there."""

    curve: Curve
    start: int
    end: int
    outlines: tuple[tuple[int, bool], ...]
    """The outlines that run along it, and whether in the same direction; a strip's runs there and back."""

    @property
    def crossed(self) -> frozenset[int]:
        """The outlines that one enters or leaves by crossing the piece: not a strip's, which encloses nothing."""
        count = Counter(number for number, _ in self.outlines)
        return frozenset(number for number, times in count.items() if times % 2)

    @property
    def strips(self) -> frozenset[int]:
        """The outlines that run along it there and back."""
        return frozenset(number for number, _ in self.outlines) - self.crossed


@dataclass(frozen=True, eq=False)
class Arrangement:
    """Pieces and their faces."""

    points: Floats
    """(P, 2), m."""
    pieces: tuple[CutPiece, ...]

    @cached_property
    def loops(self) -> tuple[Loop, ...]:
        """All closed walks: outer boundaries of faces counter-clockwise, boundaries of what they hold clockwise."""
        onward = self._onward()
        seen: set[int] = set()
        loops = []
        for first in onward:
            walk = []
            step = first
            while step not in seen:
                seen.add(step)
                walk.append(step)
                step = onward[step]
            if walk:
                loops.append(tuple(walk))
        return tuple(loops)

    def _onward(self) -> dict[int, int]:
        """For each half-edge the next one around its face: at its end, the first one clockwise."""
        leaving: dict[int, list[tuple[float, float, int]]] = {}
        for k, piece in enumerate(self.pieces):
            for half, point in ((2 * k, piece.start), (2 * k + 1, piece.end)):
                leaving.setdefault(point, []).append((*direction_and_bend(piece.curve, half % 2 == 0), half))
        onward = {}
        for halves in leaving.values():
            around = _by_angle(halves)
            for before, half in zip([around[-1], *around[:-1]], around, strict=True):
                onward[half ^ 1] = before
        return onward

    @cached_property
    def loop_of(self) -> dict[int, int]:
        """The loop of each half-edge."""
        return {half: k for k, loop in enumerate(self.loops) for half in loop}

    @cached_property
    def areas(self) -> tuple[float, ...]:
        """The area inside each loop, m^2, negative for clockwise ones; exactly 0 for a walk there and back."""
        return tuple(math.fsum(self._swept(half) for half in loop) for loop in self.loops)

    def _swept(self, half: int) -> float:
        curve = self.pieces[half // 2].curve
        (x0, y0), (x1, y1) = curve.start, curve.end
        ox, oy = self.points[0]
        area = ((x0 - ox) * (y1 - oy) - (x1 - ox) * (y0 - oy)) / 2
        if isinstance(curve, Arc):
            area += curve.radius**2 * (curve.sweep - math.sin(curve.sweep)) / 2
        elif isinstance(curve, PolynomialArc):
            area += curve.swept
        return float(area if half % 2 == 0 else -area)

    @cached_property
    def component(self) -> Ints:
        """(P,) a number for each connected set of pieces."""
        ends = np.array([(piece.start, piece.end) for piece in self.pieces]).reshape(-1, 2)
        size = len(self.points)
        graph = coo_array((np.ones(len(ends)), ends.T), shape=(size, size))
        return np.asarray(connected_components(graph, directed=False)[1], dtype=np.int64)

    def anchor(self, loop: int) -> int:
        """A point on a loop."""
        half = self.loops[loop][0]
        piece = self.pieces[half // 2]
        return piece.start if half % 2 == 0 else piece.end

    @cached_property
    def holder(self) -> dict[int, int | None]:
        """For each clockwise loop the smallest counter-clockwise one around it, or None if it lies outside all."""
        component = np.array([self.component[self.anchor(k)] for k in self._outer])
        holders: dict[int, int | None] = {}
        for k, area in enumerate(self.areas):
            if area <= 0:
                point = self.points[self.anchor(k)]
                holders[k] = self._innermost(point, component != self.component[self.anchor(k)])
        return holders

    def innermost_around(self, point: Floats) -> int | None:
        """The smallest counter-clockwise loop around a point that lies on no piece."""
        return self._innermost(point, np.ones(len(self._outer), dtype=bool))

    def _innermost(self, point: Floats, allowed: Flags) -> int | None:
        curves, boxes = self._outer_curves
        around = np.flatnonzero(boxes.around(point) & allowed)
        return next((self._outer[j] for j in around if winds_around(curves[j], point)), None)

    @cached_property
    def _outer(self) -> list[int]:
        """The counter-clockwise loops, the smallest first."""
        return sorted((k for k, area in enumerate(self.areas) if area > 0), key=lambda k: self.areas[k])

    @cached_property
    def _outer_curves(self) -> tuple[list[list[Curve]], _Boxes]:
        curves = [[self._walked(half) for half in self.loops[k]] for k in self._outer]
        return curves, _Boxes(curves)

    def anchor_of(self, half: int) -> int:
        """The point where a half-edge starts."""
        piece = self.pieces[half // 2]
        return piece.start if half % 2 == 0 else piece.end

    def _walked(self, half: int) -> Curve:
        curve = self.pieces[half // 2].curve
        return curve if half % 2 == 0 else curve.reversed()

    def memberships(self, outlines: Sequence[Sequence[Curve]]) -> tuple[frozenset[int], ...]:
        """For each loop the outlines whose inside lies on its left, found by walking from face to face.

        Crossing a piece changes just the outlines that run along it. Each component starts from a clockwise loop, where
        the outlines of the other components are tested at a point.
        """
        found: dict[int, frozenset[int]] = {}
        own: dict[int, set[int]] = {}
        for piece in self.pieces:
            own.setdefault(int(self.component[piece.start]), set()).update(k for k, _ in piece.outlines)
        boxes = _Boxes(outlines)
        queue: deque[int] = deque()
        for loop in self.holder:
            anchor = self.anchor(loop)
            point = self.points[anchor]
            near = np.flatnonzero(boxes.around(point))
            others = set(near.tolist()) - own[int(self.component[anchor])]
            found[loop] = frozenset(k for k in others if winds_around(outlines[k], point))
            queue.append(loop)
        while queue:
            loop = queue.popleft()
            for half in self.loops[loop]:
                beyond = self.loop_of[half ^ 1]
                if beyond not in found:
                    found[beyond] = found[loop] ^ self.pieces[half // 2].crossed
                    queue.append(beyond)
        return tuple(found[k] for k in range(len(self.loops)))


def arrange(outlines: Sequence[Sequence[Curve]], tolerance: float) -> Arrangement:
    """Cuts outlines where they meet. Points and curves that agree to within the tolerance, m, become one."""
    curves = [curve for outline in outlines for curve in outline]
    owner = [k for k, outline in enumerate(outlines) for _ in outline]
    parts = [
        (curve.part(t0, t1) if t1 - t0 < 1 else curve, number)
        for curve, number, cuts in zip(curves, owner, cut_parameters(curves, tolerance), strict=True)
        for t0, t1 in zip(cuts[:-1].tolist(), cuts[1:].tolist(), strict=True)
    ]
    points, labels = _clustered(np.array([end for part, _ in parts for end in (part.start, part.end)]), tolerance)
    return Arrangement(points, _merged(parts, labels.reshape(-1, 2), tolerance))


def _clustered(ends: Floats, tolerance: float) -> tuple[Floats, Ints]:
    """One point for each cluster of ends, and the cluster of each end."""
    pairs = cKDTree(ends).query_pairs(8 * tolerance, output_type="ndarray")
    graph = coo_array((np.ones(len(pairs)), pairs.T), shape=(len(ends), len(ends)))
    count, labels = connected_components(graph, directed=False)
    first = np.full(count, len(ends))
    np.minimum.at(first, labels, np.arange(len(ends)))
    return ends[first], np.asarray(labels, dtype=np.int64)


def _merged(parts: list[tuple[Curve, int]], ends: Ints, tolerance: float) -> tuple[CutPiece, ...]:
    """Parts that run along each other become one piece."""
    pieces: list[tuple[Curve, int, int, list[tuple[int, bool]], Floats]] = []
    between: dict[tuple[int, int], list[int]] = {}
    for (curve, outline), (start, end) in zip(parts, ends.tolist(), strict=True):
        if start == end:
            continue  # shorter than the tolerance
        middle = curve.at(np.array(0.5))
        rivals = between.setdefault((min(start, end), max(start, end)), [])
        same = next((k for k in rivals if np.hypot(*(pieces[k][4] - middle)) <= 16 * tolerance), None)
        if same is None:
            rivals.append(len(pieces))
            pieces.append((curve, start, end, [(outline, True)], middle))
        else:
            pieces[same][3].append((outline, pieces[same][1] == start))
    return tuple(CutPiece(curve, start, end, tuple(along)) for curve, start, end, along, _ in pieces)


def _by_angle(halves: list[tuple[float, float, int]]) -> list[int]:
    """Half-edges that leave a point, counter-clockwise; those that leave in one direction by their bend."""
    halves = sorted(halves)
    groups: list[list[tuple[float, float, int]]] = [[halves[0]]]
    for item in halves[1:]:
        if item[0] - groups[-1][-1][0] < 1e-7:
            groups[-1].append(item)
        else:
            groups.append([item])
    if len(groups) > 1 and groups[0][0][0] + math.tau - groups[-1][-1][0] < 1e-7:
        groups[0] = groups.pop() + groups[0]
    return [half for group in groups for _, _, half in sorted(group, key=lambda item: item[1])]


def winds_around(curves: Iterable[Curve], point: Point | Floats) -> bool:
    """Whether a closed chain of curves, each at most a half circle, winds around a point that is not on it."""
    turn = 0.0
    px, py = float(point[0]), float(point[1])
    for curve in curves:
        if isinstance(curve, PolynomialArc):
            turn += curve.winding(point)
            continue
        (ax, ay), (bx, by) = curve.start, curve.end
        ux, uy, vx, vy = ax - px, ay - py, bx - px, by - py
        turn += math.atan2(ux * vy - uy * vx, ux * vx + uy * vy)
        if isinstance(curve, Arc) and math.hypot(px - curve.centre[0], py - curve.centre[1]) < curve.radius:
            beside = (bx - ax) * (py - ay) - (by - ay) * (px - ax)
            if beside * curve.sweep < 0:  # between chord and arc
                turn += math.copysign(math.tau, curve.sweep)
    return abs(turn) > math.pi


class _Boxes:
    """Boxes that hold closed chains of curves."""

    def __init__(self, chains: Sequence[Sequence[Curve]]) -> None:
        boxes = np.array([_box(chain) for chain in chains]).reshape(-1, 4)
        self.low, self.high = boxes[:, :2], boxes[:, 2:]

    def around(self, point: Floats) -> Flags:
        """(n,) which of them hold a point."""
        return np.asarray(((self.low <= point) & (point <= self.high)).all(axis=1))


def _box(chain: Sequence[Curve]) -> tuple[float, float, float, float]:
    """Low x, low y, high x, high y of a box around curves."""
    xs, ys = zip(*(curve.start for curve in chain), strict=True)
    reach = max((curve.length for curve in chain if curve.curvature), default=0.0) / 2
    return (min(xs) - reach, min(ys) - reach, max(xs) + reach, max(ys) + reach)
