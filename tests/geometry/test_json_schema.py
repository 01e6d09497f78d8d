"""The schema of a case file: right by the standard, and agreeing with what the reader takes."""

from collections.abc import Iterator
from pathlib import Path
from typing import Any

import jsonschema
import pytest
import yaml

from nightcap.geometry.case_file import read_text
from nightcap.geometry.case_file.constructions import KINDS
from nightcap.geometry.case_file.json_schema import SUGGESTIONS, case_schema
from nightcap.geometry.case_file.shapes import SHAPES
from nightcap.geometry.errors import CaseError

CASES = Path(__file__).parents[2] / "cases"
SCHEMA = case_schema()
CHECKER = jsonschema.Draft202012Validator(SCHEMA)
GOOD = """\
parameters: {pitch: 0.4}
conductors:
  red: {shape: circle, radius: 0.2, at: [0, 0], coatings: [{thickness: 0.1, material: polyethylene}]}
  white: {like: red, at: [1, pitch/2]}
constructions:
  tape: {kind: ribbon, count: 3, wire: {diameter: 0.3}}
boundary: {kind: shield, shape: circle, radius: 2}
"""


def described(schema: Any, path: str = "") -> Iterator[tuple[str, Any]]:
    """Every property, wherever it stands, with its path; conditions ('if') only compare, and are left out."""
    if isinstance(schema, list):
        for k, item in enumerate(schema):
            yield from described(item, f"{path}[{k}]")
    elif isinstance(schema, dict):
        for key, value in schema.items():
            if key == "properties":
                yield from ((f"{path}.{name}", entry) for name, entry in value.items())
            if key != "if":
                yield from described(value, f"{path}.{key}")


def mistakes(text: str) -> list[str]:
    return [error.message for error in CHECKER.iter_errors(yaml.safe_load(text))]


def test_it_is_a_schema() -> None:
    jsonschema.Draft202012Validator.check_schema(SCHEMA)


def test_every_key_has_a_description() -> None:
    properties = list(described(SCHEMA))
    assert len(properties) > 300
    assert [path for path, entry in properties if not entry.get("description")] == []
    definitions: Any = SCHEMA["$defs"]
    assert [name for name, entry in definitions.items() if "." in name and not entry.get("description")] == []


@pytest.mark.parametrize("path", sorted(CASES.rglob("*.yaml")), ids=lambda path: path.stem)
def test_shipped_cases_agree_with_it(path: Path) -> None:
    assert mistakes(path.read_text()) == []


def test_words_come_from_the_tables() -> None:
    definitions: Any = SCHEMA["$defs"]
    taken = set(definitions["conductor"]["properties"]["shape"]["enum"])
    taken |= set(definitions["dielectric"]["properties"]["shape"]["enum"])
    assert taken == set(SHAPES)
    assert set(definitions["construction"]["properties"]["kind"]["enum"]) == set(KINDS)


def test_known_materials_are_offered_and_others_allowed() -> None:
    definitions: Any = SCHEMA["$defs"]
    assert "polyethylene" in SUGGESTIONS["material"]
    assert definitions["CoatingEntry"]["properties"]["material"]["anyOf"][0]["enum"] == SUGGESTIONS["material"]
    assert definitions["conductor.circle"]["properties"]["metal"]["anyOf"][0]["enum"] == SUGGESTIONS["metal"]
    assert mistakes(GOOD.replace("material: polyethylene", "material: beeswax")) == []


OWN = {
    "short": "{wax: {permittivity: 2.2, loss_tangent: 1e-3}, tin plate: {conductivity: 8e6}}",
    "in full": "{wax: {permittivity: {value: 2.2, range: [2.1, 2.3], source: shelf}, aliases: [candle]}}",
    "with headings": "{insulations: {wax: {permittivity: 2.2}}, metals: {tin plate: {conductivity: 8e6}}}",
    "beside": "stock.materials.yaml",
}


@pytest.mark.parametrize("kind", OWN)
def test_own_materials(kind: str) -> None:
    assert mistakes(f"{GOOD}materials: {OWN[kind]}\n") == []


WRONG_OWN = ("[wax]", "{wax: {permitivity: 2.2}}", "{wax: {loss_tangent: 1}}", "{wax: {permittivity: {range: [1, 2]}}}")


@pytest.mark.parametrize("own", WRONG_OWN)
def test_wrong_own_materials_are_refused(own: str) -> None:
    assert mistakes(f"{GOOD}materials: {own}\n")


WRONG = {
    "a key that is unknown": ("radius: 0.2,", "raduis: 0.2,"),
    "a key of another shape": ("radius: 0.2,", "radius: 0.2, width: 3,"),
    "a shape that is unknown": ("shape: circle, radius: 0.2,", "shape: cirle, radius: 0.2,"),
    "no shape": ("shape: circle, radius: 0.2,", "radius: 0.2,"),
    "two sizes": ("radius: 0.2,", "radius: 0.2, diameter: 0.4,"),
    "a coating of nothing": (", material: polyethylene", ""),
    "a key that is unknown beside like": ("like: red, at:", "like: red, att:"),
    "a key that is unknown in a wire": ("wire: {diameter: 0.3}", "wire: {diametr: 0.3}"),
    "a key of another shape in a wire": ("wire: {diameter: 0.3}", "wire: {diameter: 0.3, width: 2}"),
    "like in a wire": ("wire: {diameter: 0.3}", "wire: {diameter: 0.3, like: red}"),
    "a law that is unknown": ("material: polyethylene", "material: polyethylene, gas_fraction: 0.5, mixing: looyenge"),
    "a point of one number": ("at: [0, 0]", "at: [0]"),
    "a number as a mapping": ("thickness: 0.1", "thickness: {a: 1}"),
    "a kind that is unknown": ("kind: ribbon", "kind: ribon"),
    "no wire": (", wire: {diameter: 0.3}", ""),
    "no boundary": ("boundary: {kind: shield, shape: circle, radius: 2}", "title: none"),
    "a boundary without shape": (", shape: circle, radius: 2}", "}"),
    "a slab as a conductor": ("shape: circle, radius: 0.2,", "shape: slab, to: 0,"),
    "an unknown key of the file": ("conductors:", "conducters: {}\nconductors:"),
}


def test_good_text_has_no_mistakes() -> None:
    assert mistakes(GOOD) == []
    assert len(read_text(GOOD).conductors) == 5


@pytest.mark.parametrize("kind", WRONG)
def test_typical_mistakes_are_refused(kind: str) -> None:
    old, new = WRONG[kind]
    assert old in GOOD
    assert mistakes(GOOD.replace(old, new, 1))
    with pytest.raises(CaseError):
        read_text(GOOD.replace(old, new, 1))
