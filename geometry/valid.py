"""The first valid mesh of a layout: sizes, triangles, curving, and the repair of triangles that curving would fold."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np

from nightcap.geometry.chords import Lenses, cusp_edges, with_even_cusps
from nightcap.geometry.corners import with_layers
from nightcap.geometry.curves import Floats, Ints
from nightcap.geometry.curving import curved_triangles
from nightcap.geometry.errors import MeshError
from nightcap.geometry.grading import Grading
from nightcap.geometry.layout import Layout
from nightcap.geometry.mesh import Mesh, Triangulation, ascending
from nightcap.geometry.sizes import divide_pieces
from nightcap.geometry.slit import slit
from nightcap.geometry.triangulate import triangulate

ROUNDS = 12
"""Each round halves the edges that were too long; what is not valid after so many never will be."""
BLUNT = 0.75 * np.pi
"""Greatest angle between two bent edges of one triangle, radians."""


def first_mesh(layout: Layout, grading: Grading) -> Mesh:
    """Meshes a layout. Raises MeshError where no valid mesh comes out."""
    divisions = with_even_cusps(layout, divide_pieces(layout, grading))
    for _ in range(ROUNDS):
        flat, spans = with_layers(*triangulate(layout, divisions), grading)
        straight = cusp_edges(flat)
        flat, spans, rows = slit(flat, spans)
        straight = straight[rows]
        turns = _turns(flat, spans)
        flat = _without_blunt_corners(flat, np.where(straight, 0.0, turns))
        curved, valid = curved_triangles(flat, spans, bent=(turns > 0) & ~straight)
        lenses = Lenses.beside(flat, spans, straight & (turns > 0))
        engulfed_by = lenses.conductor(flat)
        offenders = np.concatenate([curved.index[~valid], lenses.sticking_out(flat), _claimed_twice(flat, engulfed_by)])
        if offenders.size == 0:
            low, high = lenses.permittivity_range(flat)
            plain = {f.name: getattr(flat, f.name) for f in fields(Triangulation)}
            return Mesh(
                **plain,
                curved=curved,
                least_permittivity=low,
                greatest_permittivity=high,
                engulfed_by=engulfed_by,
                grading=grading,
            )
        divisions = with_even_cusps(layout, _halved(divisions, flat, spans, offenders))
    raise MeshError("no valid mesh found: two curves come too close to each other")


def _turns(flat: Triangulation, spans: Floats) -> Floats:
    """(B,) the angle by which each curve edge turns, radians; 0 for straight ones."""
    of_piece = np.array([piece.curve.length * abs(piece.curve.curvature) for piece in flat.layout.pieces])
    return of_piece[flat.curve_piece] * np.abs(spans[:, 1] - spans[:, 0])


def _claimed_twice(flat: Triangulation, engulfed_by: Ints) -> Ints:
    """The triangles that count as one conductor, (T,) or -1, but have a vertex that belongs to another.

    There no potential would have the right value on both.
    """
    low = np.full(len(flat.points), np.iinfo(np.int64).max)
    high = np.full(len(flat.points), -1)
    on_surface = flat.edge_conductor >= 0
    engulfed = np.flatnonzero(engulfed_by >= 0)
    for vertices, owner in (
        (flat.edges[on_surface], flat.edge_conductor[on_surface]),
        (flat.triangles[engulfed], engulfed_by[engulfed]),
    ):
        owners = np.broadcast_to(owner[:, None], vertices.shape)
        np.minimum.at(low, vertices, owners)
        np.maximum.at(high, vertices, owners)
    torn = (high >= 0) & (low != high)
    return np.asarray(engulfed[torn[flat.triangles[engulfed]].any(axis=1)], dtype=np.int64)


def _halved(divisions: list[Floats], flat: Triangulation, spans: Floats, offenders: Ints) -> list[Floats]:
    """The divisions with the curve edges of the offending triangles cut in the middle."""
    ranks = np.unique(flat.edge_rank[flat.triangle_edges[offenders]])
    ranks = ranks[ranks >= 0]
    finer = list(divisions)
    for rank in ranks:
        piece = flat.curve_piece[rank]
        finer[piece] = np.union1d(finer[piece], [spans[rank].mean()])
    return finer


def _without_blunt_corners(flat: Triangulation, turns: Floats) -> Triangulation:
    """Splits triangles that have two edges on one smooth curve: bent, these would meet at an angle of pi.

    The edge opposite their common vertex is cut in the middle, together with the triangle beyond it.
    """
    while True:
        edges = _edges_opposite_blunt_corners(flat, turns)
        if edges.size == 0:
            return flat
        flat = _cut(flat, edges)


def _edges_opposite_blunt_corners(flat: Triangulation, turns: Floats) -> Ints:
    """Inner edges, no two of one triangle."""
    half = np.append(turns, 0.0)[flat.edge_rank] / 2
    bent = half[flat.triangle_edges]
    corner = flat.points[flat.triangles]
    found: list[int] = []
    used: set[int] = set()
    for k in np.flatnonzero((bent > 0).sum(axis=1) >= 2):
        for vertex, (one, two, opposite) in enumerate(((0, 2, 1), (0, 1, 2), (1, 2, 0))):
            u, v = corner[k, (vertex + 1) % 3] - corner[k, vertex], corner[k, (vertex + 2) % 3] - corner[k, vertex]
            angle = abs(np.arctan2(u[0] * v[1] - u[1] * v[0], u @ v)) + bent[k, one] + bent[k, two]
            edge = flat.triangle_edges[k, opposite]
            beside = set(flat.edge_triangles[edge].tolist())
            if min(bent[k, one], bent[k, two]) > 0 and angle > BLUNT and flat.edge_rank[edge] < 0 and not beside & used:
                found.append(int(edge))
                used |= beside
    return np.array(found, dtype=np.int64)


def _cut(flat: Triangulation, edges: Ints) -> Triangulation:
    """Cuts inner edges, no two of one triangle, and the two triangles beside each."""
    middle = len(flat.points) + np.arange(len(edges))
    points = np.concatenate([flat.points, flat.points[flat.edges[edges]].mean(axis=1)])
    owners = flat.edge_triangles[edges]
    children, parents = [], []
    for owner in owners.T:
        for end in (0, 1):
            child = flat.triangles[owner].copy()
            child[child == flat.edges[edges, end][:, None]] = middle
            turned = flat.orientation[owner] < 0
            child[turned] = child[turned][:, ::-1]
            children.append(child)
            parents.append(owner)
    kept = np.ones(len(flat.triangles), dtype=bool)
    kept[owners] = False
    triangles, orientation = ascending(np.concatenate(children))
    return replace(
        flat,
        points=points,
        triangles=np.concatenate([flat.triangles[kept], triangles]),
        orientation=np.concatenate([flat.orientation[kept], orientation]),
        region=np.concatenate([flat.region[kept], flat.region[np.concatenate(parents)]]),
    )
