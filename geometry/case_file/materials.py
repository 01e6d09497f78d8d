"""Materials in a case file: by numbers or by name, foams, and the file's own."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated, Any

from pydantic import BeforeValidator, Field, PrivateAttr, ValidationInfo, WithJsonSchema, model_validator

from nightcap.geometry.case import Material
from nightcap.geometry.case_file.problems import Problems, nearest, one_of, under
from nightcap.geometry.case_file.quantities import Conductivity, Fraction, LossTangent, Permittivity
from nightcap.geometry.case_file.schema import Entry, Text, checked
from nightcap.geometry.case_file.yaml_tree import Planter, Tree, UnreadableError, compose
from nightcap.geometry.materials import Catalogue, Insulation, Metal, Quantity, shipped
from nightcap.geometry.mixing import LAWS, foam

DEFAULT_LAW = "looyenga"


def _law(value: object) -> str:
    if not isinstance(value, str) or value not in LAWS:
        raise ValueError(one_of(value, LAWS))
    return value


def catalogue_of(info: ValidationInfo) -> Catalogue:
    """The materials that a file may name."""
    found: Catalogue | None = (info.context or {}).get("materials")
    return found or shipped()


class MaterialKeys(Entry):
    """A dielectric, by its numbers or by its name."""

    permittivity: Permittivity | None = Field(None, description="Relative permittivity, at least 1.")
    loss_tangent: LossTangent | None = Field(None, description="Loss tangent; default: the named material's, else 0.")
    material: Text = Field(
        "", description="Name of a known material; with a permittivity beside it, any label for pictures and tables."
    )
    gas_fraction: Fraction | None = Field(None, description="Of a foam: volume of gas over the whole, 0 to 1.")
    mixing: Annotated[str, BeforeValidator(_law), WithJsonSchema({"enum": list(LAWS)})] = Field(
        DEFAULT_LAW, description=f"Law for the foam's permittivity: {', '.join(LAWS)}."
    )
    _record: Material = PrivateAttr(Material(1.0))

    @model_validator(mode="after")
    def _resolved(self, info: ValidationInfo) -> MaterialKeys:
        permittivity, loss = self.permittivity, self.loss_tangent
        if permittivity is None:
            known = self._known(catalogue_of(info))
            permittivity = known.permittivity
            loss = (known.loss_tangent.value or 0.0) if loss is None else loss
        name = self.material
        if self.gas_fraction is not None:
            permittivity, loss = foam(permittivity, loss or 0.0, self.gas_fraction, self.mixing)
            name = f"{name}{', ' if name else ''}{100 * self.gas_fraction:.3g} % gas"
        self._record = Material(permittivity, loss or 0.0, name)
        return self

    def _known(self, catalogue: Catalogue) -> Insulation:
        if not self.material:
            raise ValueError("needs permittivity, or material with the name of a known one")
        found = catalogue.insulations.get(self.material.lower())
        if found is None:
            near = nearest(self.material, catalogue.insulations)
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
            metals = catalogue_of(info).metals
            if self.metal.lower() not in metals:
                raise ValueError(f"metal {one_of(self.metal, metals)}; or give its conductivity in S/m")
            self._value = metals[self.metal.lower()].conductivity
        return self

    def siemens_per_metre(self) -> float | None:
        """Its conductivity, where one is given, S/m."""
        return self._value


class OwnMaterialEntry(Entry):
    """A material that a file adds: a dielectric with a permittivity, or a metal with a conductivity."""

    permittivity: Permittivity | None = Field(None, description="Relative permittivity, at least 1.")
    loss_tangent: LossTangent = Field(0.0, description="Loss tangent.")
    conductivity: Conductivity | None = Field(None, description="S/m, of a metal.")
    source: Text = Field("", description="Where the numbers come from.")

    @model_validator(mode="after")
    def _one_kind(self) -> OwnMaterialEntry:
        if (self.permittivity is None) == (self.conductivity is None):
            raise ValueError("needs exactly one of permittivity, for a dielectric, and conductivity, for a metal")
        return self


def read_materials(tree: Tree, problems: Problems, context: dict[str, Any]) -> Catalogue:
    """The shipped materials and a file's own, which are listed in it or in a file beside it."""
    path = "materials"
    if isinstance(tree, str):
        tree = _beside(tree, problems)
    if tree is None:
        return shipped()
    if not isinstance(tree, dict):
        problems.add(path, "must be a mapping from names to materials, or the name of a file that holds one")
        return shipped()
    insulations, metals = [], []
    for name, entry in tree.items():
        read = checked(OwnMaterialEntry, entry, under(path, name), problems, context)
        if read and read.permittivity is not None:
            loss = Quantity(read.loss_tangent)
            insulations.append(Insulation(name, read.permittivity, None, loss, source=read.source))
        elif read and read.conductivity is not None:
            metals.append(Metal(name, read.conductivity, read.source))
    return shipped().with_own(Catalogue.of(insulations, metals))


def _beside(name: str, problems: Problems) -> Tree:
    """The content of a YAML file in the folder of the case file; None after noting that it is none."""
    path = Path(problems.source.file).parent / name
    lines: dict[str, int] = {}
    try:
        node = compose(path.read_text(encoding="utf-8-sig"))
        return Planter(lines, problems).tree(node) if node is not None else {}
    except OSError as error:
        problems.add("materials", f"the file {name!r} cannot be read: {error.strerror or error}")
    except (UnicodeDecodeError, ValueError) as error:
        problems.add("materials", f"the file {name!r} is not text in UTF-8: {error}")
    except UnreadableError as error:
        problems.add("materials", f"the file {name!r}, line {error.line}: {error.text}")
    return None
