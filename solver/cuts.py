"""Cuts: paths of mesh edges across which the flux function jumps by the charge behind them."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from scipy import sparse
from scipy.sparse.csgraph import dijkstra

from nightcap.geometry.curves import Floats, Ints
from nightcap.geometry.mesh import Mesh


@dataclass(frozen=True, eq=False)
class Cut:
    """The one-sided indicator of a path: on each triangle to its left, the hats of the path's vertices there."""

    triangle: Ints
    """(n,) triangle numbers, one row per triangle and vertex."""
    corner: Ints
    """(n,) local number of the vertex."""


@dataclass(frozen=True, eq=False)
class CutTree:
    """One cut per conductor, towards the reference or towards a conductor that is already joined to it."""

    cuts: tuple[Cut, ...]
    """One per conductor but the reference, in layout order."""
    behind: Floats
    """(N, N): the jump over cut e is the sum of behind[e, i] times the charge of conductor i."""


def cut_tree(mesh: Mesh) -> CutTree:
    """Grows cuts along shortest paths of the near sheet, starting from the reference."""
    reference = mesh.layout.reference
    others = [k for k in range(len(mesh.layout.conductors)) if k != reference]
    paths, parent = _paths(mesh, reference, others)
    fans = _Fans(mesh, np.unique(np.concatenate(list(paths.values()))))
    behind = np.zeros((len(others), len(others)))
    for column, conductor in enumerate(others):
        step = conductor
        while step != reference:
            behind[others.index(step), column] = 1.0
            step = parent[step]
    return CutTree(tuple(fans.left_of(paths[k]) for k in others), behind)


def _paths(mesh: Mesh, reference: int, others: list[int]) -> tuple[dict[int, Ints], dict[int, int]]:
    """For each conductor the vertices of its cut, itself first, and the conductor where the cut ends."""
    node = _nodes(mesh)
    edges, length = _usable_edges(mesh, node)
    ends = np.sort(node[edges], axis=1)
    order = np.lexsort((length, ends[:, 1], ends[:, 0]))
    first = np.ones(len(order), dtype=bool)
    first[1:] = (np.diff(ends[order], axis=0) != 0).any(axis=1)  # of parallel edges the shortest
    chosen = order[first]
    size = int(node.max()) + 1
    graph = sparse.csr_array((length[chosen], ends[chosen].T), shape=(size, size))
    _, before = dijkstra(graph, directed=False, indices=reference, return_predecessors=True)
    keys = ends[chosen, 0] * size + ends[chosen, 1]
    paths, parent = {}, {}
    for conductor in others:
        walk = [conductor]
        while True:
            walk.append(int(before[walk[-1]]))
            if walk[-1] < len(mesh.layout.conductors):
                break
        paths[conductor] = _real_vertices(walk, node, edges[chosen], keys, size)
        parent[conductor] = walk[-1]
    return paths, parent


def _nodes(mesh: Mesh) -> Ints:
    """(V,) graph node of each vertex: the conductor's number on a conductor, else a number of its own."""
    node = len(mesh.layout.conductors) + np.arange(len(mesh.points))
    on_conductor = mesh.edge_conductor >= 0
    for end in (0, 1):
        node[mesh.edges[on_conductor, end]] = mesh.edge_conductor[on_conductor]
    return node


def _usable_edges(mesh: Mesh, node: Ints) -> tuple[Ints, Floats]:
    """Edges (n, 2) of the near sheet that do not touch the rim nor run along one conductor; and their lengths."""
    far_vertex = np.zeros(len(mesh.points), dtype=bool)
    far_vertex[mesh.triangles[mesh.far]] = True
    usable = ~far_vertex[mesh.edges].any(axis=1) & (node[mesh.edges[:, 0]] != node[mesh.edges[:, 1]])
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

    def left_of(self, path: Ints) -> Cut:
        """The triangles on the left of a path that starts and ends on conductors."""
        triangle: list[int] = []
        corner: list[int] = []
        for k, hub in enumerate(path.tolist()):
            turn = self.next if k + 1 < len(path) else self.previous
            spoke = int(path[k + 1] if k + 1 < len(path) else path[k - 1])
            stop = int(path[k - 1]) if 0 < k < len(path) - 1 else -1
            while spoke != stop and (hub, spoke) in turn:
                t, spoke = turn[hub, spoke]
                triangle.append(t)
                corner.append(int(np.flatnonzero(self.mesh.triangles[t] == hub)[0]))
        return Cut(np.array(triangle, dtype=np.int64), np.array(corner, dtype=np.int64))
