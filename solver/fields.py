"""The two trial fields of a mesh, and their values at points."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from nightcap.geometry import curving, polynomials
from nightcap.geometry.constants import VACUUM_PERMITTIVITY
from nightcap.geometry.curves import Flags, Floats, Ints
from nightcap.geometry.mesh import Mesh
from nightcap.solver.bracket import Bracket
from nightcap.solver.stiffness import Stiffness


@dataclass(frozen=True, eq=False)
class Sample:
    """Field values on small straight triangles; corners are not shared, as the flux function jumps across cuts."""

    points: Floats
    """(V, 2), m; inverted on the far sheet."""
    triangles: Ints
    """(S, 3)"""
    material: Ints
    """(S,) index into Layout.materials."""
    far: Flags
    """(S,) True on the far sheet."""
    potential: Floats
    """(N, V), V."""
    flux: Floats
    """(N, V) flux function, C/m: its contours are field lines."""
    place: Ints
    """(V,) numbers that are the same for corners that are one point of the mesh: not for the two sides of a strip."""


@dataclass(frozen=True, eq=False)
class Fields:
    """Both trial fields on the edges of every triangle, one per conductor but the reference.

    Field i: conductor i at 1 V, the others at 0 V.
    """

    mesh: Mesh
    stiffness: Stiffness
    potential: Floats
    """(T, b, N), V."""
    flux: Floats
    """(T, b, N) flux function over eps0, V: the rotated gradient of it is the flux. Jumps across the cuts."""
    share: Floats
    """(T, N) each triangle's share of D_ii, relative to eps0."""
    bracket: Bracket
    """Relative to eps0."""
    floor: float
    """Part of the relative half-width that the polynomial edges leave of the exact curves; neither a higher order nor
    splitting makes it smaller."""
    unknowns: int

    def sample(self, subdivisions: int = 4) -> Sample:
        """Evaluates both fields on every triangle cut into subdivisions^2 small ones."""
        lattice, cells = _lattice(subdivisions)
        values, _ = polynomials.lagrange(self.stiffness.order, lattice)
        places = self._places(lattice)
        count, per_triangle = len(places), lattice.shape[1]
        corners = np.arange(count)[:, None, None] * per_triangle + cells
        fields = [self._nodal(edge_values).transpose(2, 0, 1) @ values for edge_values in (self.potential, self.flux)]
        of_region = np.array([region.material for region in self.mesh.layout.regions])
        return Sample(
            points=places.reshape(-1, 2),
            triangles=corners.reshape(-1, 3),
            material=np.repeat(of_region[self.mesh.region], len(cells)),
            far=np.repeat(self.mesh.far, len(cells)),
            potential=fields[0].reshape(len(fields[0]), -1),
            flux=fields[1].reshape(len(fields[1]), -1) * VACUUM_PERMITTIVITY,
            place=_place_numbers(self.mesh, subdivisions).reshape(-1),
        )

    def _nodal(self, edge_values: Floats) -> Floats:
        """(T, n, N) values at all nodes from those on the edges."""
        return np.concatenate([edge_values, self.stiffness.interior @ edge_values], axis=1)

    def _places(self, lattice: Floats) -> Floats:
        """(T, q, 2) where reference points (2, q) lie."""
        barycentric = np.stack([1 - lattice.sum(axis=0), *lattice], axis=1)
        places = np.einsum("qk,tkd->tqd", barycentric, self.mesh.points[self.mesh.triangles])
        values, _ = polynomials.lagrange(curving.ORDER, lattice)
        places[self.mesh.curved.index] = np.einsum("nq,tnd->tqd", values, self.mesh.curved.nodes)
        return np.asarray(places)


def _place_numbers(mesh: Mesh, n: int) -> Ints:
    """(T, q) a number for each lattice point of each triangle, shared along common edges.

    Edges run from the lower to the higher vertex in all triangles, so their inner points are counted alike.
    """
    weights = np.rint(_lattice(n)[0] * n).astype(np.int64)
    barycentric = np.stack([n - weights.sum(axis=0), *weights])
    first_edge, first_inner = len(mesh.points), len(mesh.points) + (n - 1) * len(mesh.edges)
    numbers = first_inner + np.arange(len(mesh.triangles) * barycentric.shape[1]).reshape(len(mesh.triangles), -1)
    for local, (a, b) in enumerate(polynomials.EDGES):
        on = (barycentric[[a, b]].sum(axis=0) == n) & (barycentric[b] > 0) & (barycentric[b] < n)
        along = first_edge + (n - 1) * mesh.triangle_edges[:, local, None]
        numbers[:, on] = along + barycentric[b, on] - 1
    for corner in range(3):
        numbers[:, barycentric[corner] == n] = mesh.triangles[:, corner, None]
    return numbers


def _lattice(n: int) -> tuple[Floats, Ints]:
    """Points (2, q) of the reference triangle cut into n^2 small ones, and their corners (n^2, 3)."""
    number = {(i, j): k for k, (i, j) in enumerate((i, j) for j in range(n + 1) for i in range(n + 1 - j))}
    cells = [(number[i, j], number[i + 1, j], number[i, j + 1]) for i, j in number if i + j < n]
    cells += [(number[i + 1, j], number[i + 1, j + 1], number[i, j + 1]) for i, j in number if i + j < n - 1]
    return np.array(list(number), dtype=float).T / n, np.array(cells)
