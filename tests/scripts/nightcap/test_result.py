import numpy as np
from numpy.testing import assert_allclose
from stand_ins import capacitance

from nightcap.comparison import compare
from nightcap.geometry.case import Expectation
from nightcap.result import Capacitance, mutual_capacitance

SEED = 20_311


def test_mutual_capacitances_of_a_known_matrix() -> None:
    """Three two-terminal capacitors 2, 3 (to the reference) and 5 (between) make the matrix [[7, -5], [-5, 8]]."""
    C = np.array([[7.0, -5.0], [-5.0, 8.0]])
    zero = np.zeros((2, 2))
    mutual = mutual_capacitance(Capacitance(("a", "b"), C, C, C, zero))
    assert_allclose(mutual.value, [[2.0, 5.0], [5.0, 3.0]], rtol=1e-15)
    assert_allclose(mutual.half_width, zero, atol=0.0, rtol=0.0)


def test_no_matrix_between_the_bounds_has_a_mutual_capacitance_outside_its_half_width() -> None:
    rng = np.random.default_rng(SEED)
    worst = 0.0
    for _ in range(200):
        root = rng.normal(size=(3, 3))
        D = root @ root.T
        lower = np.diag([9.0, 8.0, 7.0])
        half = 0.5 * np.sqrt(np.outer(D.diagonal(), D.diagonal()))
        mutual = mutual_capacitance(Capacitance(("a", "b", "c"), lower + D / 2, lower, lower + D, half))
        turn, _ = np.linalg.qr(rng.normal(size=(3, 3)))
        between = lower + root @ turn @ np.diag(rng.integers(0, 2, 3)) @ turn.T @ root.T
        exact = mutual_capacitance(Capacitance(("a", "b", "c"), between, between, between, half)).value
        ratio = np.abs(exact - mutual.value) / mutual.half_width
        worst = max(worst, float(ratio.max()))
    assert 0.8 < worst <= 1.0 + 1e-12


def expectation(shift: float, *, exact: bool = True, tolerance: float = 1e-4) -> Expectation:
    value = capacitance().value + shift * 5e-11 * np.eye(2)
    return Expectation(tuple(map(tuple, value.tolist())), tolerance, "from memory", exact)


def test_agreement_needs_the_tolerance_and_for_exact_values_the_bracket() -> None:
    assert compare(expectation(0.5e-5), capacitance()).agrees
    off = compare(expectation(2e-5), capacitance())
    assert off.inside_bracket is False
    assert not off.agrees
    assert compare(expectation(2e-5, exact=False), capacitance()).agrees
    assert not compare(expectation(2e-4, exact=False), capacitance()).agrees
    assert_allclose(off.deviation, 2e-5 / 1.25, rtol=1e-6)


def test_matrix_of_another_size_disagrees() -> None:
    assert not compare(expectation(0.0), capacitance(3)).agrees
