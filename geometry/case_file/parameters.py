"""``parameters:``, names that stand for numbers, some of them derived from others."""

from __future__ import annotations

import keyword
import math
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from graphlib import CycleError, TopologicalSorter

from nightcap.geometry.case import Parameter
from nightcap.geometry.case_file.expressions import CONSTANTS, FUNCTIONS, Formula, formula
from nightcap.geometry.case_file.problems import Problems, one_of, under
from nightcap.geometry.case_file.quantities import PER_CENT, QUANTITY
from nightcap.geometry.case_file.schema import CaseEntry
from nightcap.geometry.case_file.units import LENGTHS
from nightcap.geometry.case_file.values import Usage, Values, shown
from nightcap.geometry.case_file.yaml_tree import Tree

MOST_PARAMETERS = 500
EXAMPLE = '1.5, "1.5 mm" or "pitch/2"'
NAME = re.compile(r"[A-Za-z][A-Za-z0-9_]{0,63}")
COLUMNS = ("variant", "status", "message", "requested", "reached")
"""Columns of the table of variants, which parameters stand in as well."""


@dataclass(frozen=True)
class Parameters:
    """The parameters of a file, in an order in which each follows those that it is derived from."""

    formulas: Mapping[str, Formula] = field(default_factory=dict)
    """In the order of the file; without those that could not be understood."""
    order: tuple[str, ...] = ()
    others: tuple[str, ...] = ()
    """Names without a formula: those that only 'vary' gives values to, and those whose mistakes have been noted."""
    unit: float = 1e-3
    """m."""
    usage: Usage = field(default_factory=Usage)
    is_unreadable: bool = False
    """True if there are parameters, but no mapping of them."""

    def values(self, given: Mapping[str, float], problems: Problems) -> Values:
        """All values, those of ``given`` instead of what the file derives; what has no value is noted and NaN."""
        known = dict.fromkeys([*self.formulas, *self.others], math.nan) | dict(given)
        values = Values(known, self.unit, self.usage, self.is_unreadable)
        for name in self.order:
            if name not in given and not any(math.isnan(known[one]) for one in self.formulas[name].names):
                try:
                    known[name] = values.value_of(self.formulas[name])
                except ValueError as error:
                    problems.add(under("parameters", name), str(error))
        return values

    def dependent(self, names: Iterable[str]) -> set[str]:
        """These names and all that are derived from them."""
        found = set(names)
        for name in self.order:
            if found.intersection(self.formulas[name].names):
                found.add(name)
        return found

    def used(self) -> set[str]:
        """Names that an entry uses, directly or through others."""
        found = set(self.usage.used)
        for name in reversed(self.order):
            if name in found:
                found.update(self.formulas[name].names)
        return found

    def lengths(self) -> set[str]:
        """Names that are lengths: by a unit, by their use, or by what they are derived from or used for."""
        found = set(self.usage.lengths) | {name for name, f in self.formulas.items() if f.is_length}
        before = -1
        while before != len(found):
            before = len(found)
            for name, one in self.formulas.items():
                if name in found:
                    found.update(one.terms - one.measures.keys())
                elif one.terms & found:
                    found.add(name)
        return found

    def records(self, values: Values) -> tuple[Parameter, ...]:
        """What a case says about its parameters."""
        lengths, used = self.lengths(), self.used()
        return tuple(
            Parameter(
                name,
                value * (self.unit if name in lengths else 1.0),
                name in lengths,
                self.formulas[name].text if name in self.formulas and self.formulas[name].names else "",
                name in used,
            )
            for name, value in values.known.items()
        )


def read_parameters(tree: Tree, unit: float, problems: Problems, varied: Iterable[str] = ()) -> Parameters:
    """The parameters of a file; every mistake is noted. varied : names that 'vary' gives values to."""
    names = tuple(varied)
    if tree is None:
        return Parameters(others=names, unit=unit)
    if not isinstance(tree, dict) or len(tree) > MOST_PARAMETERS:
        problems.add("parameters", f"must be a mapping of at most {MOST_PARAMETERS} names to numbers, {{pitch: 1.24}}")
        return Parameters(others=names, unit=unit, is_unreadable=True)
    formulas: dict[str, Formula] = {}
    for name, value in tree.items():
        path = under("parameters", name)
        check_parameter_name(name, path, problems)
        try:
            formulas[name] = written(value, unit)
        except ValueError as error:
            problems.add(path, str(error))
    _drop_strangers(formulas, list(dict.fromkeys([*tree, *names])), problems)
    order = _ordered(formulas, problems)
    others = tuple(name for name in dict.fromkeys([*tree, *names]) if name not in formulas)
    return Parameters(formulas, order, others, unit)


def check_parameter_name(name: str, path: str, problems: Problems) -> None:
    """A name must be an identifier that means nothing else."""
    if not NAME.fullmatch(name):
        problems.add(path, "the name of a parameter starts with a letter and holds letters a-z, digits, _ (64 at most)")
    for kind, words in (
        ("a function", FUNCTIONS),
        ("a constant", CONSTANTS),
        ("a unit", LENGTHS),
        ("a key of the file", CaseEntry.model_fields),
        ("a column of the table of variants", COLUMNS),
        ("a reserved word", keyword.kwlist),
    ):
        if name in words:
            problems.add(path, f"{name!r} is {kind}; choose another name for the parameter")


def written(value: Tree, unit: float) -> Formula:
    """A number, text of number and unit, or an expression, in the file's unit. Raises ValueError with the reason."""
    if isinstance(value, bool) or not isinstance(value, int | float | str):
        raise ValueError(f"must be a number, e.g. {EXAMPLE}")
    text = str(value)
    match = QUANTITY.fullmatch(text)
    if match and match[2] and match[2] not in LENGTHS:
        if match[2] not in PER_CENT:
            raise ValueError(f"unknown unit {shown(match[2])}; allowed: {', '.join([*LENGTHS, *PER_CENT])}")
        text = f"{match[1]}*{PER_CENT[match[2]]}"
    try:
        return formula(text, unit)
    except ValueError as error:
        raise ValueError(f"{shown(text)} is not a number, e.g. {EXAMPLE}: {error}") from None


def _drop_strangers(formulas: dict[str, Formula], known: list[str], problems: Problems) -> None:
    """Notes and drops the parameters that are derived from names which there are not."""
    for name, one in list(formulas.items()):
        unknown = [stranger for stranger in one.names if stranger not in known]
        for stranger in unknown:
            problems.add(under("parameters", name), one_of(stranger, [k for k in known if k != name]))
        if unknown:
            del formulas[name]


def _ordered(formulas: dict[str, Formula], problems: Problems) -> tuple[str, ...]:
    """Names after all that they are derived from; circles are noted and dropped."""
    while True:
        graph = {name: [n for n in one.names if n in formulas] for name, one in formulas.items()}
        try:
            return tuple(TopologicalSorter(graph).static_order())
        except CycleError as error:
            circle = list(reversed(error.args[1]))[:-1]
            first = circle.index(min(circle, key=list(formulas).index))
            path = [*circle[first:], *circle[: first + 1]]
            problems.add(under("parameters", path[0]), f"goes round in a circle: {' -> '.join(path)}")
            for name in circle:
                formulas.pop(name, None)
