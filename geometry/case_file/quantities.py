"""Numbers with units, as pydantic types. Lengths take the file's own unit from the validation context."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Mapping
from typing import Annotated, Any

from pydantic import BeforeValidator, ValidationInfo, WithJsonSchema
from pydantic_core import PydanticCustomError

from nightcap.geometry.case_file import units
from nightcap.geometry.case_file.values import Values, shown

LENGTHS = units.LENGTHS
"""Units of length, m."""
MEMORY = {"B": 1.0, "kB": 1e3, "MB": 1e6, "GB": 1e9, "KiB": 2.0**10, "MiB": 2.0**20, "GiB": 2.0**30}
TIMES = {"s": 1.0, "min": 60.0, "h": 3600.0}
PER_CENT = {"%": 0.01}
QUANTITY = re.compile(r"\s*([-+]?(?:\.[0-9]+|[0-9]+(?:\.[0-9]*)?)(?:[eE][-+]?[0-9]+)?)\s*(%|[^\W\d_]*)\s*")
LONGEST = 1e9
"""m; no cross-section is larger, and squares of it are still far from overflow."""
MOST_POINTS = 1000


def number(
    value: object,
    units: Mapping[str, float],
    bare: float,
    example: str,
    values: Values | None = None,
    *,
    is_length: bool = False,
) -> float:
    """A number, or text of number and unit, or an expression, in SI. Raises ValueError with what is allowed.

    units : the units that may follow the number; bare : the unit of a number without one, and of an expression;
    values : the parameters that an expression may use; is_length : whether the parameters that are added up in an
    expression are lengths.
    """
    if isinstance(value, bool) or not isinstance(value, int | float | str):
        raise ValueError(f"must be a number, e.g. {example}")
    if not isinstance(value, str):
        return _finite(value) * bare
    match = QUANTITY.fullmatch(value)
    known = values or Values()
    if not match:
        return known.evaluate(value, example, is_length=is_length) * bare
    digits, unit = match.groups()
    if unit and unit not in units:
        product = f"; write {digits}*{unit} for a product" if unit in known.known else ""
        allowed = f"; allowed: {', '.join(units)}" if units else "; this number has none"
        raise ValueError(f"unknown unit {shown(unit)}{allowed}{product}")
    return _finite(float(digits)) * (units[unit] if unit else bare)


def whole(value: object, low: int, high: int, info: ValidationInfo, also: str = "") -> int:
    """A whole number, possibly by an expression. Raises ValueError with what is allowed. also : what else may stand."""
    allowed = f"must be a whole number from {low} to {high}{also}"
    result = value
    if isinstance(value, str):
        try:
            result = number(value, {}, 1.0, str(max(low, 1)), values_of(info))
        except PydanticCustomError:
            raise
        except ValueError as error:
            raise ValueError(f"{allowed}; {error}") from None
    if isinstance(result, float) and result.is_integer():
        result = int(result)
    if isinstance(result, bool) or not isinstance(result, int) or not low <= result <= high:
        raise ValueError(allowed)
    return result


def values_of(info: ValidationInfo) -> Values:
    """The parameters of the file that is being read."""
    found = (info.context or {}).get("values")
    return found if isinstance(found, Values) else Values()


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
    length = number(value, LENGTHS, context.get("unit", 1e-3), '1.5 or "1.5 mm"', values_of(info), is_length=True)
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


def _within(
    units: Mapping[str, float], low: float, high: float, example: str
) -> Callable[[object, ValidationInfo], float]:
    def check(value: object, info: ValidationInfo) -> float:
        result = number(value, units, 1.0, example, values_of(info))
        if not low <= result <= high:
            raise ValueError(f"must lie between {low:g} and {high:g}")
        return result

    return check


def _awg(value: object, info: ValidationInfo) -> float:
    """Diameter of a wire gauge, m: d = 0.005 in 92^((36 - n) / 39). Source: ASTM B258."""
    if isinstance(value, str) and re.fullmatch(r"[1-4]/0", value):
        gauge = 1 - int(value[0])
    else:
        gauge = whole(value, 0, 50, info, ', or "1/0" to "4/0"')
    return float(0.005 * 25.4e-3 * 92.0 ** ((36 - gauge) / 39))


def _takes(word: str, *types: str) -> WithJsonSchema:
    """What an editor is told of a kind of value."""
    return WithJsonSchema({"title": word, "type": list(types)})


LENGTH, NUMBER = _takes("length", "number", "string"), _takes("number", "number", "string")
POINT = {"title": "point [x, y]", "type": "array", "minItems": 2, "maxItems": 2}
Length = Annotated[float, BeforeValidator(_length), LENGTH]
PositiveLength = Annotated[float, BeforeValidator(_positive), LENGTH]
LengthFromZero = Annotated[float, BeforeValidator(_not_negative), LENGTH]
PointOf = Annotated[tuple[float, float], BeforeValidator(_point), WithJsonSchema(POINT)]
LIST_OF_POINTS = WithJsonSchema({"title": "list of points", "type": "array", "items": POINT})
Points = Annotated[tuple[tuple[float, float], ...], BeforeValidator(_corners), LIST_OF_POINTS]
Gauge = Annotated[float, BeforeValidator(_awg), _takes("wire gauge", "integer", "string")]
PlainNumber = Annotated[float, BeforeValidator(_within({}, -1e12, 1e12, "30")), NUMBER]
Degrees = Annotated[float, BeforeValidator(_within({}, -360.0, 360.0, "30")), _takes("degrees", "number", "string")]
Permittivity = Annotated[float, BeforeValidator(_within({}, 1.0, 1e5, "2.26")), NUMBER]
LossTangent = Annotated[float, BeforeValidator(_within({}, 0.0, 10.0, "2e-4")), NUMBER]
FRACTION = _takes("fraction or per cent", "number", "string")
Accuracy = Annotated[float, BeforeValidator(_within(PER_CENT, 1e-9, 0.5, '1e-4 or "0.01 %"')), FRACTION]
Tolerance = Annotated[float, BeforeValidator(_within(PER_CENT, 0.0, 1.0, '1e-4 or "0.01 %"')), FRACTION]
Fraction = Annotated[float, BeforeValidator(_within(PER_CENT, 0.0, 0.99, '0.5 or "50 %"')), FRACTION]
Memory = Annotated[
    float,
    BeforeValidator(_within(MEMORY, 1e7, 1e14, '"2 GB"')),
    _takes("bytes, or with B, kB, MB, GB", "number", "string"),
]
Duration = Annotated[
    float,
    BeforeValidator(_within(TIMES, 0.0, 1e7, '"10 min"')),
    _takes("seconds, or with s, min, h", "number", "string"),
]
Conductivity = Annotated[float, BeforeValidator(_within({}, 1.0, 1e9, "58e6")), NUMBER]
Strength = Annotated[float, BeforeValidator(_within({}, 1e-3, 1e5, "20")), NUMBER]
