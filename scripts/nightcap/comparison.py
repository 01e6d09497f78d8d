"""A result held against the matrix that its case expects."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from nightcap.geometry.case import Expectation
from nightcap.geometry.curves import Floats

if TYPE_CHECKING:
    from nightcap.result import Capacitance

ROUNDING = 1e-12
"""Relative to sqrt(C_ii C_jj): the last digits of an expected value and of the eigenvalues below."""


@dataclass(frozen=True)
class Comparison:
    """How far a matrix is from what was expected."""

    deviation: float
    """Largest |C_ij - expected_ij| / sqrt(C_ii C_jj); infinite if the sizes differ."""
    tolerance: float
    source: str
    inside_bracket: bool | None
    """For a value that is exact: whether it lies between the bounds. None for others."""

    @property
    def agrees(self) -> bool:
        return self.deviation <= self.tolerance and self.inside_bracket is not False

    def __str__(self) -> str:
        verdict = "agrees" if self.agrees else "DISAGREES"
        where = {True: ", inside the bracket", False: ", OUTSIDE the bracket", None: ""}[self.inside_bracket]
        return (
            f"{verdict} with the expected matrix: largest deviation {self.deviation:.1e}"
            f" (tolerance {self.tolerance:.1e}){where}"
        )


def compare(expect: Expectation, capacitance: Capacitance) -> Comparison:
    """Compares entry by entry; an exact value must also lie between the bounds in the Loewner order."""
    expected = np.array(expect.capacitance, dtype=float)
    if expected.shape != capacitance.value.shape:
        return Comparison(np.inf, expect.tolerance, expect.source, False if expect.exact else None)
    scale = np.sqrt(capacitance.value.diagonal())
    unit = np.outer(scale, scale)
    deviation = float((np.abs(capacitance.value - expected) / unit).max())
    inside = None
    if expect.exact:
        gaps = ((expected - capacitance.lower) / unit, (capacitance.upper - expected) / unit)
        inside = all(_is_positive_semidefinite(gap) for gap in gaps)
    return Comparison(deviation, expect.tolerance, expect.source, inside)


def _is_positive_semidefinite(gap: Floats) -> bool:
    return bool(np.linalg.eigvalsh((gap + gap.T) / 2).min() >= -ROUNDING)
