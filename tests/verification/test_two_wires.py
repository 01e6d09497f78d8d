"""Two equal wires in open space, from nearly touching to far apart. Source: pi / acosh(d / 2a), Smythe."""

import numpy as np
import pytest
from judging import check_against, relative, solved
from numpy.testing import assert_allclose
from references import two_wires, two_wires_by_ratio
from samples import two_wires as two_wires_case

EXCESSES = [0.001, 0.003, 0.01, 0.05, 0.2, 0.5, 1.0, 2.0, 4.0, 9.0, 29.0, 99.0]
"""d / 2a - 1."""


@pytest.mark.parametrize("excess", EXCESSES)
def test_value_and_bracket_over_distance(excess: float) -> None:
    radius = 1.0
    distance = 2 * radius * (1 + excess)
    rounded = (distance - 2 * radius) / (2 * radius)  # the gap that the case really has
    check_against(two_wires_case(distance, radius), two_wires_by_ratio(rounded), 1e-6)


@pytest.mark.parametrize("accuracy", [1e-3, 1e-4, 1e-5, 1e-7])
@pytest.mark.parametrize("excess", [0.003, 0.5, 9.0])
def test_bracket_at_other_accuracies(excess: float, accuracy: float) -> None:
    distance = 2 * (1 + excess)
    check_against(two_wires_case(distance), two_wires_by_ratio((distance - 2) / 2), accuracy)


def test_mean_at_three_radii_is_a_tenth_of_the_bracket_or_better() -> None:
    solution = solved(two_wires_case(3.0), 1e-6)
    assert_allclose(relative(solution).value, [[two_wires(3.0, 1.0)]], rtol=1e-7)


@pytest.mark.parametrize(("ratio", "error"), [(2.2, -43.7), (3, -12.4), (4, -5.00), (6, -1.62), (10, -0.441)])
def test_how_wrong_the_thin_wire_formula_is(ratio: float, error: float) -> None:
    """The tool tells the error of pi / ln(d / a) that common practice accepts, in percent.

    Source of the percentages: the two closed forms.
    """
    value = relative(solved(two_wires_case(ratio), 1e-6)).value[0, 0]
    assert_allclose(100 * (np.pi / np.log(ratio) / value - 1), error, rtol=5e-3)
