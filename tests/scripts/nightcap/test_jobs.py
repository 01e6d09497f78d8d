from pathlib import Path

import pytest

from nightcap.geometry.errors import UsageError
from nightcap.jobs import find_jobs


def touch(folder: Path, *names: str) -> None:
    for name in names:
        (folder / name).parent.mkdir(parents=True, exist_ok=True)
        (folder / name).touch()


def names(*paths: Path) -> list[str]:
    return [job.name for job in find_jobs([str(path) for path in paths])]


def test_file_is_named_by_its_stem(tmp_path: Path) -> None:
    touch(tmp_path, "deep/pair.yaml")
    assert names(tmp_path / "deep/pair.yaml") == ["pair"]


def test_folder_is_searched_in_order_and_gives_the_path_below_it(tmp_path: Path) -> None:
    touch(tmp_path, "b.yml", "a.yaml", "tail/c.v2.YAML", "notes.txt", ".hidden.yaml", ".venv/x.yaml")
    assert names(tmp_path) == ["a", "b", "tail/c.v2"]


def test_lists_of_materials_are_no_cases(tmp_path: Path) -> None:
    touch(tmp_path, "pair.yaml", "materials.yaml", "tail/stock.materials.yml", "rawmaterials.yaml")
    assert names(tmp_path) == ["pair", "rawmaterials"]


def test_two_cases_with_one_result_folder_are_refused(tmp_path: Path) -> None:
    touch(tmp_path, "x/pair.yaml", "y/pair.yaml")
    with pytest.raises(UsageError, match=r"x/pair\.yaml and .*y/pair\.yaml would share the result folder pair"):
        names(tmp_path / "x", tmp_path / "y")


def test_two_endings_of_one_name_are_refused(tmp_path: Path) -> None:
    touch(tmp_path, "pair.yaml", "pair.yml")
    with pytest.raises(UsageError, match="share the result folder"):
        names(tmp_path)


def test_missing_path_and_empty_folder_are_refused(tmp_path: Path) -> None:
    with pytest.raises(UsageError, match="no such file or folder"):
        names(tmp_path / "missing.yaml")
    with pytest.raises(UsageError, match="no case file"):
        names(tmp_path)
