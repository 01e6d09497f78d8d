"""Materials by name: insulations and metals, those that ship and those that users add."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cache
from importlib import resources
from typing import Any

import yaml


@dataclass(frozen=True)
class Quantity:
    """A property: the value that is used, and what its sources print."""

    value: float | None = None
    range: tuple[float, float] | None = None
    frequency: float | None = None
    """Hz, where it matters and is known."""
    note: str = ""


@dataclass(frozen=True)
class Insulation:
    """A dielectric."""

    name: str
    permittivity: float
    """Relative to eps0."""
    permittivity_range: tuple[float, float] | None = None
    loss_tangent: Quantity = Quantity()
    breakdown: Quantity = Quantity()
    """Short-time strength of thin samples, kV/mm: no design value."""
    source: str = ""
    aliases: tuple[str, ...] = ()


@dataclass(frozen=True)
class Metal:
    """A conductor's material."""

    name: str
    conductivity: float
    """S/m, at 20 degrees Celsius."""
    source: str = ""
    aliases: tuple[str, ...] = ()


@dataclass(frozen=True)
class Catalogue:
    """Materials by the words that name them, lower case."""

    insulations: Mapping[str, Insulation] = field(default_factory=dict)
    metals: Mapping[str, Metal] = field(default_factory=dict)

    def with_own(self, own: Catalogue) -> Catalogue:
        """This catalogue with more materials, which go before those of the same name."""
        return Catalogue({**self.insulations, **own.insulations}, {**self.metals, **own.metals})

    @classmethod
    def of(cls, insulations: list[Insulation], metals: list[Metal]) -> Catalogue:
        """A catalogue in which every name and alias stands."""
        return cls(
            {word.lower(): one for one in insulations for word in (one.name, *one.aliases)},
            {word.lower(): one for one in metals for word in (one.name, *one.aliases)},
        )


@cache
def shipped() -> Catalogue:
    """The materials in materials.yaml beside this module."""
    text = resources.files("nightcap.geometry").joinpath("materials.yaml").read_text(encoding="utf-8")
    tree = yaml.safe_load(text)
    insulations = [_insulation(name, entry) for name, entry in tree["insulations"].items()]
    metals = [
        Metal(name, float(entry["conductivity"]), entry["source"], tuple(entry.get("aliases", ())))
        for name, entry in tree["metals"].items()
    ]
    return Catalogue.of(insulations, metals)


def _insulation(name: str, entry: dict[str, Any]) -> Insulation:
    permittivity = _quantity(entry["permittivity"])
    assert permittivity.value is not None  # noqa: S101 - a test reads the shipped file
    return Insulation(
        name,
        permittivity.value,
        permittivity.range,
        _quantity(entry.get("loss_tangent", {})),
        _quantity(entry.get("breakdown", {})),
        entry["source"],
        tuple(entry.get("aliases", ())),
    )


def _quantity(entry: dict[str, Any]) -> Quantity:
    low_high = entry.get("range")
    return Quantity(
        None if entry.get("value") is None else float(entry["value"]),
        None if low_high is None else (float(low_high[0]), float(low_high[1])),
        None if entry.get("frequency") is None else float(entry["frequency"]),
        entry.get("note", ""),
    )
