"""Case files: text in, a validated Case or every mistake in it out.

The way of a file, each step a module:

    text -> tree with line numbers (yaml_tree) -> expanded tree (expansion) -> checked entries (entries, schema, shapes,
    boundaries, quantities) -> Case (assembly), checked for what only the whole can tell (consistency)
"""

from __future__ import annotations

from nightcap.geometry.case_file.reading import read_case, read_text

__all__ = ["read_case", "read_text"]
