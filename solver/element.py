"""Triangles of any order, as scikit-fem elements."""

from __future__ import annotations

from skfem.element import ElementH1
from skfem.refdom import RefTri

from nightcap.geometry import polynomials
from nightcap.geometry.curves import Floats


class ElementTriLagrange(ElementH1):  # type: ignore[misc]  # scikit-fem ships no types
    """Lagrange triangle of order p with Gauss-Lobatto nodes on its edges.

    The nodes of an edge run from its lower to its higher vertex, so triangles must be stored with ascending vertices.
    """

    nodal_dofs = 1
    refdom = RefTri

    def __init__(self, order: int) -> None:
        self.order = self.maxdeg = order
        self.facet_dofs = order - 1
        self.interior_dofs = (order - 1) * (order - 2) // 2
        self.dofnames = ["u"] * (1 + self.facet_dofs + self.interior_dofs)
        self.doflocs = polynomials.nodes(order).T

    def lbasis(self, X: Floats, i: int) -> tuple[Floats, Floats]:
        """Value (...,) and gradient (2, ...) of basis function i at reference points X (2, ...)."""
        values, gradients = polynomials.lagrange(self.order, X.reshape(2, -1))
        return values[i].reshape(X.shape[1:]), gradients[:, i].reshape(X.shape)


def skeleton_size(order: int) -> int:
    """Number of an element's basis functions that live on its edges; they come first."""
    return 3 * order
