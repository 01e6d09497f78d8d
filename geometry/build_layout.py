"""From a case to its layout: outlines cut where they meet, faces painted, faces of one material joined."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, replace
from functools import cached_property
from itertools import pairwise

import numpy as np

from nightcap.geometry.arrangement import Arrangement, CutPiece, arrange
from nightcap.geometry.case import Case, GroundPlane, Material
from nightcap.geometry.curves import Arc, Curve, Floats, Segment
from nightcap.geometry.domain import straight_edges
from nightcap.geometry.errors import CaseError
from nightcap.geometry.layout import FAR_WALL, MAGNETIC_WALL, FarWall, Layout, Piece, Region, conductor_side
from nightcap.geometry.layout_checks import find_problems
from nightcap.geometry.painting import Drawing, paint
from nightcap.geometry.seams import with_clear_seams
from nightcap.geometry.shapes import chains
from nightcap.geometry.symmetry import SymmetryLine
from nightcap.geometry.voids import Content, with_filled_voids

OUTSIDE = "outside"


def build_layout(case: Case) -> Layout:
    """Resolves what a case draws into regions with exact outlines.

    Raises CaseError with every geometric mistake, e.g. conductors that overlap.
    """
    drawing = paint(case)
    plane, members = _faces(drawing)
    problems = find_problems(case, drawing, plane, members)
    if problems:
        raise CaseError(problems)
    contents = with_filled_voids(case, plane, [_content(case, drawing, inside) for inside in members])
    return _Joined(case, drawing, plane, contents).layout()


def _faces(drawing: Drawing) -> tuple[Arrangement, list[frozenset[int]]]:
    """The plane cut by all outlines, and for each of its loops the outlines around the face on its left.

    Outlines with holes are several closed chains; a face lies inside if an odd number of these go around it.
    """
    owned = [(number, chain) for number, outline in enumerate(drawing.outlines) for chain in chains(outline)]
    owner, loops = [number for number, _ in owned], with_clear_seams([chain for _, chain in owned], drawing.tolerance)
    plane = arrange(loops, drawing.tolerance)
    counts = [Counter(owner[chain] for chain in around) for around in plane.memberships(loops)]
    members = [frozenset(number for number, count in counted.items() if count % 2) for counted in counts]
    pieces = (replace(p, outlines=tuple((owner[chain], same) for chain, same in p.outlines)) for p in plane.pieces)
    return Arrangement(plane.points, tuple(pieces)), members


def _content(case: Case, drawing: Drawing, inside: frozenset[int]) -> Content:
    """What a face inside these outlines is filled with: the last one painted."""
    if not drawing.around <= inside:
        return OUTSIDE
    top = max(inside - drawing.around, default=None)
    if top is None:
        return case.background
    drawn = drawing.drawn[top]
    if drawn.material is not None:
        return drawn.material
    assert drawn.conductor is not None  # noqa: S101 - what has no material is a conductor
    return drawn.conductor


@dataclass(frozen=True, eq=False)
class _Joined:
    """The faces after joining those of one content, and the numbering that a layout wants."""

    case: Case
    drawing: Drawing
    whole: Arrangement
    contents: list[Content]

    def _content_of(self, half: int) -> Content:
        return self.contents[self.whole.loop_of[half]]

    @cached_property
    def kept(self) -> list[int]:
        """The pieces that separate two contents, one of them a dielectric."""
        return [
            k
            for k in range(len(self.whole.pieces))
            if self._content_of(2 * k) != self._content_of(2 * k + 1)
            and any(isinstance(self._content_of(half), Material) for half in (2 * k, 2 * k + 1))
        ]

    @cached_property
    def inner(self) -> list[int]:
        """The pieces of strips that lie within one dielectric: no part of any loop."""
        kept = set(self.kept)
        return [k for k, piece in enumerate(self.whole.pieces) if k not in kept and self._strip(piece) is not None]

    def _strip(self, piece: CutPiece) -> int | None:
        """The conductor that a piece is, if a strip runs along it."""
        owners = (self.drawing.drawn[number].conductor for number in piece.strips)
        return next(owners, None)

    @cached_property
    def _renumbered(self) -> tuple[Floats, list[CutPiece]]:
        """The points that kept and inner pieces need, and these pieces between them."""
        pieces = [self.whole.pieces[k] for k in (*self.kept, *self.inner)]
        used = sorted({point for piece in pieces for point in (piece.start, piece.end)})
        number = {point: k for k, point in enumerate(used)}
        renumbered = [CutPiece(p.curve, number[p.start], number[p.end], p.outlines) for p in pieces]
        return self.whole.points[used], renumbered

    @cached_property
    def plane(self) -> Arrangement:
        """What is left: the kept pieces, between the points of the layout."""
        points, pieces = self._renumbered
        return Arrangement(points, tuple(pieces[: len(self.kept)]))

    def content(self, half: int) -> Content:
        """What lies left of a half-edge of the joined plane."""
        return self._content_of(2 * self.kept[half // 2] + half % 2)

    @cached_property
    def region(self) -> dict[int, int]:
        """The region of each loop that bounds a dielectric."""
        filled = [k for k, loop in enumerate(self.plane.loops) if isinstance(self.content(loop[0]), Material)]
        outer = [k for k in filled if self.plane.areas[k] > 0]
        number = {k: n for n, k in enumerate(outer)}
        return {k: number[k if k in number else self._holder(k)] for k in filled}

    def _holder(self, loop: int) -> int:
        holder = self.plane.holder[loop]
        assert holder is not None  # noqa: S101 - a dielectric always lies within the domain
        return holder

    @cached_property
    def conductors(self) -> tuple[str, ...]:
        """All names, that of the conductor all around last."""
        names = tuple(conductor.name for conductor in self.case.conductors)
        outer = self.case.outer_conductor
        return names if outer is None else (*names, outer)

    def layout(self) -> Layout:
        """The layout, with the far region where space is open."""
        count = max(self.region.values()) + 1
        loops: list[list[tuple[int, ...]]] = [[] for _ in range(count)]
        materials: list[Material] = [self.case.background] * count
        for k in sorted(self.region, key=lambda k: self.plane.areas[k] < 0):
            halves = self.plane.loops[k]
            loops[self.region[k]].append(tuple((half // 2 + 1) * (1 if half % 2 == 0 else -1) for half in halves))
            content = self.content(halves[0])
            assert isinstance(content, Material)  # noqa: S101 - only such loops have a region
            materials[self.region[k]] = content
        palette = sorted({*materials, self.case.background}, key=lambda m: (m.permittivity, m.loss_tangent, m.name))
        pieces = [
            Piece(p.curve, p.start, p.end, self._sides(k), self._strip(p)) for k, p in enumerate(self.plane.pieces)
        ]
        embedded = self._embedded(pieces)
        regions = [
            Region(tuple(walks), palette.index(m), embedded=tuple(embedded.get(k, ())))
            for k, (walks, m) in enumerate(zip(loops, materials, strict=True))
        ]
        points = self.plane.points
        if self.rim:
            points = self._add_far_region(pieces, regions, palette.index(self.case.background))
        return Layout(
            points,
            tuple(pieces),
            tuple(regions),
            tuple(palette),
            self.conductors,
            self.conductors.index(self.case.reference),
            self.drawing.size,
            self.rim,
            self._far_wall(),
        )

    def _embedded(self, pieces: list[Piece]) -> dict[int, list[int]]:
        """Adds the inner pieces; returns their numbers by region."""
        embedded: dict[int, list[int]] = {}
        for p in self._renumbered[1][len(self.kept) :]:
            loop = self.plane.innermost_around(p.curve.at(np.array(0.5)))
            assert loop is not None  # noqa: S101 - a strip always lies within the domain
            region = self.region[loop]
            embedded.setdefault(region, []).append(len(pieces))
            pieces.append(Piece(p.curve, p.start, p.end, (region, region), self._strip(p)))
        return embedded

    def _sides(self, piece: int) -> tuple[int, int]:
        """What lies left and right; on the rim the near region comes first."""
        sides = [self._side(half) for half in (2 * piece, 2 * piece + 1)]
        return (sides[0], sides[1])

    def _side(self, half: int) -> int:
        content = self.content(half)
        if isinstance(content, Material):
            return self.region[self.plane.loop_of[half]]
        if isinstance(content, int):
            return conductor_side(content)
        return self._beyond(self.plane.pieces[half // 2])

    def _beyond(self, piece: CutPiece) -> int:
        """What lies across an edge of the domain: a line of symmetry before all else, as it cuts what meets it."""
        outlines = {number for number, _ in piece.outlines}
        middle = piece.curve.at(np.array(0.5))
        if len(self.drawing.drawn) + 1 in outlines:
            for line in self.case.symmetry:
                if self._is_at(middle[line.axis], line.at):
                    return self._edge_side(line)
        if self._on_rim(piece.curve):
            return max(self.region.values()) + 1  # the far region
        plane = self.case.boundary
        if self.drawing.domain.wall and not (isinstance(plane, GroundPlane) and self._is_at(middle[1], plane.at)):
            return FAR_WALL
        return self._outer_side

    def _is_at(self, coordinate: float, at: float) -> bool:
        return bool(abs(coordinate - at) <= 16 * self.drawing.tolerance)

    def _edge_side(self, line: SymmetryLine) -> int:
        return self._outer_side if line.is_electric else MAGNETIC_WALL

    @property
    def _outer_side(self) -> int:
        return conductor_side(len(self.conductors) - 1)

    def _far_wall(self) -> FarWall | None:
        reach = self.drawing.domain.wall
        if reach is None:
            return None
        return FarWall(reach, None if self.case.outer_conductor is None else len(self.conductors) - 1)

    @property
    def rim(self) -> tuple[tuple[float, float], float] | None:
        return self.drawing.domain.rim

    def _on_rim(self, curve: Curve) -> bool:
        return self.rim is not None and isinstance(curve, Arc) and (curve.centre, curve.radius) == self.rim

    def _add_far_region(self, pieces: list[Piece], regions: list[Region], material: int) -> Floats:
        """Closes the rim, counter-clockwise, from the other side: with itself, or along the straight edges.

        Two edges meet at infinity, which lies at the rim's centre. Returns the points, with that one if need be.
        """
        lines = straight_edges(self.case)
        first = -np.pi / 2 if [line.axis for line in lines] == [0] else 0.0
        rim = [k for k, piece in enumerate(pieces) if self._on_rim(piece.curve)]
        rim.sort(key=lambda k: np.mod(_angle(pieces[k].curve) - first, 2 * np.pi))
        walk = [k + 1 for k in rim]
        points = self.plane.points
        stops = [pieces[rim[-1]].end, pieces[rim[0]].start] if lines else []
        if len(lines) == 2:
            assert self.rim is not None  # noqa: S101 - there is a far region
            points = np.concatenate([points, [self.rim[0]]])
            stops.insert(1, len(points) - 1)
        for line, (start, end) in zip(sorted(lines, key=lambda line: line.axis), pairwise(stops), strict=True):
            ends = [tuple(points[point].tolist()) for point in (start, end)]
            pieces.append(Piece(Segment(ends[0], ends[1]), start, end, (len(regions), self._edge_side(line))))
            walk.append(len(pieces))
        regions.append(Region((tuple(walk),), material, far=True))
        return points


def _angle(curve: Curve) -> float:
    """Polar angle, in [0, 2 pi), of the middle of an arc."""
    assert isinstance(curve, Arc)  # noqa: S101 - the rim is made of arcs
    return float(np.mod((curve.start_angle + curve.end_angle) / 2, 2 * np.pi))
