"""The symmetry lines that a case file gives."""

from __future__ import annotations

from typing import Annotated, Any

from pydantic import Field, WithJsonSchema, model_validator

from nightcap.geometry.case_file.problems import Problems, one_of, under
from nightcap.geometry.case_file.quantities import Length
from nightcap.geometry.case_file.schema import Entry, Text, checked
from nightcap.geometry.case_file.yaml_tree import Tree
from nightcap.geometry.symmetry import SymmetryLine

WALLS = {"electric": True, "magnetic": False}
EXAMPLE = "a list of one or two lines, e.g. [{wall: magnetic, x: 0}, {wall: electric, y: 0}]"


class LineKeys(Entry):
    """One line; what lies on its greater side is solved."""

    wall: Annotated[Text, WithJsonSchema({"enum": list(WALLS)})] = Field(
        description="electric: potential zero, odd fields; magnetic: no flux passes, even fields."
    )
    x: Length | None = Field(None, description="The line x = ...; what lies right of it is solved.")
    y: Length | None = Field(None, description="The line y = ...; what lies above it is solved.")

    @model_validator(mode="after")
    def _one_axis(self) -> LineKeys:
        if (self.x is None) == (self.y is None):
            raise ValueError("needs exactly one of x, y")
        return self


def read_symmetry(tree: Tree, problems: Problems, context: dict[str, Any]) -> tuple[SymmetryLine, ...]:
    """The lines; fewer after noting mistakes."""
    if tree is None:
        return ()
    if not isinstance(tree, list) or not 1 <= len(tree) <= 2:
        problems.add("symmetry", f"must be {EXAMPLE}")
        return ()
    lines: list[SymmetryLine] = []
    for k, item in enumerate(tree):
        path = under("symmetry", k)
        entry = checked(LineKeys, item, path, problems, context)
        if entry is None:
            continue
        if entry.wall not in WALLS:
            problems.add(under(path, "wall"), one_of(entry.wall, WALLS))
            continue
        axis, at = (0, entry.x) if entry.x is not None else (1, entry.y or 0.0)
        if any(line.axis == axis for line in lines):
            problems.add(path, f"there is a line in {'xy'[axis]} already; at most one in each direction")
        lines.append(SymmetryLine(axis, at, WALLS[entry.wall]))
    return tuple(lines)
