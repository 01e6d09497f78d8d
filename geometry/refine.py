"""Splitting triangles: marked ones into four, their neighbours so that the mesh stays conforming."""

from __future__ import annotations

from functools import cache

import numpy as np

from nightcap.geometry import curving, polynomials
from nightcap.geometry.curves import Flags, Floats, Ints
from nightcap.geometry.mesh import CurvedTriangles, Mesh, ascending
from nightcap.geometry.polynomials import EDGES

TURNS = np.array([[0, 1, 2], [1, 2, 0], [2, 0, 1]])
"""Corners, and likewise edges, of a triangle turned so that a given edge comes first."""


def refine(mesh: Mesh, marked: Flags) -> Mesh:
    """Splits the marked triangles (T,) at the middle of every edge.

    A triangle with any split edge has its longest edge split too, so angles do not degenerate. The parts of a curved
    triangle keep its map, cut to size: they are as valid, and as close to the exact curve, as the whole.
    Source: red-green-blue refinement, Carstensen 2004.
    """
    split, longest = _closure(mesh, marked)
    middle = np.full(len(split), -1, dtype=np.int64)
    middle[split] = len(mesh.points) + np.arange(np.count_nonzero(split))
    children, parent = _children(mesh, middle, longest)
    triangles, orientation = ascending(children)
    curved, on_edge = _split_maps(mesh, triangles, parent, middle)
    points = np.concatenate([mesh.points, mesh.points[mesh.edges[split]].mean(axis=1)])
    points[on_edge[0]] = on_edge[1]
    curve_edges, curve_piece = _split_curve_edges(mesh, middle)
    return Mesh(
        layout=mesh.layout,
        points=points,
        triangles=triangles,
        orientation=orientation,
        region=mesh.region[parent],
        curve_edges=curve_edges,
        curve_piece=curve_piece,
        curved=curved,
        least_permittivity=mesh.least_permittivity[parent],
        greatest_permittivity=mesh.greatest_permittivity[parent],
        engulfed_by=mesh.engulfed_by[parent],
        grading=mesh.grading,
    )


def _closure(mesh: Mesh, marked: Flags) -> tuple[Flags, Ints]:
    """The edges to split (E,), and the local number (T,) of each triangle's longest edge."""
    edges = mesh.triangle_edges
    rank = np.empty(len(mesh.edges), dtype=np.int64)
    rank[np.argsort(mesh.edge_lengths(), kind="stable")] = np.arange(len(rank))
    longest = np.argmax(rank[edges], axis=1)
    base = edges[np.arange(len(edges)), longest]
    split = np.zeros(len(rank), dtype=bool)
    split[edges[marked]] = True
    while True:
        wanting = split[edges].any(axis=1) & ~split[base]
        if not wanting.any():
            return split, longest
        split[base[wanting]] = True


def _children(mesh: Mesh, middle: Ints, longest: Ints) -> tuple[Ints, Ints]:
    """Counter-clockwise child triangles (C, 3) and the parent (C,) of each.

    Each parent is turned so that its longest edge runs from corner 0 to corner 1.
    """
    corners = np.take_along_axis(mesh.triangles, TURNS[longest], axis=1)
    middles = middle[np.take_along_axis(mesh.triangle_edges, TURNS[longest], axis=1)]
    clockwise = mesh.orientation < 0
    corners[clockwise] = corners[clockwise][:, [1, 0, 2]]
    middles[clockwise] = middles[clockwise][:, [0, 2, 1]]
    a, b, c = corners.T
    ab, bc, ca = middles.T
    kinds = [
        (ab < 0, [(a, b, c)]),
        ((ab >= 0) & (bc < 0) & (ca < 0), [(a, ab, c), (ab, b, c)]),
        ((ab >= 0) & (bc >= 0) & (ca < 0), [(a, ab, c), (ab, b, bc), (ab, bc, c)]),
        ((ab >= 0) & (bc < 0) & (ca >= 0), [(ab, b, c), (a, ab, ca), (ab, c, ca)]),
        ((ab >= 0) & (bc >= 0) & (ca >= 0), [(a, ab, ca), (ab, b, bc), (ca, bc, c), (ab, bc, ca)]),
    ]
    number = np.arange(len(corners))
    children = [np.stack(corner, axis=1)[case] for case, parts in kinds for corner in parts]
    parents = [number[case] for case, parts in kinds for _ in parts]
    return np.concatenate(children), np.concatenate(parents)


def _split_maps(mesh: Mesh, triangles: Ints, parent: Ints, middle: Ints) -> tuple[CurvedTriangles, tuple[Ints, Floats]]:
    """The maps of the parts of curved triangles, and where these put their new vertices: numbers and points."""
    row = np.full(len(mesh.triangles), -1, dtype=np.int64)
    row[mesh.curved.index] = np.arange(len(mesh.curved.index))
    index = np.flatnonzero(row[parent] >= 0)
    row = row[parent[index]]
    places = _places_in_parent(mesh, triangles[index], parent[index], middle)
    nodes = np.empty((len(index), polynomials.count(curving.ORDER), 2))
    kinds, kind = np.unique(places @ [36, 6, 1], return_inverse=True)
    for k, code in enumerate(kinds.tolist()):
        members = kind == k
        basis = _basis_in_parent(code // 36, code // 6 % 6, code % 6)
        nodes[members] = np.einsum("nq,tnd->tqd", basis, mesh.curved.nodes[row[members]], optimize=True)
    moved = (triangles[index].ravel(), nodes[:, :3].reshape(-1, 2))
    return CurvedTriangles(index, nodes, mesh.curved.dilatation[row]), moved


def _places_in_parent(mesh: Mesh, triangles: Ints, parent: Ints, middle: Ints) -> Ints:
    """(C, 3) which of its parent's three vertices and three edges' middles each child's vertices are."""
    known = np.concatenate([mesh.triangles[parent], middle[mesh.triangle_edges[parent]]], axis=1)
    return np.asarray(np.argmax(triangles[:, :, None] == known[:, None, :], axis=2))


@cache
def _basis_in_parent(*places: int) -> Floats:
    """(n, n) the parent's basis at the nodes of a child whose vertices have these places."""
    unit = np.array([[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]])
    corners = np.concatenate([unit, [(unit[a] + unit[b]) / 2 for a, b in EDGES]])[list(places)]
    x, y = polynomials.nodes(curving.ORDER)
    return polynomials.lagrange(curving.ORDER, corners.T @ np.stack([1 - x - y, x, y]))[0]


def _split_curve_edges(mesh: Mesh, middle: Ints) -> tuple[Ints, Ints]:
    """Vertices (B, 2) and pieces (B,) of the curve edges after the split."""
    of_edge = np.full(len(mesh.curve_edges), -1, dtype=np.int64)
    on_curve = mesh.edge_rank >= 0
    of_edge[mesh.edge_rank[on_curve]] = middle[on_curve]
    cut = of_edge >= 0
    halves = [np.stack([mesh.curve_edges[cut, end], of_edge[cut]], axis=1) for end in (0, 1)]
    return (
        np.concatenate([mesh.curve_edges[~cut], *halves]),
        np.concatenate([mesh.curve_piece[~cut], mesh.curve_piece[cut], mesh.curve_piece[cut]]),
    )
