"""Lengths as people read them."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class LengthUnit:
    """A unit of length for figures and tables."""

    symbol: str
    metres: float

    def text(self, length: float, digits: int = 6) -> str:
        """A length (m) in this unit, without the symbol."""
        return f"{length / self.metres:.{digits}g}"


UNITS = (LengthUnit("nm", 1e-9), LengthUnit("um", 1e-6), LengthUnit("mm", 1e-3), LengthUnit("m", 1.0))


def fitting_unit(size: float) -> LengthUnit:
    """The unit in which a layout of that size (m) reads best: millimetres from 0.1 mm up to 1 m."""
    for unit, beyond in zip(UNITS, (1e-7, 1e-4, 1.0), strict=False):
        if size < beyond:
            return unit
    return UNITS[-1]


def length_text(length: float) -> str:
    """A length (m) with the unit that suits it."""
    unit = fitting_unit(abs(length) if length else 1e-3)
    return f"{unit.text(length)} {unit.symbol}"


def rounded_length(length: float) -> str:
    """The same with four digits, for drawings."""
    unit = fitting_unit(abs(length) if length else 1e-3)
    return f"{unit.text(length, 4)} {unit.symbol}"
