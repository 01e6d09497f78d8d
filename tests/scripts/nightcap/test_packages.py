import tomllib
from pathlib import Path

ROOT = Path(__file__).parents[3]
PLACES = {"nightcap": "scripts/nightcap", "nightcap.geometry": "geometry", "nightcap.solver": "solver"}


def packages_in_the_tree() -> set[str]:
    found = set()
    for package, folder in PLACES.items():
        for marker in (ROOT / folder).rglob("__init__.py"):
            found.add(".".join([package, *marker.parent.relative_to(ROOT / folder).parts]))
    return found


def test_every_package_of_the_tree_is_listed() -> None:
    settings = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))["tool"]["setuptools"]
    assert set(settings["packages"]) == packages_in_the_tree()
    assert settings["package-dir"] == PLACES


def test_every_data_file_of_the_tree_is_installed() -> None:
    data = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))["tool"]["setuptools"]["package-data"]
    listed = {ROOT / PLACES[package] / name for package, names in data.items() for name in names}
    found = {path for place in PLACES.values() for path in (ROOT / place).rglob("*") if path.is_file()}
    assert {path for path in found if path.suffix not in {".py", ".pyc"}} == listed
