"""The reference of the case file: right by the models, complete, and shipped as it is."""

import re
import sys
from collections.abc import Iterator
from importlib.machinery import SourceFileLoader
from importlib.util import module_from_spec, spec_from_loader
from pathlib import Path
from types import ModuleType

import pytest
import reference_page
import shipped_page
from case_examples import FOLDER, Example, examples
from key_tables import ELSEWHERE, alternatives
from reference_page import MARK, MarkError, anchor, models, page
from shipped_page import outdated, write
from small_pictures import difference, picture

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case_file import read_text, read_variants
from nightcap.geometry.case_file.axes import RangeKeys, ToleranceKeys
from nightcap.geometry.case_file.boundaries import KEYS as BOUNDARIES
from nightcap.geometry.case_file.constructions import KEYS as CONSTRUCTIONS
from nightcap.geometry.case_file.constructions import KINDS
from nightcap.geometry.case_file.constructions.board import LayerEntry, MaskEntry, TraceEntry
from nightcap.geometry.case_file.constructions.groups import BeltEntry, FillerEntry, GroupKeys
from nightcap.geometry.case_file.constructions.sheaths import DrainEntry
from nightcap.geometry.case_file.entries import CoatingEntry, ConductorKeys
from nightcap.geometry.case_file.material_entries import PROPERTIES, OwnMaterialEntry, PermittivityEntry
from nightcap.geometry.case_file.materials import MaterialKeys, MetalKeys
from nightcap.geometry.case_file.schema import CaseEntry, Entry, ExpectEntry, LimitsEntry, words_of
from nightcap.geometry.case_file.shapes import SHAPES
from nightcap.geometry.case_file.shapes.unions import LayerOfWiresEntry
from nightcap.geometry.case_file.symmetry import LineKeys
from nightcap.geometry.case_file.twist import TwistKeys
from nightcap.geometry.errors import CaseError

ROOT = Path(__file__).parents[2]
PAGE = page()
LARGEST = 12_000
"""Bytes of a picture."""
TABLES: dict[str, list[type[Entry]]] = {
    "The keys of a file": [CaseEntry],
    "Conductors": [ConductorKeys],
    "Coatings": [CoatingEntry],
    "Metals": [MetalKeys],
    "Materials": [MaterialKeys],
    "Materials of a file of its own": [OwnMaterialEntry, PermittivityEntry],
    "Symmetry": [LineKeys],
    "Groups of wires": [GroupKeys],
    "Filler and belt": [FillerEntry, BeltEntry],
    "vary": [RangeKeys, ToleranceKeys],
    "Twist": [TwistKeys],
    "Limits": [LimitsEntry],
    "Expect": [ExpectEntry],
    **{f"Shape: {word}": [model] for word, model in SHAPES.items()},
    **{f"Boundary: {word}": [model] for word, model in BOUNDARIES.items()},
    **{f"Construction: {word}": [model] for word, model in CONSTRUCTIONS.items()},
}
"""The models whose keys each part of the page lists, in order."""
TABLES["Shape: layered_strands"].append(LayerOfWiresEntry)
TABLES["Construction: board"] += [LayerEntry, TraceEntry, MaskEntry]
TABLES["Construction: screen"].append(DrainEntry)


def own_models() -> list[type[Entry]]:
    """All models that are written down somewhere: those put together while files are read are not."""
    return [model for model in models() if hasattr(sys.modules[model.__module__], model.__name__)]


def sections() -> Iterator[tuple[str, str]]:
    """Heading and text of each part of the page."""
    parts = re.split(r"^#{2,3} (.+)$", PAGE, flags=re.MULTILINE)
    yield from zip(parts[1::2], parts[2::2], strict=True)


def listed_keys(text: str) -> list[list[str]]:
    """The first column of each table of keys."""
    tables = re.findall(r"^\| key \|.*\n\|---.*\n((?:\|.*\n?)+)", text, flags=re.MULTILINE)
    return [re.findall(r"^\| `(\w+)` \|", table, flags=re.MULTILINE) for table in tables]


@pytest.mark.parametrize("name", examples())
def test_every_example_is_a_case_with_a_layout(name: str) -> None:
    for case in read_variants(FOLDER / f"{name}.yaml"):
        assert build_layout(case).regions


def test_every_word_has_an_example_that_uses_it() -> None:
    found = examples()
    words = [("shape", "shape", word) for word in SHAPES]
    words += [("boundary", "kind", word) for word in BOUNDARIES]
    words += [("construction", "kind", word) for word in KINDS]
    for group, key, word in words:
        assert re.search(rf"\b{key}: {word}\b", found[f"{group}-{word}"].text)
    assert len(found) > len(words) + 5


@pytest.mark.parametrize("title", TABLES)
def test_tables_list_exactly_the_keys_of_the_models(title: str) -> None:
    said = listed_keys(dict(sections())[title])
    expected = []
    for model in TABLES[title]:
        elsewhere = [base for base, _ in ELSEWHERE if issubclass(model, base) and model is not base]
        elsewhere += [GroupKeys] * (issubclass(model, GroupKeys) and model is not GroupKeys)
        hidden = {"shape", "kind"}.union(*(words_of(base) for base in elsewhere))
        expected.append({key for key in words_of(model) if key not in hidden})
    assert [set(keys) for keys in said] == [keys for keys in expected if keys]
    assert all(len(keys) == len(set(keys)) for keys in said)


def test_there_is_a_table_for_every_model() -> None:
    told = [model for group in TABLES.values() for model in group]
    told += [model for model in PROPERTIES if words_of(model) == words_of(PermittivityEntry)]
    untold = [model for model in own_models() if not any(issubclass(one, model) for one in told)]
    assert untold == []
    assert len(own_models()) > 50


def test_every_key_of_every_model_has_a_description() -> None:
    wordless = [
        f"{model.__name__}.{name}"
        for model in own_models()
        for name, info in model.model_fields.items()
        if len(info.description or "") < 4 or not info.description.endswith((".", "..."))
    ]
    assert wordless == []


@pytest.mark.parametrize(("group", "table"), [("shape", SHAPES), ("construction", CONSTRUCTIONS)])
def test_of_keys_that_say_the_same_one_is_needed(group: str, table: dict[str, type[Entry]]) -> None:
    groups = [(word, keys) for word, model in table.items() for keys in alternatives(model)]
    assert groups
    for word, keys in groups:
        text = examples()[f"{group}-{word}"].text
        for key in keys:
            text = re.sub(rf"\b{key}: ([\w.]+|\[.*\]|\".*\")(, )?", "", text)
        with pytest.raises(CaseError, match=f"needs exactly one of {', '.join(keys)}"):
            read_text(text)


def test_links_lead_somewhere() -> None:
    anchors = {anchor(title) for title, _ in sections()}
    links = re.findall(r"\]\(([^)]+)\)", PAGE)
    assert len(links) > 60
    for link in links:
        assert link[1:] in anchors if link.startswith("#") else (ROOT / "cases" / link).exists()
    for source in re.findall(r'src="([^"]+)"', PAGE):
        assert (ROOT / "cases" / source).is_file()


def test_the_page_holds_no_mark() -> None:
    assert not MARK.search(PAGE)
    assert "{{" not in PAGE


def test_what_ships_is_up_to_date() -> None:
    assert outdated(ROOT / "cases") == {}


def test_pictures_are_small() -> None:
    pictures = list((ROOT / "cases" / "pictures").iterdir())
    assert len(pictures) == len(examples())
    assert max(path.stat().st_size for path in pictures) < LARGEST


TWO = ("shape-oval", "boundary-open")


@pytest.fixture
def few(monkeypatch: pytest.MonkeyPatch) -> None:
    """Only two pictures are drawn."""
    monkeypatch.setattr(shipped_page, "examples", lambda: {name: examples()[name] for name in TWO})


@pytest.mark.usefixtures("few")
def test_what_is_out_of_date_is_told_and_written(tmp_path: Path) -> None:
    files = {"README.md", *(f"pictures/{name}.png" for name in TWO)}
    assert set(outdated(tmp_path)) == files
    assert set(write(tmp_path)) == files
    assert outdated(tmp_path) == {}
    (tmp_path / "README.md").write_text(page().replace("Diameter.", "diameter."))
    oval, space = (tmp_path / "pictures" / f"{name}.png" for name in TWO)
    oval.write_bytes(space.read_bytes())
    (tmp_path / "pictures" / "shape-egg.png").write_bytes(space.read_bytes())
    space.unlink()
    said = outdated(tmp_path)
    assert set(said) == files | {"pictures/shape-egg.png"}
    assert "belongs to no example" in said["pictures/shape-egg.png"]
    write(tmp_path)
    assert outdated(tmp_path) == {}


def test_a_small_change_of_a_case_is_seen_in_its_picture() -> None:
    text = examples()["shape-oval"].text
    one, other = (picture(read_text(t)) for t in (text, text.replace("height: 1}", "height: 1.2}")))
    assert text.count("height: 1}") == 1
    assert difference(one, one) == 0
    assert difference(one, other) > shipped_page.SAME


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (("{{shape: oval}}", ""), "exactly one of each of {{shape: oval}}"),
        (("{{shape: oval}}", "{{shape: oval}}\n\n{{shape: oval}}"), "exactly one of each of {{shape: oval}}"),
        (("{{example: vary}}", ""), "{{example: vary}}"),
        (("{{contents}}", "{{content}}"), "no such mark"),
        (("{{keys: LimitsEntry}}", "{{keys: LimitEntry}}"), "no model LimitEntry"),
    ],
)
def test_a_template_that_does_not_fit_is_refused(
    change: tuple[str, str], said: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    template = tmp_path / "case_file.md"
    template.write_text(reference_page.TEMPLATE.read_text("utf-8").replace(*change))
    monkeypatch.setattr(reference_page, "TEMPLATE", template)
    with pytest.raises(MarkError, match=re.escape(said)):
        page()


def script(monkeypatch: pytest.MonkeyPatch) -> ModuleType:
    """scripts/document as a module."""
    monkeypatch.setattr(sys, "path", list(sys.path))
    loader = SourceFileLoader("document", str(ROOT / "scripts" / "document"))
    spec = spec_from_loader("document", loader)
    assert spec
    module = module_from_spec(spec)
    monkeypatch.setattr(sys, "dont_write_bytecode", True)
    loader.exec_module(module)
    return module


@pytest.mark.usefixtures("few")
def test_check_says_by_its_exit_code(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    document = script(monkeypatch)
    monkeypatch.setattr(document, "ROOT", tmp_path)
    monkeypatch.setattr(sys, "argv", ["document", "--check"])
    assert document.main() == 1
    assert "cases/README.md: is missing" in capsys.readouterr().out
    assert not list(tmp_path.iterdir())
    monkeypatch.setattr(sys, "argv", ["document"])
    assert document.main() == 0
    monkeypatch.setattr(sys, "argv", ["document", "--check"])
    assert document.main() == 0


def test_an_example_shows_its_picture_beside_its_text() -> None:
    shown = Example("shape-oval", "conductors:\n").shown
    assert "pictures/shape-oval.png" in shown
    assert "```yaml\nconductors:\n```" in shown
