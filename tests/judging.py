"""What every comparison with an exact answer asserts: it lies inside the bracket, entry by entry and as a matrix."""

from __future__ import annotations

import numpy as np
from numpy.testing import assert_allclose

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case
from nightcap.geometry.constants import VACUUM_PERMITTIVITY
from nightcap.geometry.curves import Floats
from nightcap.solver.bracket import Bracket
from nightcap.solver.solve import Solution, solve

ENTRY_SLACK = 1e-12
"""Rounding allowed to an entry, relative to sqrt(C_ii C_jj)."""
ORDER_SLACK = 1e-11
"""Rounding allowed to an eigenvalue of a difference of matrices, relative to the greatest entry."""


def solved(case: Case, accuracy: float) -> Solution:
    """The solution, which must have met its accuracy."""
    solution = solve(build_layout(case), accuracy)
    assert solution.status == "met", solution.reason
    assert solution.bracket.relative <= accuracy
    return solution


def relative(solution: Solution) -> Bracket:
    """The bracket, C' / eps0."""
    return solution.bracket.scaled(1 / VACUUM_PERMITTIVITY)


def least_eigenvalue(difference: Floats, scale: float) -> float:
    """Of a matrix that should be positive semidefinite, relative to a scale."""
    return float(np.linalg.eigvalsh(difference)[0]) / scale


def assert_ordered(lower: Floats, upper: Floats) -> None:
    """Lower <= upper in the Loewner order."""
    assert least_eigenvalue(upper - lower, np.abs(upper).max()) >= -ORDER_SLACK


def assert_encloses(bracket: Bracket, exact: Floats) -> None:
    """Every entry of the exact matrix within value +- half_width, and lower <= exact <= upper."""
    root = np.sqrt(np.diag(exact))
    beyond = (np.abs(bracket.value - exact) - bracket.half_width) / np.outer(root, root)
    assert beyond.max() <= ENTRY_SLACK, f"an exact entry lies {beyond.max():.2e} outside its bracket"
    assert_ordered(bracket.lower, exact)
    assert_ordered(exact, bracket.upper)


def check_against(case: Case, exact: Floats | float, accuracy: float) -> Solution:
    """Solves a case, compares its value with the exact one and its bracket with both; exact is C' / eps0."""
    solution = solved(case, accuracy)
    bracket = relative(solution)
    matrix = np.atleast_2d(np.asarray(exact, dtype=np.float64))
    root = np.sqrt(np.diag(matrix))
    assert_allclose(bracket.value / np.outer(root, root), matrix / np.outer(root, root), rtol=0, atol=accuracy)
    assert_encloses(bracket, matrix)
    return solution
