"""Exact capacitances of infinitely thin strips as closed forms, C' / eps0. K and K' are complete elliptic integrals."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq
from scipy.special import ellipj, ellipk, ellipkm1


def whole(k: float) -> float:
    """K(k)."""
    return float(ellipk(k**2))


def ratio(k: float) -> float:
    """K(k) / K'(k), of the modulus k."""
    return whole(k) / float(ellipkm1(k**2))


def stripline(width: float, height: float) -> float:
    """A strip midway between grounded planes: 4 K(k) / K'(k), k = tanh(pi w / 2 b). Source: Cohn 1954 (from memory)."""
    return 4 * ratio(float(np.tanh(np.pi * width / (2 * height))))


def strip_in_box(width: float, box: float, height: float) -> float:
    """A strip in the middle of a box of finite width: its upper half is mapped by sn onto a half plane.

    4 K(t) / K'(t), t = sn(K(m) w / a, m) with K'(m) / K(m) = b / a. Source: conformal map, common practice.
    """
    m = brentq(lambda m: ellipkm1(m) / ellipk(m) - height / box, 1e-15, 1 - 1e-15, xtol=1e-16, rtol=1e-15)
    return 4 * ratio(float(ellipj(ellipk(m) * width / box, m)[0]))


def coupled_striplines(width: float, gap: float, height: float) -> NDArray[np.float64]:
    """(2, 2) two equal strips midway between planes, by even and odd mode. Source: Cohn 1955 (from memory)."""
    one, both = (float(np.tanh(np.pi * x / (2 * height))) for x in (width, width + gap))
    even, odd = 4 * ratio(one * both), 4 * ratio(one / both)
    return np.array([[even + odd, even - odd], [even - odd, even + odd]]) / 2


def strip_in_circle(half_width: float) -> float:
    """A strip across the middle of a unit circle: 4 K(k) / K'(k), k = 2 s / (1 + s^2). Source: conformal map."""
    return 4 * ratio(2 * half_width / (1 + half_width**2))


def coplanar_pair(inner: float, outer: float) -> float:
    """Strips from a to b and from -b to -a in open space: K'(k) / K(k), k = a / b. Source: Smythe (from memory)."""
    return 1 / ratio(inner / outer)


def strip_upright_on_plane(low: float, high: float) -> float:
    """A strip perpendicular to a grounded plane, from height a to b: with its image a coplanar pair."""
    return 2 * coplanar_pair(low, high)


def cross(inner: float, outer: float) -> float:
    """Strips from a to b along the half axes, opposite ones joined: squared, the plane holds a coplanar pair."""
    return 2 * coplanar_pair(inner**2, outer**2)
