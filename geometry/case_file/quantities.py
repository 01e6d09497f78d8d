"""Numbers with units, as pydantic types. Lengths take the file's own unit from the validation context."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Mapping
from typing import Annotated, Any

from pydantic import BeforeValidator, ValidationInfo

LENGTHS: dict[str, float] = {
    "m": 1.0,
    "cm": 1e-2,
    "mm": 1e-3,
    "um": 1e-6,
    "µm": 1e-6,
    "μm": 1e-6,
    "nm": 1e-9,
    "mil": 25.4e-6,
    "in": 25.4e-3,
    "inch": 25.4e-3,
    "ft": 0.3048,
}
"""Units of length, m. Source: ISO 80000-3; the inch is 25.4 mm exactly."""
MEMORY = {"B": 1.0, "kB": 1e3, "MB": 1e6, "GB": 1e9, "KiB": 2.0**10, "MiB": 2.0**20, "GiB": 2.0**30}
TIMES = {"s": 1.0, "min": 60.0, "h": 3600.0}
PER_CENT = {"%": 0.01}
QUANTITY = re.compile(r"\s*([-+]?(?:\.[0-9]+|[0-9]+(?:\.[0-9]*)?)(?:[eE][-+]?[0-9]+)?)\s*(\S*)\s*")
LONGEST = 1e9
"""m; no cross-section is larger, and squares of it are still far from overflow."""
MOST_POINTS = 1000


def number(value: object, units: Mapping[str, float], bare: float, example: str) -> float:
    """A number, or text of number and unit, in SI. Raises ValueError with what is allowed."""
    if isinstance(value, bool) or not isinstance(value, int | float | str):
        raise ValueError(f"must be a number, e.g. {example}")
    if not isinstance(value, str):
        return _finite(value) * bare
    match = QUANTITY.fullmatch(value)
    if not match:
        raise ValueError(f"{value!r} is not a number, e.g. {example}")
    digits, unit = match.groups()
    if unit and unit not in units:
        raise ValueError(f"unknown unit {unit!r}; allowed: {', '.join(units)}")
    return _finite(float(digits)) * (units[unit] if unit else bare)


def _finite(value: float) -> float:
    try:
        finite = math.isfinite(value)
    except OverflowError:
        finite = False
    if not finite:
        raise ValueError("is too large")
    return float(value)


def _length(value: object, info: ValidationInfo) -> float:
    context: dict[str, Any] = info.context or {}
    length = number(value, LENGTHS, context.get("unit", 1e-3), '1.5 or "1.5 mm"')
    if abs(length) > LONGEST:
        raise ValueError(f"must be at most {LONGEST:g} m")
    return length


def _positive(value: object, info: ValidationInfo) -> float:
    length = _length(value, info)
    if length <= 0:
        raise ValueError("must be greater than 0")
    if length < 1e-12:
        raise ValueError("must be at least 1e-12 m")
    return length


def _not_negative(value: object, info: ValidationInfo) -> float:
    length = _length(value, info)
    if length < 0:
        raise ValueError("must not be negative")
    return length


def _point(value: object, info: ValidationInfo) -> tuple[float, float]:
    if not isinstance(value, list) or len(value) != 2:
        raise ValueError("must be a pair of lengths, e.g. [0, 1.5]")
    return (_length(value[0], info), _length(value[1], info))


def points_of(value: object, info: ValidationInfo, least: int, example: str) -> tuple[tuple[float, float], ...]:
    """A list of at least so many points, m. Raises ValueError."""
    if not isinstance(value, list) or len(value) < least:
        raise ValueError(f"must be a list of at least {least} points, e.g. {example}")
    if len(value) > MOST_POINTS:
        raise ValueError(f"must be at most {MOST_POINTS} points")
    return tuple(_point(item, info) for item in value)


def _corners(value: object, info: ValidationInfo) -> tuple[tuple[float, float], ...]:
    return points_of(value, info, least=3, example="[[0, 0], [2, 0], [0, 1]]")


def _within(units: Mapping[str, float], low: float, high: float, example: str) -> Callable[[object], float]:
    def check(value: object) -> float:
        result = number(value, units, 1.0, example)
        if not low <= result <= high:
            raise ValueError(f"must lie between {low:g} and {high:g}")
        return result

    return check


def _awg(value: object) -> float:
    """Diameter of a wire gauge, m: d = 0.005 in 92^((36 - n) / 39). Source: ASTM B258."""
    if isinstance(value, str) and re.fullmatch(r"[1-4]/0", value):
        gauge = 1 - int(value[0])
    elif isinstance(value, int) and not isinstance(value, bool) and 0 <= value <= 50:
        gauge = value
    else:
        raise ValueError('must be a whole number from 0 to 50, or "1/0" to "4/0"')
    return float(0.005 * 25.4e-3 * 92.0 ** ((36 - gauge) / 39))


Length = Annotated[float, BeforeValidator(_length)]
PositiveLength = Annotated[float, BeforeValidator(_positive)]
LengthFromZero = Annotated[float, BeforeValidator(_not_negative)]
PointOf = Annotated[tuple[float, float], BeforeValidator(_point)]
Points = Annotated[tuple[tuple[float, float], ...], BeforeValidator(_corners)]
Gauge = Annotated[float, BeforeValidator(_awg)]
PlainNumber = Annotated[float, BeforeValidator(_within({}, -1e12, 1e12, "30"))]
Degrees = Annotated[float, BeforeValidator(_within({}, -360.0, 360.0, "30"))]
Permittivity = Annotated[float, BeforeValidator(_within({}, 1.0, 1e5, "2.26"))]
LossTangent = Annotated[float, BeforeValidator(_within({}, 0.0, 10.0, "2e-4"))]
Accuracy = Annotated[float, BeforeValidator(_within(PER_CENT, 1e-9, 0.5, '1e-4 or "0.01 %"'))]
Tolerance = Annotated[float, BeforeValidator(_within(PER_CENT, 0.0, 1.0, '1e-4 or "0.01 %"'))]
Memory = Annotated[float, BeforeValidator(_within(MEMORY, 1e7, 1e14, '"2 GB"'))]
Duration = Annotated[float, BeforeValidator(_within(TIMES, 0.0, 1e7, '"10 min"'))]
