"""Numbers printed to the digits that their half-width justifies."""

from __future__ import annotations

import math

EXPLANATION = "28.90173(29) reads: the exact value lies within 28.90173 +- 0.00029, guaranteed."
MOST_DIGITS = 13
"""Beyond these a double carries only rounding."""


def bracketed(value: float, half_width: float) -> str:
    """Value and half-width in one, the half-width in units of the value's last digit: 28.90173(29).

    Both are rounded outward: what is printed always contains the interval value +- half_width.
    """
    decimals = _decimals(value, half_width)
    unit = 10.0**-decimals
    shown = round(value, decimals)
    spread = math.ceil((half_width + abs(value - shown)) / unit * (1 - 1e-9))  # 50.0000000001 is 50
    return f"{shown + 0.0:.{decimals}f}({spread})"  # + 0.0 turns -0.0 into 0.0


def _decimals(value: float, half_width: float) -> int:
    """Decimals that show the half-width to two digits, within what a double can carry."""
    size = max(abs(value), half_width)
    finest = MOST_DIGITS - 1 - _exponent(size) if size > 0 else MOST_DIGITS
    if half_width <= 0:
        return max(finest, 0)
    return max(min(1 - _exponent(half_width), finest), 0)


def _exponent(number: float) -> int:
    return math.floor(math.log10(number))


def grouped(number: int) -> str:
    """A whole number in groups of three digits."""
    return f"{number:,}".replace(",", " ")
