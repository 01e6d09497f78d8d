"""``like: other``: an entry that is another one with some keys changed."""

from __future__ import annotations

import copy

from nightcap.geometry.case_file.problems import Problems, one_of, under
from nightcap.geometry.case_file.yaml_tree import MOST_VALUES, Tree

GROUPS = ("conductors", "dielectrics", "constructions")
ALTERNATIVES = (
    ("diameter", "radius", "awg"),
    ("strand_diameter", "overall_diameter", "awg"),
    ("outer_diameter", "outer_radius"),
    ("inner_diameter", "inner_radius", "wall"),
    ("across_flats", "across_corners"),
    ("top", "etch_angle"),
    ("gap", "overlap"),
    ("path", "wkt", "file"),
)
"""Keys that say the same thing in different ways: one that is given replaces the others that are inherited."""


def written_out(tree: dict[str, Tree], problems: Problems) -> dict[str, Tree]:
    """The tree with every ``like`` replaced by the keys of the entry that it names; a wrong one is noted and left out.

    Lines of inherited keys are those where they were written.
    """
    budget = Budget()
    plain = dict(tree)
    for group in GROUPS:
        entries = tree.get(group)
        if isinstance(entries, dict) and any(_has_like(entry) for entry in entries.values()):
            plain[group] = _Group(group, entries, problems, budget).plain()
    return plain


class Budget:
    """How many values may be inherited in one file, so that no file grows without end."""

    def __init__(self) -> None:
        self.left = MOST_VALUES

    def allows(self, count: int) -> bool:
        """Takes so many; False if there were not enough left."""
        self.left -= count
        return self.left >= 0


class _Group:
    """The named entries of one group."""

    def __init__(self, group: str, entries: dict[str, Tree], problems: Problems, budget: Budget) -> None:
        self.group, self.entries, self.problems, self.budget = group, entries, problems, budget
        self.done: dict[str, dict[str, Tree] | None] = {}
        """Entries written out so far; None for those that cannot be."""

    def plain(self) -> dict[str, Tree]:
        """All entries that can be written out."""
        plain: dict[str, Tree] = {}
        for name, entry in self.entries.items():
            if not _has_like(entry):
                plain[name] = entry
            elif (written := self._written_out(name)) is not None:
                plain[name] = written
        return plain

    def _written_out(self, name: str) -> dict[str, Tree] | None:
        """An entry with its inherited keys, after all those that it builds on."""
        chain = self._chain(name)
        for one in reversed(chain):
            if one not in self.done:
                self.done[one] = self._inherited(one)
        return self.done[name]

    def _chain(self, name: str) -> list[str]:
        """The entry, the one that it is like, and so on; ends where there is nothing more to follow."""
        chain = [name]
        while chain[-1] not in self.done:
            entry = self.entries.get(chain[-1])
            if not isinstance(entry, dict) or "like" not in entry:
                break
            other = entry["like"]
            if not isinstance(other, str) or other not in self.entries:
                break
            if other in chain:
                self._note_circle([*chain[chain.index(other) :], other], chain)
                break
            chain.append(other)
        return chain

    def _note_circle(self, circle: list[str], chain: list[str]) -> None:
        first = min(circle[:-1], key=list(self.entries).index)
        turned = circle.index(first)
        path = [*circle[turned:-1], *circle[: turned + 1]]
        self.problems.add(self._like_of(first), f"goes round in a circle: {' -> '.join(path)}")
        self.done.update(dict.fromkeys(chain))

    def _inherited(self, name: str) -> dict[str, Tree] | None:
        """One entry on top of the one that it is like, which has been written out before."""
        entry = self.entries[name]
        if not isinstance(entry, dict):
            self.problems.add(under(self.group, name), "must be a mapping")
            return None
        if "like" not in entry:
            return entry
        other = entry["like"]
        if not isinstance(other, str):
            self.problems.add(self._like_of(name), f"must be the name of another of the {self.group}")
            return None
        if other not in self.entries:
            others = [one for one in self.entries if one != name]
            self.problems.add(self._like_of(name), one_of(other, others))
            return None
        base = self.done[other]
        return None if base is None else self._on_top(name, entry, other, base)

    def _on_top(self, name: str, entry: dict[str, Tree], other: str, base: dict[str, Tree]) -> dict[str, Tree] | None:
        own = {key: value for key, value in entry.items() if key != "like"}
        replaced = {key for group in ALTERNATIVES if own.keys() & set(group) for key in group}
        inherited = {key: value for key, value in base.items() if key not in own and key not in replaced}
        if not self.budget.allows(_count(inherited)):
            self.problems.add(self.group, f"'like' makes the file hold more than {MOST_VALUES} values")
            return None
        for key, value in inherited.items():
            self._note_lines(value, under(under(self.group, other), key), under(under(self.group, name), key))
        return copy.deepcopy({**inherited, **own})

    def _note_lines(self, value: Tree, there: str, here: str) -> None:
        """Lets an inherited value and all below it point to where they were written."""
        source = self.problems.source
        if isinstance(source.lines, dict) and isinstance(source.origins, dict):
            source.origins[here] = source.origins.get(there, there)
            if there in source.lines:
                source.lines[here] = source.lines[there]
        below = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
        for key, item in below:
            self._note_lines(item, under(there, key), under(here, key))

    def _like_of(self, name: str) -> str:
        return f"{under(self.group, name)}.like"


def _has_like(entry: Tree) -> bool:
    return isinstance(entry, dict) and "like" in entry


def _count(tree: Tree) -> int:
    """Values in a tree, itself included."""
    if isinstance(tree, dict):
        return 1 + sum(map(_count, tree.values()))
    if isinstance(tree, list):
        return 1 + sum(map(_count, tree))
    return 1
