"""The algebra that keeps a bracket a bracket."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from nightcap.geometry.errors import BracketError
from nightcap.solver.bracket import Bracket

seeds = st.integers(2, 10**6)
sizes = st.integers(2, 7)


def maxwell(n: int, seed: int) -> tuple[np.ndarray, Bracket]:
    """An exact Maxwell matrix and a bracket around it, neither in the middle nor a multiple."""
    random = np.random.default_rng(seed)
    between = random.uniform(0.0, 1.0, (n, n))
    between = np.triu(between, 1) + np.triu(between, 1).T
    exact = np.diag(between.sum(axis=1) + random.uniform(0.1, 1.0, n)) - between
    below, above = (0.01 * root @ root.T for root in random.normal(size=(2, n, n)))
    below *= 0.5 * np.linalg.eigvalsh(exact)[0] / np.linalg.norm(below, 2)
    return exact, Bracket(exact - below, exact + above)


def holds(bracket: Bracket, exact: np.ndarray) -> bool:
    """Whether the exact matrix lies between the bounds, and each entry within its half-width."""
    slack = 1e-12 * np.abs(np.diag(exact)).max()
    ordered = all(np.linalg.eigvalsh(d)[0] >= -slack for d in (exact - bracket.lower, bracket.upper - exact))
    return ordered and bool((np.abs(exact - bracket.value) <= bracket.half_width + slack).all())


@given(sizes, seeds)
def test_every_entry_lies_within_its_half_width(n: int, seed: int) -> None:
    exact, bracket = maxwell(n, seed)
    assert holds(bracket, exact)


@given(sizes, seeds)
def test_grounding(n: int, seed: int) -> None:
    exact, bracket = maxwell(n, seed)
    assert holds(bracket.keep(range(1, n)), exact[1:, 1:])


@given(sizes, seeds)
def test_tying(n: int, seed: int) -> None:
    exact, bracket = maxwell(n, seed)
    T = np.vstack([np.eye(n - 1)[:1], np.eye(n - 1)])
    assert holds(bracket.congruent(T), T.T @ exact @ T)


@given(sizes, seeds)
def test_floating_is_the_inverse_of_a_part_of_the_inverse(n: int, seed: int) -> None:
    exact, bracket = maxwell(n, seed)
    expected = np.linalg.inv(np.linalg.inv(exact)[1:, 1:])
    assert holds(bracket.eliminate([0]), expected)


@given(sizes, seeds)
def test_inverse(n: int, seed: int) -> None:
    exact, bracket = maxwell(n, seed)
    assert holds(bracket.inverse(), np.linalg.inv(exact))


@given(sizes, seeds)
def test_another_reference_and_back(n: int, seed: int) -> None:
    exact, bracket = maxwell(n, seed)
    full = np.block([[exact, -exact.sum(axis=1, keepdims=True)], [-exact.sum(axis=0, keepdims=True), exact.sum()]])
    moved = bracket.with_reference(0)
    assert holds(moved, full[1:, 1:])
    back = np.roll(np.arange(n), 1)  # the former reference stood last; as the new first row's complement it returns
    assert_allclose(moved.with_reference(n - 1).lower[np.ix_(back, back)], bracket.lower, rtol=1e-9, atol=1e-12)


def test_relative_is_the_greatest_relative_half_width() -> None:
    bracket = Bracket(np.diag([1.0, 9.0]), np.diag([3.0, 11.0]))
    assert_allclose(bracket.relative, 0.5, rtol=1e-15)


def test_contradicting_bounds_are_refused() -> None:
    with pytest.raises(BracketError, match="exceeds"):
        Bracket(np.eye(2), np.diag([1.0, 0.999])).checked()
    with pytest.raises(BracketError):
        Bracket(np.eye(2), np.diag([np.nan, 2.0])).checked()


def test_no_floating_conductor_changes_nothing() -> None:
    exact, bracket = maxwell(4, 99)
    assert_allclose(bracket.eliminate([]).lower, bracket.lower, rtol=1e-15)
    assert holds(bracket.eliminate([]), exact)


def test_bounds_that_contradict_each_other_by_rounding_are_widened() -> None:
    bracket = Bracket(np.eye(2), np.diag([1.0, 1.0 - 1e-12])).checked()
    assert np.linalg.eigvalsh(bracket.width)[0] > 0
    assert np.linalg.eigvalsh(bracket.upper - np.eye(2))[0] >= 0
    assert np.linalg.eigvalsh(np.diag([1.0, 1.0 - 1e-12]) - bracket.lower)[0] >= 0
