"""Exact answers that owe nothing to the program: closed forms, as C'/eps0."""

from __future__ import annotations

import numpy as np
from scipy.optimize import brentq
from scipy.special import ellipk, ellipkm1


def acosh_of_excess(x: float) -> float:
    """arccosh(1 + x) without cancellation, for x >= 0: arccosh(y) = ln(y + sqrt(y^2 - 1))."""
    return float(np.log1p(x + np.sqrt(x * (x + 2))))


def two_wires(distance: float, a1: float, a2: float | None = None) -> float:
    """2 pi / acosh((d^2 - a1^2 - a2^2) / (2 a1 a2)); equal wires: pi / acosh(d / 2a).

    Source: Smythe, Static and Dynamic Electricity (from memory).
    """
    a2 = a1 if a2 is None else a2
    gap = distance - a1 - a2
    return float(2 * np.pi / acosh_of_excess(gap * (distance + a1 + a2) / (2 * a1 * a2)))


def two_wires_by_ratio(excess: float) -> float:
    """Two equal wires at d/2a = 1 + excess. Source: as two_wires."""
    return float(np.pi / acosh_of_excess(excess))


def wire_over_plane(height: float, radius: float) -> float:
    """2 pi / acosh(h / a). Source: Smythe (from memory)."""
    return float(2 * np.pi / acosh_of_excess((height - radius) / radius))


def eccentric_coax(inner: float, outer: float, offset: float) -> float:
    """2 pi / acosh((a^2 + b^2 - e^2) / (2 a b)). Source: Smythe (from memory)."""
    excess = (outer - inner - offset) * (outer - inner + offset) / (2 * inner * outer)
    return float(2 * np.pi / acosh_of_excess(excess))


def layered_coax(radii: tuple[float, ...], permittivities: tuple[float, ...]) -> float:
    """2 pi / sum(ln(r_i / r_(i-1)) / eps_i): capacitors in series.

    With one layer this is the coax of Maxwell, Treatise on Electricity and Magnetism (from memory).
    """
    logs = np.log(np.divide(radii[1:], radii[:-1]))
    return float(2 * np.pi / (logs / permittivities).sum())


def square_in_square(ratio: float) -> float:
    """A square of side ``ratio``, at most 0.95, centred in one of side 1, sides parallel.

    An eighth of the figure is the quadrilateral between two conductors, mapped by elliptic functions:
    with K(k')/K(k) = (1 - ratio) / (1 + ratio) and l = ((k - k') / (k + k'))^2, C = 8 K(l) / K'(l).
    Source: Bowman, Proc. London Math. Soc. 1935 (from memory; digits of two ratios recomputed independently).
    """
    aspect = (1 - ratio) / (1 + ratio)
    m = brentq(lambda m: ellipkm1(m) - ellipk(m) / aspect, 1e-300, 0.5, xtol=1e-300, rtol=1e-15, maxiter=500)
    k, k1 = np.sqrt(1 - m), np.sqrt(m)
    modulus = ((k - k1) / (k + k1)) ** 2
    complement = 4 * k * k1 / (k + k1) ** 2 * (1 + modulus)  # 1 - l^2, without cancellation
    return float(8 * ellipkm1(complement) / ellipk(complement))
