"""The validated content of a case file, in SI units, with no geometry computed yet."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from nightcap.geometry.errors import Problem
from nightcap.geometry.shapes import Shape
from nightcap.geometry.symmetry import ELECTRIC_WALL, SymmetryLine
from nightcap.geometry.twist import Twist


@dataclass(frozen=True)
class Material:
    """A lossless-to-first-order dielectric."""

    permittivity: float
    """Relative to eps0."""
    loss_tangent: float = 0.0
    name: str = ""
    """Name for pictures and tables; may be empty."""


@dataclass(frozen=True)
class Coating:
    """One layer of insulation around a conductor."""

    thickness: float
    """m."""
    material: Material


@dataclass(frozen=True)
class Conductor:
    """A perfect conductor and its insulation, from the inside out."""

    name: str
    shape: Shape
    coatings: tuple[Coating, ...] = ()
    floating: bool = False
    conductivity: float | None = None
    """S/m, where the file gives it; the capacitance does not depend on it."""


@dataclass(frozen=True)
class Dielectric:
    """A painted region; later ones cover earlier ones."""

    name: str
    shape: Shape
    material: Material


@dataclass(frozen=True)
class Shield:
    """A grounded conductor whose inside is ``shape``."""

    shape: Shape
    name: str = "shield"
    conductivity: float | None = None
    """S/m, where the file gives it."""


@dataclass(frozen=True)
class OpenSpace:
    """Unbounded space all around."""


@dataclass(frozen=True)
class GroundPlane:
    """A grounded plane y = ``at``, unbounded; the layout lies above it."""

    at: float = 0.0
    """m."""
    name: str = "plane"
    conductivity: float | None = None
    """S/m, where the file gives it."""


Boundary = Shield | OpenSpace | GroundPlane


@dataclass(frozen=True)
class Limits:
    """What a case may use before it stops with 'accuracy not reached'."""

    triangles: int = 200_000
    memory: float = 4e9
    """bytes."""
    time: float = 600.0
    """s."""
    variants: int = 10_000
    """Combinations of varied parameters."""


@dataclass(frozen=True)
class Expectation:
    """A matrix that the result is compared with."""

    capacitance: tuple[tuple[float, ...], ...]
    """Maxwell capacitance matrix, F/m, of the reduced problem (after tie and floating)."""
    tolerance: float
    """Relative to sqrt(C_ii C_jj)."""
    source: str
    exact: bool = False
    """True if the value is exact to all digits: it must then lie inside the bracket."""


@dataclass(frozen=True)
class Parameter:
    """A name that stands for a number in a case file."""

    name: str
    value: float
    """m if it is a length, else as written."""
    is_length: bool = False
    formula: str = ""
    """As written, if it is derived from others."""
    is_used: bool = True


@dataclass(frozen=True)
class Source:
    """Where each key of a case was written, so that later checks can point at it."""

    file: str = ""
    lines: Mapping[str, int] = field(default_factory=dict)
    """Dotted key path to line number, counted from 1."""
    origins: Mapping[str, str] = field(default_factory=dict)
    """Key path that an entry took over from another by 'like', to the path where it was written."""

    def problem(self, key: str, text: str) -> Problem:
        """A mistake at a key; if the key itself has no line, that of the nearest key above it.

        What a construction draws has no lines of its own: the construction is to blame.
        """
        key = self.origins.get(key, key)
        group, _, name = key.partition(".")
        drawn = f"constructions.{name}"
        unwritten = group in ("conductors", "dielectrics") and self._written(key) in (group, "")
        if unwritten and "." in self._written(drawn):
            key = drawn
        return Problem(self.file, self.lines.get(self._written(key)), key, text)

    def _written(self, key: str) -> str:
        """The nearest key that has a line, or nothing."""
        while key and key not in self.lines:
            key = key[: max(key.rfind("."), key.rfind("["), 0)]
        return key


@dataclass(frozen=True)
class Case:
    """Everything a case file says."""

    name: str
    """The file's stem."""
    title: str
    conductors: tuple[Conductor, ...]
    boundary: Boundary
    reference: str
    """Name of the conductor that the matrix is relative to."""
    dielectrics: tuple[Dielectric, ...] = ()
    background: Material = Material(1.0)
    ties: tuple[tuple[str, ...], ...] = ()
    """Groups of conductors joined together; a group takes the name of its first member."""
    accuracy: float = 1e-4
    """Half-width of the bracket of every entry, relative to sqrt(C_ii C_jj)."""
    limits: Limits = Limits()
    expect: Expectation | None = None
    parameters: tuple[Parameter, ...] = ()
    """All of them with their values in this variant."""
    variant: Mapping[str, float] = field(default_factory=dict, hash=False)
    """The varied parameters: m for a length, else as written. Empty if the file varies nothing."""
    variant_name: str = ""
    """Such as ``pitch=1.22,wall=0.35``; fit for the name of a folder."""
    source: Source = field(default=Source(), compare=False)
    symmetry: tuple[SymmetryLine, ...] = ()
    """At most one per axis. What lies beyond them is the mirror image of what is solved."""
    twist: Twist | None = None
    files: tuple[str, ...] = ()
    """Other files that the case file names and that were read for it."""

    @property
    def outer_conductor(self) -> str | None:
        """Name of the conductor all around: the shield or plane, with any electric wall; None if there is none."""
        if not isinstance(self.boundary, OpenSpace):
            return self.boundary.name
        return ELECTRIC_WALL if any(line.is_electric for line in self.symmetry) else None

    @property
    def reference_pieces(self) -> tuple[str, ...]:
        """All conductors that make up the reference: it comes first, then those tied to it."""
        tied = (name for group in self.ties if self.reference in group for name in group)
        return tuple(dict.fromkeys((self.reference, *tied)))
