"""Random coated wires in a shield, in open space and over a plane, against the multipole expansion."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from judging import check_against
from multipoles import InOpenSpace, InShield, OverPlane, Surroundings, Wire, capacitance
from round_wires import as_case

from nightcap.geometry.case import Boundary, GroundPlane, OpenSpace, Shield
from nightcap.geometry.shapes import Circle

FIRST_SEED = 71_003
SHIELDED, OPEN, OVER = 38, 6, 6
"""How many layouts of each kind."""
LEAST_GAP, GREATEST_SMALL_GAP = 0.02, 0.1
"""Of the smaller outer radius: the expansion needs many harmonics where coats come closer."""


def random_wire(random: np.random.Generator, centre: complex) -> Wire:
    outside = random.uniform(0.3, 1.0)
    shares = random.dirichlet(np.full(1 + random.integers(1, 3), 3.0))
    coatings = tuple((float(s * outside), float(random.uniform(1.0, 10.0))) for s in shares[1:])
    return Wire(centre, float(shares[0] * outside), coatings)


def moved(wire: Wire, centre: complex) -> Wire:
    return Wire(centre, wire.radius, wire.coatings)


def beside(random: np.random.Generator, wire: Wire, placed: list[Wire]) -> Wire:
    """The wire a random small gap from an earlier one, clear of all others."""
    while True:
        neighbour = placed[random.integers(len(placed))]
        gap = random.uniform(LEAST_GAP, GREATEST_SMALL_GAP) * min(wire.outside, neighbour.outside)
        reach = neighbour.outside + wire.outside + gap
        centre = neighbour.centre + reach * np.exp(2j * np.pi * random.uniform())
        if all(_gap(moved(wire, centre), other) >= LEAST_GAP for other in placed):
            return moved(wire, complex(centre))


def _gap(one: Wire, other: Wire) -> float:
    apart = abs(one.centre - other.centre) - one.outside - other.outside
    return float(apart / min(one.outside, other.outside)) * (1 + 1e-12)


def cluster(random: np.random.Generator) -> list[Wire]:
    placed = [random_wire(random, 0j)]
    for _ in range(random.integers(1, 6)):
        placed.append(beside(random, random_wire(random, 0j), placed))
    return placed


def in_shield(random: np.random.Generator, placed: list[Wire]) -> tuple[tuple[Wire, ...], Surroundings, Boundary]:
    """Off centre, the outermost wire a small gap from the shield."""
    shift = complex(*random.uniform(-0.5, 0.5, 2))
    wires = tuple(moved(w, w.centre + shift) for w in placed)
    outermost = max(wires, key=lambda w: abs(w.centre) + w.outside)
    radius = float(abs(outermost.centre) + outermost.outside * (1 + random.uniform(LEAST_GAP, 0.4)))
    return wires, InShield(radius), Shield(Circle((0.0, 0.0), radius))


def over_plane(random: np.random.Generator, placed: list[Wire]) -> tuple[tuple[Wire, ...], Surroundings, Boundary]:
    """The lowest wire a small gap above the plane."""
    lowest = min(placed, key=lambda w: w.centre.imag - w.outside)
    lift = lowest.outside * (1 + random.uniform(LEAST_GAP, 0.4)) - lowest.centre.imag
    return tuple(moved(w, w.centre + 1j * lift) for w in placed), OverPlane(), GroundPlane()


def in_open_space(_: np.random.Generator, placed: list[Wire]) -> tuple[tuple[Wire, ...], Surroundings, Boundary]:
    return tuple(placed), InOpenSpace(), OpenSpace()


Kind = Callable[[np.random.Generator, list[Wire]], tuple[tuple[Wire, ...], Surroundings, Boundary]]
KINDS: list[Kind] = [in_shield] * SHIELDED + [in_open_space] * OPEN + [over_plane] * OVER


@pytest.mark.parametrize(("number", "kind"), list(enumerate(KINDS)))
def test_no_exact_entry_lies_outside_its_bracket(number: int, kind: Kind) -> None:
    random = np.random.default_rng(FIRST_SEED + number)
    wires, around, boundary = kind(random, cluster(random))
    background = float(random.choice([1.0, random.uniform(1.0, 10.0)]))
    accuracy = float(10 ** random.uniform(-6.0, -3.0))
    exact = capacitance(wires, around, background)
    check_against(as_case(wires, boundary, background), exact, accuracy)
