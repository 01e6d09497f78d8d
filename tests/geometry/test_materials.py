"""Materials by name, foams, metals, and a file's own."""

import math
from importlib import resources
from pathlib import Path
from textwrap import indent

import pytest
import yaml
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from nightcap.geometry.case import OpenSpace
from nightcap.geometry.case_file import own_materials, read_case, read_text, read_variants
from nightcap.geometry.errors import CaseError
from nightcap.geometry.materials import Insulation, shipped
from nightcap.geometry.mixing import LAWS, foam

# Foam of polyethylene, e = 2.26, half of it gas: values of the published laws, four decimals as printed.
PRINTED = {"linear": 1.6300, "lichtenecker": 1.5033, "looyenga": 1.5454, "maxwell_garnett": 1.5655, "bruggeman": 1.5459}


@pytest.mark.parametrize("law", PRINTED)
def test_foam_of_polyethylene(law: str) -> None:
    assert_allclose(foam(2.26, 0.0, 0.5, law)[0], PRINTED[law], rtol=0, atol=5e-5)


@given(st.sampled_from(sorted(LAWS)), st.floats(1.0, 20.0), st.floats(0.0, 0.99))
def test_laws_stay_between_the_bounds_of_wiener(law: str, solid: float, gas: float) -> None:
    """Wiener 1912: between layers across the field and layers along it. common practice."""
    mixed = foam(solid, 0.0, gas, law)[0]
    across = 1 / (gas + (1 - gas) / solid)
    assert across * (1 - 1e-12) <= mixed <= (gas + (1 - gas) * solid) * (1 + 1e-12)


@given(st.sampled_from(sorted(LAWS)), st.floats(1.0, 20.0), st.floats(0.0, 0.2))
def test_no_gas_changes_nothing(law: str, solid: float, loss: float) -> None:
    assert_allclose(foam(solid, loss, 0.0, law), (solid, loss), rtol=1e-12, atol=1e-15)


@pytest.mark.parametrize("law", PRINTED)
def test_permittivity_of_a_foam_is_that_of_the_printed_law_whatever_the_loss(law: str) -> None:
    assert foam(2.26, 0.1, 0.5, law)[0] == foam(2.26, 0.0, 0.5, law)[0]


@pytest.mark.parametrize("law", PRINTED)
def test_loss_of_a_foam_follows_the_law(law: str) -> None:
    """To first order: tan d times the derivative of ln e_mixed by ln e_solid."""
    step = 1e-6
    low, high = (foam(2.26 * (1 + s), 0.0, 0.3, law)[0] for s in (-step, step))
    slope = math.log(high / low) / math.log((1 + step) / (1 - step))
    assert_allclose(foam(2.26, 1e-4, 0.3, law)[1], 1e-4 * slope, rtol=1e-6)


def all_insulations() -> list[Insulation]:
    return list(dict.fromkeys(shipped().insulations.values()))


def test_every_shipped_value_is_within_its_range_and_says_whether_it_was_found() -> None:
    metals = dict.fromkeys(shipped().metals.values())
    quantities = [metal.conductivity for metal in metals]
    for one in all_insulations():
        assert one.permittivity.value >= 1.0
        assert one.loss_tangent is None or 0.0 <= one.loss_tangent.value < 1.0
        assert one.breakdown is None or 1.0 < one.breakdown.value < 1000.0
        quantities += [q for q in (one.permittivity, one.loss_tangent, one.breakdown) if q]
    assert len(quantities) > 70
    for quantity in quantities:
        low, high = quantity.range or (quantity.value, quantity.value)
        assert low <= quantity.value <= high
        assert quantity.source.startswith(("found", "memory"))


def test_caution_stands_beside_the_breakdown_strengths() -> None:
    text = resources.files("nightcap.geometry").joinpath("materials.yaml").read_text(encoding="utf-8")
    assert "no design values" in text
    assert "local codes and licensed practice" in text.replace("\n# ", " ")


def test_no_name_stands_for_two_materials() -> None:
    tree = yaml.safe_load(resources.files("nightcap.geometry").joinpath("materials.yaml").read_text(encoding="utf-8"))
    for group in ("insulations", "metals"):
        words = [w.lower() for name, entry in tree[group].items() for w in (name, *entry.get("aliases", ()))]
        assert len(words) == len(set(words))


IACS = 58e6
"""S/m: 100 % IACS by IEC 60028. The shares below are as common tables print them; to their last digit."""


@pytest.mark.parametrize(
    ("metal", "per_cent"),
    [
        ("copper", 100),
        ("hard-drawn copper", 97),
        ("aluminium", 61),
        ("tin", 15),
        ("brass", 28),
        ("phosphor bronze", 15),
    ],
)
def test_metals_by_their_share_of_iacs(metal: str, per_cent: float) -> None:
    assert_allclose(shipped().metals[metal].conductivity.value, per_cent / 100 * IACS, rtol=0, atol=0.005 * IACS)


def test_tinned_copper_by_astm_b33() -> None:
    """Resistivity by mass, ohm g/m2 (table 2, 0.51 to 2.6 mm), against 0.15328 of 100 % IACS."""
    assert_allclose(shipped().metals["tinned copper"].conductivity.value, IACS * 0.15328 / 0.15940, rtol=1e-4)


CASE = """\
conductors:
  red: {{shape: circle, radius: 0.2, {conductor} coatings: [{{thickness: 0.1, {coating}}}]}}
boundary: {{kind: shield, shape: circle, radius: 2}}
{rest}
"""


def material(coating: str, rest: str = "") -> tuple[float, float, str]:
    layer = read_text(CASE.format(coating=coating, conductor="", rest=rest)).conductors[0].coatings[0].material
    return layer.permittivity, layer.loss_tangent, layer.name


def test_named_materials() -> None:
    assert material("material: polyethylene") == (2.26, 3e-4, "polyethylene")
    assert material("material: pe") == (2.26, 3e-4, "polyethylene")
    assert material("material: polyethylene, permittivity: 2.3") == (2.3, 0.0, "polyethylene")
    assert material("material: polyethylene, loss_tangent: 1e-3") == (2.26, 1e-3, "polyethylene")
    assert material("material: anything at all, permittivity: 2.3")[2] == "anything at all"


def test_foams() -> None:
    permittivity, loss, name = material("material: polyethylene, gas_fraction: 50 %")
    assert_allclose(permittivity, PRINTED["looyenga"], rtol=0, atol=5e-5)
    assert 0 < loss < 3e-4
    assert name == "polyethylene, 50 % gas"
    assert_allclose(
        material("permittivity: 2.26, gas_fraction: 0.5, mixing: bruggeman")[0], PRINTED["bruggeman"], rtol=0, atol=5e-5
    )


def test_own_materials_go_before_the_shipped_ones() -> None:
    own = "materials: {wax: {permittivity: 2.2, loss_tangent: 1e-3}, polyethylene: {permittivity: 2.3}}"
    assert material("material: wax", own) == (2.2, 1e-3, "wax")
    assert material("material: Polyethylene", own)[0] == 2.3


FULL = """\
insulations:
  wax:
    aliases: [candle]
    permittivity: {value: 2.2, range: [2.1, 2.3], source: shelf}
    loss_tangent: {value: 1e-3, frequency: 1e3}
    breakdown: {range: [10, 12], note: thin}
metals:
  tin plate: {conductivity: {value: 8e6, source: shelf}}
"""


def test_files_beside_may_have_the_layout_of_the_shipped_one(tmp_path: Path) -> None:
    shipped_text = resources.files("nightcap.geometry").joinpath("materials.yaml").read_text(encoding="utf-8")
    for text, word in ((FULL, "candle"), (shipped_text, "PTFE")):
        (tmp_path / "stock.materials.yaml").write_text(text, encoding="utf-8")
        path = tmp_path / "case.yaml"
        path.write_text(CASE.format(coating=f"material: {word}", conductor="", rest="materials: stock.materials.yaml"))
        case = read_case(path)
        assert case.conductors[0].coatings[0].material.permittivity == (2.2 if word == "candle" else 2.1)
        assert case.files == (str(tmp_path / "stock.materials.yaml"),)


def test_own_materials_in_full() -> None:
    own = f"materials:\n{indent(FULL, '  ')}"
    assert material("material: Candle", own) == (2.2, 1e-3, "wax")


def test_own_materials_may_use_parameters() -> None:
    assert material("material: wax", "parameters: {e: 2.2}\nmaterials: {wax: {permittivity: e + 0.1}}")[0] == 2.2 + 0.1


def test_file_beside_is_read_once_for_all_variants(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    read: list[Path] = []
    original = own_materials.compose
    monkeypatch.setattr(own_materials, "compose", lambda text: (read.append(tmp_path), original(text))[1])
    (tmp_path / "stock.materials.yaml").write_text("wax: {permittivity: 2.2}\n")
    vary = "materials: stock.materials.yaml\nparameters: {e: 1}\nvary: {e: [1, 2, 3]}\nbackground: {permittivity: e}"
    path = tmp_path / "case.yaml"
    path.write_text(CASE.format(coating="material: wax", conductor="", rest=vary))
    cases = read_variants(path)
    assert [case.conductors[0].coatings[0].material.permittivity for case in cases] == [2.2] * 3
    assert len(read) == 1


def test_file_beside_knows_no_parameters(tmp_path: Path) -> None:
    (tmp_path / "stock.materials.yaml").write_text("wax: {permittivity: e}\n")
    path = tmp_path / "case.yaml"
    rest = "materials: stock.materials.yaml\nparameters: {e: 2}"
    path.write_text(CASE.format(coating="permittivity: e", conductor="", rest=rest))
    with pytest.raises(CaseError, match=r"stock\.materials\.yaml:1: wax\.permittivity.*no parameters"):
        read_case(path)


def test_metals_of_everything_that_conducts() -> None:
    text = """\
constructions:
  foil: {kind: screen, inner_diameter: 3, thickness: 0.1, metal: aluminium}
  card:
    kind: board
    width: 1
    layers: [{thickness: 0.2, material: FR4}]
    traces: {a: {x: 0, width: 0.2, thickness: 0.03, metal: copper}}
boundary: {kind: %s, metal: brass}
"""
    for kind, rest in (
        ("shield", ", shape: circle, radius: 2"),
        ("box", ", width: 8, height: 8"),
        ("ground_plane", ""),
    ):
        case = read_text(text % (kind + rest))
        assert {one.name: one.conductivity for one in case.conductors} == {"foil": 35.38e6, "card.a": 58e6}
        assert not isinstance(case.boundary, OpenSpace)
        assert case.boundary.conductivity == 16.2e6


def test_own_materials_may_lie_beside_the_file(tmp_path: Path) -> None:
    (tmp_path / "stock.yaml").write_text("wax: {permittivity: 2.2}\ntin plate: {conductivity: 8e6}\n")
    path = tmp_path / "case.yaml"
    path.write_text(CASE.format(coating="material: wax", conductor="metal: tin plate,", rest="materials: stock.yaml"))
    conductor = read_case(path).conductors[0]
    assert (conductor.coatings[0].material.permittivity, conductor.conductivity) == (2.2, 8e6)


def test_metals() -> None:
    text = CASE.format(coating="permittivity: 2", conductor="metal: copper,", rest="")
    assert read_text(text).conductors[0].conductivity == 58e6
    text = CASE.format(coating="permittivity: 2", conductor="conductivity: 4e7,", rest="")
    assert read_text(text).conductors[0].conductivity == 4e7
    assert read_text(CASE.format(coating="permittivity: 2", conductor="", rest="")).conductors[0].conductivity is None


FAULTS = {
    "near name": ("material: polyethilene", "", "", "did you mean 'polyethylene'"),
    "no name": ("loss_tangent: 0.1", "", "", "needs permittivity, or material"),
    "all gas": ("material: PE, gas_fraction: 1", "", "", "gas_fraction: must lie between 0 and 0.99"),
    "less than no gas": ("material: PE, gas_fraction: -0.1", "", "", "gas_fraction: must lie between 0 and 0.99"),
    "unknown law": ("material: PE, gas_fraction: 0.5, mixing: looyenge", "", "", "did you mean 'looyenga'"),
    "law without foam": ("material: PE, mixing: looyenga", "", "", "give their gas_fraction"),
    "unknown metal": ("permittivity: 2", "metal: coper,", "", "did you mean 'copper'"),
    "unknown metal of the boundary": ("permittivity: 2", "", "background: {metal: coper}", "unknown key"),
    "conductivity in the wrong place": ("permittivity: 2", "conductivity: 0,", "", "between 1 and"),
    "own of no kind": ("material: wax", "", "materials: {wax: {loss_tangent: 1}}", "exactly one of permittivity"),
    "own metal with loss": ("permittivity: 2", "", "materials: {wax: {conductivity: 1e6, loss_tangent: 1}}", "a metal"),
    "own with a wrong key": ("material: wax", "", "materials: {wax: {permitivity: 1}}", "did you mean 'permittivity'"),
    "own with a wrong key inside": (
        "permittivity: 2",
        "",
        "materials: {wax: {permittivity: {value: 2, rang: [1, 2]}}}",
        r"materials\.wax\.permittivity\.rang: unknown key.*did you mean 'range'",
    ),
    "own below vacuum": (
        "permittivity: 2",
        "",
        "materials: {wax: {permittivity: 0.5}}",
        r"materials\.wax\.permittivity.*must lie between 1 and",
    ),
    "own range upside down": (
        "permittivity: 2",
        "",
        "materials: {wax: {permittivity: {value: 2, range: [3, 1]}}}",
        "must be in order",
    ),
    "own breakdown of nothing": (
        "permittivity: 2",
        "",
        "materials: {wax: {permittivity: 2, breakdown: {note: x}}}",
        "needs value or range",
    ),
    "own names twice": (
        "permittivity: 2",
        "",
        "materials: {wax: {permittivity: 2}, Wax: {permittivity: 3}}",
        "'Wax' stands for 'wax' already",
    ),
    "own without name": ("permittivity: 2", "", 'materials: {" ": {permittivity: 2}}', "printable characters"),
    "own beside headings": (
        "permittivity: 2",
        "",
        "materials: {metals: {}, wax: {permittivity: 2}}",
        "list it below one",
    ),
    "own heading of a list": ("permittivity: 2", "", "materials: {metals: [wax]}", "must be a mapping from names"),
    "own as a list": ("permittivity: 2", "", "materials: [wax]", "must be a mapping from names"),
    "file that is missing": ("permittivity: 2", "", "materials: none.yaml", "the file 'none.yaml' is not there"),
    "file that is a folder": ("permittivity: 2", "", "materials: .", "the file '.' is no file"),
    "file that never ends": ("permittivity: 2", "", "materials: /dev/zero", "is no file"),
    "file without a name": ("permittivity: 2", "", 'materials: "a\\0b"', "is no name of a file|is not there"),
}


@pytest.mark.parametrize("fault", FAULTS)
def test_faults(fault: str) -> None:
    coating, conductor, rest, words = FAULTS[fault]
    with pytest.raises(CaseError, match=words):
        read_text(CASE.format(coating=coating, conductor=conductor, rest=rest))


def test_all_mistakes_at_once_and_those_of_the_file_beside_with_its_own_lines(tmp_path: Path) -> None:
    stock = tmp_path / "stock.materials.yaml"
    stock.write_text("wax:\n  permittivity: 2.2\nresin:\n  permittivity: 0.2\n")
    path = tmp_path / "case.yaml"
    path.write_text(
        CASE.format(coating="material: resin, thicknes: 1", conductor="metal: coper,", rest=f"materials: {stock.name}")
    )
    with pytest.raises(CaseError) as caught:
        read_case(path)
    places = {(Path(problem.file).name, problem.line, problem.key) for problem in caught.value.problems}
    assert places == {
        ("stock.materials.yaml", 4, "resin.permittivity.value"),
        ("case.yaml", 2, "conductors.red"),
        ("case.yaml", 2, "conductors.red.coatings[0].thicknes"),
    }


@pytest.mark.parametrize("own", ["none.yaml", "{resin: {permittivity: 0.2}}", "{resin: {permitivity: 2}}"])
def test_what_follows_from_a_wrong_list_is_not_told(own: str) -> None:
    with pytest.raises(CaseError) as caught:
        read_text(CASE.format(coating="material: Resin", conductor="", rest=f"materials: {own}"))
    assert {problem.key.partition(".")[0] for problem in caught.value.problems} == {"materials"}


BESIDE = {
    b"\xff\xfe": "is not text in UTF-8",
    b"a: [1": "is not valid YAML",
    b"- 1": "must be a mapping from names",
    b"wax: 3": "must be a mapping with the keys",
    b"wax: &a [*a]": "contains itself",
    b"wax: !!python/name:os.system {}": "is not allowed",
    b"#" * 1_000_001: "is larger than",
    b"": "is empty",
}


@pytest.mark.parametrize("content", BESIDE, ids=BESIDE.get)
def test_files_beside_that_hold_no_materials(content: bytes, tmp_path: Path) -> None:
    (tmp_path / "stock.yaml").write_bytes(content)
    path = tmp_path / "case.yaml"
    path.write_text(CASE.format(coating="permittivity: 2", conductor="", rest="materials: stock.yaml"))
    with pytest.raises(CaseError, match=BESIDE[content]):
        read_case(path)
