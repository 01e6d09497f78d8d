"""What walls do to the unknowns: no flux passes them, and the far one has a single potential."""

from __future__ import annotations

import numpy as np
from scipy import sparse
from scipy.sparse.csgraph import connected_components

from nightcap.geometry import polynomials
from nightcap.geometry.curves import Flags, Ints
from nightcap.geometry.layout import FAR_WALL
from nightcap.geometry.mesh import Mesh


def unknowns_on(mesh: Mesh, order: int, dofs: Ints, label: Ints, none: int) -> Ints:
    """(M,) for each unknown the label (E,) of an edge that it lies on, or ``none`` where no edge is labelled.

    dofs : (T, b) numbers of each triangle's unknowns on its edges.
    """
    labels = np.full(int(dofs.max()) + 1, none, dtype=np.int64)
    p = order - 1
    for local, (a, b) in enumerate(polynomials.EDGES):
        on = label[mesh.triangle_edges[:, local]]
        rows = np.flatnonzero(on != none)
        columns = [a, b, *range(3 + local * p, 3 + (local + 1) * p)]
        labels[dofs[rows][:, columns]] = on[rows, None]
    return labels


def with_one_far_potential(mesh: Mesh, order: int, dofs: Ints) -> Ints:
    """The numbers (T, b) of unknowns of the potential: where the far wall floats, all on it are one."""
    wall = mesh.layout.wall
    if wall is None or wall.conductor is not None:
        return dofs
    on_wall = _on_far_wall(mesh, order, dofs)
    number = np.arange(len(on_wall))
    number[on_wall] = np.flatnonzero(on_wall)[0]
    return number[dofs]


def potential_of_far_wall(mesh: Mesh, order: int, dofs: Ints, conductor: Ints) -> Ints:
    """The conductor (M,) that fixes each unknown of the potential, with the one that reaches the far wall, if any."""
    wall = mesh.layout.wall
    if wall is None or wall.conductor is None:
        return conductor
    return np.where(_on_far_wall(mesh, order, dofs), wall.conductor, conductor)


def _on_far_wall(mesh: Mesh, order: int, dofs: Ints) -> Flags:
    return np.asarray(unknowns_on(mesh, order, dofs, mesh.edge_wall, 0) == FAR_WALL)


def held_fluxes(mesh: Mesh, order: int, dofs: Ints) -> Flags:
    """(M,) True for the unknowns of the flux function that are held at zero.

    All on walls: between any two walls of one part of the mesh a conductor's surface lies, and what the flux function
    gains along it is the charge there, which the cuts carry. A part without walls is held at one vertex.
    """
    held = unknowns_on(mesh, order, dofs, mesh.edge_wall, 0) != 0
    count = len(mesh.points)
    graph = sparse.coo_array((np.ones(len(mesh.edges)), mesh.edges.T), shape=(count, count))
    _, part = connected_components(graph, directed=False)
    is_held = np.zeros(int(part.max()) + 1, dtype=bool)
    is_held[part[held[:count]]] = True
    _, first = np.unique(part, return_index=True)
    held[first[~is_held]] = True
    return np.asarray(held)
