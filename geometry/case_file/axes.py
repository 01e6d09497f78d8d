"""The entries of ``vary:``, each a parameter, or several that move together, with a row of values."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Annotated, Any, Literal

from pydantic import BeforeValidator, Field, ValidationInfo

from nightcap.geometry.case_file.expressions import Formula
from nightcap.geometry.case_file.parameters import Parameters, check_parameter_name, written
from nightcap.geometry.case_file.problems import Problems, nearest, one_of, under
from nightcap.geometry.case_file.quantities import PER_CENT, QUANTITY, whole
from nightcap.geometry.case_file.schema import COUNT, Entry, checked
from nightcap.geometry.case_file.values import Values
from nightcap.geometry.case_file.yaml_tree import Tree

MOST_STEPS = 10**6
EXAMPLES = "a list [1.2, 1.3], a range {from: 1.2, to: 1.3, steps: 5} or {tolerance: 5 %}"
SCALES = ("linear", "logarithmic")
Row = tuple[tuple[float, str], ...]
"""One value, and its text in names, for each parameter of an axis."""


@dataclass(frozen=True)
class Axis:
    """Parameters that move together."""

    names: tuple[str, ...]
    count: int
    rows: Callable[[], list[Row]]
    """Made only once the number of combinations is known to be small enough."""


def names_of(key: str) -> tuple[str, ...]:
    return tuple(part.strip() for part in key.split(","))


def _measure(value: object) -> Any:
    if isinstance(value, bool) or not isinstance(value, int | float | str):
        raise ValueError("must be a number, e.g. 1.2")
    return value


def _steps(value: object, info: ValidationInfo) -> int:
    return whole(value, 2, MOST_STEPS, info)


def _scale(value: object) -> str:
    if not isinstance(value, str) or value not in SCALES:
        raise ValueError(one_of(value, SCALES))
    return value


class RangeKeys(Entry):
    """Evenly spaced values."""

    start: Annotated[Any, BeforeValidator(_measure)] = Field(alias="from", description="First value.")
    to: Annotated[Any, BeforeValidator(_measure)] = Field(description="Last value.")
    steps: Annotated[int, BeforeValidator(_steps), COUNT] = Field(
        description="Number of values, the two ends included."
    )
    scale: Annotated[Literal["linear", "logarithmic"], BeforeValidator(_scale)] = Field(
        "linear", description="linear: equal steps; logarithmic: equal ratios."
    )


class ToleranceKeys(Entry):
    """The parameter's own value and the two ends of its tolerance."""

    tolerance: Annotated[Any, BeforeValidator(_measure)] = Field(
        description="Deviation in the unit of the parameter, or in per cent of its value."
    )


class AxisReader:
    """Reads the values of each axis; they may build on parameters that are not varied."""

    def __init__(self, parameters: Parameters, varied: tuple[str, ...], problems: Problems) -> None:
        self.parameters, self.varied, self.problems = parameters, varied, problems
        self.moving = parameters.dependent(varied)
        silent = Problems(problems.source)  # values that cannot be had are noted variant by variant
        self.fixed: Values = parameters.values({}, silent)

    def check_names(self, tree: dict[str, Tree]) -> None:
        """Notes names that are wrong or come twice."""
        seen: set[str] = set()
        for key in tree:
            for name in names_of(key):
                if name not in self.parameters.formulas:
                    check_parameter_name(name, under("vary", key), self.problems)
                if name in seen:
                    self.problems.add(under("vary", key), f"{name!r} is varied twice")
                seen.add(name)

    def axis(self, key: str, value: Tree) -> Axis | None:
        """One entry of 'vary', or None after noting what is wrong with it."""
        path, names = under("vary", key), names_of(key)
        if isinstance(value, list) and value:
            return self._list(names, value, path)
        if isinstance(value, dict) and len(names) > 1:
            self.problems.add(path, "parameters that move together need a list of lists, e.g. [[1.2, 0.3], [1.3, 0.4]]")
            return None
        if isinstance(value, dict) and "tolerance" in value:
            return self._tolerance(names[0], value, path)
        if isinstance(value, dict) and value:
            return self._range(names[0], value, path)
        self.problems.add(path, f"must be {EXAMPLES}")
        return None

    def _list(self, names: tuple[str, ...], items: list[Tree], path: str) -> Axis | None:
        rows: list[Row | None] = [self._row(names, item, under(path, k)) for k, item in enumerate(items)]
        good = [row for row in rows if row is not None]
        return Axis(names, len(good), lambda: good) if len(good) == len(rows) else None

    def _row(self, names: tuple[str, ...], item: Tree, path: str) -> Row | None:
        if len(names) == 1:
            cell = self._cell(names[0], item, path)
            return (cell,) if cell else None
        if not isinstance(item, list) or len(item) != len(names):
            self.problems.add(path, f"must be a list of {len(names)} numbers, one each for {', '.join(names)}")
            return None
        cells = [self._cell(name, part, under(path, k)) for k, (name, part) in enumerate(zip(names, item, strict=True))]
        good = [cell for cell in cells if cell]
        return tuple(good) if len(good) == len(cells) else None

    def _cell(self, name: str, item: Tree, path: str) -> tuple[float, str] | None:
        value = self._value(name, item, path)
        return None if value is None else (value, _label(item, value))

    def _range(self, name: str, tree: dict[str, Tree], path: str) -> Axis | None:
        entry = checked(RangeKeys, tree, path, self.problems, {"values": self.fixed})
        if entry is None:
            return None
        low = self._value(name, entry.start, under(path, "from"))
        high = self._value(name, entry.to, under(path, "to"))
        if low is None or high is None:
            return None
        if low == high:
            self.problems.add(path, "'from' and 'to' must differ")
            return None
        is_logarithmic = entry.scale == "logarithmic"
        if is_logarithmic and low * high <= 0:
            self.problems.add(path, "a logarithmic range needs 'from' and 'to' on one side of 0")
            return None
        return Axis((name,), entry.steps, lambda: _spaced(low, high, entry.steps, is_logarithmic=is_logarithmic))

    def _tolerance(self, name: str, tree: dict[str, Tree], path: str) -> Axis | None:
        entry = checked(ToleranceKeys, tree, path, self.problems, {"values": self.fixed})
        if entry is None:
            return None
        nominal = self._nominal(name, path)
        text = entry.tolerance
        match = QUANTITY.fullmatch(text) if isinstance(text, str) else None
        deviation = self._value(name, text, under(path, "tolerance"))
        if nominal is None or deviation is None:
            return None
        if match and match[2] in PER_CENT:
            deviation *= abs(nominal)
        if deviation <= 0:
            self.problems.add(under(path, "tolerance"), "must be greater than 0, and so must be a value to take % of")
            return None
        values = [nominal, nominal - deviation, nominal + deviation]
        return Axis((name,), 3, lambda: [_plain_row(value) for value in values])

    def _nominal(self, name: str, path: str) -> float | None:
        """The parameter's own value."""
        own = self.parameters.formulas.get(name)
        if own is None:
            known = list(self.parameters.formulas)
            self.problems.add(path, f"needs a value of {name!r} in 'parameters' to vary around{nearest(name, known)}")
            return None
        return self._of(own, path)

    def _value(self, name: str, item: Tree, path: str) -> float | None:
        """A number or expression in the file's unit, or None after noting what is wrong with it."""
        try:
            found = written(item, self.parameters.unit)
        except ValueError as error:
            self.problems.add(path, str(error))
            return None
        if found.is_length:
            self.parameters.usage.lengths.add(name)
        return self._of(found, path)

    def _of(self, found: Formula, path: str) -> float | None:
        for name in found.names:
            if name in self.moving:
                self.problems.add(path, f"depends on {name!r}, which is varied itself")
                return None
        self.parameters.usage.used.update(found.names)
        try:
            self.fixed.check_names(found, "1.2")
            return self.fixed.value_of(found)
        except ValueError as error:
            self.problems.add(path, str(error))
            return None


def _spaced(low: float, high: float, steps: int, *, is_logarithmic: bool) -> list[Row]:
    """Values from low to high, in equal steps or equal ratios."""
    shares = [k / (steps - 1) for k in range(steps)]
    if is_logarithmic:
        inner: Iterable[float] = (low * (high / low) ** share for share in shares)
    else:
        inner = (low + (high - low) * share for share in shares)
    return [_plain_row(value) for value in inner]


def _plain_row(value: float) -> Row:
    """Twelve digits, so that the value and the name say the same."""
    text = f"{value:.12g}"
    return ((float(text), text),)


def _label(item: Tree, value: float) -> str:
    """A value as it was written, fit for the name of a folder."""
    match = QUANTITY.fullmatch(item) if isinstance(item, str) else None
    if not match or not match[2]:
        return f"{value:.12g}"
    unit = "pct" if match[2] in PER_CENT else match[2].replace("µ", "u").replace("μ", "u")
    return f"{float(match[1]):.12g}{unit}"
