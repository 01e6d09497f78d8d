"""Materials in a case file: by numbers or by name, and foams."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Annotated

from pydantic import BeforeValidator, Field, PrivateAttr, ValidationInfo, WithJsonSchema, model_validator
from pydantic_core import PydanticCustomError

from nightcap.geometry.case import Material
from nightcap.geometry.case_file.problems import nearest, one_of
from nightcap.geometry.case_file.quantities import Conductivity, Fraction, LossTangent, Permittivity
from nightcap.geometry.case_file.schema import Entry, Text
from nightcap.geometry.case_file.values import FOLLOWS
from nightcap.geometry.materials import Catalogue, Insulation, shipped
from nightcap.geometry.mixing import LAWS, foam

DEFAULT_LAW = "looyenga"


def _law(value: object) -> str:
    if not isinstance(value, str) or value not in LAWS:
        raise ValueError(one_of(value, LAWS))
    return value


@dataclass(frozen=True)
class Stock:
    """The materials that a file may name."""

    catalogue: Catalogue
    files: tuple[str, ...] = ()
    """Other files that list some of them."""
    wrong: frozenset[str] = frozenset()
    """Names, lower case, of materials that the file adds, but wrongly."""
    is_unreadable: bool = False
    """True if a list could not be read, so that any name may be in it."""

    def check(self, word: str) -> None:
        """Keeps quiet about a name that is unknown because of another mistake."""
        if self.is_unreadable or word.lower() in self.wrong:
            raise PydanticCustomError(FOLLOWS, "names a material that is wrong itself")


def stock_of(info: ValidationInfo) -> Stock:
    """The materials that the file may name."""
    found = (info.context or {}).get("materials")
    return found if isinstance(found, Stock) else Stock(shipped())


class MaterialKeys(Entry):
    """A dielectric, by its numbers or by its name."""

    permittivity: Permittivity | None = Field(None, description="Relative permittivity, at least 1.")
    loss_tangent: LossTangent | None = Field(None, description="Loss tangent; default: the named material's, else 0.")
    material: Text = Field(
        "", description="Name of a known material; with a permittivity beside it, any label for pictures and tables."
    )
    gas_fraction: Fraction | None = Field(None, description="Of a foam: volume of gas over the whole, at most 0.99.")
    mixing: Annotated[str, BeforeValidator(_law), WithJsonSchema({"enum": list(LAWS)})] = Field(
        DEFAULT_LAW, description="Law of mixing for the permittivity of the foam."
    )
    _record: Material = PrivateAttr(Material(1.0))

    @model_validator(mode="after")
    def _resolved(self, info: ValidationInfo) -> MaterialKeys:
        permittivity, loss, name = self.permittivity, self.loss_tangent, self.material
        if permittivity is None:
            known = self._known(stock_of(info))
            permittivity, name = known.permittivity.value, known.name
            loss = known.loss_tangent.value if loss is None and known.loss_tangent else loss
        if self.gas_fraction is None and "mixing" in self.model_fields_set:
            raise ValueError("mixing is for foams; give their gas_fraction, too")
        if self.gas_fraction is not None:
            permittivity, loss = foam(permittivity, loss or 0.0, self.gas_fraction, self.mixing)
            name = f"{name}{', ' if name else ''}{100 * self.gas_fraction:.3g} % gas"
        self._record = Material(permittivity, loss or 0.0, name)
        return self

    def _known(self, stock: Stock) -> Insulation:
        if not self.material:
            raise ValueError("needs permittivity, or material with the name of a known one")
        insulations = stock.catalogue.insulations
        found = insulations.get(self.material.lower())
        if found is None:
            stock.check(self.material)
            near = nearest(self.material, insulations)
            raise ValueError(
                f"material {self.material!r} is not known{near}; give its permittivity,"
                " or see 'nightcap materials' for the names"
            )
        return found

    def record(self) -> Material:
        """The material of the case."""
        return self._record


class MetalKeys(Entry):
    """The metal of a conductor."""

    metal: Text = Field("", description="Name of a known metal; with a conductivity beside it, any label.")
    conductivity: Conductivity | None = Field(None, description="S/m.")
    _value: float | None = PrivateAttr(None)

    @model_validator(mode="after")
    def _found(self, info: ValidationInfo) -> MetalKeys:
        self._value = self.conductivity
        if self.metal and self.conductivity is None:
            stock = stock_of(info)
            metals = stock.catalogue.metals
            if self.metal.lower() not in metals:
                stock.check(self.metal)
                raise ValueError(f"metal {one_of(self.metal, metals)}; or give its conductivity in S/m")
            self._value = metals[self.metal.lower()].conductivity.value
        return self

    def siemens_per_metre(self) -> float | None:
        """Its conductivity, where one is given, S/m."""
        return self._value
