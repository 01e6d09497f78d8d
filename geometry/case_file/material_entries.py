"""What a list of materials may hold: properties as bare numbers or in full."""

from __future__ import annotations

from typing import Annotated

from pydantic import BeforeValidator, Field, ValidationInfo, WithJsonSchema, model_validator

from nightcap.geometry.case_file.quantities import Conductivity, LossTangent, Permittivity, Strength, number, values_of
from nightcap.geometry.case_file.schema import Entry, Text
from nightcap.geometry.materials import Insulation, Metal, Quantity


def _span(value: object, info: ValidationInfo) -> tuple[float, float]:
    if not isinstance(value, list) or len(value) != 2:
        raise ValueError("must be a pair of numbers, e.g. [2.2, 2.3]")
    low, high = (number(item, {}, 1.0, "2.2", values_of(info)) for item in value)
    if low > high:
        raise ValueError("must be in order: the lower end, then the upper")
    return (low, high)


def _aliases(value: object) -> tuple[str, ...]:
    if not isinstance(value, list) or any(not isinstance(word, str) for word in value):
        raise ValueError("must be a list of names, e.g. [PE, polythene]")
    return tuple(value)


def _in_full(value: object) -> object:
    """A bare number stands for a property that has nothing but a value."""
    return value if isinstance(value, dict) else {"value": value}


Span = Annotated[
    tuple[float, float],
    BeforeValidator(_span),
    WithJsonSchema({"title": "pair of numbers", "type": "array", "minItems": 2, "maxItems": 2}),
]
Aliases = Annotated[
    tuple[str, ...], BeforeValidator(_aliases), WithJsonSchema({"type": "array", "items": {"type": "string"}})
]
Hertz = Annotated[float, BeforeValidator(lambda v, info: number(v, {}, 1.0, "1e3", values_of(info)))]


class PropertyEntry(Entry):
    """A property in full: its value and what is known about it."""

    range: Span | None = Field(None, description="Lowest and highest value that the sources print.")
    frequency: Annotated[Hertz, WithJsonSchema({"type": ["number", "string"]})] | None = Field(
        None, description="Hz, at which the value holds."
    )
    note: Text = Field("", description="A condition, e.g. the thickness of the sample.")
    source: Text = Field("", description="Where the numbers come from.")

    def quantity(self, otherwise: str) -> Quantity:
        """The record. otherwise : the source, if the property names none of its own."""
        given: float = getattr(self, "value", None) or (self.range[0] if self.range else 0.0)
        return Quantity(given, self.range, self.frequency, self.note, self.source or otherwise)


class PermittivityEntry(PropertyEntry):
    """A permittivity in full."""

    value: Permittivity = Field(description="Relative permittivity, at least 1.")


class LossTangentEntry(PropertyEntry):
    """A loss tangent in full."""

    value: LossTangent = Field(description="Loss tangent.")


class BreakdownEntry(PropertyEntry):
    """A breakdown strength in full."""

    value: Strength | None = Field(None, description="kV/mm; default: the lower end of the range.")

    @model_validator(mode="after")
    def _some_number(self) -> BreakdownEntry:
        if self.value is None and self.range is None:
            raise ValueError("needs value or range")
        return self


class ConductivityEntry(PropertyEntry):
    """A conductivity in full."""

    value: Conductivity = Field(description="S/m at 20 degrees Celsius.")


PROPERTIES = (PermittivityEntry, LossTangentEntry, BreakdownEntry, ConductivityEntry)


def _number_or(name: str) -> WithJsonSchema:
    return WithJsonSchema({"anyOf": [{"type": ["number", "string"]}, {"$ref": f"#/$defs/{name}"}]})


class OwnMaterialEntry(Entry):
    """A material that a file adds: a dielectric with a permittivity, or a metal with a conductivity."""

    permittivity: Annotated[PermittivityEntry, BeforeValidator(_in_full), _number_or("PermittivityEntry")] | None = (
        Field(None, description="Relative permittivity: a number, or value, range, frequency, source.")
    )
    loss_tangent: Annotated[LossTangentEntry, BeforeValidator(_in_full), _number_or("LossTangentEntry")] | None = Field(
        None, description="Loss tangent: a number, or value, range, frequency, source; default 0."
    )
    breakdown: Annotated[BreakdownEntry, BeforeValidator(_in_full), _number_or("BreakdownEntry")] | None = Field(
        None, description="Breakdown strength, kV/mm: a number, or range, note, source. For information only."
    )
    conductivity: Annotated[ConductivityEntry, BeforeValidator(_in_full), _number_or("ConductivityEntry")] | None = (
        Field(None, description="S/m, of a metal: a number, or value, range, source.")
    )
    aliases: Aliases = Field((), description="Other names of it.")
    source: Text = Field("", description="Where the numbers come from.")

    @model_validator(mode="after")
    def _one_kind(self) -> OwnMaterialEntry:
        if (self.permittivity is None) == (self.conductivity is None):
            raise ValueError("needs exactly one of permittivity, for a dielectric, and conductivity, for a metal")
        if self.conductivity and (self.loss_tangent or self.breakdown):
            raise ValueError("a metal has a conductivity, and neither loss tangent nor breakdown strength")
        return self

    def record(self, name: str) -> Insulation | Metal:
        """The material by its name."""
        known = (self.permittivity, self.loss_tangent, self.breakdown)
        if self.conductivity:
            return Metal(name, self.conductivity.quantity(self.source), self.aliases)
        permittivity, loss_tangent, breakdown = (one.quantity(self.source) if one else None for one in known)
        assert permittivity is not None  # noqa: S101 - one of the two kinds is given
        return Insulation(name, permittivity, loss_tangent, breakdown, self.aliases)
