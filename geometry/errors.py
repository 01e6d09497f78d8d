"""Everything that nightcap raises on purpose. One base class; the command line turns it into an exit code."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field


class NightcapError(Exception):
    """Base of every error that nightcap raises on purpose."""


@dataclass(frozen=True)
class Problem:
    """One mistake in a case file, as the person who wrote the file needs to read it."""

    file: str
    """Path of the file as the user gave it; empty if the case was built in memory."""
    line: int | None
    """Line number counted from 1, or None if the mistake has no place."""
    key: str
    """Dotted key path, e.g. ``conductors.red.coatings[0].thickness``."""
    text: str
    """What is wrong, what is allowed and, where there is one, the nearest valid name."""
    place: tuple[float, float] | None = field(default=None, compare=False)
    """Where in the cross-section, m, for drawings."""

    def __str__(self) -> str:
        place = self.file if self.line is None else f"{self.file}:{self.line}"
        return ": ".join(part for part in (place, self.key, self.text) if part)


class CaseError(NightcapError):
    """A case file that cannot be used. Carries every mistake found, not only the first."""

    def __init__(self, problems: Sequence[Problem]) -> None:
        self.problems: tuple[Problem, ...] = tuple(problems)
        super().__init__("\n".join(map(str, self.problems)))


class MeshError(NightcapError):
    """A layout for which no mesh with positive Jacobians was found."""


class BracketError(NightcapError):
    """Two bounds that contradict each other: the case has failed and has no numbers to report."""


class LimitError(NightcapError):
    """A limit of the case (triangles, memory, time) was hit before there was any result."""


class UsageError(NightcapError):
    """A command line that cannot be obeyed: a path that cannot be read, two cases with one result folder."""
