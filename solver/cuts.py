"""Cuts: paths of mesh edges across which the flux function jumps by the charge behind them."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from scipy import sparse
from scipy.sparse.csgraph import connected_components, dijkstra

from nightcap.geometry.curves import Floats, Ints
from nightcap.geometry.mesh import Mesh


@dataclass(frozen=True, eq=False)
class Cut:
    """The one-sided indicator of a path: on each triangle to its left, the hats of the path's vertices there.

    At a vertex on a wall that would make the indicator jump along the wall if the wall lies to the left; there it is
    minus the hats on the right, which has the same jump across the path.
    """

    triangle: Ints
    """(n,) triangle numbers, one row per triangle and vertex."""
    corner: Ints
    """(n,) local number of the vertex."""
    value: Floats
    """(n,) 1 on the left, -1 on the right."""


@dataclass(frozen=True, eq=False)
class CutTree:
    """One cut per surface but one of each connected part of the mesh, towards a surface that is joined to that one.

    A surface is a connected part of a conductor's: a tube has two, a conductor that symmetry lines cut may have more.
    """

    cuts: tuple[Cut, ...]
    charges: Floats
    """(N, cuts): charge of each conductor but the reference, in layout order, per unit jump over each cut."""


def cut_tree(mesh: Mesh) -> CutTree:
    """Grows cuts along shortest paths of the near sheet, starting from the reference where it is present."""
    reference = mesh.layout.reference
    node, owner = _surfaces(mesh)
    paths = _paths(mesh, node, owner)
    fans = _Fans(mesh, np.unique(np.concatenate([path for path, _, _ in paths])) if paths else np.empty(0, int))
    charges = np.zeros((len(mesh.layout.conductors), len(paths)))
    for column, (_, start, end) in enumerate(paths):
        charges[owner[start], column] += 1.0
        charges[owner[end], column] -= 1.0
    return CutTree(tuple(fans.left_of(path) for path, _, _ in paths), np.delete(charges, reference, axis=0))


def _surfaces(mesh: Mesh) -> tuple[Ints, Ints]:
    """(V,) the graph node of each vertex: its surface's number, or one of its own; (S,) the conductor of each surface.

    Surfaces come in the order of conductors, the reference first.
    """
    count = len(mesh.points)
    on = mesh.edge_conductor >= 0
    ends = mesh.edges[on]
    graph = sparse.coo_array((np.ones(len(ends)), ends.T), shape=(count, count))
    _, part = connected_components(graph, directed=False)
    conductor = np.full(count, -1, dtype=np.int64)
    conductor[ends] = mesh.edge_conductor[on][:, None]
    vertex = np.flatnonzero(conductor >= 0)
    parts, first = np.unique(part[vertex], return_index=True)
    owner = conductor[vertex[first]]
    order = np.lexsort((parts, owner, owner != mesh.layout.reference))
    rank = np.empty(len(parts), dtype=np.int64)
    rank[order] = np.arange(len(parts))
    node = len(parts) + np.arange(count)
    node[vertex] = rank[np.searchsorted(parts, part[vertex])]
    return node, owner[order]


def _paths(mesh: Mesh, node: Ints, owner: Ints) -> list[tuple[Ints, int, int]]:
    """The vertices of each cut, with the surfaces where it starts and ends."""
    edges, length = _usable_edges(mesh, node)
    ends = np.sort(node[edges], axis=1)
    order = np.lexsort((length, ends[:, 1], ends[:, 0]))
    first = np.ones(len(order), dtype=bool)
    first[1:] = (np.diff(ends[order], axis=0) != 0).any(axis=1)  # of parallel edges the shortest
    chosen = order[first]
    size = int(node.max()) + 1
    graph = sparse.csr_array((length[chosen], ends[chosen].T), shape=(size, size))
    _, part = connected_components(graph, directed=False)
    keys = ends[chosen, 0] * size + ends[chosen, 1]
    paths = []
    for root in np.unique(part[: len(owner)], return_index=True)[1].tolist():
        _, before = dijkstra(graph, directed=False, indices=root, return_predecessors=True)
        for surface in np.flatnonzero(part[: len(owner)] == part[root]).tolist():
            if surface != root:
                walk = _walk(before, surface, len(owner))
                paths.append((_real_vertices(walk, node, edges[chosen], keys, size), surface, walk[-1]))
    return paths


def _walk(before: Ints, surface: int, surfaces: int) -> list[int]:
    """The graph nodes from a surface to the next one on the way to the root."""
    walk = [surface, int(before[surface])]
    while walk[-1] >= surfaces:
        walk.append(int(before[walk[-1]]))
    return walk


def _usable_edges(mesh: Mesh, node: Ints) -> tuple[Ints, Floats]:
    """Edges (n, 2) of the near sheet that do not touch the rim nor run along one surface or wall; and their lengths."""
    far_vertex = np.zeros(len(mesh.points), dtype=bool)
    far_vertex[mesh.triangles[mesh.far]] = True
    usable = ~far_vertex[mesh.edges].any(axis=1) & (node[mesh.edges[:, 0]] != node[mesh.edges[:, 1]])
    usable &= mesh.edge_wall == 0
    return mesh.edges[usable], mesh.edge_lengths()[usable]


def _real_vertices(walk: list[int], node: Ints, edges: Ints, keys: Ints, size: int) -> Ints:
    """The mesh vertices along a walk over graph nodes."""
    vertices: list[int] = []
    for a, b in pairwise(walk):
        edge = edges[np.searchsorted(keys, min(a, b) * size + max(a, b))]
        start, end = edge if node[edge[0]] == a else edge[::-1]
        vertices += [int(start), int(end)] if not vertices else [int(end)]
    return np.array(vertices)


class _Fans:
    """The triangles around some vertices, in counter-clockwise order."""

    def __init__(self, mesh: Mesh, vertices: Ints) -> None:
        self.mesh = mesh
        self.next: dict[tuple[int, int], tuple[int, int]] = {}
        self.previous: dict[tuple[int, int], tuple[int, int]] = {}
        wanted = np.zeros(len(mesh.points), dtype=bool)
        wanted[vertices] = True
        for t in np.flatnonzero(wanted[mesh.triangles].any(axis=1)):
            a, b, c = mesh.triangles[t].tolist() if mesh.orientation[t] > 0 else mesh.triangles[t, ::-1].tolist()
            for hub, one, two in ((a, b, c), (b, c, a), (c, a, b)):
                self.next[hub, one] = (int(t), two)
                self.previous[hub, two] = (int(t), one)
        self.walls = set(map(tuple, mesh.edges[mesh.edge_wall != 0].tolist()))

    def left_of(self, path: Ints) -> Cut:
        """The triangles on the left of a path that starts and ends on conductors, or on the right beside walls."""
        rows: list[tuple[int, int, float]] = []
        for k, hub in enumerate(path.tolist()):
            ahead = k + 1 < len(path)
            spoke = int(path[k + 1] if ahead else path[k - 1])
            stop = int(path[k - 1]) if 0 < k < len(path) - 1 else -1
            left, right = (self.next, self.previous) if ahead else (self.previous, self.next)
            beside, last = self._fan(left, hub, spoke, stop)
            value = 1.0
            if (min(hub, last), max(hub, last)) in self.walls:
                beside, last = self._fan(right, hub, spoke, stop)
                value = -1.0
            rows += [(t, int(np.flatnonzero(self.mesh.triangles[t] == hub)[0]), value) for t in beside]
        triangle, corner, values = zip(*rows, strict=True)
        return Cut(np.array(triangle, dtype=np.int64), np.array(corner, dtype=np.int64), np.array(values))

    @staticmethod
    def _fan(turn: dict[tuple[int, int], tuple[int, int]], hub: int, spoke: int, stop: int) -> tuple[list[int], int]:
        """The triangles around a vertex from one spoke up to another, or to the boundary; and the spoke reached."""
        triangles = []
        while spoke != stop and (hub, spoke) in turn:
            t, spoke = turn[hub, spoke]
            triangles.append(t)
        return triangles, spoke
