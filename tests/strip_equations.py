"""Charges on infinitely thin strips from their integral equations, to some twelve digits: owes nothing to the program.

Each straight part is run through by t from 0 to 1 with x' ~ t^(m-1) (1-t)^(n-1), which turns the density of charge at
a free end (r^(-1/2), m = 2) and at a right-angled bend (r^(-1/3) and r^1, m = 3) into an analytic function of t. A
polynomial stands for it, collocated; the logarithms are integrated on intervals that shrink geometrically towards them.
Source: common practice (spectral collocation after a smoothing substitution).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.polynomial import chebyshev, legendre
from numpy.typing import NDArray
from scipy.special import betainc

Complexes = NDArray[np.complex128]
Floats = NDArray[np.float64]
Green = Callable[[Complexes, Complexes], Floats]
"""Potential at z of a unit line charge at s, times eps0."""
END, BEND = 2, 3
NEAREST = 1e-30
"""Instead of 0, where rounding makes two points one: the weight there is 1e-15."""


@dataclass(frozen=True)
class Part:
    """A straight part of a strip."""

    conductor: int
    start: complex
    end: complex
    kinds: tuple[int, int] = (END, END)

    def at(self, t: Floats) -> Complexes:
        return self.start + (self.end - self.start) * betainc(*self.kinds, t)


def _distance(z: Complexes, s: Complexes) -> Floats:
    return np.maximum(np.abs(z - s), NEAREST)


def open_space(z: Complexes, s: Complexes) -> Floats:
    return -np.log(_distance(z, s)) / (2 * np.pi)


def over_plane(z: Complexes, s: Complexes) -> Floats:
    """A grounded plane y = 0: one image."""
    return np.log(np.abs(z - s.conj()) / _distance(z, s)) / (2 * np.pi)


def in_unit_circle(z: Complexes, s: Complexes) -> Floats:
    """A grounded circle of radius 1 about 0: one image."""
    return np.log(np.abs(1 - z * s.conj()) / _distance(z, s)) / (2 * np.pi)


def between_planes(z: Complexes, s: Complexes) -> Floats:
    """Grounded planes y = 0 and y = 1: all images, summed."""
    image, own = (np.abs(np.sinh(np.pi * away / 2)) for away in (z - s.conj(), z - s))
    return np.log(image / np.maximum(own, NEAREST)) / (2 * np.pi)


def capacitance(parts: list[Part], green: Green, degree: int = 28) -> Floats:
    """Maxwell matrix C' / eps0; in open space relative to the last conductor, with no net charge."""
    n, count = degree + 1, max(part.conductor for part in parts) + 1
    nodes = (1 + chebyshev.chebpts1(n)) / 2
    matrix = np.block([[_potentials(to, source, nodes, green) for source in parts] for to in parts])
    owner = np.repeat([part.conductor for part in parts], n)
    charge_of = np.zeros((count, len(owner)))
    charge_of[owner[::n], np.arange(len(parts)) * n] = 1.0  # only the constant polynomial carries charge
    volts = (owner[:, None] == np.arange(count)).astype(float)
    if green is not open_space:
        return charge_of @ np.linalg.solve(matrix, volts)
    bordered = np.block([[matrix, -np.ones((len(owner), 1))], [charge_of.sum(axis=0), np.zeros((1, 1))]])
    solution = np.linalg.solve(bordered, np.vstack([volts, np.zeros(count)]))
    return (charge_of @ solution[:-1])[:-1, :-1]


def _potentials(to: Part, source: Part, nodes: Floats, green: Green) -> Floats:
    """(n, n) potential at each node of a part of each Legendre polynomial of charge per t on another."""
    rows = []
    for t in nodes:
        places, weights = _graded((t,) if to is source else ())
        values = green(np.array(to.at(np.array(t))), source.at(places)) * weights
        rows.append(legendre.legvander(2 * places - 1, len(nodes) - 1).T @ values)
    return np.array(rows)


def _graded(inner: tuple[float, ...]) -> tuple[Floats, Floats]:
    """Gauss points and weights on [0, 1], on intervals that shrink towards both ends and some places within."""
    shrinking = 0.35 ** np.arange(34)
    marks = np.array([0.0, *inner, 1.0])
    breaks = [marks]
    for low, high in pairwise(marks.tolist()):
        breaks += [low + (high - low) / 2 * shrinking, high - (high - low) / 2 * shrinking]
    edges = np.unique(np.concatenate(breaks))
    x, w = legendre.leggauss(14)
    half = np.diff(edges)[:, None] / 2
    return (edges[:-1, None] + half * (1 + x)).ravel(), (half * w).ravel()
