"""What the names in a file stand for, and what use was made of them."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from pydantic_core import PydanticCustomError

from nightcap.geometry.case_file.expressions import Formula, formula
from nightcap.geometry.case_file.problems import listed, nearest

FOLLOWS = "follows_from_another_mistake"
"""Kind of a complaint that is not shown, because its cause is."""
WORD = re.compile(r"[^\W\d]\w*")


@dataclass
class Usage:
    """Which parameters the entries of a file use, and which of these are lengths; filled while entries are read."""

    used: set[str] = field(default_factory=set)
    lengths: set[str] = field(default_factory=set)

    def note(self, found: Formula, *, is_length: bool) -> None:
        """Notes the parameters of an expression; ``is_length`` if its value is one."""
        self.used.update(found.names)
        if is_length:
            self.lengths.update(found.terms - found.measures.keys())


@dataclass(frozen=True)
class Values:
    """The value of every parameter in one variant."""

    known: Mapping[str, float] = field(default_factory=dict)
    """In the file's unit, where it is a length; NaN for a parameter that is wrong itself."""
    unit: float = 1e-3
    """m."""
    usage: Usage = field(default_factory=Usage)
    is_unreadable: bool = False
    """True if the file's parameters could not be read, so that any name may be one."""

    def evaluate(self, text: str, example: str, *, is_length: bool = False) -> float:
        """The value of an expression, in the file's unit if it is a length. Raises ValueError with the reason."""
        try:
            found = formula(text, self.unit)
        except ValueError as error:
            raise ValueError(f"{shown(text)} is not a number, e.g. {example}, nor a formula: {error}") from None
        self.check_names(found, example)
        self.usage.note(found, is_length=is_length)
        return self.value_of(found)

    def value_of(self, found: Formula) -> float:
        """The value of an expression whose names are known."""
        if any(math.isnan(self.known[name]) for name in found.names):
            raise PydanticCustomError(FOLLOWS, "uses a parameter that is wrong itself")
        return found.evaluate(self.known)

    def check_names(self, found: Formula, example: str) -> None:
        """Raises ValueError if an expression holds a name that is no parameter."""
        unknown = [name for name in found.names if name not in self.known]
        if unknown and self.is_unreadable:
            raise PydanticCustomError(FOLLOWS, "uses a parameter that is wrong itself")
        if unknown:
            is_word = WORD.fullmatch(found.text.strip()) is not None
            lead = f"{shown(found.text)} is not a number, e.g. {example}, nor a parameter" if is_word else ""
            raise ValueError(lead + self._strangers(unknown, "; " if is_word else ""))

    def _strangers(self, unknown: Iterable[str], joint: str) -> str:
        names = list(unknown)
        said = "" if joint else f"{listed(map(repr, names))}: no such parameter"
        if not self.known:
            return f"{said}{joint or '; '}the file has no parameters"
        return f"{said}{joint or '; '}parameters: {listed(self.known)}{nearest(names[0], self.known)}"


def shown(text: str) -> str:
    """A text in quotes, cut if it is long."""
    return repr(text if len(text) <= 60 else f"{text[:57]}...")
