"""Parameters, like and vary that are right."""

from dataclasses import replace
from pathlib import Path

import pytest
from numpy.testing import assert_allclose

from nightcap.geometry.case import Case, Shield
from nightcap.geometry.case_file import list_variants, read_case, read_text, read_variant, read_variants
from nightcap.geometry.errors import CaseError
from nightcap.geometry.shapes import Circle, Rectangle, Strands

PAIR = """\
units: mm
accuracy: 1e-4
parameters:
{parameters}
conductors:
  red: {{shape: circle, diameter: core, at: [-pitch/2, 0], coatings: [{{thickness: wall, permittivity: eps}}]}}
  white: {{like: red, at: [pitch/2, 0]}}
boundary: {{kind: shield, name: screen, shape: circle, diameter: 3.6}}
{rest}
"""
PLAIN = """\
units: mm
accuracy: 1e-4
conductors:
  red: {shape: circle, diameter: 0.5, at: [-0.625, 0], coatings: [{thickness: 0.25, permittivity: 2.25}]}
  white: {shape: circle, diameter: 0.5, at: [0.625, 0], coatings: [{thickness: 0.25, permittivity: 2.25}]}
boundary: {kind: shield, name: screen, shape: circle, diameter: 3.6}
"""
VALUES = {"core": "0.5", "wall": "0.25", "pitch": "core + 2*wall + gap", "gap": "0.25", "eps": "2.25"}


def pair(rest: str = "", **changed: str | None) -> str:
    written = {name: value for name, value in {**VALUES, **changed}.items() if value is not None}
    lines = "\n".join(f"  {name}: {value}" for name, value in written.items())
    return PAIR.format(parameters=lines, rest=rest)


def bare(case: Case) -> Case:
    """The case as it would be without parameters."""
    return replace(case, parameters=(), variant={}, variant_name="")


@pytest.fixture
def file(tmp_path: Path) -> Path:
    return tmp_path / "pair.yaml"


def variants(file: Path, rest: str, **changed: str | None) -> tuple[Case, ...]:
    file.write_text(pair(rest, **changed))
    return read_variants(file)


def values(cases: tuple[Case, ...], name: str) -> list[float]:
    return [case.variant[name] for case in cases]


def test_parameters_and_like_say_the_same_as_numbers() -> None:
    assert bare(read_text(pair())) == read_text(PLAIN)


def test_order_of_derived_parameters_does_not_matter() -> None:
    turned = dict(reversed(VALUES.items()))
    text = PAIR.format(parameters="\n".join(f"  {n}: {v}" for n, v in turned.items()), rest="")
    assert bare(read_text(text)) == read_text(PLAIN)


def test_parameters_stand_in_every_kind_of_number() -> None:
    case = read_text(
        """
units: mil
accuracy: tight*2
parameters: {n: 24, tight: 0.01 %, turn: 15, w: 12, count: 1000, c: "2*pi/log(2)"}
conductors:
  a: {shape: circle, awg: n, at: [0, 50]}
  b: {shape: rectangle, width: w, height: w/3 + 1 mil, at: ["-max(w, 40)", w], corner_radius: w/12, rotate: turn*2}
  c: {shape: polygon, points: [[100, 0], ["100 + w", 0], [100, w**2/12]]}
boundary: {kind: ground_plane, at: -w}
limits: {triangles: count*5, time: 60*10, memory: 2e9}
expect: {relative: [[c, -1, -1], [-1, c/1, -1], [-1, -1, c]], tolerance: tight, source: made up}
"""
    )
    mil = 25.4e-6
    _, b, c = case.conductors
    assert isinstance(b.shape, Rectangle)
    assert_allclose([b.shape.width, b.shape.height, b.shape.corner_radius], [12 * mil, 5 * mil, mil], rtol=1e-15)
    assert_allclose(b.shape.centre, [-40 * mil, 12 * mil], rtol=1e-15)
    assert_allclose(b.shape.angle, 0.5235987755982988, rtol=1e-15)  # pi/6
    assert_allclose(c.shape.outline()[1].end, [100 * mil, 12 * mil], rtol=1e-15)
    assert case.accuracy == 2e-4
    assert (case.limits.triangles, case.limits.time) == (5000, 600.0)
    assert case.expect is not None
    assert_allclose(case.expect.capacitance[0][0], 9.06472028365439 * 8.8541878188e-12, rtol=1e-14)  # 2 pi / ln 2


def test_text_that_is_no_number_is_left_alone() -> None:
    case = read_text(
        pair("title: pitch/2\n")
        .replace("permittivity: eps", "permittivity: eps, material: core")
        .replace("red", "pitch")
    )
    assert case.title == "pitch/2"
    assert case.conductors[0].name == "pitch"
    assert case.conductors[0].coatings[0].material.name == "core"


def test_a_case_knows_its_parameters() -> None:
    case = read_text(pair(spare="7", core="20 mil"))
    found = {p.name: p for p in case.parameters}
    assert list(found) == ["core", "wall", "pitch", "gap", "eps", "spare"]
    assert [name for name, p in found.items() if p.is_length] == ["core", "wall", "pitch", "gap"]
    assert [name for name, p in found.items() if not p.is_used] == ["spare"]
    assert found["pitch"].formula == "core + 2*wall + gap"
    assert_allclose(found["core"].value, 508e-6, rtol=1e-15)
    assert_allclose(found["pitch"].value, 508e-6 + 0.75e-3, rtol=1e-15)
    assert (found["eps"].value, found["spare"].value) == (2.25, 7.0)


@pytest.mark.parametrize(
    ("formula", "is_length"), [("x", True), ("-x/2", True), ("1 + 3*x", True), ("3/x", False), ("x**2", False)]
)
def test_a_parameter_is_a_length_if_it_is_added_up_to_one(formula: str, is_length: bool, file: Path) -> None:
    cases = variants(file, "vary: {x: [0.3, 0.4]}", gap=formula if formula != "-x/2" else "1 - x/2")
    assert_allclose(values(cases, "x"), [0.3e-3, 0.4e-3] if is_length else [0.3, 0.4], rtol=1e-15)


def test_a_unit_makes_a_length_and_so_does_use_further_on(file: Path) -> None:
    cases = variants(file, "vary: {ratio: [1 mm, 2]}", gap="ratio/4")
    assert_allclose(values(cases, "ratio"), [1e-3, 2e-3], rtol=1e-15)
    cases = variants(file, "vary: {ratio: [1, 2]}", gap="core*ratio")
    assert_allclose(values(cases, "ratio"), [1.0, 2.0], rtol=1e-15)


def test_like_takes_over_what_is_not_given() -> None:
    text = """
conductors:
  c: {like: b, at: [4, 0], radius: 0.3}
  b: {like: a, at: [2, 0], coatings: }
  a:
    shape: circle
    diameter: 0.5
    floating: false
    coatings:
      - {thickness: 0.1, permittivity: 2}
dielectrics:
  low: {shape: circle, radius: 1, at: [0, -4], permittivity: 3}
  high: {like: low, at: [0, 4]}
boundary: {kind: open}
"""
    case = read_text(text, "x.yaml")
    c, b, a = case.conductors
    assert isinstance(c.shape, Circle)
    assert isinstance(b.shape, Circle)
    assert_allclose([c.shape.radius, b.shape.radius], [0.3e-3, 0.25e-3], rtol=1e-15)
    assert (len(c.coatings), len(b.coatings), len(a.coatings)) == (0, 0, 1)
    assert case.dielectrics[1].material == case.dielectrics[0].material
    assert case.source.lines["conductors.b.diameter"] == 7
    assert case.source.lines["conductors.b.at"] == 4
    assert case.source.lines["conductors.c.shape"] == 6


def test_like_gives_strands_another_size_in_another_way() -> None:
    text = """
conductors:
  a: {shape: strands, count: 7, strand_diameter: 0.2, at: [-2, 0]}
  b: {like: a, overall_diameter: 0.9, at: [0, 0]}
  c: {like: b, awg: 36, at: [2, 0]}
boundary: {kind: open}
"""
    shapes = [conductor.shape for conductor in read_text(text).conductors]
    radii = [shape.overall_radius for shape in shapes if isinstance(shape, Strands)]
    assert_allclose(radii, [0.3e-3, 0.45e-3, 1.5 * 0.127e-3], rtol=1e-12)  # AWG 36 is 0.005 in, ASTM B258


def test_a_mistake_in_an_inherited_key_points_to_where_it_was_written() -> None:
    text = pair().replace("permittivity: eps", "permittivity: 0.5")
    with pytest.raises(CaseError, match="between 1 and") as caught:
        read_text(text, "x.yaml")
    assert [(p.key, p.line) for p in caught.value.problems] == [("conductors.red.coatings[0].permittivity", 10)]


def test_a_long_chain_of_likes_is_followed() -> None:
    last = 600
    entries = "\n".join(f"  w{k}: {{like: w{k + 1}, at: [{2 * k}, 0]}}" for k in range(last))
    end = f"  w{last}: {{shape: circle, radius: 0.5, at: [{2 * last}, 0]}}"
    text = f"conductors:\n{entries}\n{end}\nboundary: {{kind: open}}"
    assert len(read_text(text).conductors) == last + 1


def test_one_variant_per_combination_the_last_fastest(file: Path) -> None:
    cases = variants(file, "vary:\n  gap: [0.1, 0.2]\n  eps: [2, 3, 4]")
    assert [case.variant_name for case in cases] == [
        "gap=0.1,eps=2", "gap=0.1,eps=3", "gap=0.1,eps=4", "gap=0.2,eps=2", "gap=0.2,eps=3", "gap=0.2,eps=4",
    ]  # fmt: skip
    assert dict(cases[5].variant) == {"gap": 0.2e-3, "eps": 4.0}
    assert cases[5].conductors[0].coatings[0].material.permittivity == 4.0
    assert_allclose(cases[5].conductors[1].shape.outline()[0].start[0], (0.6 + 0.25) * 1e-3, rtol=1e-15)
    assert {case.name for case in cases} == {"pair"}
    assert read_case(file) == cases[0]
    assert read_variant(file, "gap=0.2,eps=3") == cases[4]
    assert list_variants(file) == tuple((case.variant_name, case.variant) for case in cases)


def test_a_variant_says_the_same_as_its_numbers(file: Path) -> None:
    cases = variants(file, "vary: {gap: [0.1, 0.25, 0.3]}")
    assert bare(cases[1]) == replace(read_text(PLAIN, name="pair"), title="pair")


def test_a_file_that_varies_nothing_has_one_variant_without_a_name(file: Path) -> None:
    (case,) = variants(file, "")
    assert (case.variant_name, dict(case.variant)) == ("", {})
    assert list_variants(file) == ()


def test_ranges(file: Path) -> None:
    cases = variants(file, "vary: {gap: {from: 0.1, to: 0.4, steps: 4}}")
    assert [case.variant_name for case in cases] == ["gap=0.1", "gap=0.2", "gap=0.3", "gap=0.4"]
    assert_allclose(values(cases, "gap"), [1e-4, 2e-4, 3e-4, 4e-4], rtol=1e-15)
    cases = variants(file, "vary: {gap: {from: 10 mil, to: 0.0254, steps: 3, scale: logarithmic}}")
    assert_allclose(values(cases, "gap"), [254e-6, 254e-6 / 10**0.5, 25.4e-6], rtol=1e-11)
    cases = variants(file, "vary: {eps: {from: 1 + 2, to: 2, steps: 2}}")
    assert values(cases, "eps") == [3.0, 2.0]


@pytest.mark.parametrize(
    ("name", "tolerance", "expected"),
    [
        ("gap", "0.02", [0.25e-3, 0.23e-3, 0.27e-3]),
        ("gap", "1 mil", [0.25e-3, 0.2246e-3, 0.2754e-3]),
        ("gap", "10 %", [0.25e-3, 0.225e-3, 0.275e-3]),
        ("eps", "4 %", [2.25, 2.16, 2.34]),
        ("core", "wall/10", [0.5e-3, 0.475e-3, 0.525e-3]),
    ],
)
def test_tolerance_gives_the_value_and_both_ends(name: str, tolerance: str, expected: list[float], file: Path) -> None:
    cases = variants(file, f'vary: {{{name}: {{tolerance: "{tolerance}"}}}}')
    assert_allclose(values(cases, name), expected, rtol=1e-14)


def test_tolerance_of_a_derived_parameter(file: Path) -> None:
    cases = variants(file, "vary: {pitch: {tolerance: 0.05}}")
    assert_allclose(values(cases, "pitch"), [1.25e-3, 1.2e-3, 1.3e-3], rtol=1e-14)


def test_parameters_that_move_together(file: Path) -> None:
    cases = variants(file, 'vary:\n  "gap, eps": [[0.1, 2], [0.2, 3]]\n  wall: [0.2, 0.3]')
    assert [case.variant_name for case in cases] == [
        "gap=0.1,eps=2,wall=0.2", "gap=0.1,eps=2,wall=0.3", "gap=0.2,eps=3,wall=0.2", "gap=0.2,eps=3,wall=0.3",
    ]  # fmt: skip


def test_a_varied_parameter_needs_no_value(file: Path) -> None:
    cases = variants(file, "vary: {gap: [0.1, 0.2]}", gap=None)
    assert_allclose([case.parameters[2].value for case in cases], [1.1e-3, 1.2e-3], rtol=1e-14)


def test_values_stand_in_names_as_they_were_written(file: Path) -> None:
    cases = variants(file, 'vary: {gap: ["5 mil", 100 µm, 0.3000, 1/4, 2e-1], eps: [200 %]}')
    assert [case.variant_name.split(",")[0] for case in cases] == [
        "gap=5mil", "gap=100um", "gap=0.3", "gap=0.25", "gap=0.2",
    ]  # fmt: skip
    assert {case.variant_name.split(",")[1] for case in cases} == {"eps=200pct"}


def test_long_names_are_cut_and_stay_apart(file: Path) -> None:
    long = "x" * 60
    cases = variants(
        file, f"vary: {{{long}: [0.1, 0.2], eps: {{from: 2, to: 3, steps: 7}}, wall: [0.25, 0.2504321]}}", gap=long
    )
    names = [case.variant_name for case in cases]
    assert len(set(names)) == len({name.casefold() for name in names}) == 28
    assert max(map(len, names)) <= 100
    wide = variants(file, f"vary: {{{long}: [0.1, 0.2], {long}y: [1, 2, 3]}}", gap=f"{long}*{long}y")
    names = [case.variant_name for case in wide]
    assert [len(name) for name in names] == [100] * 6
    assert len(set(names)) == 6
    assert all(name.startswith(f"{long}=0.") for name in names)


def test_thousands_of_variants_are_read(file: Path) -> None:
    cases = variants(file, "vary: {gap: {from: 0.1, to: 0.5, steps: 50}, eps: {from: 2, to: 3, steps: 40}}")
    assert len(cases) == 2000


def test_screen_follows_a_parameter(file: Path) -> None:
    file.write_text(pair("vary: {gap: [0.1, 0.2]}").replace("diameter: 3.6", "diameter: 3*pitch"))
    for case, pitch in zip(read_variants(file), (1.1e-3, 1.2e-3), strict=True):
        assert isinstance(case.boundary, Shield)
        assert isinstance(case.boundary.shape, Circle)
        assert_allclose(case.boundary.shape.radius, 1.5 * pitch, rtol=1e-14)


def test_what_is_derived_from_a_length_is_one() -> None:
    case = read_text(pair(spare="2*core + 1", other="spare/2", ratio="core/wall"))
    assert {p.name: p.is_length for p in case.parameters if not p.is_used} == {
        "spare": True, "other": True, "ratio": False,
    }  # fmt: skip
