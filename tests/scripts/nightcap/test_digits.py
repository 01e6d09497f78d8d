import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from nightcap.digits import bracketed, grouped


@pytest.mark.parametrize(
    ("value", "half_width", "text"),
    [
        (28.9017312, 0.000283, "28.90173(29)"),
        (-13.80858718, 2.05e-9, "-13.8085871800(21)"),
        (28.9, 13.0, "29(14)"),
        (28.9, 131.2, "29(132)"),
        (-1e-9, 0.001, "0.0000(11)"),
        (0.0, 0.0, "0.0000000000000(0)"),
    ],
)
def test_half_width_stands_behind_the_digits_it_limits(value: float, half_width: float, text: str) -> None:
    assert bracketed(value, half_width) == text


@given(st.floats(-1e4, 1e4), st.floats(1e-9, 1e3))
def test_what_is_printed_contains_the_whole_bracket(value: float, half_width: float) -> None:
    match = re.fullmatch(r"(-?\d+(?:\.(\d+))?)\((\d+)\)", bracketed(value, half_width))
    assert match is not None
    shown, spread = float(match[1]), int(match[3]) * 10.0 ** -len(match[2] or "")
    rounding = 1e-15 * abs(value) + 2e-9 * half_width
    assert shown - spread <= value - half_width + rounding
    assert shown + spread >= value + half_width - rounding
    assert spread <= 1.2 * half_width + 1e-7


def test_digits_are_grouped_by_threes() -> None:
    assert grouped(1234567) == "1 234 567"
