"""Materials that users add: in a case file, or in a file beside it with the layout of geometry/materials.yaml."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

from nightcap.geometry.case import Source
from nightcap.geometry.case_file.material_entries import OwnMaterialEntry
from nightcap.geometry.case_file.materials import Stock
from nightcap.geometry.case_file.problems import Problems, listed, under
from nightcap.geometry.case_file.schema import checked
from nightcap.geometry.case_file.yaml_tree import Planter, Tree, UnreadableError, compose
from nightcap.geometry.materials import Catalogue, Insulation, Metal, shipped

GROUPS = ("insulations", "metals")
"""Headings of a long list; a short one does without."""
LARGEST = 1_000_000
"""Bytes; a list of more is none."""
LONGEST_NAME = 60


def read_materials(tree: Tree, problems: Problems, context: dict[str, Any], beside: Stock | None) -> Stock:
    """The shipped materials and a file's own; notes every mistake in these. beside : from a list in another file."""
    if beside is not None:
        return beside
    return Stock(shipped()) if tree is None else _stock(tree, "materials", problems, context)


def read_beside(tree: Tree, problems: Problems) -> Stock | None:
    """The shipped materials and those in a file beside the case file, if it names one; notes every mistake in these.

    They know no parameters of the case: variants share them, and so can other cases.
    """
    if not isinstance(tree, str):
        return None
    path = Path(problems.source.file).parent / tree
    lines: dict[str, int] = {}
    found = Problems(Source(str(path), lines))
    inside = _content(path, lines, found)
    if not lines:
        problems.add("materials", f"the file {tree!r} {found.found[0].text if found.found else 'is empty'}")
        return Stock(shipped(), is_unreadable=True)
    stock = _stock(inside, "", found, {})
    problems.found.extend(found.found)
    return replace(stock, files=(str(path),), is_unreadable=not isinstance(inside, dict))


def _stock(tree: Tree, path: str, problems: Problems, context: dict[str, Any]) -> Stock:
    """The shipped materials and those of a tree."""
    records: list[Insulation | Metal] = []
    wrong: set[str] = set()
    owners: dict[tuple[type, str], str] = {}
    for place, name, entry in _listed(tree, path, problems):
        if not name.strip() or not name.isprintable() or len(name) > LONGEST_NAME:
            problems.add(place, f"the name of a material has 1 to {LONGEST_NAME} printable characters")
        elif read := checked(OwnMaterialEntry, entry, place, problems, context):
            records.append(read.record(name))
            _check_words(records[-1], owners, place, problems)
        else:
            wrong.add(name.lower())
    insulations = [one for one in records if isinstance(one, Insulation)]
    own = Catalogue.of(insulations, [one for one in records if isinstance(one, Metal)])
    return Stock(shipped().with_own(own), wrong=frozenset(wrong))


def _check_words(
    record: Insulation | Metal, owners: dict[tuple[type, str], str], place: str, problems: Problems
) -> None:
    """Notes every word that stands for another material already. owners : by kind and word; receives this one."""
    for word in dict.fromkeys((record.name, *record.aliases)):
        owner = owners.setdefault((type(record), word.lower()), record.name)
        if owner != record.name:
            problems.add(place, f"{word!r} stands for {owner!r} already")


def _listed(tree: Tree, path: str, problems: Problems) -> Iterator[tuple[str, str, Tree]]:
    """Path, name and entry of every material, listed with or without headings."""
    if not isinstance(tree, dict):
        problems.add(path, "must be a mapping from names to materials, or the name of a file that holds one")
        return
    if not any(group in tree for group in GROUPS):
        yield from ((under(path, name), name, entry) for name, entry in tree.items())
        return
    for group, entries in tree.items():
        place = under(path, group)
        if group not in GROUPS:
            problems.add(place, f"beside the headings {listed(GROUPS)} there can be no material; list it below one")
        elif not isinstance(entries, dict):
            problems.add(place, "must be a mapping from names to materials")
        else:
            yield from ((under(place, name), name, entry) for name, entry in entries.items())


def _content(path: Path, lines: dict[str, int], problems: Problems) -> Tree:
    """The content of a YAML file; None after noting that it is none."""
    try:
        if not path.is_file():
            problems.add("", "is not there" if not path.exists() else "is no file")
        elif path.stat().st_size > LARGEST:
            problems.add("", f"is larger than {LARGEST} bytes; this is no list of materials")
        else:
            node = compose(path.read_bytes().decode("utf-8-sig"))
            return Planter(lines, problems).tree(node) if node is not None else None
    except OSError as error:
        problems.add("", f"cannot be read: {error.strerror or error}")
    except UnicodeDecodeError as error:
        problems.add("", f"is not text in UTF-8 (byte {error.start})")
    except UnreadableError as error:
        problems.add("", error.text + (f" (line {error.line})" if error.line else ""))
    except ValueError:
        problems.add("", "is no name of a file")
    return None
