"""Mistakes in parameters, like and vary: each gets its message, with line and key."""

from pathlib import Path

import pytest

from nightcap.geometry.case_file import list_variants, read_case, read_text, read_variant, read_variants
from nightcap.geometry.errors import CaseError

BASE = """\
parameters:
  pitch: 1.25
  half: pitch/2
  wall: 0.25
conductors:
  red: {shape: circle, radius: 0.2, at: [-half, 0], coatings: [{thickness: wall, permittivity: 2.3}]}
  white: {like: red, at: [half, 0]}
boundary: {kind: shield, name: screen, shape: circle, radius: 2}
vary:
  pitch: [1.2, 1.3]
"""


def changed(old: str, new: str) -> str:
    assert old in BASE
    return BASE.replace(old, new, 1)


def parameter(entry: str) -> str:
    return changed("  wall: 0.25\n", f"  wall: 0.25\n  {entry}\n")


def vary(entry: str) -> str:
    return changed("pitch: [1.2, 1.3]", entry)


FAULTS = {
    "parameters as list": (
        changed("\n  pitch: 1.25\n  half: pitch/2\n  wall: 0.25", " [1]"),
        1,
        "parameters",
        "mapping",
    ),
    "parameter as list": (parameter("x: [1]"), 5, "parameters.x", "must be a number"),
    "parameter as flag": (parameter("x: true"), 5, "parameters.x", "must be a number"),
    "empty parameter": (parameter("x:"), 5, "parameters.x", "must be a number"),
    "unit of a parameter": (parameter("x: 5 furlong"), 5, "parameters.x", "unknown unit 'furlong'; allowed: m, cm"),
    "formula of a parameter": (parameter("x: 2*(pitch"), 5, "parameters.x", "a bracket is missing"),
    "function of a parameter": (parameter("x: sqr(pitch)"), 5, "parameters.x", "did you mean 'sqrt'?"),
    "attribute": (parameter("x: pitch.real"), 5, "parameters.x", "only names, numbers"),
    "dunder": (parameter("x: __import__('os').getcwd()"), 5, "parameters.x", "starts with a letter"),
    "unknown name": (parameter("x: 2*pich"), 5, "parameters.x", "'pich' is not known; allowed: pitch, half, wall; did"),
    "unknown name alone": (parameter("x: pich"), 5, "parameters.x", "did you mean 'pitch'?"),
    "division by zero": (parameter("x: 1/(wall - 0.25)"), 5, "parameters.x", "divides by zero where wall = 0.25"),
    "root of a negative": (parameter("x: sqrt(-wall)"), 5, "parameters.x", "has no real value"),
    "huge power": (parameter("x: 9**9**9**9"), 5, "parameters.x", "is too large"),
    "circle": (parameter("a: b + 1\n  b: 2*c\n  c: a"), 5, "parameters.a", "in a circle: a -> b -> c -> a"),
    "circle of one": (parameter("x: x + 1"), 5, "parameters.x", "in a circle: x -> x"),
    "name with a dash": (parameter("my-x: 1"), 5, "parameters.my-x", "starts with a letter"),
    "name with an umlaut": (parameter("höhe: 1"), 5, "parameters.höhe", "starts with a letter"),
    "name of a function": (parameter("sin: 1"), 5, "parameters.sin", "is a function"),
    "name of a constant": (parameter("pi: 3"), 5, "parameters.pi", "is a constant"),
    "name of a unit": (parameter("mm: 1"), 5, "parameters.mm", "is a unit"),
    "name of a key": (parameter("limits: 1"), 5, "parameters.limits", "is a key of the file"),
    "name of a column": (parameter("status: 1"), 5, "parameters.status", "is a column"),
    "reserved word": (parameter("lambda: 1"), 5, "parameters.lambda", "is a reserved word"),
    "parameter twice": (parameter("pitch: 1"), 5, "parameters.pitch", "given twice"),
    "unknown name in an entry": (
        changed("radius: 0.2", "radius: wal - 0.1"),
        6,
        "conductors.red.radius",
        "'wal': no such parameter; parameters: pitch, half, wall; did you mean 'wall'?",
    ),
    "unknown word in an entry": (
        changed("radius: 0.2", "radius: wal"),
        6,
        "conductors.red.radius",
        "'wal' is not a number, e.g. 1.5 or \"1.5 mm\", nor a parameter; parameters: pitch, half, wall; did you mean",
    ),
    "formula in an entry": (changed("radius: 0.2", "radius: wall*"), 6, "conductors.red.radius", "nor a formula"),
    "product without a sign": (changed("radius: 0.2", "radius: 2 wall"), 6, "conductors.red.radius", "write 2*wall"),
    "value in an entry": (changed("radius: 0.2", "radius: 1/(wall-wall)"), 6, "conductors.red.radius", "by zero"),
    "negative result": (changed("radius: 0.2", "radius: wall - 1"), 6, "conductors.red.radius", "greater than 0"),
    "gauge that is not whole": (changed("radius: 0.2", "awg: wall*100.5"), 6, "conductors.red.awg", "whole number"),
    "like of none": (changed("like: red", "like: rad"), 7, "conductors.white.like", "did you mean 'red'?"),
    "like of itself": (changed("like: red", "like: white"), 7, "conductors.white.like", "circle: white -> white"),
    "like in a circle": (
        changed("shape: circle, radius: 0.2,", "like: white,"),
        6,
        "conductors.red.like",
        "goes round in a circle: red -> white -> red",
    ),
    "like of a list": (changed("like: red", "like: [red]"), 7, "conductors.white.like", "the name of another"),
    "like of a number": (
        BASE + "dielectrics: {a: 5, b: {like: a}}\n",
        11,
        "dielectrics.a",
        "must be a mapping",
    ),
    "like across groups": (
        BASE + "dielectrics: {a: {like: red, permittivity: 2}}\n",
        11,
        "dielectrics.a.like",
        "'red' is not known",
    ),
    "unknown key beside like": (
        changed("like: red,", "like: red, raduis: 1,"),
        7,
        "conductors.white.raduis",
        "'radius'?",
    ),
    "vary as list": (vary("- pitch"), 9, "vary", "must be a mapping"),
    "empty vary": (changed("vary:\n  pitch: [1.2, 1.3]", "vary: {}"), 9, "vary", "must be a mapping"),
    "vary by a number": (vary("pitch: 1.3"), 10, "vary.pitch", "a list [1.2, 1.3], a range"),
    "vary by an empty list": (vary("pitch: []"), 10, "vary.pitch", "a list [1.2, 1.3], a range"),
    "vary by a word": (vary("pitch: [wide]"), 10, "vary.pitch[0]", "nor a parameter"),
    "vary by a list of lists": (vary("pitch: [[1.2]]"), 10, "vary.pitch[0]", "must be a number"),
    "vary by a unit": (vary("pitch: [1.2 parsec]"), 10, "vary.pitch[0]", "unknown unit"),
    "value twice": (vary("pitch: [1.2, 1.2 mm]"), 10, "vary.pitch", "1.2mm is given twice"),
    "value twice but for rounding": (vary("pitch: [1.2, 1.200000000000001]"), 10, "vary.pitch", "1.2 is given twice"),
    "unknown parameter": (vary("pich: [1.2, 1.3]"), 10, "vary.pich", "depends on 'pich'; did you mean 'pitch'?"),
    "name of a varied parameter": (vary("mm: [1.2, 1.3]"), 10, "vary.mm", "is a unit"),
    "range without end": (vary("pitch: {from: 1, steps: 3}"), 10, "vary.pitch", "the key 'to' is missing"),
    "range without start": (vary("pitch: {to: 1, steps: 3}"), 10, "vary.pitch", "the key 'from' is missing"),
    "key of a range": (vary("pitch: {form: 1, to: 2, steps: 3}"), 10, "vary.pitch.form", "did you mean 'from'?"),
    "one step": (vary("pitch: {from: 1, to: 2, steps: 1}"), 10, "vary.pitch.steps", "from 2 to"),
    "half a step": (vary("pitch: {from: 1, to: 2, steps: 2.5}"), 10, "vary.pitch.steps", "whole number"),
    "range of one value": (vary("pitch: {from: 1, to: 1, steps: 2}"), 10, "vary.pitch", "must differ"),
    "scale": (vary("pitch: {from: 1, to: 2, steps: 2, scale: log}"), 10, "vary.pitch.scale", "linear, logarithmic"),
    "logarithm of zero": (
        vary("pitch: {from: 0, to: 2, steps: 2, scale: logarithmic}"),
        10,
        "vary.pitch",
        "on one side of 0",
    ),
    "tolerance of none": (vary("pich: {tolerance: 1 %}"), 10, "vary.pich", "needs a value of 'pich' in 'parameters'"),
    "tolerance of zero": (vary("pitch: {tolerance: 0}"), 10, "vary.pitch.tolerance", "greater than 0"),
    "tolerance as list": (vary("pitch: {tolerance: [1]}"), 10, "vary.pitch.tolerance", "must be a number"),
    "tolerance with a range": (vary("pitch: {tolerance: 1 %, steps: 3}"), 10, "vary.pitch.steps", "unknown key"),
    "value that is varied": (vary("pitch: [1.2, half]"), 10, "vary.pitch[1]", "depends on 'half', which is varied"),
    "paired range": (vary('"pitch, wall": {from: 1, to: 2, steps: 2}'), 10, "vary.pitch, wall", "list of lists"),
    "pair of three": (vary('"pitch, wall": [[1, 2, 3]]'), 10, "vary.pitch, wall[0]", "2 numbers, one each for pitch"),
    "varied twice": (vary('"pitch, wall": [[1.2, 0.2]]\n  pitch: [1.2]'), 11, "vary.pitch", "is varied twice"),
    "too many": (
        vary("pitch: {from: 1.2, to: 1.3, steps: 1000}\n  wall: {from: 0.1, to: 0.2, steps: 12}"),
        9,
        "vary",
        "makes 12000 variants; 'variants' in 'limits' allows 10000",
    ),
    "too many for the file": (BASE + "limits: {variants: 1}\n", 9, "vary", "makes 2 variants"),
    "astronomically many": (
        vary("pitch: {from: 1.2, to: 1.3, steps: 1e6}\n  wall: {from: 0.1, to: 0.2, steps: 1000000}"),
        9,
        "vary",
        "makes 1000000000000 variants",
    ),
    "limit of variants": (BASE + "limits: {variants: 0}\n", 11, "limits.variants", "from 1 to 1000000"),
}


@pytest.mark.parametrize("fault", FAULTS)
def test_fault(fault: str, tmp_path: Path) -> None:
    text, line, key, words = FAULTS[fault]
    path = tmp_path / "broken.yaml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(CaseError) as caught:
        read_variants(path)
    problems = caught.value.problems
    assert any(p.line == line and p.key == key and words in p.text for p in problems), list(map(str, problems))
    assert len(problems) <= 2, list(map(str, problems))
    with pytest.raises(CaseError):
        list_variants(path)


def test_the_base_of_the_faults_is_right(tmp_path: Path) -> None:
    path = tmp_path / "right.yaml"
    path.write_text(BASE)
    assert len(read_variants(path)) == 2


def test_all_mistakes_are_told_at_once() -> None:
    text = BASE.replace("1.25", "1/0").replace("wall: 0.25", "wall: -1").replace("like: red", "like: blue")
    with pytest.raises(CaseError) as caught:
        read_text(text.replace("[1.2, 1.3]", "5") + "bondary: 1\n", "x.yaml")
    assert [p.line for p in caught.value.problems] == [2, 6, 7, 10, 11]


def test_what_follows_from_a_wrong_parameter_is_not_told() -> None:
    with pytest.raises(CaseError) as caught:
        read_text(BASE.replace("wall: 0.25", "wall: 1/0").replace("half: pitch/2", "half: pitch/wall"), "x.yaml")
    assert [p.key for p in caught.value.problems] == ["parameters.wall"]


def told(text: str, tmp_path: Path) -> list[str]:
    path = tmp_path / "x.yaml"
    path.write_text(text)
    with pytest.raises(CaseError) as caught:
        read_variants(path)
    return [f"{p.line}: {p.key}: {p.text}" for p in caught.value.problems]


def test_a_mistake_of_one_variant_is_told_with_its_name(tmp_path: Path) -> None:
    text = vary("wall: [0.2, -0.1, 0.3]\n  pitch: [1.2, 1.3]").replace("like: red", "shape: circle, radius: 0.2")
    assert told(text, tmp_path) == [
        "6: conductors.red.coatings[0].thickness: in variant wall=-0.1,pitch=1.2 and 1 other: must be greater than 0"
    ]
    outcomes = list_variants(tmp_path / "x.yaml")
    assert [values["wall"] for _, values in outcomes] == [0.2e-3, 0.2e-3, -0.1e-3, -0.1e-3, 0.3e-3, 0.3e-3]
    assert read_variant(tmp_path / "x.yaml", "wall=0.3,pitch=1.2").variant_name == "wall=0.3,pitch=1.2"
    assert read_case(tmp_path / "x.yaml").variant_name == "wall=0.2,pitch=1.2"
    with pytest.raises(CaseError, match="greater than 0"):
        read_variant(tmp_path / "x.yaml", "wall=-0.1,pitch=1.2")
    with pytest.raises(CaseError, match="no variant wall=7 any more"):
        read_variant(tmp_path / "x.yaml", "wall=7")


def test_a_mistake_that_all_variants_share_is_told_once(tmp_path: Path) -> None:
    assert told(BASE.replace("radius: 0.2", "radius: -0.2"), tmp_path) == [
        "6: conductors.red.radius: must be greater than 0"  # also of 'white', which took the key over
    ]
    text = BASE.replace("radius: 0.2", "radius: pitch - 2")
    assert told(text, tmp_path) == ["6: conductors.red.radius: must be greater than 0"]
    text = BASE.replace("half: pitch/2", "half: sqrt(1 - pitch)")
    assert told(text, tmp_path) == [
        "3: parameters.half: in every variant, here pitch=1.2: 'sqrt(1 - pitch)' has no real value where pitch = 1.2"
    ]


def test_likes_cannot_make_a_file_grow_without_end() -> None:
    many = ", ".join("[0, 0]" for _ in range(3000))
    entries = "\n".join(f"  p{k}: {{like: p0}}" for k in range(1, 200))
    text = f"conductors:\n  p0: {{shape: polygon, points: [{many}]}}\n{entries}\nboundary: {{kind: open}}\n"
    with pytest.raises(CaseError, match="'like' makes the file hold more than"):
        read_text(text)


def test_formulas_cannot_grow_without_end() -> None:
    with pytest.raises(CaseError, match="more than 300 characters"):
        read_text(parameter(f"x: {'1+' * 400}1"))
    with pytest.raises(CaseError, match="at most 500"):
        read_text("parameters:\n" + "\n".join(f"  a{k}: 1" for k in range(501)))
