"""Copies of what has been drawn: around a circle, in a row, mirrored, turned, shifted."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace
from typing import Annotated

from pydantic import BeforeValidator, Field, model_validator

from nightcap.geometry.case_file.constructions.built import Built, Place
from nightcap.geometry.case_file.constructions.groups import Count
from nightcap.geometry.case_file.problems import nearest
from nightcap.geometry.case_file.quantities import Degrees, PointOf
from nightcap.geometry.case_file.schema import REFERENCE, Entry, Text
from nightcap.geometry.motion import Motion


def _of(value: object) -> tuple[str, ...]:
    names = [value] if isinstance(value, str) else value
    if not isinstance(names, list) or not names or any(not isinstance(name, str) for name in names):
        raise ValueError("must be a name, or a list of names, of conductors, dielectrics or constructions")
    return tuple(dict.fromkeys(names))


class CopiesKeys(Entry):
    """More of what is named in ``of``, which itself stays where it is."""

    kind: Text = Field(description="Word for the construction.")
    of: Annotated[tuple[str, ...], BeforeValidator(_of), REFERENCE] = Field(
        description="What to copy: one name or a list, of conductors, dielectrics or earlier constructions."
    )
    ring: Count | None = Field(None, description="So many in all, evenly around the point 'about'.")
    row: Count | None = Field(None, description="So many in all, each 'step' further than the one before.")
    mirror: Degrees | None = Field(None, description="A mirror image in the line at this angle through 'about'.")
    rotate: Degrees | None = Field(None, description="One copy turned by so many degrees about 'about'.")
    move: PointOf | None = Field(None, description="One copy shifted by [dx, dy].")
    step: PointOf | None = Field(None, description="Shift from one to the next of a row.")
    about: PointOf = Field((0.0, 0.0), description="Centre of a ring or of a turn; a point of a mirror's line.")

    @model_validator(mode="after")
    def _one_way(self) -> CopiesKeys:
        ways = ("ring", "row", "mirror", "rotate", "move")
        given = [way for way in ways if getattr(self, way) is not None]
        if len(given) != 1:
            said = "none is given" if not given else f"{', '.join(given)} are given"
            raise ValueError(f"needs exactly one of {', '.join(ways)}; {said}")
        if (self.row is None) != (self.step is None):
            raise ValueError("row and step go together, e.g. row: 4, step: [1.27, 0]")
        return self

    def motions(self) -> list[Motion]:
        """One for each copy."""
        if self.ring is not None:
            return [Motion.turn(math.tau * k / self.ring, self.about) for k in range(1, self.ring)]
        if self.row is not None and self.step is not None:
            return [Motion((k * self.step[0], k * self.step[1])) for k in range(1, self.row)]
        if self.mirror is not None:
            return [Motion.mirror(math.radians(self.mirror), self.about)]
        if self.rotate is not None:
            return [Motion.turn(math.radians(self.rotate), self.about)]
        return [Motion(self.move or (0.0, 0.0))]


def read_copies(place: Place, name: str, drawn: Mapping[str, Built]) -> Built | None:
    """Copies of what was drawn before, by name: ``name``, or ``name.2`` ..., with the member's own name behind.

    The original counts as the first of a ring or row.
    """
    keys = place.keys(CopiesKeys)
    if keys is None:
        return None
    unknown = [one for one in keys.of if one not in drawn]
    for one in unknown:
        place.note(f"'{one}' is not drawn before this; drawn are: {', '.join(drawn)}{nearest(one, drawn)}", "of")
    if unknown:
        return None
    whole = Built.joined(drawn[one] for one in keys.of)
    motions = keys.motions()
    if len(motions) * len(whole.members()) > MOST_COPIES:
        place.note(f"would draw more than {MOST_COPIES} figures")
        return None
    several = keys.ring is not None or keys.row is not None
    copies = []
    for number, motion in enumerate(motions, start=2):
        prefix = f"{name}.{number}" if several else name
        copies.append(_renamed(whole.moved(motion), prefix))
    return Built.joined(copies)


MOST_COPIES = 2000


def _renamed(copy: Built, prefix: str) -> Built:
    """A copy with names of its own: the prefix alone if it has but one member."""
    alone = len(copy.members()) == 1
    return Built(
        tuple(replace(one, name=prefix if alone else f"{prefix}.{one.name}") for one in copy.conductors),
        tuple(replace(one, name=prefix if alone else f"{prefix}.{one.name}") for one in copy.dielectrics),
    )
