"""Formulas: values, what is refused, and that nothing but arithmetic can be said in them."""

import math
import string

import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from nightcap.geometry.case_file.expressions import FUNCTIONS, formula

MM = 1e-3
a, b = 1.24, 0.35
VALUES = {"a": a, "b": b}


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("a", 1.24),
        ("-a/2", -0.62),
        ("a + 2*b", 1.94),
        ("2 * (a - b)", 1.78),
        ("2**3**2", 512.0),
        ("-2**2", -4.0),
        ("+a - -b", 1.59),
        ("1e-1*a", 0.124),
        (".5*a", 0.62),
        ("pi", 3.141592653589793),
        ("5 mil", 0.127),
        ("a/2 + 5 mil", 0.747),
        ("2*0.02in", 1.016),
        ("1 inch - 1 in", 0.0),
        ("1e-4 m + 100 um + 100µm", 0.3),
        ("(1 cm)**2", 100.0),
        ("7 / 2 mm", 3.5),
        ("sqrt(2)", 1.4142135623730951),
        ("hypot(3, 4)", 5.0),
        ("hypot(2, 3, 6)", 7.0),
        ("sin(pi/6)", 0.5),
        ("cos(radians(60))", 0.5),
        ("tan(pi/4)", 1.0),
        ("degrees(atan2(1, -1))", 135.0),
        ("degrees(asin(0.5) + acos(0.5) + atan(1))", 135.0),
        ("log(exp(2)) + log10(1000)", 5.0),
        ("min(a, b, 3) + max(1, a)", 1.59),
        ("abs(-a)", 1.24),
        ("round(2.345, 1) + round(2.6)", 5.3),
        ("floor(-1.5) + ceil(1.2)", 0.0),
    ],
)
def test_value(text: str, value: float) -> None:
    """Values by hand; sqrt(2) and pi to the digits of any table."""
    assert_allclose(formula(text, MM).evaluate(VALUES), value, rtol=1e-14, atol=1e-15)


def test_a_unit_is_turned_into_that_of_the_file() -> None:
    assert_allclose(formula("5 mil", 1.0).evaluate({}), 127e-6, rtol=1e-15)
    assert_allclose(formula("5 mil", 25.4e-6).evaluate({}), 5.0, rtol=1e-15)


@pytest.mark.parametrize(
    ("text", "terms"),
    [
        ("a", "a"),
        ("-a/2 + 3*b", "ab"),
        ("a*b", ""),
        ("a/b", ""),
        ("1/a", ""),
        ("a**2", ""),
        ("a*sqrt(2)", "a"),
        ("sqrt(a)", ""),
        ("max(a, 0.1)", "a"),
        ("hypot(a, b)", "ab"),
        ("a*(1 mm)", ""),
        ("(a - b)*pi/4", "ab"),
        ("a*b - b", "b"),
    ],
)
def test_plain_summands_are_found(text: str, terms: str) -> None:
    found = formula(text, MM)
    assert set(found.terms) - set(found.measures) == set(terms)


@pytest.mark.parametrize(
    ("text", "is_length"), [("5 mil", True), ("a + 1 mm", True), ("a*(1 mm)", False), ("1 mm/a", False), ("2*a", False)]
)
def test_lengths_are_told_by_their_unit(text: str, is_length: bool) -> None:
    """A product of a length and a parameter is not told: the parameter may be a length itself."""
    assert formula(text, MM).is_length is is_length


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("a +", "cannot be understood"),
        ("(a", "a bracket is missing"),
        ("max(a", "in quotes"),
        ("", "cannot be understood"),
        ("a b", "cannot be understood"),
        ("a ^ 2", "use ** for powers"),
        ("a = 2", "cannot be understood"),
        ("a; b", "cannot be understood"),
        ("a % 2", "only names, numbers"),
        ("a // 2", "only names, numbers"),
        ("a < b", "only names, numbers"),
        ("a if b else 1", "only names, numbers"),
        ("not a", "only names, numbers"),
        ("[a]", "only names, numbers"),
        ("a[0]", "only names, numbers"),
        ("(a, b)", "only names, numbers"),
        ("{a: b}", "only names, numbers"),
        ("[x for x in a]", "only names, numbers"),
        ("lambda: a", "only names, numbers"),
        ("(x := 1)", "only names, numbers"),
        ("f'{a}'", "only names, numbers"),
        ("'a' * 9", "not a number"),
        ("True", "not a number"),
        ("None", "not a number"),
        ("2j", "not a number"),
        ("...", "not a number"),
        ("a.real", "only names, numbers"),
        ("a.__class__", "a name starts with a letter"),
        ("__import__('os')", "a name starts with a letter"),
        ("_0", "a name starts with a letter"),
        ("a().b()", "only a function can stand before ("),
        ("open('x')", "there is no function 'open'"),
        ("sqr(a)", "did you mean 'sqrt'?"),
        ("sqrt()", "takes 1 number, not 0"),
        ("sqrt(a, b)", "takes 1 number, not 2"),
        ("atan2(a)", "takes 2 numbers, not 1"),
        ("max(a)", "takes 2 to 30 numbers"),
        ("max(*a)", "takes 2 to 30"),
        ("round(a, ndigits=2)", "takes 1 to 2"),
        ("sqrt + 1", "needs brackets, sqrt(...)"),
        ("1e999", "too large"),
        ("a \u2212 b", "'\u2212' cannot stand"),
        ("a + 'π'", "cannot stand"),
        ("a" * 301, "more than 300"),
        ("(" * 150 + "a" + ")" * 149, "bracket is missing"),
        ("1 +\0 2", "cannot be understood"),
    ],
)
def test_refused(text: str, words: str) -> None:
    with pytest.raises(ValueError, match=r".+") as caught:
        formula(text, MM)
    assert words in str(caught.value)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("1/(a - a)", "divides by zero where a = 1.24"),
        ("sqrt(b - a)", "has no real value where b = 0.35, a = 1.24"),
        ("(b - a)**0.5", "has no real value"),
        ("log(0)", "has no real value"),
        ("0**-1", "has no real value"),
        ("acos(2)", "has no real value"),
        ("9**9**9**9", "is too large"),
        ("exp(1e9)", "is too large"),
        ("1e300*1e300", "is too large"),
        ("1e300*1e300 - 1e300*1e300", "is too large"),
        ("floor(1e300*1e300)", "is too large"),
        ("round(a, 1e300*1e300 - 1e300*1e300)", "no real value"),
    ],
)
def test_without_a_value(text: str, words: str) -> None:
    with pytest.raises(ValueError, match=r".+") as caught:
        formula(text, MM).evaluate(VALUES)
    assert words in str(caught.value)


@pytest.mark.parametrize("text", ["-" * 299 + "1", "abs(" * 59 + "1" + ")" * 59, "1" + "**1" * 99, "9" * 300])
def test_depth_and_size_end_in_a_number_or_a_reason(text: str) -> None:
    try:
        assert math.isfinite(formula(text, MM).evaluate({}))
    except ValueError as error:
        assert str(error)  # noqa: PT017 - either of the two is right


numbers = st.floats(0.01, 100.0)


@given(numbers, numbers, numbers)
def test_agrees_with_the_arithmetic_of_the_language(x: float, y: float, z: float) -> None:
    values = {"x": x, "y": y, "z": z}
    assert formula("(x - y)*z/(x + z) + x**2 - hypot(y, z)", MM).evaluate(values) == pytest.approx(
        (x - y) * z / (x + z) + math.pow(x, 2) - math.hypot(y, z), rel=1e-15, abs=1e-300
    )


WORDS = [*FUNCTIONS, *"ab+-*/(),.", "**", "1", "2.5", " mil", "pi", "_", "'", "[", "]", "lambda", "import", " if ", "="]


@given(st.lists(st.sampled_from(WORDS), max_size=12).map("".join) | st.text(string.printable, max_size=20))
def test_any_text_is_a_finite_number_or_a_reason(text: str) -> None:
    try:
        found = formula(text, MM)
        if set(found.names) <= VALUES.keys():
            assert math.isfinite(found.evaluate(VALUES))
    except ValueError as error:
        assert str(error)  # noqa: PT017 - either of the two is right
