"""What only the whole case can tell: names, reference, ties, floating conductors, expectations."""

from __future__ import annotations

import re

from nightcap.geometry.case import Case, Expectation, GroundPlane, OpenSpace
from nightcap.geometry.case_file.problems import Problems, one_of, under

NAME = re.compile(r"[^\W_][\w.+-]{0,63}")
"""A letter or digit, then up to 63 letters, digits, _ . + -"""


def check_name(name: str, path: str, problems: Problems) -> None:
    """A name must be usable in tables and files."""
    if not NAME.fullmatch(name):
        problems.add(path, "a name starts with a letter or digit and holds letters, digits, _ . + - (64 at most)")


def check_case(case: Case, problems: Problems) -> None:
    """Notes every inconsistency of a case."""
    names = [conductor.name for conductor in case.conductors]
    outer = case.outer_conductor
    if not isinstance(case.boundary, OpenSpace):
        check_name(case.boundary.name, "boundary.name", problems)
    if outer is not None:
        if outer in names:
            key = f"conductors.{outer}" if isinstance(case.boundary, OpenSpace) else "boundary.name"
            problems.add(
                key, f"'{outer}' is the name of {'the wall' if key != 'boundary.name' else 'a conductor'} already"
            )
        names.append(outer)
    elif len(names) < 2:
        problems.add("conductors", "in open space there must be at least two: the charge of one returns to another")
    _check_lines(case, problems)
    if case.reference not in names:
        problems.add("reference", one_of(case.reference, names))
        return
    _check_ties(case, names, problems)
    _check_floating(case, problems)
    if not problems.found:
        remaining = _remaining(case, names)
        if not remaining:
            problems.add("conductors", "none remains: all are floating, or tied to the reference")
        elif case.expect:
            _check_expectation(case.expect, remaining, problems)


def _check_lines(case: Case, problems: Problems) -> None:
    for k, line in enumerate(case.symmetry):
        if line.axis == 1 and isinstance(case.boundary, GroundPlane):
            problems.add(under("symmetry", k), "the ground plane ends the layout in y already; allowed here: x")


def _check_ties(case: Case, names: list[str], problems: Problems) -> None:
    group_of: dict[str, int] = {}
    for k, group in enumerate(case.ties):
        path = under("tie", k)
        if path not in problems.source.lines and case.reference in group:
            path = "reference"  # several pieces of it are a group of their own
        for name in group:
            if name not in names:
                problems.add(path, one_of(name, names))
            elif name in group_of:
                where = "this group" if group_of[name] == k else "another group"
                problems.add(path, f"'{name}' is in {where} already")
            group_of[name] = k


def _check_floating(case: Case, problems: Problems) -> None:
    tied = {name for group in case.ties for name in group}
    for conductor in case.conductors:
        if not conductor.floating:
            continue
        path = f"conductors.{conductor.name}.floating"
        if conductor.name == case.reference:
            problems.add(path, "the reference conductor cannot float")
        elif conductor.name in tied:
            problems.add(path, f"'{conductor.name}' is tied to others and cannot float; let it be one or the other")


def _remaining(case: Case, names: list[str]) -> list[str]:
    """Rows of the reduced matrix: without the reference, one per tied group, none for floating conductors."""
    head = {name: group[0] for group in case.ties for name in group}
    grounded = {name for group in case.ties if case.reference in group for name in group} | {case.reference}
    floating = {conductor.name for conductor in case.conductors if conductor.floating}
    return list(dict.fromkeys(head.get(n, n) for n in names if n not in grounded and n not in floating))


def _check_expectation(expect: Expectation, remaining: list[str], problems: Problems) -> None:
    key = "expect.relative" if "expect.relative" in problems.source.lines else "expect.capacitance"
    matrix = expect.capacitance
    if len(matrix) != len(remaining):
        said = f"must have {len(remaining)} rows, for {', '.join(remaining)}; it has {len(matrix)}"
        problems.add(key, said)
        return
    size = range(len(matrix))
    if any(abs(matrix[i][j] - matrix[j][i]) > 1e-9 * abs(matrix[i][i]) for i in size for j in size):
        problems.add(key, "must be symmetric")
    if any(matrix[i][i] <= 0 for i in size):
        problems.add(key, "must have a positive diagonal")
