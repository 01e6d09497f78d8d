"""The twist that a case file gives."""

from __future__ import annotations

import math
from typing import Annotated, Any

from pydantic import BeforeValidator, Field, WithJsonSchema, model_validator

from nightcap.geometry.case import Conductor
from nightcap.geometry.case_file.problems import Problems, one_of
from nightcap.geometry.case_file.quantities import PositiveLength
from nightcap.geometry.case_file.schema import NAMES, Entry, checked
from nightcap.geometry.case_file.yaml_tree import Tree
from nightcap.geometry.painting import box
from nightcap.geometry.twist import Twist


def _two_names(value: object) -> tuple[str, str]:
    if not isinstance(value, list) or len(value) != 2 or any(not isinstance(name, str) for name in value):
        raise ValueError("must be the names of two conductors, e.g. [red, white]")
    return (value[0], value[1])


class TwistKeys(Entry):
    """Cores laid up around an axis."""

    lay_length: PositiveLength = Field(description="Length of cable in which a core goes once around.")
    pitch_diameter: PositiveLength | None = Field(None, description="Of the circle through the centres of the cores.")
    between: (
        Annotated[tuple[str, str], BeforeValidator(_two_names), WithJsonSchema({"title": "two names", **NAMES})] | None
    ) = Field(
        None, description="Two conductors opposite each other, instead of the diameter: the distance of their centres."
    )

    @model_validator(mode="after")
    def _one_diameter(self) -> TwistKeys:
        if (self.pitch_diameter is None) == (self.between is None):
            raise ValueError("needs exactly one of pitch_diameter and between: [two conductors opposite each other]")
        return self


def read_twist(
    tree: Tree, conductors: tuple[Conductor, ...], problems: Problems, context: dict[str, Any]
) -> Twist | None:
    """The twist, or None if there is none, or after noting every mistake in it."""
    entry = checked(TwistKeys, tree, "twist", problems, context) if tree is not None else None
    if entry is None:
        return None
    if entry.pitch_diameter is not None:
        return Twist(entry.lay_length, entry.pitch_diameter)
    known = {conductor.name: conductor for conductor in conductors}
    names = entry.between or ()
    for name in names:
        if name not in known:
            problems.add("twist.between", one_of(name, known))
    if problems.found:
        return None
    distance = math.dist(*(_centre(known[name]) for name in names))
    if distance == 0.0:
        problems.add("twist.between", "the two conductors have one centre; name two that lie opposite each other")
        return None
    return Twist(entry.lay_length, distance)


def _centre(conductor: Conductor) -> tuple[float, float]:
    """The middle of the box around a conductor, m."""
    low, high = box([conductor.shape.outline()])
    x, y = ((low + high) / 2).tolist()
    return (x, y)
