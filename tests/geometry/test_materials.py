"""Materials by name, foams, metals, and a file's own."""

import math
from importlib import resources
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from nightcap.geometry.case_file import read_case, read_text
from nightcap.geometry.errors import CaseError
from nightcap.geometry.materials import shipped
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
def test_loss_of_a_foam_follows_the_law(law: str) -> None:
    """To first order: tan d times the derivative of ln e_mixed by ln e_solid."""
    step = 1e-6
    low, high = (foam(2.26 * (1 + s), 0.0, 0.3, law)[0] for s in (-step, step))
    slope = math.log(high / low) / math.log((1 + step) / (1 - step))
    assert_allclose(foam(2.26, 1e-4, 0.3, law)[1], 1e-4 * slope, rtol=1e-6)


def test_shipped_file_is_whole() -> None:
    catalogue = shipped()
    assert len(set(catalogue.insulations.values())) >= 20
    for one in set(catalogue.insulations.values()):
        low, high = one.permittivity_range or (one.permittivity, one.permittivity)
        assert 1.0 <= low <= one.permittivity <= high
        assert one.source
        loss = one.loss_tangent
        assert loss.value is None or loss.range is None or loss.range[0] <= loss.value <= loss.range[1]
    assert all(metal.source and 1e6 < metal.conductivity < 1e8 for metal in catalogue.metals.values())


def test_no_name_stands_for_two_materials() -> None:
    import yaml

    tree = yaml.safe_load(resources.files("nightcap.geometry").joinpath("materials.yaml").read_text())
    for group in ("insulations", "metals"):
        words = [w.lower() for name, entry in tree[group].items() for w in (name, *entry.get("aliases", ()))]
        assert len(words) == len(set(words))


def test_annealed_copper_is_the_standard_of_iec_60028() -> None:
    assert_allclose(1 / shipped().metals["copper"].conductivity, 1.7241e-8, rtol=3e-5)  # ohm m at 20 C


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
    assert material("material: pe")[0] == 2.26
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
    "all gas": ("material: PE, gas_fraction: 1", "", "", "between 0 and 0.99"),
    "unknown law": ("material: PE, gas_fraction: 0.5, mixing: looyenge", "", "", "did you mean 'looyenga'"),
    "unknown metal": ("permittivity: 2", "metal: coper,", "", "did you mean 'copper'"),
    "conductivity in the wrong place": ("permittivity: 2", "conductivity: 0,", "", "between 1 and"),
    "own of no kind": ("material: wax", "", "materials: {wax: {loss_tangent: 1}}", "exactly one of permittivity"),
    "own with a wrong key": ("material: wax", "", "materials: {wax: {permitivity: 1}}", "did you mean 'permittivity'"),
    "own as a list": ("permittivity: 2", "", "materials: [wax]", "must be a mapping from names"),
    "file that is missing": ("permittivity: 2", "", "materials: none.yaml", "cannot be read"),
}


@pytest.mark.parametrize("fault", FAULTS)
def test_faults(fault: str) -> None:
    coating, conductor, rest, words = FAULTS[fault]
    with pytest.raises(CaseError, match=words):
        read_text(CASE.format(coating=coating, conductor=conductor, rest=rest))


@pytest.mark.parametrize("content", [b"\xff\xfe", b"a: [1", b"- 1", b"wax: 3", b""])
def test_files_beside_that_hold_no_materials(content: bytes, tmp_path: Path) -> None:
    (tmp_path / "stock.yaml").write_bytes(content)
    path = tmp_path / "case.yaml"
    path.write_text(CASE.format(coating="material: wax", conductor="", rest="materials: stock.yaml"))
    with pytest.raises(CaseError):
        read_case(path)
