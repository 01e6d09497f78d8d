"""From the expanded tree to a Case: each entry checked and turned into its record."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from pathlib import Path
from typing import Any

from nightcap.geometry.case import Case, Conductor, Dielectric, Expectation, Limits, Material
from nightcap.geometry.case_file.boundaries import read_boundary
from nightcap.geometry.case_file.consistency import check_case, check_name
from nightcap.geometry.case_file.constructions import read_constructions
from nightcap.geometry.case_file.constructions.built import Built
from nightcap.geometry.case_file.entries import ConductorKeys
from nightcap.geometry.case_file.layers import check_coatings, read_coatings
from nightcap.geometry.case_file.materials import MaterialKeys, Stock
from nightcap.geometry.case_file.own_materials import read_materials
from nightcap.geometry.case_file.problems import Problems, under
from nightcap.geometry.case_file.quantities import LENGTHS
from nightcap.geometry.case_file.schema import CaseEntry, ExpectEntry, LimitsEntry, checked
from nightcap.geometry.case_file.shapes import shaped
from nightcap.geometry.case_file.symmetry import read_symmetry
from nightcap.geometry.case_file.twist import read_twist
from nightcap.geometry.case_file.values import Values
from nightcap.geometry.case_file.yaml_tree import Tree
from nightcap.geometry.constants import VACUUM_PERMITTIVITY


def assemble(
    tree: dict[str, Tree], name: str, problems: Problems, values: Values | None = None, beside: Stock | None = None
) -> Case:
    """Builds the case with the values of its parameters. Raises CaseError with every mistake of the file.

    beside : the materials, if they are listed in another file.
    """
    context: dict[str, Any] = {"unit": file_unit(tree), "values": values or Values()}
    context["folder"] = Path(problems.source.file).parent
    context["materials"] = stock = read_materials(tree.get("materials"), problems, context, beside)
    entry = checked(CaseEntry, tree, "", problems, context)
    conductors, dielectrics = _drawn(tree, problems, context)
    background = _background(tree.get("background"), problems, context)
    boundary = read_boundary(tree["boundary"], "boundary", problems, context) if "boundary" in tree else None
    limits = _limits(tree.get("limits"), problems, context)
    expect = _expect(tree.get("expect"), problems, context)
    symmetry = read_symmetry(tree.get("symmetry"), problems, context)
    twist = read_twist(tree.get("twist"), conductors, problems, context)
    problems.raise_any()
    if entry is None or boundary is None:  # what is missing was noted, so this is not reached
        raise AssertionError("an entry is missing without having been noted")
    case = Case(
        name=name,
        title=entry.title or name,
        conductors=conductors,
        boundary=boundary,
        reference=entry.reference[0] if entry.reference else "",
        dielectrics=dielectrics,
        background=background,
        ties=entry.tie if len(entry.reference) < 2 else (*entry.tie, entry.reference),
        accuracy=entry.accuracy,
        limits=limits,
        expect=expect,
        source=problems.source,
        symmetry=symmetry,
        twist=twist,
        files=stock.files,
    )
    if not case.reference:
        case = replace(case, reference=case.outer_conductor or conductors[-1].name)
    check_case(case, problems)
    problems.raise_any()
    return case


def file_unit(tree: dict[str, Tree]) -> float:
    """The unit of bare numbers, m."""
    unit = tree.get("units")
    return LENGTHS.get(unit, 1e-3) if isinstance(unit, str) else 1e-3


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


def _drawn(
    tree: dict[str, Tree], problems: Problems, context: dict[str, Any]
) -> tuple[tuple[Conductor, ...], tuple[Dielectric, ...]]:
    """All conductors and dielectrics, those of constructions after the others."""
    conductors = _conductors(tree.get("conductors"), problems, context)
    dielectrics = _dielectrics(tree.get("dielectrics"), problems, context)
    drawn = {one.name: Built((one,)) for one in conductors} | {one.name: Built((), (one,)) for one in dielectrics}
    constructions = _entries(tree.get("constructions"), "constructions", problems)
    for name in constructions:
        if name in drawn:
            problems.add(under("constructions", name), f"'{name}' is the name of a conductor or dielectric already")
    built = read_constructions(constructions, drawn, problems, context)
    conductors += built.conductors
    for name in [name for name, count in Counter(one.name for one in conductors).items() if count > 1]:
        problems.add(under("conductors", name), f"two conductors have the name '{name}'")
    if "conductors" not in tree and "constructions" not in tree:
        problems.add("", "the key 'conductors' is missing")
    elif not conductors and not problems.found:
        problems.add("conductors", "there must be at least one conductor")
    return conductors, dielectrics + built.dielectrics


def _conductors(tree: Tree, problems: Problems, context: dict[str, Any]) -> tuple[Conductor, ...]:
    conductors = []
    entries = _entries(tree, "conductors", problems)
    for name, entry in entries.items():
        path = under("conductors", name)
        read = shaped(ConductorKeys, entry, path, problems, context)
        coats = entry.get("coatings") if isinstance(entry, dict) else None
        coatings = read_coatings(coats, under(path, "coatings"), problems, context)
        if read:
            keys, shape = read
            check_coatings(shape, coatings, under(path, "coatings"), problems)
            conductors.append(Conductor(name, shape, coatings, keys.floating, keys.siemens_per_metre()))
    return tuple(conductors)


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
    return Limits(entry.triangles, entry.memory, entry.time, entry.variants) if entry else Limits()


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
