"""The two global problems: potentials from above, flux functions from below."""

from __future__ import annotations

import numpy as np
from scipy import sparse
from scipy.sparse.linalg import SuperLU, splu
from skfem.assembly import Dofs

from nightcap.geometry import polynomials
from nightcap.geometry.curves import Floats, Ints
from nightcap.geometry.curving import require_valid
from nightcap.geometry.mesh import Mesh
from nightcap.solver.bracket import Bracket
from nightcap.solver.cuts import CutTree, cut_tree
from nightcap.solver.element import ElementTriLagrange, skeleton_size
from nightcap.solver.fields import Fields
from nightcap.solver.stiffness import Stiffness, edge_pairing, stiffness
from nightcap.solver.stopwatch import Stopwatch
from nightcap.solver.walls import held_fluxes, potential_of_far_wall, unknowns_on, with_one_far_potential

ALLOWANCE = 1e-12
"""What rounding may do to a bound, relative; both are widened by it."""


def solve_fields(mesh: Mesh, order: int, tolerance: float, watch: Stopwatch) -> Fields:
    """Solves both problems for all conductors on one mesh.

    tolerance : what approximating the metric of curved triangles may leave, relative; it widens the bracket.
    Raises MeshError for a mesh with folded triangles, BracketError if the bounds contradict each other.
    """
    local, dofs = _local(mesh, order, tolerance, watch)
    above, below = _weighted(mesh, local)
    potential = _potentials(mesh, order, dofs, above, watch)
    upper = _energy(above, potential)
    flux, lower = _fluxes(mesh, order, dofs, below, watch)
    pairing = edge_pairing(order) * (mesh.orientation * np.where(mesh.far, -1.0, 1.0))[:, None, None]
    mixed = np.einsum("tbn,tbn->tn", potential, pairing @ flux)
    energy = _per_triangle(above, potential) + _per_triangle(below, flux)
    share = energy - 2 * np.sign(mixed.sum()) * mixed
    floor = float((mesh.curved.dilatation @ energy[mesh.curved.index] / np.diag(upper)).max() / 2)
    bracket = Bracket((lower + lower.T) / 2 * (1 - ALLOWANCE), (upper + upper.T) / 2 * (1 + ALLOWANCE)).checked()
    return Fields(mesh, local, potential, flux, np.maximum(share, 0.0), bracket, floor, int(dofs.max()) + 1)


def solve_potentials(mesh: Mesh, order: int, tolerance: float, watch: Stopwatch) -> tuple[Floats, Floats]:
    """The potentials alone: their edge values (T, b, N), V, and the upper bound (N, N) relative to eps0."""
    local, dofs = _local(mesh, order, tolerance, watch)
    above, _ = _weighted(mesh, local)
    potential = _potentials(mesh, order, dofs, above, watch)
    return potential, _energy(above, potential)


def _local(mesh: Mesh, order: int, tolerance: float, watch: Stopwatch) -> tuple[Stiffness, Ints]:
    """Element matrices, and the numbers (T, b) of each triangle's unknowns."""
    with watch.on("assembly"):
        require_valid(mesh)
        numbering = Dofs(mesh.topology, ElementTriLagrange(order)).element_dofs
        return stiffness(mesh, order, tolerance), numbering[: skeleton_size(order)].T.astype(np.int64)


def _weighted(mesh: Mesh, local: Stiffness) -> tuple[Floats, Floats]:
    """Element matrices (T, b, b) with the greatest permittivity, and with the inverse of the least."""
    above = mesh.greatest_permittivity * (1 + local.dilatation)
    below = (1 + local.dilatation) / mesh.least_permittivity
    return local.skeleton * above[:, None, None], local.skeleton * below[:, None, None]


def _per_triangle(K: Floats, u: Floats) -> Floats:
    """(T, N) energies of each field in each triangle."""
    return np.asarray(np.einsum("tbn,tbn->tn", u, K @ u))


def _energy(K: Floats, u: Floats) -> Floats:
    """(N, N) the sum of u' K u over all triangles."""
    u = u - u[:, :1]  # no triangle has any energy of constants: without them less is lost to rounding
    n = u.shape[2]
    return u.reshape(-1, n).T @ (K @ u).reshape(-1, n)


def _fixed_potentials(mesh: Mesh, order: int, dofs: Ints) -> Ints:
    """(M,) the conductor that fixes each unknown of the potential, or -1."""
    conductor = unknowns_on(mesh, order, dofs, mesh.edge_conductor, -1)
    engulfed = np.flatnonzero(mesh.engulfed_by >= 0)
    conductor[dofs[engulfed]] = mesh.engulfed_by[engulfed, None]
    return potential_of_far_wall(mesh, order, dofs, conductor)


def _potentials(mesh: Mesh, order: int, dofs: Ints, K: Floats, watch: Stopwatch) -> Floats:
    """(T, b, N) the potentials of least energy."""
    conductor = _fixed_potentials(mesh, order, dofs)
    dofs = with_one_far_potential(mesh, order, dofs)
    others = [k for k in range(len(mesh.layout.conductors)) if k != mesh.layout.reference]
    values = (conductor[:, None] == np.array(others)).astype(float)
    free = (conductor < 0) & (np.bincount(dofs.ravel(), minlength=len(conductor)) > 0)
    number = np.where(free, np.cumsum(free) - 1, -1)
    with watch.on("assembly"):
        load = _scattered(dofs, -(K @ values[dofs]), len(conductor))
        matrix = _assembled(number[dofs], K, int(free.sum()))
    if matrix.shape[0]:
        values[free] = _solved(matrix, load[free], watch)
    return np.asarray(values[dofs])


def _fluxes(mesh: Mesh, order: int, dofs: Ints, K: Floats, watch: Stopwatch) -> tuple[Floats, Floats]:
    """(T, b, N) flux functions of unit potentials, and a lower bound (N, N) of C.

    With energies S of unit jumps t over the cuts and charges q = Q t, the least energy of given charges is that of
    t = S^-1 Q' (Q S^-1 Q')^-1 q: so P = (Q S^-1 Q')^-1 is an upper bound of C^-1, and Q S^-1 Q' a lower one of C.
    """
    with watch.on("assembly"):
        tree = cut_tree(mesh)
        jumps = _jumps(tree, order, len(dofs))
        free = ~held_fluxes(mesh, order, dofs)
        load = _scattered(dofs, -(K @ jumps), len(free))
        number = np.where(free, np.cumsum(free) - 1, -1)
        matrix = _assembled(number[dofs], K, int(free.sum()))
    values = np.zeros((len(free), len(tree.cuts)))
    if matrix.shape[0]:
        values[free] = _solved(matrix, load[free], watch)
    flux = values[dofs] + jumps
    jumps_of_unit_potentials = np.linalg.solve(_energy(K, flux), tree.charges.T)
    return flux @ jumps_of_unit_potentials, tree.charges @ jumps_of_unit_potentials


def _jumps(tree: CutTree, order: int, triangles: int) -> Floats:
    """(T, b, N) the one-sided indicators of all cuts, on the edges' nodes."""
    x, y = polynomials.nodes(order)[:, : skeleton_size(order)]
    hats = np.stack([1 - x - y, x, y])
    jumps = np.zeros((triangles, hats.shape[1], len(tree.cuts)))
    for column, cut in enumerate(tree.cuts):
        np.add.at(jumps[:, :, column], cut.triangle, cut.value[:, None] * hats[cut.corner])
    return jumps


def _scattered(dofs: Ints, local: Floats, size: int) -> Floats:
    """(M, N) the sum of local vectors (T, b, N) over the triangles."""
    flat = local.reshape(-1, local.shape[2])
    return np.stack([np.bincount(dofs.ravel(), column, minlength=size) for column in flat.T], axis=1)


def _assembled(number: Ints, K: Floats, size: int) -> sparse.csc_array:
    """The global matrix over the unknowns with a number >= 0."""
    b = number.shape[1]
    rows, columns = np.repeat(number, b, axis=1).ravel(), np.tile(number, (1, b)).ravel()
    used = (rows >= 0) & (columns >= 0)
    entries = (K.ravel()[used], (rows[used].astype(np.int32), columns[used].astype(np.int32)))
    return sparse.coo_array(entries, shape=(size, size)).tocsc()


def _solved(matrix: sparse.csc_array, load: Floats, watch: Stopwatch) -> Floats:
    with watch.on("factorisation"):
        factor: SuperLU = splu(
            matrix, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options={"SymmetricMode": True}
        )
    with watch.on("solves"):
        return np.asarray(factor.solve(load))
