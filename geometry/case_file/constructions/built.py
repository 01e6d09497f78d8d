"""What a construction expands to, and the place in a file from which it is read."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import Any, TypeVar

from nightcap.geometry.case import Coating, Conductor, Dielectric
from nightcap.geometry.case_file.problems import Problems, under
from nightcap.geometry.case_file.schema import Entry, checked
from nightcap.geometry.case_file.yaml_tree import Tree
from nightcap.geometry.motion import Motion

Keys = TypeVar("Keys", bound=Entry)


@dataclass(frozen=True)
class Built:
    """Plain conductors and dielectrics."""

    conductors: tuple[Conductor, ...] = ()
    dielectrics: tuple[Dielectric, ...] = ()
    """In the order of painting: what lies outside first."""

    def moved(self, motion: Motion) -> Built:
        """The same in another place."""
        return Built(
            tuple(replace(conductor, shape=motion.shape(conductor.shape)) for conductor in self.conductors),
            tuple(replace(dielectric, shape=motion.shape(dielectric.shape)) for dielectric in self.dielectrics),
        )

    def members(self) -> tuple[Conductor | Dielectric, ...]:
        """All of it."""
        return (*self.conductors, *self.dielectrics)

    @staticmethod
    def joined(parts: Iterable[Built]) -> Built:
        """All of several."""
        parts = list(parts)
        conductors = tuple(conductor for part in parts for conductor in part.conductors)
        return Built(conductors, tuple(dielectric for part in parts for dielectric in part.dielectrics))


@dataclass(frozen=True)
class Place:
    """An entry of a file: where it is, and what was written there."""

    tree: Tree
    path: str
    problems: Problems
    context: dict[str, Any]

    def keys(self, model: type[Keys]) -> Keys | None:
        """The entry by a model, or None after noting every mistake in it."""
        return checked(model, self.tree, self.path, self.problems, self.context)

    def below(self, key: str | int) -> Place | None:
        """The entry under a key, if there is one."""
        if isinstance(key, str):
            tree = self.tree.get(key) if isinstance(self.tree, dict) else None
        else:
            tree = self.tree[key] if isinstance(self.tree, list) else None
        return None if tree is None else Place(tree, under(self.path, key), self.problems, self.context)

    def note(self, text: str, key: str = "") -> None:
        """Notes a mistake here, or at a key below."""
        self.problems.add(under(self.path, key) if key else self.path, text)


def total_thickness(coatings: Iterable[Coating]) -> float:
    """Thickness of all layers together, m."""
    return sum(coating.thickness for coating in coatings)
