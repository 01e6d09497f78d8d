"""From what was written to what is meant: the place where short forms turn into plain entries.

A tree goes in and a tree comes out, so nothing after this step knows of short forms. Parameters are no part of it:
where a number is expected, and only there, its reader (quantities) takes a formula as well.
"""

from __future__ import annotations

from nightcap.geometry.case_file.likeness import written_out
from nightcap.geometry.case_file.problems import Problems
from nightcap.geometry.case_file.yaml_tree import Tree


def expand(tree: dict[str, Tree], problems: Problems) -> dict[str, Tree]:
    """The tree without short forms; those that are wrong are noted and left out."""
    return written_out(tree, problems)
