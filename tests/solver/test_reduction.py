"""Potentials of tied and floating conductors: they give the reduced charges and energies."""

import numpy as np
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from nightcap.solver.bracket import Bracket
from nightcap.solver.reduction import Reduction


def reduction() -> Reduction:
    """Five conductors: a and c tied, b floating, e tied to the reference."""
    tie = np.array([[1.0, 0, 0], [0, 1, 0], [1, 0, 0], [0, 0, 1], [0, 0, 0]])
    return Reduction(("a", "b", "c", "d", "e"), ("a", "d"), tie, (1,))


@given(st.integers(0, 2**31))
def test_potentials_have_the_reduced_energy_and_leave_floating_ones_without_charge(seed: int) -> None:
    A = np.random.default_rng(seed).normal(size=(5, 5))
    C = A @ A.T + np.eye(5)
    V = reduction().potentials(C)
    assert_allclose(V.T @ C @ V, reduction().apply(Bracket(C, C)).upper, rtol=1e-10, atol=1e-10)
    assert_allclose((C @ V)[1], 0.0, atol=1e-10)
    assert_allclose(V[[0, 2]], [[1, 0], [1, 0]], atol=1e-12)
    assert_allclose(V[4], 0.0, atol=1e-12)
