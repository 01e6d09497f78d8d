"""Broken case files: each kind of mistake gets its message, with line and key; never anything but CaseError."""

import contextlib
import json
import string
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from nightcap.geometry.case_file import read_case, read_text
from nightcap.geometry.errors import CaseError

BASE = """\
units: mm
accuracy: 1e-4
conductors:
  red: {shape: circle, radius: 0.2, at: [-0.6, 0]}
  white:
    shape: circle
    radius: 0.2
    at: [0.6, 0]
    coatings:
      - {thickness: 0.1, permittivity: 2.3}
boundary: {kind: shield, name: screen, shape: circle, radius: 2}
"""
BOMB = "a: &a [x, x, x, x, x, x, x, x]\n" + "".join(
    f"{b}: &{b} [*{a}, *{a}, *{a}, *{a}, *{a}, *{a}, *{a}, *{a}]\n" for a, b in zip("abcdef", "bcdefg", strict=True)
)


def changed(old: str, new: str) -> str:
    assert old in BASE
    return BASE.replace(old, new, 1)


FAULTS = {
    "empty file": ("", None, "", "is empty"),
    "only comments": ("# nothing\n", None, "", "is empty"),
    "not a mapping": ("- a\n- b\n", 1, "", "must be a mapping"),
    "a single word": ("capacitance", 1, "", "must be a mapping"),
    "broken yaml": ("conductors: [1, 2\n", 2, "", "is not valid YAML"),
    "tab for indent": ("conductors:\n\tred: 1\n", 2, "", "is not valid YAML"),
    "two documents": (BASE + "---\n" + BASE, 12, "", "document"),
    "control character": ("title: \x07\n", None, "", "is not text"),
    "alias bomb": (BOMB, 1, "", "values, aliases included"),
    "alias in itself": ("a: &x [1, *x]\n", 1, "", "contains itself"),
    "nested deeply": ("a: " + "[" * 60 + "]" * 60, 1, "", "levels deep"),
    "nested beyond recursion": ("a: " + "[" * 5000 + "]" * 5000, None, "", "nested too deeply"),
    "key that is a list": ("? [a]\n: 1\n", 1, "", "key that is not a word"),
    "foreign tag": (changed("radius: 0.2,", "radius: !!python/name:os.system '',"), 4, "conductors.red.radius", "tag"),
    "key twice": (BASE + "units: cm\n", 12, "units", "given twice, first in line 1"),
    "unknown key": (BASE + "bondary: 1\n", 12, "bondary", "did you mean 'boundary'?"),
    "unknown key in a conductor": (changed("radius: 0.2,", "raduis: 0.2,"), 4, "conductors.red.raduis", "'radius'?"),
    "unknown key in a coating": (
        changed("thickness:", "thicknes:"),
        10,
        "conductors.white.coatings[0].thicknes",
        "'thickness'?",
    ),
    "unit": (changed("units: mm", "units: furlong"), 1, "units", "allowed: m, cm, mm"),
    "unit of a length": (changed("radius: 0.2,", "radius: 0.2 lightyear,"), 4, "conductors.red.radius", "unknown unit"),
    "length as text": (changed("radius: 0.2,", "radius: small,"), 4, "conductors.red.radius", "not a number"),
    "length as flag": (changed("radius: 0.2,", "radius: true,"), 4, "conductors.red.radius", "must be a number"),
    "length missing": (changed("radius: 0.2,", "radius: ,"), 4, "conductors.red", "exactly one of diameter"),
    "negative radius": (changed("radius: 0.2,", "radius: -0.2,"), 4, "conductors.red.radius", "greater than 0"),
    "zero radius": (changed("radius: 0.2,", "radius: 0,"), 4, "conductors.red.radius", "greater than 0"),
    "infinite radius": (changed("radius: 0.2,", "radius: 1e999,"), 4, "conductors.red.radius", "too large"),
    "radius of a galaxy": (changed("radius: 0.2,", "radius: 1e30,"), 4, "conductors.red.radius", "at most"),
    "integer without end": (
        changed("radius: 0.2,", f"radius: {'9' * 290},"),
        4,
        "conductors.red.radius",
        "at most",
    ),
    "not a number": (changed("radius: 0.2,", "radius: .nan,"), 4, "conductors.red.radius", "not a number"),
    "two sizes": (changed("radius: 0.2,", "radius: 0.2, diameter: 0.4,"), 4, "conductors.red", "radius are given"),
    "no size": (changed("radius: 0.2,", ""), 4, "conductors.red", "none is given"),
    "gauge": (changed("radius: 0.2,", "awg: 99,"), 4, "conductors.red.awg", "0 to 50"),
    "gauge with oughts": (changed("radius: 0.2,", "awg: 5/0,"), 4, "conductors.red.awg", "4/0"),
    "point": (changed("at: [-0.6, 0]", "at: [1, 2, 3]"), 4, "conductors.red.at", "pair of lengths"),
    "point as number": (changed("at: [-0.6, 0]", "at: 3"), 4, "conductors.red.at", "pair of lengths"),
    "no shape": (changed("shape: circle, radius: 0.2,", "radius: 0.2,"), 4, "conductors.red", "'shape' is missing"),
    "unknown shape": (changed("shape: circle,", "shape: cirlce,"), 4, "conductors.red.shape", "did you mean 'circle'?"),
    "shape as list": (changed("shape: circle,", "shape: [circle],"), 4, "conductors.red.shape", "not known"),
    "conductor as number": (
        changed("  red: {shape: circle, radius: 0.2, at: [-0.6, 0]}", "  red: 5"),
        4,
        "conductors.red",
        "must be a mapping",
    ),
    "conductors as list": ("conductors: [1]\nboundary: {kind: open}\n", 1, "conductors", "from names to entries"),
    "no conductors": ("boundary: {kind: open}\n", 1, "", "'conductors' is missing"),
    "empty conductors": ("conductors: {}\nboundary: {kind: open}\n", 1, "conductors", "at least one"),
    "conductor's name": (changed("  red:", '  "red wire!":'), 4, "conductors.red wire!", "a name starts"),
    "corner radius": (
        changed("shape: circle, radius: 0.2,", "shape: rectangle, width: 1, height: 0.2, corner_radius: 0.3,"),
        4,
        "conductors.red",
        "half of the shorter side",
    ),
    "rectangle without height": (
        changed("shape: circle, radius: 0.2,", "shape: rectangle, width: 1,"),
        4,
        "conductors.red",
        "'height' is missing",
    ),
    "polygon of two points": (
        changed("shape: circle, radius: 0.2, at: [-0.6, 0]", "shape: polygon, points: [[0, 0], [1, 1]]"),
        4,
        "conductors.red.points",
        "at least 3",
    ),
    "polygon that crosses itself": (
        changed("shape: circle, radius: 0.2, at: [-0.6, 0]", "shape: polygon, points: [[0,0], [1,1], [1,0], [0,1.5]]"),
        4,
        "conductors.red",
        "cross or touch",
    ),
    "polygon without area": (
        changed("shape: circle, radius: 0.2, at: [-0.6, 0]", "shape: polygon, points: [[0,0], [1,1], [2,2]]"),
        4,
        "conductors.red",
        "no area",
    ),
    "polygon with a double point": (
        changed("shape: circle, radius: 0.2, at: [-0.6, 0]", "shape: polygon, points: [[0,0], [0,0], [1,0], [0,1]]"),
        4,
        "conductors.red",
        "are the same",
    ),
    "coating on a hollow polygon": (
        changed(
            "    shape: circle\n    radius: 0.2\n    at: [0.6, 0]\n",
            "    shape: polygon\n    points: [[0, 0], [3, 0], [3, 9], [2, 9], [2, 1], [1.9, 1], [1.9, 9], [0, 9]]\n",
        ),
        9,
        "conductors.white.coatings[0]",
        "too thick for a hollow corner",
    ),
    "coatings as mapping": (
        changed("      - {thickness: 0.1, permittivity: 2.3}", "      thickness: 0.1"),
        9,
        "conductors.white.coatings",
        "list of layers",
    ),
    "permittivity below one": (
        changed("permittivity: 2.3", "permittivity: 0.5"),
        10,
        "conductors.white.coatings[0].permittivity",
        "between 1 and",
    ),
    "material without permittivity": (
        changed("permittivity: 2.3", "material: polyethylen"),
        10,
        "conductors.white.coatings[0]",
        "did you mean 'polyethylene'",
    ),
    "accuracy": (changed("accuracy: 1e-4", "accuracy: 200 %"), 2, "accuracy", "between"),
    "accuracy zero": (changed("accuracy: 1e-4", "accuracy: 0"), 2, "accuracy", "between"),
    "accuracy in mm": (changed("accuracy: 1e-4", "accuracy: 1 mm"), 2, "accuracy", "allowed: %"),
    "no boundary": (BASE[: BASE.index("boundary")], 1, "", "'boundary' is missing"),
    "kind of boundary": (changed("kind: shield", "kind: shied"), 11, "boundary.kind", "did you mean 'shield'?"),
    "boundary as word": (
        changed("boundary: {kind: shield, name: screen, shape: circle, radius: 2}", "boundary: open"),
        11,
        "boundary",
        "must be a mapping",
    ),
    "boundary without kind": (changed("kind: shield, ", ""), 11, "boundary", "'kind' is missing"),
    "open with a name": (
        changed("{kind: shield, name: screen, shape: circle, radius: 2}", "{kind: open, name: x}"),
        11,
        "boundary.name",
        "unknown key",
    ),
    "boundary named like a conductor": (changed("name: screen", "name: red"), 11, "boundary.name", "already"),
    "reference": (BASE + "reference: sreen\n", 12, "reference", "did you mean 'screen'?"),
    "reference as number": (BASE + "reference: 5\n", 12, "reference", "must be text"),
    "floating reference": (
        changed("radius: 0.2,", "radius: 0.2, floating: true,") + "reference: red\n",
        4,
        "conductors.red.floating",
        "cannot float",
    ),
    "floating as text": (
        changed("radius: 0.2,", "radius: 0.2, floating: yes,"),
        4,
        "conductors.red.floating",
        "true or false",
    ),
    "one wire in open space": (
        "conductors: {a: {shape: circle, radius: 1}}\nboundary: {kind: open}\n",
        1,
        "conductors",
        "at least two",
    ),
    "tie of one": (BASE + "tie: [[red]]\n", 12, "tie", "at least two"),
    "tie of strangers": (BASE + "tie: [[red, blue]]\n", 12, "tie[0]", "'blue' is not known"),
    "tie twice": (BASE + "tie: [[red, white], [white, screen]]\n", 12, "tie[1]", "another group"),
    "floating and tied": (
        changed("radius: 0.2,", "radius: 0.2, floating: true,") + "tie: [[red, white]]\n",
        4,
        "conductors.red.floating",
        "cannot float",
    ),
    "nothing left": (BASE + "tie: [[red, white, screen]]\n", 3, "conductors", "none remains"),
    "limits": (BASE + "limits: {triangles: few}\n", 12, "limits.triangles", "whole number"),
    "memory": (BASE + "limits: {memory: 2 apples}\n", 12, "limits.memory", "allowed: B, kB"),
    "time": (BASE + "limits: {time: -1}\n", 12, "limits.time", "between 0"),
    "expectation without source": (BASE + "expect: {relative: [[1]], tolerance: 1e-3}\n", 12, "expect", "'source'"),
    "two expectations": (
        BASE + "expect: {relative: [[1]], capacitance: [[1]], tolerance: 1e-3, source: x}\n",
        12,
        "expect",
        "exactly one",
    ),
    "expectation of another size": (
        BASE + "expect: {relative: [[1]], tolerance: 1e-3, source: x}\n",
        12,
        "expect.relative",
        "must have 2 rows, for red, white",
    ),
    "expectation not symmetric": (
        BASE + "expect: {relative: [[2, -1], [-0.5, 2]], tolerance: 1e-3, source: x}\n",
        12,
        "expect.relative",
        "symmetric",
    ),
    "expectation not square": (
        BASE + "expect: {relative: [[2, -1]], tolerance: 1e-3, source: x}\n",
        12,
        "expect.relative",
        "as many columns",
    ),
    "title as list": (BASE + "title: [a]\n", 12, "title", "must be text"),
}


@pytest.mark.parametrize("fault", FAULTS)
def test_fault(fault: str) -> None:
    text, line, key, words = FAULTS[fault]
    with pytest.raises(CaseError) as caught:
        read_text(text, "broken.yaml")
    problems = caught.value.problems
    assert any(p.line == line and p.key == key and words in p.text for p in problems), list(map(str, problems))
    assert len(problems) <= 3
    assert all(str(p).startswith("broken.yaml") for p in problems)


def test_the_base_of_the_faults_is_right() -> None:
    assert len(read_text(BASE).conductors) == 2


def test_all_mistakes_are_reported_at_once_in_the_order_of_the_file() -> None:
    text = BASE.replace("mm", "m m").replace("1e-4", "much").replace("radius: 0.2,", "radius: -1,").replace("2.3", "x")
    with pytest.raises(CaseError) as caught:
        read_text(text + "bondary: 1\n", "broken.yaml")
    assert [p.line for p in caught.value.problems] == [1, 2, 4, 10, 12]


def test_files_that_cannot_be_read(tmp_path: Path) -> None:
    binary = tmp_path / "binary.yaml"
    binary.write_bytes(bytes(range(128, 256)))
    large = tmp_path / "large.yaml"
    large.write_bytes(b"# " + b"x" * 1_000_001)
    for path, words in (
        (tmp_path, "cannot be read"),
        (tmp_path / "none.yaml", "No such file"),
        (binary, "UTF-8"),
        (large, "larger"),
    ):
        with pytest.raises(CaseError, match=words):
            read_case(path)


trees = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(string.printable, max_size=8),
    lambda children: (
        st.lists(children, max_size=3) | st.dictionaries(st.text("abcde", max_size=4), children, max_size=3)
    ),
    max_leaves=12,
)


def attempt(text: str) -> None:
    """Anything but a case or a CaseError fails the test by itself."""
    with contextlib.suppress(CaseError):
        read_text(text, "random.yaml")


@settings(max_examples=300)
@given(st.text(max_size=60))
def test_random_text_is_answered_by_problems(text: str) -> None:
    attempt(text)


@settings(max_examples=300)
@given(st.sampled_from(BASE.split()), trees)
def test_random_values_anywhere_are_answered_by_problems(word: str, tree: object) -> None:
    attempt(BASE.replace(word, json.dumps(tree), 1))


@settings(max_examples=300)
@given(st.integers(0, len(BASE) - 1), st.integers(1, 12), st.text(string.printable, max_size=3))
def test_random_damage_is_answered_by_problems(start: int, length: int, patch: str) -> None:
    attempt(BASE[:start] + patch + BASE[start + length :])
