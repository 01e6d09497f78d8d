"""``vary:``, parameters that take several values, and the variants of a case that follow."""

from __future__ import annotations

import hashlib
import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from itertools import product

from nightcap.geometry.case_file.axes import EXAMPLES, Axis, AxisReader, Row, names_of
from nightcap.geometry.case_file.parameters import Parameters
from nightcap.geometry.case_file.problems import Problems, under
from nightcap.geometry.case_file.yaml_tree import Tree

LONGEST_NAME = 100
"""Characters of the name of a variant; it names a folder."""


@dataclass(frozen=True)
class Variant:
    """One combination of values."""

    name: str = ""
    values: Mapping[str, float] = field(default_factory=dict)
    """In the file's unit, where they are lengths."""


def varied_names(tree: Tree) -> tuple[str, ...]:
    """The parameters that a file varies."""
    return tuple(dict.fromkeys(name for key in tree for name in names_of(key))) if isinstance(tree, dict) else ()


def read_variants_of(tree: Tree, parameters: Parameters, limit: int, problems: Problems) -> tuple[Variant, ...]:
    """Every combination in the order of the file, the last key fastest; only one, without a name, if nothing is varied.

    limit : greatest number of combinations. Notes every mistake, and returns nothing if there is any.
    """
    if tree is None:
        return (Variant(),)
    if not isinstance(tree, dict) or not tree:
        problems.add("vary", f"must be a mapping from parameters to {EXAMPLES}")
        return ()
    before = len(problems.found)
    reader = AxisReader(parameters, varied_names(tree), problems)
    axes = [axis for key, value in tree.items() if (axis := reader.axis(key, value))]
    reader.check_names(tree)
    if len(problems.found) > before or len(axes) != len(tree):
        return ()
    count = math.prod(axis.count for axis in axes)
    if count > limit:
        problems.add("vary", f"makes {count} variants; 'variants' in 'limits' allows {limit}")
        return ()
    return _combined(axes, problems)


def _combined(axes: list[Axis], problems: Problems) -> tuple[Variant, ...]:
    names = [name for axis in axes for name in axis.names]
    all_rows = [axis.rows() for axis in axes]
    for axis, rows in zip(axes, all_rows, strict=True):
        _check_repeats(axis, rows, problems)
    variants = []
    for combination in product(*all_rows):
        cells = [cell for row in combination for cell in row]
        text = ",".join(f"{name}={label}" for name, (_, label) in zip(names, cells, strict=True))
        values = {name: value for name, (value, _) in zip(names, cells, strict=True)}
        variants.append(Variant(folder_name(text), values))
    return tuple(variants)


def _check_repeats(axis: Axis, rows: list[Row], problems: Problems) -> None:
    """To the digits that the names of variants have: two must never share a folder."""
    seen: set[tuple[str, ...]] = set()
    for row in rows:
        marks = {tuple(label for _, label in row), tuple(f"{value:.12g}" for value, _ in row)}
        if marks & seen:
            said = ", ".join(label for _, label in row)
            problems.add(under("vary", ", ".join(axis.names)), f"the value {said} is given twice")
        seen |= marks


def folder_name(text: str) -> str:
    """The text, cut and told apart by a hash if it is too long for the name of a folder."""
    if len(text) <= LONGEST_NAME:
        return text
    mark = hashlib.sha256(text.encode()).hexdigest()[:12]
    return f"{text[: LONGEST_NAME - len(mark) - 1]}-{mark}"
