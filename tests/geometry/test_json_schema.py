"""The schema of a case file: right by the standard, and agreeing with what the reader takes."""

from pathlib import Path
from typing import Any

import jsonschema
import pytest
import yaml

from nightcap.geometry.case_file.constructions import KINDS
from nightcap.geometry.case_file.json_schema import case_schema, described
from nightcap.geometry.case_file.shapes import SHAPES

CASES = Path(__file__).parents[2] / "cases"
SCHEMA = case_schema()
CHECKER = jsonschema.Draft202012Validator(SCHEMA)
GOOD = """\
conductors:
  red: {shape: circle, radius: 0.2, at: [0, 0], coatings: [{thickness: 0.1, material: polyethylene}]}
  white: {like: red, at: [1, pitch/2]}
constructions:
  tape: {kind: ribbon, count: 3, wire: {diameter: 0.3}}
boundary: {kind: shield, shape: circle, radius: 2}
"""


def mistakes(text: str) -> list[str]:
    return [error.message for error in CHECKER.iter_errors(yaml.safe_load(text))]


def test_it_is_a_schema() -> None:
    jsonschema.Draft202012Validator.check_schema(SCHEMA)


def test_every_key_has_a_description() -> None:
    properties = list(described(SCHEMA))
    assert len(properties) > 300
    assert [path for path, entry in properties if not entry.get("description")] == []


@pytest.mark.parametrize("path", sorted(CASES.rglob("*.yaml")), ids=lambda path: path.stem)
def test_shipped_cases_agree_with_it(path: Path) -> None:
    assert mistakes(path.read_text()) == []


def test_words_come_from_the_tables() -> None:
    definitions: Any = SCHEMA["$defs"]
    taken = set(definitions["conductor"]["properties"]["shape"]["enum"])
    taken |= set(definitions["dielectric"]["properties"]["shape"]["enum"])
    assert taken == set(SHAPES)
    assert set(definitions["construction"]["properties"]["kind"]["enum"]) == set(KINDS)


WRONG = {
    "a key that is unknown": ("radius: 0.2,", "raduis: 0.2,"),
    "a key of another shape": ("radius: 0.2,", "radius: 0.2, width: 3,"),
    "a shape that is unknown": ("shape: circle, radius: 0.2,", "shape: cirle, radius: 0.2,"),
    "no shape": ("shape: circle, radius: 0.2,", "radius: 0.2,"),
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


@pytest.mark.parametrize("kind", WRONG)
def test_typical_mistakes_are_refused(kind: str) -> None:
    old, new = WRONG[kind]
    assert old in GOOD
    assert mistakes(GOOD.replace(old, new, 1))
