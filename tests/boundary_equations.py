"""Capacitance of bare conductors in a round shield by a boundary integral equation: independent of the program.

The charge on the conductors is a single layer; the shield is in Green's function, ln |R (z - w) / (R^2 - z conj w)|.
Each curve is cut into panels of 16 Gauss-Legendre nodes that shrink towards corners; on its own panel the logarithm is
integrated exactly against Legendre polynomials, on near panels after halving them towards the target. Source of the
method: quadrature by product integration, common practice; see Atkinson, The Numerical Solution of Integral Equations
of the Second Kind, 1997 (from memory). Of the program only points and tangents of curves are used.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray
from scipy.special import lqn

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
NODES = 16
T, W = legendre.leggauss(NODES)
TO_LEGENDRE = (legendre.legvander(T, NODES - 1) * W[:, None]).T * (np.arange(NODES)[:, None] + 0.5)
"""Values at the nodes to Legendre coefficients."""
RATIO, LEVELS = 0.25, 10
"""Panels at a corner shrink by this ratio, so many times."""


def _log_moments(s: float) -> Floats:
    """(NODES,) integrals over t from -1 to 1 of P_n(t) ln |t - s|, for s inside."""
    q = lqn(NODES, s)[0]
    n = np.arange(1, NODES)
    moments = np.empty(NODES)
    moments[0] = (1 + s) * np.log(1 + s) + (1 - s) * np.log(1 - s) - 2
    moments[1:] = 2 * (q[n + 1] - q[n - 1]) / (2 * n + 1)
    return moments


SELF = np.array([_log_moments(s) for s in T]) @ TO_LEGENDRE
"""(node, node): the integral of f ln |t - s| for s at each node, from the values of f at the nodes."""


@dataclass(frozen=True)
class Panel:
    """A part of a curve."""

    curve: Any
    low: float
    high: float
    owner: int

    def points(self, t: Floats) -> Complexes:
        x, y = self.curve.at((self.low + self.high) / 2 + (self.high - self.low) / 2 * t).T
        return np.asarray(x + 1j * y)

    @property
    def half(self) -> float:
        """Half its length: curves run at constant speed."""
        return float(self.curve.length * (self.high - self.low) / 2)


def panels(curves: Sequence[Any], owner: int, levels: int, pieces: int = 3) -> list[Panel]:
    """The panels of some curves, graded towards their ends, unless the next one runs on smoothly from there."""
    found = []
    for curve in curves:
        depth = [min((_depth(curve, other, end, levels) for other in curves), default=levels) for end in (0, 1)]
        fine = [1 / pieces * RATIO ** np.arange(1, deep + 1) for deep in depth]
        breaks = np.unique(np.concatenate([np.linspace(0.0, 1.0, pieces + 1), fine[0], 1 - fine[1]]))
        found += [Panel(curve, float(a), float(b), owner) for a, b in pairwise(breaks)]
    return found


def _depth(curve: Any, other: Any, end: int, levels: int) -> int:
    """Levels of panels where a curve ends (1) or begins (0), as far as another has to do with it.

    None where that one goes on in the same direction and with the same curvature, a few where the curvature jumps.
    """
    here, there = (curve.end, other.start) if end else (curve.start, other.end)
    if other is curve or np.hypot(here[0] - there[0], here[1] - there[1]) > 1e-9 * curve.length:
        return levels
    ours, theirs = curve.tangent(np.array(float(end))), other.tangent(np.array(float(1 - end)))
    if ours @ theirs < 1 - 1e-9:
        return levels
    return 0 if np.isclose(curve.curvature, other.curvature) else min(4, levels)


def capacitance(outlines: Sequence[Sequence[Any]], radius: float, levels: int = LEVELS) -> Floats:
    """(N, N) Maxwell capacitance matrix over eps0 of N bare conductors in a grounded circle about the origin.

    outlines : for each conductor the curves of its surface. levels : of panels at corners.
    """
    parts = [panel for k, curves in enumerate(outlines) for panel in panels(curves, k, levels)]
    z = np.concatenate([panel.points(T) for panel in parts])
    owner = np.repeat([panel.owner for panel in parts], NODES)
    A = np.empty((len(z), len(z)))
    for k, panel in enumerate(parts):
        own = slice(k * NODES, (k + 1) * NODES)
        A[:, own] = _logarithms(panel, z, own) - _images(panel, z, radius)
    charge = np.linalg.solve(-A / (2 * np.pi), (owner[:, None] == np.arange(len(outlines))).astype(float))
    weights = np.concatenate([W * panel.half for panel in parts])
    C = np.array(
        [[(weights * charge[:, j])[owner == i].sum() for j in range(len(outlines))] for i in range(len(outlines))]
    )
    return np.asarray((C + C.T) / 2)


def _logarithms(panel: Panel, z: Complexes, own: slice) -> Floats:
    """(targets, NODES): the integral of f ln |z - w| over a panel from the values of f at its nodes."""
    w = panel.points(T)
    known: dict[tuple[float, float], tuple[Complexes, Floats]] = {}
    with np.errstate(divide="ignore"):
        rows = np.log(np.abs(z[:, None] - w)) * (W * panel.half)
    for k in np.flatnonzero(np.abs(z[:, None] - w).min(axis=1) < 2.0 * panel.half):
        if not own.start <= k < own.stop:
            rows[k] = _near(panel, z[k], known)
    apart, steps = np.abs(w[:, None] - w), np.abs(T[:, None] - T)
    np.fill_diagonal(apart, panel.half)
    np.fill_diagonal(steps, 1.0)
    rows[own] = (SELF + np.log(apart / steps) * W) * panel.half
    return rows


def _near(panel: Panel, target: complex, known: dict[tuple[float, float], tuple[Complexes, Floats]]) -> Floats:
    """One row for a target close to the panel, which is halved until each part is as far away as it is long.

    known : points and interpolation of parts seen before.
    """
    stack, found = [(-1.0, 1.0)], np.zeros(NODES)
    while stack:
        low, high = stack.pop()
        if (low, high) not in known:
            t = (low + high) / 2 + (high - low) / 2 * T
            known[low, high] = (panel.points(t), (legendre.legvander(t, NODES - 1) @ TO_LEGENDRE) * W[:, None])
        w, values = known[low, high]
        size = panel.half * (high - low)
        apart = np.abs(w - target)
        if apart.min() < size and high - low > 1e-14:
            stack += [(low, (low + high) / 2), ((low + high) / 2, high)]
        else:
            found += np.log(apart) @ values * (size / 2)
    return found


def _images(panel: Panel, z: Complexes, radius: float) -> Floats:
    """(targets, NODES): the same for the images beyond the shield, which are not near."""
    w = panel.points(T)
    return np.asarray(np.log(np.abs(radius**2 - z[:, None] * w.conj()) / radius) * (W * panel.half))
