"""From what was written to what is meant: the place where short forms turn into plain entries.

A tree goes in and a tree comes out, so nothing after this step knows of short forms.
"""

from __future__ import annotations

from nightcap.geometry.case_file.problems import Problems
from nightcap.geometry.case_file.yaml_tree import Tree

LATER = ("parameters", "vary")
"""Keys of a whole file that have a meaning but no effect yet."""


def expand(tree: dict[str, Tree], problems: Problems) -> dict[str, Tree]:
    """The tree without short forms; those that this version lacks are noted as mistakes."""
    for key in LATER:
        if key in tree:
            problems.add(key, f"'{key}' is not available in this version; write plain numbers")
    for group in ("conductors", "dielectrics"):
        entries = tree.get(group)
        for name, entry in entries.items() if isinstance(entries, dict) else ():
            if isinstance(entry, dict) and "like" in entry:
                problems.add(f"{group}.{name}.like", "'like' is not available in this version; repeat the entry's keys")
    return {key: _without_like(value) for key, value in tree.items() if key not in LATER}


def _without_like(entries: Tree) -> Tree:
    """Entries that are written out; the others have been noted."""
    if not isinstance(entries, dict):
        return entries
    return {name: entry for name, entry in entries.items() if not (isinstance(entry, dict) and "like" in entry)}
