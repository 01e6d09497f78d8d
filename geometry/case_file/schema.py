"""What each entry of a case file may hold, and the translation of pydantic's complaints into ours."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, TypeVar, get_args

from pydantic import BaseModel, BeforeValidator, ConfigDict, Field, ValidationError, ValidationInfo, WithJsonSchema

from nightcap.geometry.case import Limits
from nightcap.geometry.case_file.problems import Problems, listed, nearest, under
from nightcap.geometry.case_file.quantities import (
    LENGTHS,
    Accuracy,
    Duration,
    Memory,
    Tolerance,
    number,
    values_of,
    whole,
)
from nightcap.geometry.case_file.values import FOLLOWS
from nightcap.geometry.case_file.yaml_tree import Tree


class Entry(BaseModel):
    """A mapping whose keys are all known."""

    model_config = ConfigDict(extra="forbid", frozen=True, arbitrary_types_allowed=True)


EntryType = TypeVar("EntryType", bound=Entry)


def words_of(model: type[Entry]) -> list[str]:
    """The keys of an entry as they are written: some are no Python names."""
    return [field.alias or name for name, field in model.model_fields.items()]


def _text(value: object) -> str:
    if not isinstance(value, str):
        raise ValueError("must be text; put it in quotes")
    if not value.isprintable():
        raise ValueError("must be one line of printable characters")
    return value


def _flag(value: object) -> bool:
    if not isinstance(value, bool):
        raise ValueError("must be true or false")
    return value


def _unit(value: object) -> float:
    if not isinstance(value, str) or value not in LENGTHS:
        raise ValueError(f"{value!r} is no unit of length; allowed: {listed(LENGTHS)}")
    return LENGTHS[value]


def _label(value: object) -> str:
    return _text(value)


def _triangles(value: object, info: ValidationInfo) -> int:
    return whole(value, 100, 10**8, info)


def _variants(value: object, info: ValidationInfo) -> int:
    return whole(value, 1, 10**6, info)


def _names(value: object) -> tuple[tuple[str, ...], ...]:
    groups = value if isinstance(value, list) else None
    if groups is None or any(not isinstance(group, list) or len(group) < 2 for group in groups):
        raise ValueError("must be a list of groups of at least two names, e.g. [[drain, screen]]")
    if any(not isinstance(name, str) for group in groups for name in group):
        raise ValueError("must hold names of conductors")
    return tuple(tuple(group) for group in groups)


def _matrix(value: object, info: ValidationInfo) -> tuple[tuple[float, ...], ...]:
    if not isinstance(value, list) or not value or any(not isinstance(row, list) for row in value):
        raise ValueError("must be a matrix, e.g. [[3.2, -1.1], [-1.1, 3.2]]")
    if any(isinstance(x, bool) or not isinstance(x, int | float | str) for row in value for x in row):
        raise ValueError("must hold plain numbers")
    if any(len(row) != len(value) for row in value):
        raise ValueError("must have as many columns as rows")
    return tuple(tuple(number(x, {}, 1.0, "3.2", values_of(info)) for x in row) for row in value)


def _reference(value: object) -> tuple[str, ...]:
    if not isinstance(value, list):
        return (_text(value),)
    if not value or any(not isinstance(name, str) for name in value):
        raise ValueError("must be the name of a conductor, or a list of names, e.g. [screen, drain]")
    if len(set(value)) < len(value):
        raise ValueError("names a conductor twice")
    return tuple(value)


Text = Annotated[str, BeforeValidator(_text)]
Flag = Annotated[bool, BeforeValidator(_flag)]
Matrix = Annotated[
    tuple[tuple[float, ...], ...],
    BeforeValidator(_matrix),
    WithJsonSchema({"title": "matrix", "type": "array", "items": {"type": "array"}}),
]
NAMES = {"type": "array", "items": {"type": "string"}}


COUNT = WithJsonSchema({"title": "whole number", "type": ["integer", "string"]})
GROUPS = WithJsonSchema({"title": "list of groups of names", "type": "array", "items": NAMES})
REFERENCE = WithJsonSchema({"title": "name or list of names", "anyOf": [{"type": "string"}, NAMES]})


class LimitsEntry(Entry):
    """What a case may use."""

    triangles: Annotated[int, BeforeValidator(_triangles), COUNT] = Field(
        Limits().triangles, description="Most triangles of a mesh."
    )
    variants: Annotated[int, BeforeValidator(_variants), COUNT] = Field(
        Limits().variants, description="Combinations of the values in 'vary'."
    )
    memory: Memory = Field(Limits().memory, description="Most memory of a solution, about.")
    time: Duration = Field(Limits().time, description="Most time of a case, about.")


class ExpectEntry(Entry):
    """A matrix to compare with."""

    capacitance: Matrix | None = Field(None, description="Maxwell capacitance matrix, F/m.")
    relative: Matrix | None = Field(None, description="The same over eps0.")
    tolerance: Tolerance = Field(description="Allowed deviation relative to sqrt(C_ii C_jj).")
    source: Text = Field(description="Where the matrix comes from.")
    exact: Flag = Field(False, description="True if all digits are exact; they must then lie inside the bracket.")


class CaseEntry(Entry):
    """The keys of a whole file; entries with shapes are read one by one afterwards."""

    title: Text = Field("", description="One line about the case.")
    units: Annotated[float, BeforeValidator(_unit), WithJsonSchema({"enum": list(LENGTHS)})] = Field(
        1e-3, description="Unit of bare numbers."
    )
    accuracy: Accuracy = Field(1e-4, description="Half-width of the bracket relative to sqrt(C_ii C_jj).")
    parameters: Any = Field(None, description="Name to number or formula; the names may stand in any number.")
    vary: Any = Field(None, description="Parameter to list, range or tolerance; one variant per combination.")
    conductors: Any = Field(None, description="Name to shape and coatings.")
    materials: Any = Field(None, description="Materials of the file's own by name, or a file beside it.")
    dielectrics: Any = Field(None, description="Name to shape and material; later ones cover earlier ones.")
    constructions: Any = Field(None, description="Name to pair, ribbon, board ...: what cables are made of.")
    background: Any = Field(None, description="Material of all that is not drawn.")
    boundary: Any = Field(description="Shield, box, open space or ground plane.")
    reference: Annotated[tuple[str, ...], BeforeValidator(_reference), REFERENCE] = Field(
        (), description="The conductor that the matrix is relative to, or a list of them that are one."
    )
    symmetry: Any = Field(None, description="Lines of symmetry; what lies on the greater side of each is solved.")
    twist: Any = Field(None, description="Lay length and pitch circle of twisted cores.")
    tie: Annotated[tuple[tuple[str, ...], ...], BeforeValidator(_names), GROUPS] = Field(
        (), description="Groups of conductors that are joined, each a list of names."
    )
    limits: Any = Field(None, description="What the case may use before it stops.")
    expect: Any = Field(None, description="A matrix to compare the result with, and its source.")


def checked(
    model: type[EntryType], tree: Tree, path: str, problems: Problems, context: Mapping[str, Any]
) -> EntryType | None:
    """An entry of a model, or None after noting every mistake in it."""
    if not isinstance(tree, dict):
        problems.add(path, f"must be a mapping with the keys {listed(words_of(model))}")
        return None
    try:
        return model.model_validate(tree, context=dict(context))
    except ValidationError as error:
        for detail in error.errors():
            _translate(detail, model, path, problems)
        return None


def _translate(detail: Any, model: type[Entry], path: str, problems: Problems) -> None:
    place, above = path, path
    for key in detail["loc"]:
        place, above = under(place, key), place
    name = str(detail["loc"][-1]) if detail["loc"] else ""
    if detail["type"] == "extra_forbidden":
        known = words_of(_nested(model, detail["loc"][:-1]))
        comma = "; in a number write a point, not a comma" if name.isdigit() else ""
        problems.add(place, f"unknown key; allowed here: {listed(known)}{nearest(name, known)}{comma}")
    elif detail["type"] == FOLLOWS:
        return
    elif detail["type"] == "missing":
        problems.add(above, f"the key '{name}' is missing")
    elif detail["type"] == "value_error":
        problems.add(place, str(detail["ctx"]["error"]))
    elif detail["type"] in SHAPES_OF_YAML:
        problems.add(place, SHAPES_OF_YAML[detail["type"]])
    else:
        problems.add(place, str(detail["msg"]))


SHAPES_OF_YAML = {
    "model_type": "must be a mapping of keys to values",
    "tuple_type": "must be a list",
    "list_type": "must be a list",
}


def _nested(model: type[Entry], loc: tuple[str | int, ...]) -> type[Entry]:
    """The model of an entry below another, by its keys and numbers."""
    for key in loc:
        if isinstance(key, int):
            continue
        field = next(f for name, f in model.model_fields.items() if key in (name, f.alias))
        kinds = [getattr(kind, "__origin__", kind) for kind in (field.annotation, *get_args(field.annotation))]
        model = next((kind for kind in kinds if isinstance(kind, type) and issubclass(kind, Entry)), model)
    return model
