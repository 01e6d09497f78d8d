"""Shipped cases that consist of round wires alone, against the multipole expansion; a new file needs no new test code.

The demo cases expect no published value, so this is what holds their numbers against something exact.
"""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest
from judging import assert_encloses, relative
from multipoles import (
    InOpenSpace,
    InShield,
    OverGroundedSlab,
    OverHalfSpace,
    OverPlane,
    OverSlab,
    Surroundings,
    Wire,
    capacitance,
)

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case, GroundPlane, OpenSpace, Shield
from nightcap.geometry.case_file import read_case, read_variants
from nightcap.geometry.curves import Floats
from nightcap.geometry.shapes import Circle
from nightcap.geometry.slab import Slab
from nightcap.solver.solve import solve

CASES = Path(__file__).parents[2] / "cases"
LEAST_NUMBER = 25
"""Fewer would mean that the choice below has gone wrong."""


def wires(case: Case) -> tuple[Wire, ...] | None:
    """The wires, the reference last in open space, in units of the first one's radius; None if the case has more."""
    if case.symmetry or not all(isinstance(c.shape, Circle) for c in case.conductors):
        return None
    if case.dielectrics and slab_below(case) is None:
        return None
    unit, sunk = unit_and_origin(case)
    found = []
    for conductor in sorted(case.conductors, key=lambda c: c.name == case.reference):
        assert isinstance(conductor.shape, Circle)
        coats = tuple((coat.thickness / unit, coat.material.permittivity) for coat in conductor.coatings)
        centre = (complex(*conductor.shape.centre) - sunk) / unit
        found.append(Wire(centre, conductor.shape.radius / unit, coats))
    if case.dielectrics and any(wire.centre.imag < wire.outside * (1 - 1e-9) for wire in found):
        return None  # it reaches into the slab
    return None if are_fused(found) else tuple(found)


def slab_below(case: Case) -> Slab | None:
    """The one slab that is the only dielectric, below all wires."""
    shapes = [d.shape for d in case.dielectrics]
    if len(shapes) != 1 or not isinstance(shapes[0], Slab) or math.isinf(shapes[0].high):
        return None
    return shapes[0]


def are_fused(found: list[Wire]) -> bool:
    """Whether coatings overlap; then they are round no more."""
    pairs = [(a, b) for k, a in enumerate(found) for b in found[:k]]
    return any(abs(a.centre - b.centre) < (a.outside + b.outside) * (1 - 1e-9) for a, b in pairs)


def unit_and_origin(case: Case) -> tuple[float, complex]:
    """m, and the point that becomes the origin."""
    first = case.conductors[0].shape
    assert isinstance(first, Circle)
    if slab := slab_below(case):
        return first.radius, 1j * slab.high
    if isinstance(case.boundary, GroundPlane):
        return first.radius, 1j * case.boundary.at
    if isinstance(case.boundary, Shield) and isinstance(case.boundary.shape, Circle):
        return first.radius, complex(*case.boundary.shape.centre)
    return first.radius, 0j


def surroundings(case: Case) -> Surroundings | None:
    """The boundary, where the expansion knows it and it is the reference."""
    if slab := slab_below(case):
        return over_slab(case, slab)
    if isinstance(case.boundary, OpenSpace):
        return InOpenSpace()
    if case.reference != case.boundary.name:
        return None
    if isinstance(case.boundary, GroundPlane):
        return OverPlane()
    shape = case.boundary.shape
    return InShield(shape.radius / unit_and_origin(case)[0]) if isinstance(shape, Circle) else None


def over_slab(case: Case, slab: Slab) -> Surroundings | None:
    unit, _ = unit_and_origin(case)
    permittivity = case.dielectrics[0].material.permittivity
    if isinstance(case.boundary, GroundPlane):
        return OverGroundedSlab((slab.high - case.boundary.at) / unit, permittivity)
    if not isinstance(case.boundary, OpenSpace):
        return None
    thickness = (slab.high - slab.low) / unit
    return OverHalfSpace(permittivity) if math.isinf(thickness) else OverSlab(thickness, permittivity)


def rows(case: Case) -> list[str]:
    """Names in the order of the full matrix."""
    return [c.name for c in case.conductors if c.name != case.reference]


def reduced(C: Floats, case: Case) -> tuple[tuple[str, ...], Floats]:
    """Tied conductors share a potential and add their charges; floating ones, without charge, are eliminated."""
    names = rows(case)
    head = {name: case.reference if case.reference in tie else tie[0] for tie in case.ties for name in tie}
    heads = [n for n in dict.fromkeys(head.get(n, n) for n in names) if n != case.reference]
    together = np.array([[float(head.get(n, n) == h) for h in heads] for n in names])
    C = together.T @ C @ together
    floats = {c.name for c in case.conductors if c.floating}
    kept = [k for k, n in enumerate(heads) if n not in floats]
    free = [k for k, n in enumerate(heads) if n in floats]
    between = C[np.ix_(kept, free)]
    rest = C[np.ix_(kept, kept)] - between @ np.linalg.solve(C[np.ix_(free, free)], between.T)
    return tuple(heads[k] for k in kept), rest


def suitable() -> list[Path]:
    found = []
    for path in sorted(CASES.rglob("*.yaml")):
        case = read_case(path)
        if all(isinstance(c.shape, Circle) for c in case.conductors) and surroundings(case) and wires(case):
            found.append(path)
    return found


SUITABLE = suitable()


def test_enough_cases_are_suitable() -> None:
    assert len(SUITABLE) >= LEAST_NUMBER
    assert {
        "drain-wire",
        "sensor-bundle",
        "wires-over-plane",
        "eccentric-core",
        "pair-tolerances",
        "cable-on-sand",
        "wires-on-planks",
    } <= {path.stem for path in SUITABLE}


@pytest.mark.parametrize("path", SUITABLE, ids=lambda path: path.relative_to(CASES).with_suffix("").as_posix())
def test_the_exact_matrix_lies_inside_the_bracket(path: Path) -> None:
    for case in read_variants(path):
        check_against_multipoles(case)


def check_against_multipoles(case: Case) -> None:
    round_wires, around = wires(case), surroundings(case)
    assert round_wires is not None
    assert around is not None
    names, exact = reduced(capacitance(round_wires, around, case.background.permittivity), case)
    floating = tuple(c.name for c in case.conductors if c.floating)
    solution = solve(build_layout(case), case.accuracy, case.limits, floating, case.ties)
    assert solution.conductors == names
    assert_encloses(relative(solution), exact)
