"""Case files: text in, a validated Case or every mistake in it out.

The way of a file, each step a module:

    text -> tree with line numbers (yaml_tree) -> expanded tree (expansion, likeness) -> parameters and variants
    (parameters, axes, variants) -> for each variant: checked entries (schema, shapes, boundaries, quantities,
    expressions) -> Case (assembly), checked for what only the whole can tell (consistency)

``document`` holds a file that was read once, ``survey`` all of its variants.
"""

from __future__ import annotations

from nightcap.geometry.case_file.reading import list_variants, read_case, read_text, read_variant, read_variants
from nightcap.geometry.case_file.survey import told_together

__all__ = ["list_variants", "read_case", "read_text", "read_variant", "read_variants", "told_together"]
