"""The JSON Schema of a case file, for editors: made from the models that check it."""

from __future__ import annotations

import types
from collections.abc import Mapping
from itertools import combinations
from typing import Any, Literal, Union, get_args, get_origin

from pydantic import WithJsonSchema
from pydantic.fields import FieldInfo

from nightcap.geometry.case_file.axes import RangeKeys, ToleranceKeys
from nightcap.geometry.case_file.boundaries import KEYS as BOUNDARY_KEYS
from nightcap.geometry.case_file.constructions import KEYS as CONSTRUCTION_KEYS
from nightcap.geometry.case_file.constructions.board import LayerEntry, MaskEntry, TraceEntry
from nightcap.geometry.case_file.constructions.groups import BeltEntry, FillerEntry
from nightcap.geometry.case_file.constructions.sheaths import DrainEntry
from nightcap.geometry.case_file.entries import CoatingEntry, ConductorKeys
from nightcap.geometry.case_file.likeness import ALTERNATIVES
from nightcap.geometry.case_file.material_entries import PROPERTIES, OwnMaterialEntry
from nightcap.geometry.case_file.materials import MaterialKeys
from nightcap.geometry.case_file.own_materials import GROUPS as MATERIAL_GROUPS
from nightcap.geometry.case_file.schema import CaseEntry, Entry, ExpectEntry, LimitsEntry, words_of
from nightcap.geometry.case_file.shapes import SHAPES, combined, words_for
from nightcap.geometry.case_file.symmetry import LineKeys
from nightcap.geometry.case_file.twist import TwistKeys
from nightcap.geometry.materials import shipped

DIALECT = "https://json-schema.org/draft/2020-12/schema"
Schema = dict[str, Any]
NUMBER: Schema = {"title": "number or formula", "type": ["number", "string"]}
LIKE: Schema = {"type": "string", "description": "Another entry of the same group; the keys given here go on top."}
SUGGESTIONS = {
    "material": sorted({one.name for one in shipped().insulations.values()}, key=str.lower),
    "metal": sorted({one.name for one in shipped().metals.values()}, key=str.lower),
}
"""Words that an editor offers; others are allowed, too."""
PLAIN = {str: "string", bool: "boolean", int: "integer", float: "number"}


def case_schema() -> Schema:
    """The schema of a whole file, draft 2020-12."""
    whole = _of(CaseEntry)
    shapes: dict[str, type[Entry]] = {"conductor": ConductorKeys, "dielectric": MaterialKeys, "part": Entry}
    definitions: Schema = {
        model.__name__: _of(model)
        for model in (
            BeltEntry, CoatingEntry, DrainEntry, ExpectEntry, FillerEntry, LayerEntry, LimitsEntry, LineKeys, MaskEntry,
            MaterialKeys, OwnMaterialEntry, *PROPERTIES, RangeKeys, ToleranceKeys, TraceEntry, TwistKeys,
        )
    }  # fmt: skip
    for group, own in shapes.items():
        models = {word: combined(own, SHAPES[word]) for word in words_for(f"{group}s", own)}
        definitions |= _chosen_by("shape", group, models, like=group != "part")
    definitions |= _chosen_by("kind", "construction", CONSTRUCTION_KEYS, like=True)
    definitions |= _chosen_by("kind", "boundary", {k: v for k, v in BOUNDARY_KEYS.items() if k != "shield"}, like=False)
    shields = {word: combined(BOUNDARY_KEYS["shield"], SHAPES[word]) for word in words_for("boundary", Entry)}
    definitions |= _chosen_by("shape", "shield", shields, like=False)
    definitions["boundary"]["properties"]["kind"]["enum"].append("shield")
    definitions["boundary"]["allOf"].append(_if("kind", "shield", "shield"))
    definitions |= _wire(definitions)
    head = {"$schema": DIALECT, "title": "nightcap case file"}
    whole["description"] = "A cross-section of conductors and insulation, in its boundary."
    return {**head, **whole, "anyOf": [_needs("conductors"), _needs("constructions")], "$defs": definitions}


def _of(model: type[Entry]) -> Schema:
    """The schema of one model, without those that it refers to."""
    properties = {
        key: _property(key, info) for key, info in zip(words_of(model), model.model_fields.values(), strict=True)
    }
    required = [info.alias or name for name, info in model.model_fields.items() if info.is_required()]
    text = (model.__doc__ or "").strip().partition("\n")[0]
    schema = {"type": "object", "description": text, "properties": properties, "additionalProperties": False}
    rules = _rules(model, properties)
    return {**schema, **({"required": required} if required else {}), **({"allOf": rules} if rules else {})}


def _rules(model: type[Entry], properties: Mapping[str, Schema]) -> list[Schema]:
    """What keys must or must not stand together; what is missing may come from 'like'."""
    pairs = (pair for group in ALTERNATIVES for pair in combinations(group, 2) if set(pair) <= properties.keys())
    rules: list[Schema] = [{"not": _needs(*pair)} for pair in pairs]
    if issubclass(model, MaterialKeys):
        rules.append({"anyOf": [_needs("permittivity"), _needs("material"), _needs("like")]})
    if issubclass(model, OwnMaterialEntry):
        rules.append({"oneOf": [_needs("permittivity"), _needs("conductivity")]})
    return rules


def _property(key: str, info: FieldInfo) -> Schema:
    kind = taken(key, info)
    if key in SUGGESTIONS and kind.get("type") == "string":
        kind = {"anyOf": [{"enum": SUGGESTIONS[key]}, kind]}
    shown = {"default": info.default} if isinstance(info.default, str | bool) and info.default != "" else {}
    return {**kind, **shown, "description": info.description or ""}


def taken(key: str, info: FieldInfo) -> Schema:
    """What a key takes: as its type says, or, for what is read by itself, as HOLDS says."""
    told = [item for item in info.metadata if isinstance(item, WithJsonSchema)]
    if told:
        return dict(told[0].json_schema or {})
    return HOLDS[key] if info.annotation is Any else _by_type(info.annotation)


def _by_type(kind: Any) -> Schema:
    origin, inner = get_origin(kind), get_args(kind)
    if origin in (Union, types.UnionType):
        return _by_type(next(one for one in inner if one is not type(None)))
    told = [item for item in getattr(kind, "__metadata__", ()) if isinstance(item, WithJsonSchema)]
    if told:
        return dict(told[0].json_schema or {})
    if hasattr(kind, "__metadata__"):
        return _by_type(inner[0])
    if origin is Literal:
        return {"enum": list(inner)}
    if origin is tuple and isinstance(inner[0], type) and issubclass(inner[0], Entry):
        return {"type": "array", "items": _of(inner[0])}
    return {"type": PLAIN[kind]}


def _ref(name: str) -> Schema:
    return {"$ref": f"#/$defs/{name}"}


def _mapping(name: str) -> Schema:
    return _mapping_of(_ref(name))


def _mapping_of(schema: Schema) -> Schema:
    return {"type": "object", "additionalProperties": schema}


def _list(name: str) -> Schema:
    return {"type": "array", "items": _ref(name)}


def _needs(*keys: str) -> Schema:
    return {"required": list(keys)}


def _if(key: str, word: str, name: str) -> Schema:
    return {"if": {"properties": {key: {"const": word}}, **_needs(key)}, "then": _ref(name)}


def _chosen_by(key: str, group: str, models: Mapping[str, type[Entry]], *, like: bool) -> Schema:
    """Definitions for entries whose other keys depend on a word: the entry itself, and one for each word.

    like : whether it may take keys over from another entry, so that none is required.
    """
    description = next(iter(models.values())).model_fields[key].description or ""
    properties: Schema = {key: {"enum": list(models), "description": description}}
    entry: Schema = {"type": "object", "properties": properties, "allOf": []}
    entry |= {"anyOf": [_needs(key), _needs("like")]} if like else _needs(key)
    definitions = {group: entry}
    if like:
        properties["like"] = LIKE
        known = {"like", *(word for model in models.values() for word in words_of(model))}
        entry["propertyNames"] = {"enum": sorted(known)}
    for word, model in models.items():
        schema = _of(model)
        schema["properties"][key] = {"const": word, "description": description}
        if like:
            schema["properties"]["like"] = LIKE
            schema["anyOf"] = [_needs("like"), _needs(*schema.pop("required", ()))]
        definitions[f"{group}.{word}"] = schema
        entry["allOf"].append(_if(key, word, f"{group}.{word}"))
    return definitions


def _wire(definitions: Schema) -> Schema:
    """Definitions for the wires of constructions: conductors, circles unless they say something else."""
    wire = {key: value for key, value in definitions["conductor"].items() if key != "anyOf"}
    circle = {key: value for key, value in definitions["conductor.circle"].items() if key != "anyOf"}
    plain = {"if": {"not": _needs("shape")}, "then": _ref("wire.circle")}
    wire["allOf"] = [*wire["allOf"], plain]
    return {"wire": {**wire, "not": _needs("like")}, "wire.circle": circle}


def _any_of(*kinds: Schema) -> Schema:
    return {"anyOf": list(kinds)}


OWN_MATERIALS = _mapping("OwnMaterialEntry")
GROUPED_MATERIALS: Schema = {"propertyNames": {"enum": list(MATERIAL_GROUPS)}, **_mapping_of(OWN_MATERIALS)}
HOLDS: dict[str, Schema] = {
    "parameters": {"type": "object", "additionalProperties": NUMBER},
    "vary": {
        "type": "object",
        "additionalProperties": _any_of({"type": "array"}, _ref("RangeKeys"), _ref("ToleranceKeys")),
    },
    "conductors": _mapping("conductor"),
    "dielectrics": _mapping("dielectric"),
    "constructions": _mapping("construction"),
    "materials": _any_of({"type": "string"}, OWN_MATERIALS, GROUPED_MATERIALS),
    "background": _ref("MaterialKeys"),
    "boundary": _ref("boundary"),
    "symmetry": _list("LineKeys"),
    "twist": _ref("TwistKeys"),
    "limits": _ref("LimitsEntry"),
    "expect": _ref("ExpectEntry"),
    "coatings": _list("CoatingEntry"),
    "parts": _list("part"),
    "wire": _ref("wire"),
    "filler": _ref("FillerEntry"),
    "belt": _ref("BeltEntry"),
    "layers": _list("LayerEntry"),
    "traces": _mapping("TraceEntry"),
    "mask": _ref("MaskEntry"),
    "drain": _ref("DrainEntry"),
    "from": NUMBER,
    "to": NUMBER,
    "tolerance": NUMBER,
}
"""What the keys hold whose entries are read by themselves."""
