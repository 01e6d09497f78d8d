"""Exact capacitance matrices of round coated wires, by a multipole expansion that owes nothing to the program.

About each wire the potential is the real part of a Laurent series; what leaves a wire arrives at the others through the
binomial series, and a wire with its coatings answers each harmonic by itself. Method: Rayleigh, Phil. Mag. 34 (1892)
481 (from memory). Everything is per eps0.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Complex = NDArray[np.complex128]
Real = NDArray[np.float64]


@dataclass(frozen=True)
class Wire:
    """A round conductor; its coatings from the inside out."""

    centre: complex
    radius: float
    coatings: tuple[tuple[float, float], ...] = ()
    """(thickness, permittivity)."""

    @property
    def radii(self) -> tuple[float, ...]:
        return tuple(float(r) for r in np.cumsum([self.radius, *(t for t, _ in self.coatings)]))

    @property
    def outside(self) -> float:
        return self.radii[-1]

    @property
    def series_drop(self) -> float:
        """Sum of ln(r_i / r_(i-1)) / eps_i: the potential lost in the coatings per charge, times 2 pi."""
        logs = np.log(np.divide(self.radii[1:], self.radii[:-1]))
        return float(sum(log / eps for log, (_, eps) in zip(logs, self.coatings, strict=True)))

    def answers(self, count: int, background: float) -> Real:
        """(count,) what leaves over what arrives at the outermost circle, for each harmonic from 1 on."""
        n = np.arange(1, count + 1)
        ratio = -np.ones(count)
        beyond = [*(eps for _, eps in self.coatings), background][1:]
        for (inner, outer), (_, eps), after in zip(
            zip(self.radii[:-1], self.radii[1:], strict=True), self.coatings, beyond, strict=True
        ):
            ratio = ratio * (inner / outer) ** (2 * n)
            potential, flux = 1 + ratio, eps * (1 - ratio)
            ratio = (after * potential - flux) / (after * potential + flux)
        return ratio


@dataclass(frozen=True)
class InShield:
    """Inside a grounded circle about the origin."""

    radius: float


@dataclass(frozen=True)
class OverPlane:
    """Above the grounded plane y = 0."""


@dataclass(frozen=True)
class InOpenSpace:
    """Unbounded space, no net charge; the last wire is the reference."""


@dataclass(frozen=True)
class OverHalfSpace:
    """Above a dielectric that fills everything below y = 0; no net charge, as in open space."""

    permittivity: float
    neutral = True

    def images(self, background: float) -> list[tuple[float, float]]:
        """(factor, shift): a pole at z has images of that factor at conj(z) + i shift.

        Source: method of images, Smythe, Static and Dynamic Electricity (from memory).
        """
        return [((background - self.permittivity) / (background + self.permittivity), 0.0)]


@dataclass(frozen=True)
class OverSlab:
    """Above a dielectric slab from y = -thickness to 0, with the background again below it; no net charge."""

    thickness: float
    permittivity: float
    neutral = True

    def images(self, background: float) -> list[tuple[float, float]]:
        """A wave e^(-ky) is sent back K (1 - e) / (1 - K^2 e)-fold, e = e^(-2kt): a geometric series of images."""
        K = (background - self.permittivity) / (background + self.permittivity)
        return [(K, 0.0), *_series(-K * (1 - K**2), K**2, self.thickness)]


@dataclass(frozen=True)
class OverGroundedSlab:
    """Above a dielectric slab from y = -thickness to 0 that lies on a grounded plane."""

    thickness: float
    permittivity: float
    neutral = False

    def images(self, background: float) -> list[tuple[float, float]]:
        """A wave e^(-ky) is sent back (K - e) / (1 - K e)-fold, e = e^(-2kt)."""
        K = (background - self.permittivity) / (background + self.permittivity)
        return [(K, 0.0), *_series(-(1 - K**2), K, self.thickness)]


def _series(first: float, ratio: float, thickness: float) -> list[tuple[float, float]]:
    """Images -2 t, -4 t, ... below the first, until what is left of the factors no longer counts."""
    terms = 1 if ratio == 0 else int(np.ceil(np.log(1e-17) / np.log(abs(ratio))))
    return [(first * ratio**n, -2 * thickness * (n + 1)) for n in range(terms)]


Layered = OverHalfSpace | OverSlab | OverGroundedSlab
Surroundings = InShield | OverPlane | InOpenSpace | Layered


def capacitance(
    wires: tuple[Wire, ...], around: Surroundings, background: float = 1.0, digits: float = 1e-13, most: int = 700
) -> Real:
    """(N, N) Maxwell capacitance matrix / eps0, from so many harmonics that twelve more change nothing."""
    count = 24
    while count <= most:
        few, more = (_capacitance(wires, around, background, n) for n in (count, count + 12))
        if np.abs(few - more).max() <= digits * np.abs(more).max():
            return more
        count = count * 3 // 2
    raise ValueError(f"{most} harmonics do not suffice")


def _capacitance(wires: tuple[Wire, ...], around: Surroundings, background: float, count: int) -> Real:
    """Unknowns: of each wire the harmonics that leave it (real parts, then imaginary ones) and its charge."""
    size, step = len(wires), 2 * count + 1
    A = np.zeros((size * step, size * step))
    for j, here in enumerate(wires):
        answer = here.answers(count, background)
        rows = slice(j * step, (j + 1) * step)
        for k, source in enumerate(wires):
            arriving = _arriving(source, here, around, count, j == k, background)
            back = np.r_[answer, -answer]  # the conjugate, times the answer
            A[rows, k * step : (k + 1) * step] = np.r_[-back[:, None] * arriving[:-1], arriving[-1:]]
        A[rows, rows][np.arange(step - 1), np.arange(step - 1)] += 1.0
        A[j * step + step - 1, j * step + step - 1] += background * here.series_drop - np.log(here.outside)
    volts = np.zeros((size * step, size))
    volts[step - 1 :: step] = np.eye(size)
    if isinstance(around, InOpenSpace) or (isinstance(around, Layered) and around.neutral):
        return _neutral(A, volts, step, background)
    charges = np.linalg.solve(A, volts)[step - 1 :: step]
    return np.asarray(2 * np.pi * background * charges)


def _neutral(A: Real, volts: Real, step: int, background: float) -> Real:
    """One unknown more, the potential at infinity; one equation more, that the charges sum to zero."""
    charge = np.zeros(len(A))
    charge[step - 1 :: step] = 1.0
    bordered = np.block([[A, charge[:, None]], [charge, np.zeros(1)]])
    solved = np.linalg.solve(bordered, np.vstack([volts, np.zeros(volts.shape[1])]))
    return np.asarray(2 * np.pi * background * solved[step - 1 : -1 : step][:-1, :-1])


def _arriving(source: Wire, here: Wire, around: Surroundings, count: int, same: bool, background: float) -> Real:
    """(2 count + 1, 2 count + 1) from what leaves one wire to what arrives at another: harmonics, then constant."""
    straight = np.zeros((count + 1, count + 1), dtype=complex)
    mirrored = np.zeros_like(straight)
    if not same:
        straight = _from_pole(source.centre, source.outside, here, count)
    if isinstance(around, OverPlane):
        mirrored = -_from_pole(source.centre.conjugate(), source.outside, here, count)
    if isinstance(around, Layered):
        for factor, shift in around.images(background):
            mirrored += factor * _from_pole(source.centre.conjugate() + 1j * shift, source.outside, here, count)
    if isinstance(around, InShield):
        mirrored = _by_way_of_shield(source, here, around.radius, count)
    return _as_real(straight, mirrored)


def _from_pole(pole: complex, radius: float, here: Wire, count: int) -> Complex:
    """(count + 1, count + 1) from -log(z - pole), (radius / (z - pole))^n to powers of (z - here) / outside, from 0."""
    gap = here.centre - pole
    n, m = np.arange(1, count + 1), np.arange(1, count + 1)
    T = np.empty((count + 1, count + 1), dtype=complex)
    T[0, 0] = -np.log(abs(gap))
    T[1:, 0] = (-here.outside / gap) ** m / m
    first = (radius / gap) ** n
    steps = (n[None, :] + m[:, None] - 1) / m[:, None] * (-here.outside / gap)
    T[:, 1:] = np.vstack([first, first * np.cumprod(steps, axis=0)])
    return T


def _by_way_of_shield(source: Wire, here: Wire, shield: float, count: int) -> Complex:
    """As _from_pole, of the conjugate: the field that the grounded circle sends back.

    On the circle the source is sum E_m (R/z)^m; the answer -conj(E_m) (z/R)^m makes the real part zero there.
    """
    many = 3 * count
    m = np.arange(1, many + 1)
    E = np.zeros((many + 1, count + 1), dtype=complex)
    E[0, 0] = -np.log(shield)
    E[1:, 0] = (source.centre / shield) ** m / m
    power = (source.outside / shield) ** np.arange(1, many + 1)
    for n in range(1, count + 1):
        k = np.arange(1, many - n + 1)
        E[n, n] = power[n - 1]
        E[n + 1 :, n] = power[n - 1] * np.cumprod((n + k - 1) / k * (source.centre / shield))
    D = np.zeros((count + 1, many + 1), dtype=complex)
    for n in range(count + 1):
        k = np.arange(1, many - n + 1)
        D[n, n] = (here.outside / shield) ** n
        D[n, n + 1 :] = D[n, n] * np.cumprod((n + k) / k * (here.centre / shield))
    return np.asarray(-D @ E.conj())


def _as_real(straight: Complex, mirrored: Complex) -> Real:
    """The real form of b -> straight b + mirrored conj(b); the charge and the constant, both real, go last."""
    left, right = straight + mirrored, 1j * (straight - mirrored)
    columns = np.hstack([left[:, 1:], right[:, 1:], left[:, :1]])
    return np.vstack([columns[1:].real, columns[1:].imag, columns[:1].real])
