"""The reference page of the case file: up to date, with an example for every word, each of them a case."""

import sys
from pathlib import Path

import pytest

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case_file import read_case
from nightcap.geometry.case_file.boundaries import BOUNDARIES
from nightcap.geometry.case_file.constructions import KINDS
from nightcap.geometry.case_file.shapes import SHAPES

ROOT = Path(__file__).parents[2]
EXAMPLES = sorted((ROOT / "scripts" / "reference" / "examples").glob("*.yaml"))


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_examples_are_cases(path: Path) -> None:
    assert build_layout(read_case(path)).regions


def test_every_word_has_an_example() -> None:
    names = {path.stem for path in EXAMPLES}
    words = {f"shape-{word}" for word in SHAPES} | {f"construction-{word}" for word in KINDS}
    assert words | {f"boundary-{word}" for word in BOUNDARIES} <= names


def test_every_example_has_a_picture() -> None:
    pictures = {path.stem: path for path in (ROOT / "cases" / "pictures").glob("*.png")}
    assert {path.stem for path in EXAMPLES} == set(pictures)
    assert all(path.stat().st_size < 20_000 for path in pictures.values())


def test_page_is_up_to_date(monkeypatch: pytest.MonkeyPatch) -> None:
    """Run scripts/document if this fails."""
    monkeypatch.setattr(sys, "path", [str(ROOT / "scripts" / "reference"), *sys.path])
    from reference_page import page

    assert (ROOT / "cases" / "README.md").read_text("utf-8") == page()
