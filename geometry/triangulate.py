"""The first mesh: gmsh fills each region with triangles between vertices that we place on the curves."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from itertools import pairwise
from types import ModuleType

import numpy as np

from nightcap.geometry.curves import Floats, Ints
from nightcap.geometry.errors import MeshError
from nightcap.geometry.layout import Layout
from nightcap.geometry.mesh import Triangulation, ascending

OPTIONS = {
    "General.Verbosity": 0,
    "General.NumThreads": 1,
    "Mesh.Algorithm": 5,  # Delaunay: follows steep changes of size
    "Mesh.MeshSizeExtendFromBoundary": 0,  # a field does that, at a rate of our own
    "Mesh.MeshSizeFromPoints": 0,
    "Mesh.MeshSizeFromCurvature": 0,
    "Mesh.RandomFactor": 1e-9,
}


GROWTH = 0.8
"""How fast triangles grow with the distance from the nearest curve."""
FARTHEST = 10.0
"""No point is farther from a curve than this, in sizes of the layout, unless there is a far wall."""


@contextmanager
def mesher() -> Iterator[ModuleType]:
    """gmsh, started and stopped, silent, with our options."""
    import gmsh

    gmsh.initialize(interruptible=False)
    try:
        for name, value in OPTIONS.items():
            gmsh.option.setNumber(name, value)
        gmsh.model.add("layout")
        yield gmsh
    finally:
        gmsh.finalize()


def triangulate(layout: Layout, divisions: list[Floats]) -> tuple[Triangulation, Floats]:
    """Fills the regions of a layout with triangles.

    divisions : for each piece the parameters of the vertices along it, 0 and 1 included.
    Returns the triangles, and for each of their curve edges the curve's parameters (B, 2) at its two vertices.
    Raises MeshError where gmsh gives up.
    """
    scale = layout.size
    origin = layout.points.mean(axis=0)
    points, along = _curve_vertices(layout, divisions)
    with mesher() as gmsh:
        _describe(gmsh, layout, (points - origin) / scale, along)
        try:
            gmsh.model.mesh.generate(2)
        except Exception as error:
            raise MeshError(f"the mesher gave up: {error}") from error
        inner, triangles, region = _collect(gmsh, layout, len(points))
    mesh_points = np.concatenate([points, inner * scale + origin])
    triangles, orientation = ascending(triangles)
    edges, piece, spans = _curve_edges(divisions, along)
    return Triangulation(layout, mesh_points, triangles, orientation, region, edges, piece), spans


def _curve_vertices(layout: Layout, divisions: list[Floats]) -> tuple[Floats, list[Ints]]:
    """Coordinates of all vertices on curves (n, 2), the layout's points first, and their numbers along each piece."""
    points = [layout.points]
    along = []
    number = len(layout.points)
    for piece, t in zip(layout.pieces, divisions, strict=True):
        points.append(piece.curve.at(t[1:-1]))
        along.append(np.concatenate([[piece.start], number + np.arange(len(t) - 2), [piece.end]]).astype(np.int64))
        number += len(t) - 2
    return np.concatenate(points), along


def _describe(gmsh: ModuleType, layout: Layout, points: Floats, along: list[Ints]) -> None:
    """Tells gmsh the vertices, the edges between them (one line each, never divided), and the regions."""
    geo = gmsh.model.geo
    for tag, (x, y) in enumerate(points.tolist(), start=1):
        geo.addPoint(x, y, 0.0, tag=tag)
    lines: list[list[int]] = []
    tag = 0
    for vertices in (along_piece.tolist() for along_piece in along):
        lines.append([])
        for start, end in pairwise(vertices):
            tag = geo.addLine(start + 1, end + 1)
            geo.mesh.setTransfiniteCurve(tag, 2)
            lines[-1].append(tag)
    loop = 0
    for k, region in enumerate(layout.regions, start=1):
        first = loop + 1
        for walk in region.loops:
            loop += 1
            geo.addCurveLoop([tag for piece in walk for tag in _walked(lines, piece)], loop)
        geo.addPlaneSurface(list(range(first, loop + 1)), k)
    geo.synchronize()
    for k, region in enumerate(layout.regions, start=1):
        if region.embedded:
            gmsh.model.mesh.embed(1, [tag for piece in region.embedded for tag in lines[piece]], 2, k)
    farthest = FARTHEST if layout.wall is None else 2 * layout.wall.reach / layout.size
    _grow_from_curves(gmsh, tag, len(layout.regions), farthest)


def _grow_from_curves(gmsh: ModuleType, lines: int, surfaces: int, farthest: float) -> None:
    """Triangles as large as the nearest edge, plus so much of the distance to it, which is at most ``farthest``."""
    field = gmsh.model.mesh.field
    tag = field.add("Extend")
    field.setNumbers(tag, "CurvesList", list(range(1, lines + 1)))
    field.setNumbers(tag, "SurfacesList", list(range(1, surfaces + 1)))
    field.setNumber(tag, "Power", 1.0)
    field.setNumber(tag, "DistMax", farthest)
    field.setNumber(tag, "SizeMax", GROWTH * farthest)
    field.setAsBackgroundMesh(tag)


def _walked(lines: list[list[int]], piece: int) -> list[int]:
    """The signed lines of a piece, in the direction in which a loop walks it."""
    return lines[piece - 1] if piece > 0 else [-tag for tag in reversed(lines[-piece - 1])]


def _collect(gmsh: ModuleType, layout: Layout, on_curves: int) -> tuple[Floats, Ints, Ints]:
    """The vertices inside regions (n, 2), the triangles (T, 3) counter-clockwise, and the region of each (T,)."""
    inner, triangles, region = [], [], []
    renumber = np.full(int(gmsh.model.mesh.getMaxNodeTag()) + 1, -1, dtype=np.int64)
    renumber[1 : on_curves + 1] = np.arange(on_curves)
    count = on_curves
    for k in range(len(layout.regions)):
        tags, coordinates, _ = gmsh.model.mesh.getNodes(2, k + 1)
        renumber[tags.astype(np.int64)] = count + np.arange(len(tags))
        count += len(tags)
        inner.append(coordinates.reshape(-1, 3)[:, :2])
        _, nodes = gmsh.model.mesh.getElementsByType(2, k + 1)
        if len(nodes) == 0:
            raise MeshError(f"no triangle fits into region {k} of the layout")
        triangles.append(renumber[nodes.astype(np.int64)].reshape(-1, 3))
        region.append(np.full(len(triangles[-1]), k, dtype=np.int64))
    return np.concatenate(inner), np.concatenate(triangles), np.concatenate(region)


def _curve_edges(divisions: list[Floats], along: list[Ints]) -> tuple[Ints, Ints, Floats]:
    """Vertices (B, 2), ascending; piece (B,); and parameters (B, 2) of the edges along the pieces."""
    vertices = np.concatenate([np.stack([v[:-1], v[1:]], axis=1) for v in along])
    span = np.concatenate([np.stack([t[:-1], t[1:]], axis=1) for t in divisions])
    piece = np.repeat(np.arange(len(along)), [len(v) - 1 for v in along])
    turned = vertices[:, 0] > vertices[:, 1]
    vertices[turned], span[turned] = vertices[turned][:, ::-1], span[turned][:, ::-1]
    return vertices, piece, span
