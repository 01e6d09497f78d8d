"""Tables of the keys of a case file, from the models that check it."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

from nightcap.geometry.case_file.json_schema import taken
from nightcap.geometry.case_file.likeness import ALTERNATIVES
from nightcap.geometry.case_file.materials import MaterialKeys, MetalKeys
from nightcap.geometry.case_file.schema import Entry, words_of
from nightcap.geometry.case_file.units import LENGTHS

GROUPS = (
    *ALTERNATIVES,
    ("points", "width"),
    ("ring", "row", "mirror", "rotate", "move"),
    ("pitch_diameter", "between"),
    ("x", "y"),
    ("capacitance", "relative"),
    ("permittivity", "conductivity"),
)
"""Keys of which an entry that has several of them takes exactly one."""
PLACES = {
    "conductor": ("conductor", "conductors"),
    "dielectric": ("dielectric", "dielectrics"),
    "construction": ("construction", "constructions"),
    "boundary": ("boundary", "boundaries"),
    "wire": ("conductor", "conductors"),
    "part": ("shape", "shapes"),
    "CoatingEntry": ("coating", "coatings"),
    "MaterialKeys": ("material", "materials"),
    "OwnMaterialEntry": ("material of its own", "materials-of-a-file-of-its-own"),
    "PermittivityEntry": ("property in full", "materials-of-a-file-of-its-own"),
    "LossTangentEntry": ("property in full", "materials-of-a-file-of-its-own"),
    "BreakdownEntry": ("property in full", "materials-of-a-file-of-its-own"),
    "ConductivityEntry": ("property in full", "materials-of-a-file-of-its-own"),
    "LineKeys": ("line", "symmetry"),
    "TwistKeys": ("twist", "twist"),
    "LimitsEntry": ("limits", "limits"),
    "ExpectEntry": ("expectation", "expect"),
    "RangeKeys": ("range", "vary"),
    "ToleranceKeys": ("tolerance", "vary"),
    "FillerEntry": ("filler", "filler-and-belt"),
    "BeltEntry": ("belt", "filler-and-belt"),
    "LayerEntry": ("layer", "construction-board"),
    "TraceEntry": ("trace", "construction-board"),
    "MaskEntry": ("mask", "construction-board"),
    "DrainEntry": ("drain wire", "construction-screen"),
}
"""What a key holds, by the name that the schema has for it: a word, and the part of the page that tells of it."""
UNIT = "[unit of length](#how-values-are-written)"
NOTHING = ""
CHOSEN_BY = ("shape", "kind")
"""The keys that say which other keys there are; the headings name them."""
PLACE = ("at", "rotate")
"""Keys that come last, unless they are what an entry is about."""
ELSEWHERE: tuple[tuple[type[Entry], str], ...] = (
    (MaterialKeys, "the keys of a [material](#materials)"),
    (MetalKeys, "the keys of a [metal](#metals)"),
)
"""Keys that many entries share and that have a table of their own."""


def table(model: type[Entry], without: Sequence[type[Entry]] = ()) -> str:
    """The keys of a model but those of other models: what each takes, its default, its meaning."""
    shared = [(base, text) for base, text in ELSEWHERE if issubclass(model, base) and model is not base]
    hidden = {key for base in (*without, *(base for base, _ in shared)) for key in words_of(base)}
    rows = list(_rows(model, hidden))
    lines = ["| key | takes | default | meaning |", "|---|---|---|---|", *rows] if rows else []
    if shared:
        lines += ["", f"{'And ' if rows else 'It has '}{' and '.join(text for _, text in shared)}."]
    return "\n".join(lines)


def _rows(model: type[Entry], hidden: set[str]) -> Iterator[str]:
    fields = zip(words_of(model), model.model_fields.values(), strict=True)
    for key, info in sorted(fields, key=lambda field: field[0] in PLACE and field[1].default is not None):
        if key in hidden or key in CHOSEN_BY:
            continue
        kind = taken(key, info)
        default = "**required**" if info.is_required() else _default(key, info.default, kind)
        group = _alternatives(model, key)
        default = f"one of {', '.join(f'`{one}`' for one in group)}" if group else default
        cells = (f"`{key}`", words_for(kind), default, info.description or "")
        yield f"| {' | '.join(cell.replace('|', chr(92) + '|') for cell in cells)} |"


def alternatives(model: type[Entry]) -> list[tuple[str, ...]]:
    """The groups of keys of which a model takes exactly one."""
    optional = {
        key
        for key, info in zip(words_of(model), model.model_fields.values(), strict=True)
        if not info.is_required() and info.default is None
    }
    groups = [tuple(key for key in group if key in optional) for group in GROUPS]
    return [group for group in groups if len(group) > 1]


def _alternatives(model: type[Entry], key: str) -> tuple[str, ...]:
    return next((group for group in alternatives(model) if key in group), ())


def _default(key: str, value: Any, kind: dict[str, Any]) -> str:
    """A default as one would write it in a file; nothing for what is then not there."""
    return NOTHING if value is None or value in ("", ()) else f"`{_written(key, value, kind.get('title', ''))}`"


def _written(key: str, value: Any, title: str) -> str:
    if isinstance(value, bool | str):
        return str(value).lower() if isinstance(value, bool) else value
    if isinstance(value, tuple):
        return f"[{', '.join(f'{item:g}' for item in value)}]"
    if key == "units":
        return next(unit for unit, metres in LENGTHS.items() if metres == value)
    of_unit = {"bytes": f"{value / 1e9:g} GB", "seconds": f"{value / 60:g} min"}.get(title.partition(",")[0])
    return of_unit or (str(value) if isinstance(value, int) else _short(value))


def _short(value: float) -> str:
    """Such as 0.5 or 1e-4."""
    digits, exponent = f"{value:e}".split("e")
    return f"{float(digits):g}e{int(exponent)}" if 0 < abs(value) < 1e-2 else f"{value:g}"


def words_for(kind: dict[str, Any]) -> str:
    """What a key takes, from its schema."""
    if "title" in kind:
        return str(kind["title"])
    if "enum" in kind:
        return UNIT if set(kind["enum"]) == set(LENGTHS) else ", ".join(f"`{word}`" for word in kind["enum"])
    if "anyOf" in kind:
        return " or ".join(dict.fromkeys(words_for(one) for one in kind["anyOf"]))
    if "$ref" in kind:
        word, anchor = PLACES[kind["$ref"].rpartition("/")[2]]
        return f"[{word}](#{anchor})"
    return _of_several(kind)


def _of_several(kind: dict[str, Any]) -> str:
    """What a mapping, a list, or a plain value takes."""
    below = kind.get("additionalProperties")
    if isinstance(below, dict):
        return f"{'headings with' if 'additionalProperties' in below else 'names, each a'} {words_for(below)}"
    if isinstance(kind["type"], list):
        return "number"
    if kind["type"] == "array" and "items" in kind:
        return f"list of {words_for(kind['items'])}"
    return {"string": "text", "boolean": "`true` or `false`", "object": "mappings, see below", "array": "list"}[
        kind["type"]
    ]
