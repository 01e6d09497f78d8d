"""The triangulation of a layout: straight triangles first, then the curved ones laid over them."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
import skfem

from nightcap.geometry.curves import Flags, Floats, Ints
from nightcap.geometry.grading import Grading
from nightcap.geometry.layout import Layout


@dataclass(frozen=True, eq=False)
class Triangulation:
    """Triangles over the regions of a layout; the far sheet overlaps the near one, sharing only the rim."""

    layout: Layout
    points: Floats
    """(V, 2), m; inverted on the far sheet."""
    triangles: Ints
    """(T, 3), ascending vertex numbers."""
    orientation: Floats
    """(T,) +1 where the ascending vertices run counter-clockwise, else -1: the sign each Jacobian must have."""
    region: Ints
    """(T,) index into Layout.regions."""
    curve_edges: Ints
    """(B, 2) vertices of the edges that lie on pieces of the layout, the lower number first."""
    curve_piece: Ints
    """(B,) the piece that each lies on, index into Layout.pieces."""

    @cached_property
    def topology(self) -> skfem.MeshTri:
        """The same triangles as a scikit-fem mesh: its facets, and its numbering of unknowns."""
        points, triangles = (np.ascontiguousarray(array.T) for array in (self.points, self.triangles))
        return skfem.MeshTri(points, triangles, sort_t=False, validate=False)

    @cached_property
    def edges(self) -> Ints:
        """(E, 2) vertices of all edges, the lower number first."""
        return np.ascontiguousarray(self.topology.facets.T.astype(np.int64))

    @cached_property
    def triangle_edges(self) -> Ints:
        """(T, 3) edge numbers of each triangle, in the order of ``polynomials.EDGES``."""
        return np.ascontiguousarray(self.topology.t2f.T.astype(np.int64))

    @cached_property
    def edge_triangles(self) -> Ints:
        """(E, 2) the triangles beside each edge; -1 where there is no second one."""
        return np.ascontiguousarray(self.topology.f2t.T.astype(np.int64))

    @cached_property
    def edge_rank(self) -> Ints:
        """(E,) for each edge its row in curve_edges, or -1."""
        n = len(self.points)
        keys = self.edges[:, 0] * n + self.edges[:, 1]
        order = np.argsort(keys)
        found = order[np.searchsorted(keys, self.curve_edges[:, 0] * n + self.curve_edges[:, 1], sorter=order)]
        rank = np.full(len(keys), -1, dtype=np.int64)
        rank[found] = np.arange(len(found))
        return rank

    @cached_property
    def edge_conductor(self) -> Ints:
        """(E,) the conductor on whose surface each edge lies, or -1."""
        surfaces = (piece.surface for piece in self.layout.pieces)
        conductor = np.array([-1 if surface is None else surface for surface in surfaces])
        return np.append(conductor[self.curve_piece], -1)[self.edge_rank]

    @cached_property
    def edge_wall(self) -> Ints:
        """(E,) MAGNETIC_WALL or FAR_WALL where an edge lies on one, else 0."""
        wall = np.array([piece.wall for piece in self.layout.pieces], dtype=np.int64)
        return np.append(wall[self.curve_piece], 0)[self.edge_rank]

    @cached_property
    def far(self) -> Flags:
        """(T,) True on the far sheet."""
        return np.array([region.far for region in self.layout.regions])[self.region]

    @cached_property
    def permittivity(self) -> Floats:
        """(T,) relative permittivity of each triangle's region."""
        of_region = np.array([self.layout.materials[r.material].permittivity for r in self.layout.regions])
        return of_region[self.region]

    def edge_lengths(self) -> Floats:
        """(E,) lengths of the chords, m."""
        a, b = self.points[self.edges].transpose(1, 0, 2)
        return np.asarray(np.hypot(*(b - a).T))


@dataclass(frozen=True, eq=False)
class CurvedTriangles:
    """The triangles that are not the straight ones through their vertices: maps from the reference triangle."""

    index: Ints
    """(K,) triangle numbers."""
    nodes: Floats
    """(K, n, 2) images of ``polynomials.nodes(curving.ORDER)``, m."""
    dilatation: Floats
    """(K,) bound kappa on how much the step from polynomial to exact edges can change the triangle's energy:
    the energy of any field, carried over, changes by a factor of at most 1 + kappa."""


@dataclass(frozen=True, eq=False)
class Mesh(Triangulation):
    """A valid mesh: every Jacobian is positive everywhere."""

    curved: CurvedTriangles
    least_permittivity: Floats
    """(T,) the least that is present in each triangle. Differs from the greatest only beside a curve that is
    replaced by its chord, where a lens of the neighbour's material reaches into the triangle."""
    greatest_permittivity: Floats
    """(T,)"""
    engulfed_by: Ints
    """(T,) the conductor of which such a lens reaches into the triangle, or -1. For an upper bound of capacitance the
    whole triangle counts as that conductor, for a lower bound none of it."""
    grading: Grading
    """What the first mesh was graded to."""

    @property
    def has_lens(self) -> Flags:
        """(T,) True where a curve is replaced by its chord: only a first mesh graded further makes these better."""
        return (self.least_permittivity < self.greatest_permittivity) | (self.engulfed_by >= 0)


def ascending(triangles: Ints) -> tuple[Ints, Floats]:
    """Counter-clockwise triangles (T, 3) with their vertices sorted, and the orientation that this leaves (T,)."""
    a, b, c = triangles.T
    even = ((a < b) & (b < c)) | ((b < c) & (c < a)) | ((c < a) & (a < b))
    return np.sort(triangles, axis=1), np.where(even, 1.0, -1.0)
