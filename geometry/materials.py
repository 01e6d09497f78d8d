"""Materials by name: insulations and metals, those that ship and those that users add."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from functools import cache
from importlib import resources
from typing import Any

import yaml


@dataclass(frozen=True)
class Quantity:
    """A property: the value that is used, and what its sources print."""

    value: float
    range: tuple[float, float] | None = None
    frequency: float | None = None
    """Hz, where it matters and is known."""
    note: str = ""
    source: str = ""
    """Where value and range come from; of what ships, whether it was found or is from memory."""


@dataclass(frozen=True)
class Insulation:
    """A dielectric."""

    name: str
    permittivity: Quantity
    """Relative to eps0."""
    loss_tangent: Quantity | None = None
    breakdown: Quantity | None = None
    """Short-time strength of thin samples, kV/mm, its value the least that is printed: no design value."""
    aliases: tuple[str, ...] = ()


@dataclass(frozen=True)
class Metal:
    """A conductor's material."""

    name: str
    conductivity: Quantity
    """S/m, at 20 degrees Celsius."""
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
    def of(cls, insulations: Iterable[Insulation], metals: Iterable[Metal]) -> Catalogue:
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
    insulations = [
        Insulation(
            name,
            _quantity(entry["permittivity"]),
            _quantity(entry["loss_tangent"]) if "loss_tangent" in entry else None,
            _quantity(entry["breakdown"]) if "breakdown" in entry else None,
            tuple(entry.get("aliases", ())),
        )
        for name, entry in tree["insulations"].items()
    ]
    metals = [
        Metal(name, _quantity(entry["conductivity"]), tuple(entry.get("aliases", ())))
        for name, entry in tree["metals"].items()
    ]
    return Catalogue.of(insulations, metals)


def _quantity(entry: Mapping[str, Any]) -> Quantity:
    """A property as the file gives it; without a value, the lower end of its range is one."""
    low_high = entry.get("range")
    return Quantity(
        float(entry["value"] if "value" in entry else entry["range"][0]),
        None if low_high is None else (float(low_high[0]), float(low_high[1])),
        None if entry.get("frequency") is None else float(entry["frequency"]),
        entry.get("note", ""),
        entry["source"],
    )
