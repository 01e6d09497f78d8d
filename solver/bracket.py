"""A symmetric matrix known between two others, and the algebra that keeps it so."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from nightcap.geometry.curves import Floats, Ints
from nightcap.geometry.errors import BracketError

ROUNDING = 1e-10
"""Bounds may contradict each other by so much, relative, before that counts as a contradiction."""


@dataclass(frozen=True, eq=False)
class Bracket:
    """lower <= exact <= upper in the Loewner order: x' lower x <= x' exact x <= x' upper x for every x."""

    lower: Floats
    """(N, N), symmetric."""
    upper: Floats
    """(N, N), symmetric."""

    @property
    def value(self) -> Floats:
        """(N, N) the middle."""
        return (self.lower + self.upper) / 2

    @property
    def width(self) -> Floats:
        """(N, N) D = upper - lower, positive semidefinite."""
        return self.upper - self.lower

    @property
    def half_width(self) -> Floats:
        """(N, N) every entry of the exact matrix lies within value +- 1/2 sqrt(D_ii D_jj)."""
        root = np.sqrt(np.maximum(np.diag(self.width), 0.0))
        return np.outer(root, root) / 2

    @property
    def relative(self) -> float:
        """The greatest half-width relative to sqrt(value_ii value_jj)."""
        return float((np.diag(self.half_width) / np.diag(self.value)).max(initial=0.0))

    def checked(self) -> Bracket:
        """The same bracket, or one widened by as much as its bounds contradict each other.

        Raises BracketError if that is more than rounding explains.
        """
        scale = 1 / np.sqrt(np.abs(np.diag(self.upper)))
        least = np.linalg.eigvalsh(self.width * np.outer(scale, scale))[0] if len(scale) else 0.0
        if not (np.isfinite(self.lower).all() and np.isfinite(self.upper).all() and least > -ROUNDING):
            raise BracketError(f"the lower bound exceeds the upper one by {-least:.1e} of the matrix")
        wider = np.diag(np.diag(self.upper)) * max(-float(least), 0.0)
        return Bracket(self.lower - wider, self.upper + wider)

    def keep(self, rows: Sequence[int] | Ints) -> Bracket:
        """Grounds all conductors but the kept ones: deletes rows and columns."""
        index = np.ix_(np.asarray(rows), np.asarray(rows))
        return Bracket(self.lower[index], self.upper[index])

    def congruent(self, T: Floats) -> Bracket:
        """T' A T, for any T (N, M). With T of zeros and ones: conductors tied together."""
        return Bracket(_symmetric(T.T @ self.lower @ T), _symmetric(T.T @ self.upper @ T))

    def eliminate(self, rows: Sequence[int]) -> Bracket:
        """Lets conductors float at zero charge: the Schur complement on the remaining ones."""
        return Bracket(_schur(self.lower, rows), _schur(self.upper, rows))

    def inverse(self) -> Bracket:
        """The inverse; it reverses the order, so the bounds change places."""
        return Bracket(_symmetric(np.linalg.inv(self.upper)), _symmetric(np.linalg.inv(self.lower)))

    def with_reference(self, conductor: int) -> Bracket:
        """The matrix with another reference: the old one takes the last row, the new one's row goes.

        Charges sum to zero, so the full matrix with one more row has row sums zero.
        """
        n = len(self.lower)
        T = np.vstack([np.eye(n), -np.ones(n)]).T  # all potentials against the old reference
        full = self.congruent(T)
        return full.keep([k for k in range(n + 1) if k != conductor])

    def scaled(self, factor: float) -> Bracket:
        """The matrix times a positive factor."""
        return Bracket(self.lower * factor, self.upper * factor)


def _schur(A: Floats, rows: Sequence[int]) -> Floats:
    gone = np.asarray(rows, dtype=np.int64)
    kept = np.setdiff1d(np.arange(len(A)), gone)
    inner = np.linalg.solve(A[np.ix_(gone, gone)], A[np.ix_(gone, kept)])
    return _symmetric(A[np.ix_(kept, kept)] - A[np.ix_(kept, gone)] @ inner)


def _symmetric(A: NDArray[np.floating]) -> Floats:
    return np.asarray((A + A.T) / 2, dtype=np.float64)
