"""The page and its pictures as they ship, and whether they are what the program says."""

from __future__ import annotations

from pathlib import Path

from case_examples import examples
from reference_page import page
from small_pictures import difference, picture

PAGE, PICTURES = "README.md", "pictures"
SAME = 2.0
"""Pictures whose mean difference in tone (of 255) is less are taken for one: other versions of the libraries that draw
them place a word half a dot elsewhere."""


def outdated(folder: Path) -> dict[str, str]:
    """Each file of the reference, below the folder of the shipped cases, that is not up to date, and why."""
    found = {}
    shipped = folder / PAGE
    if not shipped.is_file():
        found[PAGE] = "is missing"
    elif shipped.read_text("utf-8") != page():
        found[PAGE] = "differs from what scripts/document writes"
    drawn = {f"{name}.png": picture(example.case) for name, example in examples().items()}
    there = {path.name: path.read_bytes() for path in (folder / PICTURES).glob("*")}
    for name in sorted(drawn.keys() | there.keys()):
        why = _wrong(drawn.get(name), there.get(name))
        if why:
            found[f"{PICTURES}/{name}"] = why
    return found


def _wrong(drawn: bytes | None, there: bytes | None) -> str:
    if drawn is None:
        return "belongs to no example"
    if there is None:
        return "is missing"
    return "" if drawn == there or difference(drawn, there) < SAME else "differs from what its example draws"


def write(folder: Path) -> list[str]:
    """Writes what is out of date; returns the names of the files that were written or taken away."""
    found = list(outdated(folder))
    (folder / PICTURES).mkdir(parents=True, exist_ok=True)
    for name in found:
        path = folder / name
        example = examples().get(path.stem)
        if name == PAGE:
            path.write_text(page(), "utf-8")
        elif example is None:
            path.unlink()
        else:
            path.write_bytes(picture(example.case))
    return found
