"""Slitting a triangulation along infinitely thin strips: each of their two sides gets vertices and edges of its own."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from nightcap.geometry.curves import Flags, Floats, Ints
from nightcap.geometry.mesh import Triangulation, ascending


def slit(flat: Triangulation, spans: Floats) -> tuple[Triangulation, Floats, Ints]:
    """Cuts a triangulation open along its strips, and where surfaces of one conductor touch in a point.

    Around each vertex of a strip the triangles between two of its edges form a sector. The widest keeps the vertex,
    every other gets a copy; around a free end there is only one. From then on a strip is a boundary like any other.
    spans : (B, 2) curve parameters of the curve edges. Returns the triangulation, the parameters of its curve edges,
    and the row (B,) of the curve edge that each was before.
    """
    on_strip = np.array([piece.conductor is not None for piece in flat.layout.pieces])[flat.curve_piece]
    pinched = _pinched(flat)
    if not (on_strip.any() or pinched.any()):
        return flat, spans, np.arange(len(spans))
    sectors = _Sectors.of(flat, on_strip, pinched)
    numbers, points = sectors.vertices(flat)
    edges, rows = _curve_edges(flat, numbers, on_strip)
    turned = edges[:, 0] > edges[:, 1]
    counter_clockwise = np.where((flat.orientation > 0)[:, None], numbers, numbers[:, [1, 0, 2]])
    triangles, orientation = ascending(counter_clockwise)
    opened = replace(
        flat,
        points=points,
        triangles=triangles,
        orientation=orientation,
        curve_edges=np.sort(edges, axis=1),
        curve_piece=flat.curve_piece[rows],
    )
    return opened, np.where(turned[:, None], spans[rows][:, ::-1], spans[rows]), rows


@dataclass(frozen=True, eq=False)
class _Sectors:
    """The corners of triangles at the vertices of strips, joined where no strip comes between."""

    triangle: Ints
    """(n,)"""
    corner: Ints
    """(n,) local number of the vertex."""
    sector: Ints
    """(n,)"""

    @classmethod
    def of(cls, flat: Triangulation, on_strip: Flags, pinched: Flags) -> _Sectors:
        """Two triangles at a vertex are joined by the edge from there that they share, unless it lies on a strip."""
        split = pinched.copy()
        split[flat.curve_edges[on_strip]] = True
        triangle, corner = np.nonzero(split[flat.triangles])
        number = np.full(flat.triangles.shape, -1, dtype=np.int64)
        number[triangle, corner] = np.arange(len(triangle))
        joining = (flat.edge_triangles >= 0).all(axis=1) & ~np.append(on_strip, False)[flat.edge_rank]
        edge, end = np.nonzero(split[flat.edges] & joining[:, None])
        beside, vertex = flat.edge_triangles[edge], flat.edges[edge, end]
        place = np.argmax(flat.triangles[beside] == vertex[:, None, None], axis=2)
        links = number[beside, place]
        graph = coo_array((np.ones(len(links)), links.T), shape=(len(triangle), len(triangle)))
        return cls(triangle, corner, connected_components(graph, directed=False)[1].astype(np.int64))

    def vertices(self, flat: Triangulation) -> tuple[Ints, Floats]:
        """(T, 3) the vertices of all triangles, in the places that they had, and the points (V, 2) of all vertices."""
        vertex = flat.triangles[self.triangle, self.corner]
        count = int(self.sector.max()) + 1
        of_sector = np.empty(count, dtype=np.int64)
        of_sector[self.sector] = vertex
        width = np.bincount(self.sector, _angles(flat, self.triangle, self.corner), minlength=count)
        order = np.lexsort((-width, of_sector))
        copies = order[1:][of_sector[order[1:]] == of_sector[order[:-1]]]
        points = np.concatenate([flat.points, flat.points[of_sector[copies]]])
        of_sector[copies] = len(flat.points) + np.arange(len(copies))
        numbers = flat.triangles.copy()
        numbers[self.triangle, self.corner] = of_sector[self.sector]
        return numbers, points


def _pinched(flat: Triangulation) -> Flags:
    """(V,) True for the vertices where more than two edges of a surface meet: where parts of a conductor touch."""
    outer = (flat.edge_triangles < 0).any(axis=1) & (flat.edge_conductor >= 0)
    return np.asarray(np.bincount(flat.edges[outer].ravel(), minlength=len(flat.points)) > 2)


def _angles(flat: Triangulation, triangle: Ints, corner: Ints) -> Floats:
    """(n,) the angles of triangles at some of their corners, radians."""
    at, one, two = (flat.points[flat.triangles[triangle, (corner + k) % 3]] for k in range(3))
    u, v = one - at, two - at
    return np.asarray(np.abs(np.arctan2(u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0], (u * v).sum(axis=1))))


def _curve_edges(flat: Triangulation, numbers: Ints, on_strip: Flags) -> tuple[Ints, Ints]:
    """Vertices (B, 2) of the curve edges with the numbers (T, 3) that triangles now have, in the order in which they
    were, and the row (B,) of each before. Those on a strip come once for each triangle beside them.
    """
    edge = np.empty(len(flat.curve_edges), dtype=np.int64)
    on_curve = np.flatnonzero(flat.edge_rank >= 0)
    edge[flat.edge_rank[on_curve]] = on_curve
    beside = flat.edge_triangles[edge]
    second = on_strip & (beside[:, 1] >= 0)
    rows = np.concatenate([np.arange(len(edge)), np.flatnonzero(second)])
    triangle = np.concatenate([beside[:, 0], beside[second, 1]])
    place = np.argmax(flat.triangles[triangle][:, None, :] == flat.curve_edges[rows][:, :, None], axis=2)
    return numbers[triangle[:, None], place], rows
