"""All variants of a file at once, and the mistakes of all told as few."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace

from nightcap.geometry.case import Case
from nightcap.geometry.case_file.document import Document
from nightcap.geometry.case_file.variants import Variant
from nightcap.geometry.errors import CaseError, Problem

NUMBER = re.compile(r"[-+]?[0-9.]+(?:e[-+]?[0-9]+)?")


@dataclass(frozen=True)
class Outcome:
    """One variant: its case, or what is wrong with it."""

    variant: Variant
    case: Case | None
    problems: tuple[Problem, ...] = ()


def survey(document: Document) -> tuple[Outcome, ...]:
    """Every variant; only the first if the mistakes do not depend on the variant."""
    variants = document.variants[:1] if document.problems else document.variants
    return tuple(_outcome(document, variant) for variant in variants)


def _outcome(document: Document, variant: Variant) -> Outcome:
    try:
        return Outcome(variant, document.case(variant))
    except CaseError as error:
        return Outcome(variant, None, error.problems)


def told_together(found: Sequence[tuple[str, Sequence[Problem]]]) -> list[Problem]:
    """The mistakes of variants, in the order of the file: one that all share once, another with its variant.

    found : name of each variant and its mistakes, also of variants without any.
    """
    groups: dict[tuple[int | None, str, str], list[tuple[str, Problem]]] = {}
    for name, problems in found:
        for problem in problems:
            kind = (problem.line, problem.key, NUMBER.sub("#", problem.text))
            groups.setdefault(kind, []).append((name, problem))
    told = [_told(group, len(found)) for group in groups.values()]
    return sorted(told, key=lambda problem: problem.line or 0)


def _told(group: list[tuple[str, Problem]], count: int) -> Problem:
    name, problem = group[0]
    if len(group) == count and all(other == problem for _, other in group):
        return problem
    if len(group) == count:
        where = f"every variant, here {name}"
    elif len(group) == 1:
        where = f"variant {name}"
    else:
        more = len(group) - 1
        where = f"variant {name} and {more} {'other' if more == 1 else 'others'}"
    return replace(problem, text=f"in {where}: {problem.text}")
