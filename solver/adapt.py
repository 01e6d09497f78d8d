"""What to do next when a bracket is still too wide: raise the order, or split the triangles that hold its width."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from nightcap.geometry.curves import Flags, Floats
from nightcap.geometry.errors import MeshError
from nightcap.geometry.mesh import Mesh
from nightcap.geometry.refine import refine
from nightcap.geometry.valid import first_mesh
from nightcap.solver.fields import Fields

HIGHEST_ORDER = 8
WIDESPREAD = 0.25
"""Where more than this fraction of the triangles is to blame, a higher order pays."""
CLOSEST_CONTACT = 1e-5
"""Least length of the chords at contacts, relative to the curves: what lies beside them is thinner by its square."""
LEVELS = 4
"""Splits towards a point of the outlines in one round: only there can a field be singular."""

SMALLEST = 1e-11
"""No edge shorter than this, relative to its coordinates, is split."""


@dataclass(frozen=True, eq=False)
class Step:
    """The next round's order and mesh, and what was changed, in words."""

    order: int
    mesh: Mesh
    action: str


def first_order(accuracy: float) -> int:
    """Order of the first round, MEASURED to be the cheapest that mostly meets the accuracy at once."""
    return next((order for order, least in ((3, 3e-4), (4, 3e-6), (5, 2e-6)) if accuracy >= least), 6)


def next_step(fields: Fields, accuracy: float) -> Step:
    """Chooses between order and triangles by how the width of the bracket is spread over the mesh.

    If no triangle held more than its equal part of half the permitted width, the bracket would be narrow enough; those
    that do are to blame. Where two curves touch, splitting does not help; there the mesh is made anew.
    Raises MeshError where nothing helps any more.
    """
    order = fields.stiffness.order
    excess = fields.bracket.relative / accuracy
    lenses = float(relative_share(fields)[fields.mesh.has_lens].sum())
    contact = fields.mesh.grading.contact
    if lenses > accuracy / 4 and contact > CLOSEST_CONTACT:
        contact = max(contact * max((accuracy / (10 * lenses)) ** (1 / 2), 1e-2), CLOSEST_CONTACT)
        grading = replace(fields.mesh.grading, contact=contact)
        return Step(order, first_mesh(fields.mesh.layout, grading), f"contacts graded to {contact:.1e}")
    blamed = _blamed(fields, accuracy)
    spread = blamed.mean() > WIDESPREAD or _stuck(fields) > accuracy
    if spread and order < HIGHEST_ORDER:
        steps = next((k for k, most in ((1, 5.0), (2, 1e3)) if excess < most), 4)  # one order gains about a digit
        higher = min(order + steps, HIGHEST_ORDER)
        return Step(higher, fields.mesh, f"order {order} to {higher}")
    if _stuck(fields) > accuracy:
        raise MeshError(f"triangles as small as double precision can carry alone leave {_stuck(fields):.1e}")
    mesh = _split(fields.mesh, blamed)
    return Step(order, mesh, f"{np.count_nonzero(blamed)} triangles split")


def relative_share(fields: Fields) -> Floats:
    """(T,) each triangle's share of the half-width, relative to C_ii, for the conductor where it matters most."""
    return np.asarray((fields.share / np.diag(fields.bracket.value)).max(axis=1) / 2)


def _stuck(fields: Fields) -> float:
    """The part of the relative half-width that lies in triangles too small to be split."""
    return float(relative_share(fields)[~_divisible(fields.mesh)].sum())


def _blamed(fields: Fields, accuracy: float) -> Flags:
    share = np.where(fields.mesh.has_lens, 0.0, relative_share(fields))
    permitted = min(accuracy / (2 * len(share)), float(share.max()) / 2)
    return np.asarray(share > permitted, dtype=np.bool_)


def _split(mesh: Mesh, blamed: Flags) -> Mesh:
    """Splits the blamed triangles, and again those that touch a point of the outlines that a blamed one touched."""
    drawn = len(mesh.layout.points)
    touched = np.unique(mesh.triangles[blamed])
    touched = touched[touched < drawn]
    mesh = refine(mesh, blamed & _divisible(mesh))
    for _ in range(LEVELS - 1):
        mesh = refine(mesh, np.asarray(np.isin(mesh.triangles, touched).any(axis=1)) & _divisible(mesh))
    return mesh


def _divisible(mesh: Mesh) -> Flags:
    """(T,) True for triangles whose parts still have coordinates that differ in several digits."""
    shortest = mesh.edge_lengths()[mesh.triangle_edges].min(axis=1)
    extent = np.abs(mesh.points[mesh.triangles]).max(axis=(1, 2))
    return np.asarray(shortest > SMALLEST * extent, dtype=np.bool_)
