"""From the expanded tree to a Case: each entry checked and turned into its record."""

from __future__ import annotations

from typing import Any

from nightcap.geometry.case import (
    Boundary,
    Case,
    Coating,
    Conductor,
    Dielectric,
    Expectation,
    GroundPlane,
    Limits,
    Material,
    OpenSpace,
    Shield,
)
from nightcap.geometry.case_file.boundaries import read_boundary
from nightcap.geometry.case_file.consistency import check_case, check_name
from nightcap.geometry.case_file.problems import Problems, under
from nightcap.geometry.case_file.quantities import LENGTHS
from nightcap.geometry.case_file.schema import (
    CaseEntry,
    CoatingEntry,
    ConductorKeys,
    ExpectEntry,
    LimitsEntry,
    MaterialKeys,
    checked,
)
from nightcap.geometry.case_file.shapes import shaped
from nightcap.geometry.case_file.strip import BENT_TOO_SHARPLY
from nightcap.geometry.case_file.yaml_tree import Tree
from nightcap.geometry.constants import VACUUM_PERMITTIVITY
from nightcap.geometry.shapes import Polygon
from nightcap.geometry.strip import Strip

MOST_LAYERS = 20


def assemble(tree: dict[str, Tree], name: str, problems: Problems) -> Case:
    """Builds the case. Raises CaseError with every mistake of the file."""
    unit = tree.get("units")
    context = {"unit": LENGTHS.get(unit, 1e-3) if isinstance(unit, str) else 1e-3}
    entry = checked(CaseEntry, tree, "", problems, context)
    conductors = _conductors(tree.get("conductors"), problems, context)
    dielectrics = _dielectrics(tree.get("dielectrics"), problems, context)
    background = _background(tree.get("background"), problems, context)
    boundary = read_boundary(tree["boundary"], "boundary", problems, context) if "boundary" in tree else None
    limits = _limits(tree.get("limits"), problems, context)
    expect = _expect(tree.get("expect"), problems, context)
    problems.raise_any()
    if entry is None or boundary is None:  # what is missing was noted, so this is not reached
        raise AssertionError("an entry is missing without having been noted")
    case = Case(
        name=name,
        title=entry.title or name,
        conductors=conductors,
        boundary=boundary,
        reference=entry.reference or _default_reference(boundary, conductors),
        dielectrics=dielectrics,
        background=background,
        ties=entry.tie,
        accuracy=entry.accuracy,
        limits=limits,
        expect=expect,
        source=problems.source,
    )
    check_case(case, problems)
    problems.raise_any()
    return case


def _default_reference(boundary: Boundary, conductors: tuple[Conductor, ...]) -> str:
    if isinstance(boundary, Shield | GroundPlane):
        return boundary.name
    assert isinstance(boundary, OpenSpace)  # noqa: S101 - there is no other kind
    return conductors[-1].name


def _entries(tree: Tree, path: str, problems: Problems) -> dict[str, Tree]:
    """The named entries of a group; none after noting that it is no mapping."""
    if tree is None:
        return {}
    if not isinstance(tree, dict):
        problems.add(path, "must be a mapping from names to entries")
        return {}
    for name in tree:
        check_name(name, under(path, name), problems)
    return tree


def _conductors(tree: Tree, problems: Problems, context: dict[str, Any]) -> tuple[Conductor, ...]:
    conductors = []
    entries = _entries(tree, "conductors", problems)
    if not entries and (tree is None or isinstance(tree, dict)):
        problems.add("conductors", "there must be at least one conductor")
    for name, entry in entries.items():
        path = under("conductors", name)
        read = shaped(ConductorKeys, entry, path, problems, context)
        coats = entry.get("coatings") if isinstance(entry, dict) else None
        coatings = _coatings(coats, under(path, "coatings"), problems, context)
        if read:
            keys, shape = read
            if coatings and isinstance(shape, Polygon) and not shape.is_convex:
                problems.add(under(path, "coatings"), "a coating can be laid around a convex polygon only")
            if isinstance(shape, Strip) and not shape.takes([coating.thickness for coating in coatings]):
                problems.add(under(path, "coatings"), BENT_TOO_SHARPLY)
            conductors.append(Conductor(name, shape, coatings, keys.floating))
    return tuple(conductors)


def _coatings(tree: Tree, path: str, problems: Problems, context: dict[str, Any]) -> tuple[Coating, ...]:
    if tree is None:
        return ()
    if not isinstance(tree, list):
        problems.add(path, "must be a list of layers, e.g. [{thickness: 0.2, permittivity: 2.3}]")
        return ()
    if len(tree) > MOST_LAYERS:
        problems.add(path, f"must be at most {MOST_LAYERS} layers")
        return ()
    read = [checked(CoatingEntry, layer, under(path, k), problems, context) for k, layer in enumerate(tree)]
    return tuple(Coating(layer.thickness, layer.record()) for layer in read if layer)


def _dielectrics(tree: Tree, problems: Problems, context: dict[str, Any]) -> tuple[Dielectric, ...]:
    dielectrics = []
    for name, entry in _entries(tree, "dielectrics", problems).items():
        read = shaped(MaterialKeys, entry, under("dielectrics", name), problems, context)
        if read:
            dielectrics.append(Dielectric(name, read[1], read[0].record()))
    return tuple(dielectrics)


def _background(tree: Tree, problems: Problems, context: dict[str, Any]) -> Material:
    entry = checked(MaterialKeys, tree, "background", problems, context) if tree is not None else None
    return entry.record() if entry else Material(1.0)


def _limits(tree: Tree, problems: Problems, context: dict[str, Any]) -> Limits:
    entry = checked(LimitsEntry, tree, "limits", problems, context) if tree is not None else None
    return Limits(entry.triangles, entry.memory, entry.time) if entry else Limits()


def _expect(tree: Tree, problems: Problems, context: dict[str, Any]) -> Expectation | None:
    entry = checked(ExpectEntry, tree, "expect", problems, context) if tree is not None else None
    if entry is None:
        return None
    if (entry.capacitance is None) == (entry.relative is None):
        problems.add("expect", "needs exactly one of capacitance (F/m) and relative (in units of eps0)")
        return None
    matrix = entry.capacitance
    if entry.relative is not None:
        matrix = tuple(tuple(x * VACUUM_PERMITTIVITY for x in row) for row in entry.relative)
    assert matrix is not None  # noqa: S101 - one of the two is given
    return Expectation(matrix, entry.tolerance, entry.source, entry.exact)
