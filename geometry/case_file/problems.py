"""Collecting the mistakes of a file instead of stopping at the first."""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from nightcap.geometry.case import Source
from nightcap.geometry.errors import CaseError, Problem


@dataclass
class Problems:
    """The mistakes found so far in one file."""

    source: Source
    found: list[Problem] = field(default_factory=list)

    def add(self, key: str, text: str) -> None:
        """Notes a mistake at a key path."""
        problem = self.source.problem(key, text)
        if problem not in self.found:
            self.found.append(problem)

    def raise_any(self) -> None:
        """Raises CaseError if there is any mistake, in the order of the file."""
        if self.found:
            raise CaseError(sorted(self.found, key=lambda problem: problem.line or 0))


def under(path: str, key: str | int) -> str:
    """The path of an entry: ``conductors.red``, ``coatings[0]``."""
    if isinstance(key, int):
        return f"{path}[{key}]"
    return f"{path}.{key}" if path else key


def nearest(word: str, names: Iterable[str]) -> str:
    """', did you mean ...' if a valid name is near, else nothing."""
    close = difflib.get_close_matches(word.lower(), list(names), n=1, cutoff=0.6)
    return f"; did you mean '{close[0]}'?" if close else ""


def listed(names: Iterable[str]) -> str:
    """Names for a message."""
    return ", ".join(names)


def one_of(word: object, names: Mapping[str, object] | Iterable[str]) -> str:
    """The message for a word that is not among the allowed ones."""
    known = list(names)
    return f"{word!r} is not known; allowed: {listed(known)}{nearest(str(word), known)}"
