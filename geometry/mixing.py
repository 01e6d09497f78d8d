"""Permittivity of a foam from that of its solid and the fraction of gas in it."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

Law = Callable[[complex, float], complex]
"""From the relative permittivity of the solid, complex where it has loss, and the volume fraction of gas."""


def linear(solid: complex, gas: float) -> complex:
    """Layers along the field: the greatest that is possible. Source: Wiener 1912."""
    return gas + (1 - gas) * solid


def lichtenecker(solid: complex, gas: float) -> complex:
    """The logarithms mix. Source: Lichtenecker 1926."""
    return complex(solid ** (1 - gas))


def looyenga(solid: complex, gas: float) -> complex:
    """The cube roots mix. Source: Looyenga 1965."""
    return complex((gas + (1 - gas) * solid ** (1 / 3)) ** 3)


def maxwell_garnett(solid: complex, gas: float) -> complex:
    """Separate bubbles in the solid. Source: Maxwell Garnett 1904."""
    return solid * (2 * solid + 1 + 2 * gas * (1 - solid)) / (2 * solid + 1 - gas * (1 - solid))


def bruggeman(solid: complex, gas: float) -> complex:
    """Bubbles and grains alike: the root of v (1 - x)/(1 + 2 x) + (1 - v)(e - x)/(e + 2 x) = 0 between 1 and e.

    Source: Bruggeman 1935.
    """
    linear_part = gas * (2 - solid) + (1 - gas) * (2 * solid - 1)
    return complex((linear_part + np.sqrt(linear_part**2 + 8 * solid)) / 4)


LAWS: dict[str, Law] = {
    "linear": linear,
    "lichtenecker": lichtenecker,
    "looyenga": looyenga,
    "maxwell_garnett": maxwell_garnett,
    "bruggeman": bruggeman,
}


def foam(permittivity: float, loss_tangent: float, gas: float, law: str) -> tuple[float, float]:
    """Relative permittivity and loss tangent of a foam, from those of its solid.

    The permittivity is that of the law for a solid without loss, as the sources print it: what loss adds to it is of
    second order, and is left out everywhere. The loss tangent is that of the law for a complex permittivity.
    """
    mixed = LAWS[law](complex(permittivity, -permittivity * loss_tangent), gas)
    return float(LAWS[law](permittivity, gas).real), float(-mixed.imag / mixed.real)
